"""Random integrals of fixed seeds against quadrature; the long run is ``python -m benchmarks.fuzz``."""
from functools import cache

import pytest

from benchmarks.fuzz import examine

SEEDS = range(50_000, 50_150)
GROUP = 15


@cache
def examined(seed):
    return examine(seed, digits=6, seconds=4, points=1)


@pytest.mark.parametrize("first", SEEDS[::GROUP])
def test_random_integrals(first):
    records = [examined(seed) for seed in range(first, first + GROUP)]
    assert [r for r in records if r["outcome"] in ("wrong", "error")] == []


def test_most_answers_are_checked():
    records = [examined(seed) for seed in SEEDS[:40]]
    outcomes = [r["outcome"] for r in records]
    assert outcomes.count("agrees") >= 12 and outcomes.count("unchecked") <= 5, outcomes
