"""Published integrals (tests/data, each with its source) through `closed_form`: value, region, and no overclaim.

SymPy is not asked here: what the strategies refuse counts as not solved, and the count is held from below.
"""
from __future__ import annotations

from collections import defaultdict
from pathlib import Path

import pytest
from sympy.core.cache import clear_cache

from benchmarks.entries import Entry, load
from benchmarks.scoring import SOLVED, UNEVALUATED, classify, compare_region, time_limit
from sympy_mellin_ext import closed_form

DATA = Path(__file__).parent / "data"
ENTRIES: dict[str, list[Entry]] = defaultdict(list)
for entry in load(DATA):
    ENTRIES[entry.family].append(entry)


@pytest.mark.parametrize("family", sorted(ENTRIES))
def test_family(family: str) -> None:
    """Nothing wrong, no region too wide; at least 85 of 100 entries of each family solved."""
    wrong, solved = [], 0
    for entry in ENTRIES[family]:
        clear_cache()
        with time_limit(30):
            answer = closed_form(entry.integrand, *entry.limits)
        if family == "divergent":
            solved += answer is None
            if answer is not None:
                wrong.append(f"{entry.name}: {answer} for a divergent integral")
            continue
        if answer is None:
            continue
        outcome, detail = classify(answer.as_piecewise(), entry)
        if outcome not in (SOLVED, UNEVALUATED):
            wrong.append(f"{entry.name}: {outcome} {detail}")
        solved += outcome == SOLVED
        if entry.valid is not None:
            verdict, witness = compare_region(answer.condition, entry, 30)
            if verdict == "wide":
                wrong.append(f"{entry.name}: {answer.condition} is wider than {entry.valid} at {witness}")
    assert not wrong, "\n".join(wrong)
    assert solved >= 0.85 * len(ENTRIES[family]), f"{solved} of {len(ENTRIES[family])} solved"
