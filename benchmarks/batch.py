"""Throughput of a batch, and what an entry costs over a plain loop.

``python -m benchmarks.batch PATH`` takes integrals of the ``*.jsonl`` files at PATH and evaluates them in a plain loop
over ``integrate``, with one worker process and with two, each run in fresh processes.
"""
from __future__ import annotations

import argparse
import json
import random
import signal
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from pathlib import Path

from sympy_mellin_ext import integrate
from sympy_mellin_ext.batch import Entry, Journal, Options, stream

from .entries import load


class Late(BaseException):
    """An entry took too long for this comparison; no handler on the way may keep it."""


def _alarm(_signal: int, _frame: object) -> None:
    raise Late


def candidates(path: str) -> list[Entry]:
    """All entries in one variable, in an order that does not go by families."""
    entries = [Entry(e.name, e.integrand, e.limits) for e in load(path) if len(e.limits) == 1]
    random.Random(0).shuffle(entries)
    return entries


def plain(path: str, count: int, seconds: float) -> dict[str, float]:
    """Seconds of each entry in a plain loop, for the first `count` that do not take more than `seconds`."""
    result: dict[str, float] = {}
    signal.signal(signal.SIGALRM, _alarm)
    for entry in candidates(path):
        if len(result) == count:
            break
        start = time.perf_counter()
        signal.setitimer(signal.ITIMER_REAL, seconds)
        try:
            integrate(entry.integrand, *entry.limits)
        except Late:
            continue
        finally:
            signal.setitimer(signal.ITIMER_REAL, 0)
        result[entry.name] = time.perf_counter() - start
    return result


def batch(entries: list[Entry], jobs: int, check: bool) -> tuple[float, dict[str, float], dict[str, float]]:
    """Wall time of a run with a journal, time of each entry until its record arrived, and its time in the worker."""
    arrived, inside = {}, {}
    with tempfile.TemporaryDirectory() as folder, Journal(Path(folder) / "journal.jsonl") as book:
        start = before = time.perf_counter()
        for name, record in stream(entries, Options(check=check), jobs=jobs, journal=book):
            now = time.perf_counter()
            arrived[name], inside[name] = now - before, record["seconds"]
            before = now
    return before - start, arrived, inside


def main(arguments: Sequence[str] | None = None) -> int:
    """Measure and print; the exit status is 0."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks.batch", description=__doc__.split("\n")[0])
    parser.add_argument("path", help="a .jsonl file, or a folder of them")
    parser.add_argument("--count", type=int, default=200, help="number of entries (default 200)")
    parser.add_argument("--seconds", type=float, default=4, help="longer entries are left out (default 4)")
    parser.add_argument("--check", action="store_true", help="with quadrature of each result, as a batch does it")
    parser.add_argument("--plain", action="store_true", help=argparse.SUPPRESS)  # the loop, in a process of its own
    options = parser.parse_args(arguments)
    if options.plain:
        print(json.dumps(plain(options.path, options.count, options.seconds)))
        return 0
    command = [sys.executable, "-m", "benchmarks.batch", options.path, "--plain", "--count", str(options.count)]
    command += ["--seconds", str(options.seconds)]
    loop = json.loads(subprocess.run(command, check=True, capture_output=True, text=True).stdout)
    entries = [entry for entry in candidates(options.path) if entry.name in loop]
    print(f"plain loop    {sum(loop.values()):8.2f} s for {len(loop)} entries")
    began = [batch(entries[:jobs], jobs, options.check)[0] for jobs in (1, 2)]
    one, arrived, inside = batch(entries, 1, options.check)
    two, _, _ = batch(entries, 2, options.check)
    for jobs, seconds in ((1, one), (2, two)):
        print(f"{jobs} worker{'s' * (jobs > 1):1}      {seconds:8.2f} s, {len(entries) / seconds:6.1f} a second")
    print(f"2 workers against 1: {one / two:.2f} times as many a second; {(one - began[0]) / (two - began[1]):.2f} "
          f"without the start of the workers ({began[0]:.2f} s, {began[1]:.2f} s)")
    if options.check:
        return 0
    waited = entries[0].name  # for the worker to start
    extra = {n: arrived[n] - inside[n] for n in arrived if n != waited}
    print(f"over the time in the worker, an entry costs {1000 * statistics.median(extra.values()):.2f} ms (median)")
    long = [n for n in extra if inside[n] >= 0.05]
    if long:
        share = sum(extra[n] for n in long) / sum(inside[n] for n in long)
        print(f"{len(long)} entries of 50 ms and more: {sum(inside[n] for n in long):.2f} s in the worker, "
              f"{sum(loop[n] for n in long):.2f} s in the plain loop; {100 * share:.1f}% overhead")
    return 0


if __name__ == "__main__":
    sys.exit(main())
