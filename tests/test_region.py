"""Regions of parameters: signs, emptiness, and the fewest inequalities."""

import pytest
from sympy import Rational, Symbol, symbols

from sympy_mellin_ext.region import Region

s, t, nu, mu, k = symbols("s t nu mu k", real=True)
a, b, c = symbols("a b c", positive=True)
z, w = symbols("z w")
n = Symbol("n", integer=True, positive=True)


@pytest.mark.parametrize(
    ("inequalities", "expected"),
    [
        ([s, s + 1, 1 - s, a], "(s > 0) & (s < 1)"),
        ([1 + k / c], "k > -c"),
        ([s - nu, s + nu, Rational(3, 2) - s], "(s < 3/2) & (s > Abs(nu))"),
        ([mu, nu * 0 + a * (n + 1) - mu, 2 * a - mu], "(mu > 0) & (mu < 2*a)"),
        ([s, -1 - s], "False"),
        ([a + b], "True"),
    ],
)
def test_to_boolean(inequalities, expected):
    assert str(Region().positive(*inequalities).to_boolean()) == expected
