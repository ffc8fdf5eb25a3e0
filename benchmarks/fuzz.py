"""Random integrals against quadrature: ``python -m benchmarks.fuzz --count 10000 --seed 1 --journal fuzz.jsonl``.

Every closed form is compared with quadrature at points inside its region, near its edges too; where the integral is
found to converge just outside, the record says so (``narrow``).  A run with the same journal goes on where it stopped.
"""
from __future__ import annotations

import argparse
import json
import multiprocessing
import sys
from collections import Counter
from collections.abc import Iterator
from functools import partial
from pathlib import Path
from typing import Any

from sympy import I
from sympy.core.cache import clear_cache

from .grammar import Grammar
from .scoring import OutOfTime, time_limit


def examine(seed: int, digits: int = 7, seconds: float = 20, points: int | None = None) -> dict[str, Any]:
    """One integral of the sequence: refused, agrees, wrong or unchecked, with what to reproduce it by.

    With `points` it is compared at so many points inside only, and neither at the edges nor outside.
    """
    from sympy_mellin_ext import closed_form
    from sympy_mellin_ext.verify.sampling import sample

    f, limits, given = Grammar(seed).question()
    record: dict[str, Any] = {"seed": seed, "integrand": str(f), "limits": str(limits)}
    if given:
        record["given"] = str(given)
    if points is None:
        clear_cache()
    try:
        with time_limit(seconds):
            answer = closed_form(f, limits, given=given)
    except OutOfTime:
        return record | {"outcome": "slow"}
    except Exception as error:  # an exception is a finding
        return record | {"outcome": "error", "note": f"{type(error).__name__}: {error}"}
    if answer is None:
        return record | {"outcome": "refused"}
    record |= {"value": str(answer.value), "condition": str(answer.condition), "strategy": answer.strategy}
    if answer.value.has(I) and answer.value.is_real is False and not f.has(I):
        return record | {"outcome": "wrong", "note": "not real"}
    try:
        with time_limit(2 * seconds):
            chosen = None
            if points is not None:
                symbols = (f.free_symbols | limits[1].free_symbols | limits[2].free_symbols) - {limits[0]}
                chosen = sample(symbols, answer.condition, given, points)
            certificate = answer.verify(digits, chosen, seconds / 4)
    except OutOfTime:
        return record | {"outcome": "unchecked", "note": "quadrature out of time"}
    except Exception as error:
        return record | {"outcome": "error", "note": f"verify: {type(error).__name__}: {error}"}
    outcome = {True: "agrees", False: "wrong", None: "unchecked"}[certificate.ok]
    if certificate.sharp is False:
        record["narrow"] = [f"{p}: {verdict}" for p, verdict in certificate.outside]
    return record | {"outcome": outcome, "note": certificate.note}


def finished(journal: Path) -> dict[int, dict[str, Any]]:
    """Records of an earlier run; a half-written last line is passed over."""
    done: dict[int, dict[str, Any]] = {}
    if journal.exists():
        for line in journal.read_text().splitlines():
            try:
                record = json.loads(line)
            except json.JSONDecodeError:
                continue
            done[record["seed"]] = record
    return done


def progress(items: Iterator[Any], total: int) -> Iterator[Any]:
    """With a bar where tqdm is installed and somebody watches."""
    try:
        from tqdm import tqdm
    except ImportError:
        return items
    return tqdm(items, total=total, disable=not sys.stderr.isatty())


def main(arguments: list[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m benchmarks.fuzz", description=__doc__)
    parser.add_argument("--count", type=int, default=300, help="number of integrals")
    parser.add_argument("--seed", type=int, default=0, help="seed of the first one; the others follow")
    parser.add_argument("--journal", type=Path, default=Path("fuzz.jsonl"), help="records, one a line")
    parser.add_argument("--jobs", type=int, default=1)
    parser.add_argument("--quick", action="store_true", help="two points inside, none at the edges or outside")
    options = parser.parse_args(arguments)
    done = finished(options.journal)
    seeds = [options.seed + n for n in range(options.count)]
    todo = [s for s in seeds if s not in done]
    task = partial(examine, digits=6, seconds=8, points=2) if options.quick else examine
    with (
        options.journal.open("a") as out,
        multiprocessing.get_context("fork").Pool(options.jobs, maxtasksperchild=200) as pool,
    ):
        for record in progress(pool.imap_unordered(task, todo), len(todo)):
            out.write(json.dumps(record) + "\n")
            out.flush()
            done[record["seed"]] = record
    records = [done[s] for s in seeds]
    counts = Counter(r["outcome"] for r in records)
    for r in sorted(records, key=lambda r: r["seed"]):
        if r["outcome"] in ("wrong", "error", "slow"):
            print(f"{r['outcome']}: seed {r['seed']}  {r['integrand']}  over {r['limits']}")
            print(f"    {r.get('value', '')}  for {r.get('condition', '')}  [{r.get('strategy', '')}]")
            print(f"    {r.get('note', '')}")
    print(f"seeds {seeds[0]} to {seeds[-1]}: " + ", ".join(f"{n} {name}" for name, n in sorted(counts.items())))
    return 1 if counts["wrong"] or counts["error"] else 0


if __name__ == "__main__":
    sys.exit(main())
