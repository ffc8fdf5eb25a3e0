"""The built-in strategies and their order: an edit that drops one must not go unseen."""
from __future__ import annotations

from sympy_mellin_ext.strategies import strategies

EXPECTED = [
    "master theorem",
    "exponential series",
    "Abel-Plana kernel",
    "ranges",
    "zeta coefficients",
    "Taylor coefficients of one argument",
    "Mellin-Barnes",
    "Taylor coefficients",
    "sums with zeta coefficients",
    "function of a binomial",
    "even function of exp(x)",
    "change of variable",
]


def test_built_in_strategies() -> None:
    assert [s.name for s in strategies() if s.name in EXPECTED] == EXPECTED
