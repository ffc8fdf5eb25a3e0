"""Score the package on a list of published integrals.

``python -m benchmarks.corpus PATH`` integrates every entry of the ``*.jsonl`` files at PATH, each in a
process of its own with a time limit and a cold cache, and says which came back solved, wrong, overclaiming,
unevaluated, late or with an error. ``--stock`` puts SymPy's own `integrate` beside it, ``--regions``
compares the stated regions of convergence with the listed ones.
"""
from __future__ import annotations

import argparse
import json
import math
import multiprocessing
import statistics
import sys
import time
from collections import Counter, defaultdict
from collections.abc import Sequence
from multiprocessing.connection import Connection, wait
from typing import Any

from .entries import Entry, load
from .scoring import ERROR, OUTCOMES, SOLVED, TIMEOUT, measure, shortened

Result = dict[str, Any]


def _child(entry: Entry, options: argparse.Namespace, pipe: Connection) -> None:
    pipe.send(measure(entry, options.seconds, options.stock, options.regions))
    pipe.close()


def run(entries: Sequence[Entry], options: argparse.Namespace) -> list[Result]:
    """Measure all entries, at most `options.jobs` at a time, each in a forked process."""
    context = multiprocessing.get_context("fork")
    # alarms end a call in time; this is for code that does not come back to the interpreter
    patience = 4 * options.seconds * (2 + 6 * options.stock) + 180
    waiting = list(reversed(entries))
    running: dict[Connection, tuple[Any, Entry, float]] = {}
    results: dict[str, Result] = {}
    show = sys.stderr.isatty()
    while waiting or running:
        while waiting and len(running) < options.jobs:
            entry = waiting.pop()
            ours, theirs = context.Pipe(duplex=False)
            process = context.Process(target=_child, args=(entry, options, theirs), daemon=True)
            process.start()
            theirs.close()
            running[ours] = (process, entry, time.monotonic())
        ready = wait(list(running), timeout=1)
        for pipe, (process, entry, start) in list(running.items()):
            late = time.monotonic() - start > patience
            if pipe not in ready and not late:
                continue
            results[entry.name] = _received(pipe, entry, late)
            del running[pipe]
            process.kill()
            process.join()
            if show:
                print(f"\r{len(results)}/{len(entries)} {entry.name:30}", end="", file=sys.stderr)
    if show:
        print("\r" + " " * 60 + "\r", end="", file=sys.stderr)
    return [results[e.name] for e in entries]


def _received(pipe: Connection, entry: Entry, late: bool) -> Result:
    try:
        if not late:
            result: Result = pipe.recv()
            return result
    except EOFError:
        pass
    finally:
        pipe.close()
    return {"id": entry.name, "family": entry.family, "outcome": TIMEOUT if late else ERROR, "seconds": 0.0,
            "detail": "no answer from the process" if late else "the process died", "answer": ""}


def table(results: Sequence[Result], stock: bool) -> list[str]:
    """Counts per family, the families' percentages, and how many did not need SymPy's own integrator."""
    columns = [*OUTCOMES, "all", "%", "own"]
    head = f"{'family':18}" + "".join(f"{c:>12}" for c in columns) + ("   stock     %" if stock else "")
    lines = [head, "-" * len(head)]
    families: dict[str, list[Result]] = defaultdict(list)
    for result in results:
        families[result["family"]].append(result)
    for name, members in [*sorted(families.items()), ("all", list(results))]:
        counts = Counter(r["outcome"] for r in members)
        share = f"{100 * counts[SOLVED] / len(members):.1f}"
        own = sum(r["outcome"] == SOLVED and bool(r.get("strategy")) for r in members)
        cells = [*(counts[c] or "" for c in OUTCOMES), len(members), share, own]
        if name == "all":
            lines.append("-" * len(head))
        line = f"{name:18}" + "".join(f"{c:>12}" for c in cells)
        if stock:
            theirs = sum(r.get("stock", {}).get("outcome") == SOLVED for r in members)
            line += f"{theirs:>8}{100 * theirs / len(members):>6.1f}"
        lines.append(line)
    return lines


def speed(results: Sequence[Result]) -> list[str]:
    """Our time per entry, and the ratio to stock on the entries that both solve."""
    lines = []
    times = [r["seconds"] for r in results if r["outcome"] != TIMEOUT]
    if times:
        worst = max((r for r in results), key=lambda r: r["seconds"])
        lines.append(f"time per entry, cold cache: median {1000 * statistics.median(times):.1f} ms, "
                     f"largest {worst['seconds']:.2f} s ({worst['id']})")
    ratios = [(r["ratio"], r["id"]) for r in results if "ratio" in r]
    if ratios:
        mean = math.exp(statistics.fmean(math.log(ratio) for ratio, _ in ratios))
        worst_ratio, name = min(ratios)
        lines.append(f"stock / ours, cold cache, {len(ratios)} entries that both solve: "
                     f"geometric mean {mean:.2f}, median {statistics.median(r for r, _ in ratios):.2f}, "
                     f"worst {worst_ratio:.2f} ({name})")
    wrong = [r["id"] for r in results if r.get("stock", {}).get("outcome") == "wrong"]
    if wrong:
        lines.append(f"stock is wrong on: {', '.join(wrong)}")
    return lines


def regions(results: Sequence[Result]) -> list[str]:
    counted = [r for r in results if "region" in r]
    counts = Counter(r["region"] for r in counted)
    lines = ["regions at 60 random points each: "
             + ", ".join(f"{k} {counts[k]}" for k in ("exact", "beyond", "narrow", "wide"))]
    for r in counted:
        if r["region"] != "exact":
            lines.append(f"  {r['region']:7}{r['id']:20} {shortened(r['condition'], 70)} at {r['witness']}")
    return lines


def simplicity(results: Sequence[Result]) -> list[str]:
    counted = [r for r in results if "ops" in r]
    long = [r for r in counted if r["ops"][0] > 2 * max(r["ops"][1], 1)]
    lines = [f"more than twice as many operations as the listed value: {len(long)} of {len(counted)}"]
    for r in long:
        lines.append(f"  {r['id']:20} {r['ops'][0]} against {r['ops'][1]}: {shortened(r['answer'])}")
    return lines


def unsolved(results: Sequence[Result]) -> list[str]:
    lines = []
    for r in results:
        if r["outcome"] != SOLVED:
            by = f" [{r['strategy']}]" if r.get("strategy") else ""
            lines.append(f"{r['outcome']:12}{r['id']:20} {shortened(r['detail'])}{by}")
            if r["answer"]:
                lines.append(f"{'':32} {shortened(r['answer'])}")
        if r.get("trouble"):
            lines.append(f"{'trouble':12}{r['id']:20} {shortened(r['trouble'])}")
    return lines


def parser() -> argparse.ArgumentParser:
    result = argparse.ArgumentParser(prog="python -m benchmarks.corpus", description=__doc__.split("\n")[0])
    result.add_argument("path", help="a .jsonl file, or a folder of them")
    result.add_argument("--stock", action="store_true", help="SymPy's own integrate beside ours")
    result.add_argument("--only", nargs="+", default=[], metavar="NAME", help="families or single entries")
    result.add_argument("--seconds", type=float, default=10, help="processor time for each call (default 10)")
    result.add_argument("--regions", action="store_true", help="compare the regions with the listed ones")
    result.add_argument("--jobs", type=int, default=1, help="processes at a time (default 1)")
    result.add_argument("--json", metavar="FILE", help="write all results as JSON")
    return result


def main(arguments: Sequence[str] | None = None) -> int:
    options = parser().parse_args(arguments)
    entries = list(load(options.path, options.only))
    if not entries:
        print("no such entries")
        return 0
    _warm_up(options.stock)
    results = run(entries, options)
    sections = [table(results, options.stock), unsolved(results), speed(results), simplicity(results)]
    if options.regions:
        sections.append(regions(results))
    print("\n\n".join("\n".join(lines) for lines in sections if lines))
    if options.json:
        with open(options.json, "w", encoding="utf-8") as file:
            json.dump(results, file, indent=1)
    return 0


def _warm_up(stock: bool) -> None:
    """Imports and tables that a process makes once are not part of the time of an entry."""
    import sympy

    from sympy_mellin_ext import integrate

    x = sympy.Symbol("x", positive=True)
    for integrator in (integrate, sympy.integrate)[:1 + stock]:
        integrator(x**2 * sympy.exp(-x), (x, 0, sympy.oo))


if __name__ == "__main__":
    sys.exit(main())
