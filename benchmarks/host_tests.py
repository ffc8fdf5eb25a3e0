"""SymPy's own installed tests, stock against the extension switched on.

    python -m benchmarks.host_tests [--only NAME] [--jobs N] [--seconds S] [--drop-in]
                                   [--report FILE] [--reuse REPORT]

Every test function of the modules below runs twice, each time in a process of its own (cold caches) with a
time limit: with stock SymPy, and with `enable()`.  With `--drop-in` the name `integrate` in the test module
is replaced by ours as well.  Printed are the tests that pass with stock and fail with us.

A test whose assertion fails by the form of an answer only stands in `FORM_ONLY`.  It runs once more with each
``assert left == right`` relaxed: the sides may differ if they agree at sampled values of their symbols.
The exit status is 0 if nothing else fails.
"""
from __future__ import annotations

import argparse
import importlib
import inspect
import json
import multiprocessing
import multiprocessing.connection
import sys
import time
import traceback
from collections.abc import Callable, Iterator
from dataclasses import asdict, dataclass
from multiprocessing.connection import Connection
from typing import Any

import sympy_mellin_ext

from . import host_forms

MODULES = (
    "sympy.integrals.tests.test_integrals",
    "sympy.integrals.tests.test_meijerint",
    "sympy.integrals.tests.test_transforms",
    "sympy.integrals.tests.test_laplace",
    "sympy.stats.tests.test_continuous_rv",
)

# Tests that assert a form which is not the shortest, by name, with ours against SymPy's.
_INTEGRALS = "sympy.integrals.tests.test_integrals:"
_TRANSFORMS = "sympy.integrals.tests.test_transforms:"
_STATS = "sympy.stats.tests.test_continuous_rv:"
FORM_ONLY: dict[str, str] = {
    _INTEGRALS + "test_issue_8623": "pi*(-1/2 + sqrt(5)/2) for -pi/2 + sqrt(5)*pi/2",
    _INTEGRALS + "test_integrate_max_min": "erfc for 1 + erf",
    _INTEGRALS + "test_issue_8368i": "re(s) > 1 for s**2 > 1 and for two conditions on abs(s) and arg(s)",
    _INTEGRALS + "test_issue_14096": "-14*log(2) for -4*log(4) - 6*log(2)",
    _INTEGRALS + "test_issue_15432": "polygamma(0, n + 1) for polygamma(0, n) + 1/n",
    _INTEGRALS + "test_issue_15292": "a sum of two exponentials of imaginary argument for a cosine",
    _INTEGRALS + "test_issue_17671": "2*log(3) for log(9)",
    _INTEGRALS + "test_issue_23566": "2*asinh(sqrt(2)/2) for -log(2 - sqrt(3))",
    _INTEGRALS + "test_issue_22863": "135*log(1 + sqrt(2))/8 for -135*log(3 - 2*sqrt(2))/16",
    _INTEGRALS + "test_issue_20782": "1 for 1.0, from break points that are floats",
    "sympy.integrals.tests.test_meijerint:test_messy": "atan(1/s) for pi/2 - atan(s)",
    "sympy.integrals.tests.test_laplace:test_expint": "the larger, true half plane: re(s) > -1 for re(s) > 0",
    _TRANSFORMS + "test_mellin_transform": "a sum of two quotients of Gammas for a product with sines",
    _TRANSFORMS + "test_mellin_transform_bessel": "Abs(re(a)) for Max(-re(a), re(a)); larger, true strips",
    _TRANSFORMS + "test_expint": "-cos(pi*s)*gamma(2*s)/s for the form before duplication",
    _STATS + "test_single_normal": "erfcinv for erfinv, as the distribution function comes as erfc",
    _STATS + "test_cdf": "erf(sqrt(2)/2)/2 + 1/2 for 1 - erfc(sqrt(2)/2)/2",
    _STATS + "test_maxwell": "a**2*(-8 + 3*pi)/pi for -8*a**2/pi + 3*a**2",
    _STATS + "test_Moyal": "erfc for 1 - erf",
    _STATS + "test_reciprocal": "log(4) for log(20) - log(5)",
    _STATS + "test_union": "erfc and erf for 3/2 less erf and erfc",
    _STATS + "test_Or": "erfc and erf for 3/2 less erf and erfc",
}


OUTCOMES = ("passed", "failed", "skipped", "timed out")


@dataclass(frozen=True)
class Run:
    """The outcome of one test function under one mode."""

    test: str
    mode: str
    outcome: str
    seconds: float
    detail: str = ""


def test_names(only: str = "") -> Iterator[str]:
    """``module:function`` for every test function whose name contains ``only``."""
    for name in MODULES:
        module = importlib.import_module(name)
        for function, value in vars(module).items():
            full = f"{name}:{function}"
            if function.startswith("test") and inspect.isfunction(value) and only in full:
                yield full


def run_one(test: str, mode: str, pipe: Connection) -> None:
    """Run one test function in this process and send what happened."""
    name, function = test.split(":")
    module = importlib.import_module(name)
    if mode != "stock":
        sympy_mellin_ext.enable()
    if mode == "drop-in" and hasattr(module, "integrate"):
        module.integrate = sympy_mellin_ext.integrate  # type: ignore[attr-defined]
    if mode == "relaxed":
        module = host_forms.relaxed(module)
    started = time.perf_counter()
    outcome, detail = _call(getattr(module, function))
    if mode == "relaxed" and outcome == "passed":
        detail = "\n".join(getattr(module, host_forms.DIFFERENCES))
    pipe.send((outcome, time.perf_counter() - started, detail))


def _call(function: Callable[[], Any]) -> tuple[str, str]:
    try:
        function()
    except BaseException as error:  # SymPy's Skipped, XFail and XPass are not all Exceptions
        kind = type(error).__name__
        if kind in ("Skipped", "XFail"):
            return "skipped", kind
        frames = traceback.extract_tb(error.__traceback__)
        where = next((f for f in reversed(frames) if "/tests/" in f.filename), frames[-1])
        return "failed", f"{kind}: {str(error)[:300]} at line {where.lineno}: {where.line}"
    return "passed", ""


def run_all(work: list[tuple[str, str]], jobs: int, seconds: float) -> list[Run]:
    """Run (test, mode) pairs, each in a process of its own, at most ``jobs`` at a time."""
    context: Any = multiprocessing.get_context("fork" if sys.platform == "linux" else "spawn")
    waiting = list(reversed(work))
    running: list[tuple[str, str, Any, Connection, float]] = []
    done: list[Run] = []
    while waiting or running:
        while waiting and len(running) < jobs:
            test, mode = waiting.pop()
            ours, theirs = context.Pipe(duplex=False)
            process = context.Process(target=run_one, args=(test, mode, theirs), daemon=True)
            process.start()
            theirs.close()
            running.append((test, mode, process, ours, time.perf_counter()))
        multiprocessing.connection.wait([r[3] for r in running], timeout=0.5)
        for entry in list(running):
            test, mode, process, ours, started = entry
            elapsed = time.perf_counter() - started
            if ours.poll():
                try:
                    outcome, took, detail = ours.recv()
                except EOFError:
                    outcome, took, detail = "failed", elapsed, "the process died"
            elif elapsed > seconds:
                outcome, took, detail = "timed out", elapsed, ""
                process.kill()
            else:
                continue
            process.join()
            ours.close()
            running.remove(entry)
            done.append(Run(test, mode, outcome, took, detail))
            print(f"{len(done)}/{len(work)} {outcome:9} {took:6.1f} s  {mode:8} {test}", file=sys.stderr)
    return done


def compare(runs: list[Run], mode: str) -> tuple[list[Run], list[Run]]:
    """The runs of tests that pass with stock: those that fail with us, and those that run out of time."""
    passed = {r.test for r in runs if r.mode == "stock" and r.outcome == "passed"}
    ours = [r for r in runs if r.mode == mode and r.test in passed]
    return [r for r in ours if r.outcome == "failed"], [r for r in ours if r.outcome == "timed out"]


def main(arguments: list[str] | None = None) -> int:
    """The command line."""
    summary = str(__doc__).splitlines()[0]
    parser = argparse.ArgumentParser(prog="python -m benchmarks.host_tests", description=summary)
    parser.add_argument("--only", default="", metavar="NAME", help="part of module:function")
    parser.add_argument("--jobs", type=int, default=2, metavar="N", help="processes at a time (2)")
    parser.add_argument("--seconds", type=float, default=120, metavar="S", help="limit of one test (120)")
    parser.add_argument("--drop-in", action="store_true", help="replace the name integrate in the tests, too")
    parser.add_argument("--report", metavar="FILE", help="write every run to this JSON file")
    parser.add_argument("--reuse", metavar="REPORT", help="take the stock runs from an earlier report")
    options = parser.parse_args(arguments)
    mode = "drop-in" if options.drop_in else "enabled"
    names = list(test_names(options.only))
    known = _stock_runs(options.reuse, set(names)) if options.reuse else []
    measured = {r.test for r in known}
    work = [(n, m) for n in names for m in ("stock", mode) if m == mode or n not in measured]
    runs = known + run_all(work, options.jobs, options.seconds)
    failing, late = compare(runs, mode)
    listed = [r.test for r in failing if r.test in FORM_ONLY]
    forms = run_all([(t, "relaxed") for t in listed], options.jobs, options.seconds)
    if options.report:
        with open(options.report, "w", encoding="utf-8") as file:
            json.dump([asdict(r) for r in runs + forms], file, indent=1)
    _print_summary(runs, mode)
    for run in forms:
        print(f"\nform only: {run.test}: {FORM_ONLY[run.test]}\n  {run.outcome} relaxed: {run.detail}")
    for run in late:
        print(f"\ntimed out: {run.test} ({run.seconds:.0f} s)")
    new = [r for r in failing if r.test not in FORM_ONLY]
    for run in new:
        print(f"\nnewly failing: {run.test}\n  {run.detail}")
    bad = len(new) + len(late) + sum(r.outcome != "passed" for r in forms)
    counts = f"{len(new)} newly failing, {len(late)} newly too slow, {len(forms)} by form only"
    print(f"\n{len(names)} tests, {counts}")
    return 1 if bad else 0


def _stock_runs(path: str, names: set[str]) -> list[Run]:
    with open(path, encoding="utf-8") as file:
        runs = [Run(**entry) for entry in json.load(file)]
    return [r for r in runs if r.mode == "stock" and r.test in names]


def _print_summary(runs: list[Run], mode: str) -> None:
    for name in MODULES:
        for m in ("stock", mode):
            mine = [r for r in runs if r.mode == m and r.test.startswith(name + ":")]
            if mine:
                outcomes = [r.outcome for r in mine]
                counts = ", ".join(f"{outcomes.count(o)} {o}" for o in OUTCOMES)
                print(f"{name:45} {m:8} {counts}, {sum(r.seconds for r in mine):.1f} s")


if __name__ == "__main__":
    sys.exit(main())
