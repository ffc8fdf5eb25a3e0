"""Integrals in several variables: this package against iterated integration in SymPy.

``python -m benchmarks.orthant [PATH] [--seconds 60]`` integrates every entry with several limits, each call in a
process of its own with a time limit and a cold cache, and prints who solved it, the times and their ratio.
"""
from __future__ import annotations

import argparse
import multiprocessing
import statistics
import sys
from collections.abc import Sequence
from multiprocessing.connection import Connection
from typing import Any

import sympy

from .entries import Entry, load
from .scoring import SOLVED, TIMEOUT, classify, time_limit, timed


def _child(entry: Entry, seconds: float, ours: bool, pipe: Connection) -> None:
    from sympy_mellin_ext import integrate

    answer, spent, outcome, _ = timed(integrate if ours else sympy.integrate, entry, seconds)
    if not outcome:
        with time_limit(30):
            outcome = classify(answer, entry)[0]
    pipe.send((outcome, spent))


def measured(entry: Entry, seconds: float, ours: bool) -> tuple[str, float]:
    """(outcome, processor seconds) of one call, in a forked process that is ended if it does not come back."""
    receiver, sender = multiprocessing.Pipe(duplex=False)
    context = multiprocessing.get_context("fork")
    process = context.Process(target=_child, args=(entry, seconds, ours, sender), daemon=True)
    process.start()
    sender.close()
    try:
        result: tuple[str, float] = receiver.recv() if receiver.poll(seconds + 40) else (TIMEOUT, seconds)
    except EOFError:
        result = ("error", seconds)
    process.kill()
    process.join()
    return result


def main(arguments: Sequence[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m benchmarks.orthant", description=__doc__)
    parser.add_argument("path", nargs="?", default="tests/data/several.jsonl")
    parser.add_argument("--seconds", type=float, default=10, help="time limit of one call (default 10)")
    parser.add_argument("--ours", action="store_true", help="leave SymPy's own integration out")
    options = parser.parse_args(arguments)
    entries = [e for e in load(options.path) if len(e.limits) > 1]
    print(f"{'entry':12} {'ours':12} {'s':>7}   {'SymPy':12} {'s':>7} {'ratio':>7}")
    rows: list[tuple[tuple[str, float], Any]] = []
    for entry in entries:
        ours = measured(entry, options.seconds, True)
        stock = ("not run", 0.0) if options.ours else measured(entry, options.seconds, False)
        ratio = f"{stock[1] / max(ours[1], 1e-6):7.1f}" if ours[0] == stock[0] == SOLVED else ""
        print(f"{entry.name:12} {ours[0]:12} {ours[1]:7.3f}   {stock[0]:12} {stock[1]:7.3f} {ratio}", flush=True)
        rows.append((ours, stock))
    solved = [o for o, _ in rows if o[0] == SOLVED]
    both = [s[1] / max(o[1], 1e-6) for o, s in rows if o[0] == s[0] == SOLVED]
    print(f"\nsolved: ours {len(solved)}, SymPy {sum(s[0] == SOLVED for _, s in rows)}, of {len(rows)}")
    if solved:
        print(f"ours: median {1000 * statistics.median(o[1] for o in solved):.0f} ms, "
              f"largest {max(o[1] for o in solved):.2f} s")
    if both:
        print(f"median ratio where both solve: {statistics.median(both):.1f}")
    return 0 if len(solved) == len(rows) else 1


if __name__ == "__main__":
    sys.exit(main())
