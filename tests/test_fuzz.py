"""Random integrals of fixed seeds against quadrature; the long run is ``python -m benchmarks.fuzz``."""
import pytest

from benchmarks.fuzz import examine

SEEDS = range(50_000, 50_150)
GROUP = 15


@pytest.mark.parametrize("first", SEEDS[::GROUP])
def test_random_integrals(first):
    records = [examine(seed, digits=6, seconds=4, points=1) for seed in range(first, first + GROUP)]
    assert [r for r in records if r["outcome"] in ("wrong", "error")] == []


def test_most_answers_are_checked():
    records = [examine(seed, digits=6, seconds=4, points=1) for seed in SEEDS[:40]]
    outcomes = [r["outcome"] for r in records]
    assert outcomes.count("agrees") >= 12 and outcomes.count("unchecked") <= 5, outcomes
