"""Digamma, loggamma, polygamma and Hurwitz zeta, against quadrature."""

from __future__ import annotations

import mpmath
import pytest
from sympy import (
    EulerGamma,
    Expr,
    Rational,
    S,
    Symbol,
    digamma,
    exp,
    gamma,
    harmonic,
    lambdify,
    log,
    loggamma,
    pi,
    polygamma,
    sin,
    symbols,
    zeta,
)

from sympy_mellin_ext.series import zeta_transform

x, a, b, p = symbols("x a b p", positive=True)
s = Symbol("s")
VALUES = {a: Rational(7, 5), b: Rational(3, 2), p: Rational(13, 4)}
STIRLING = loggamma(1 + x) - (x + S.Half) * log(x) + x - log(2 * pi) / 2

FUNCTIONS = [
    (digamma(1 + x) + EulerGamma, (-1, 0)),
    (harmonic(x), (-1, 0)),
    (digamma(1 + x) - log(x), (0, 1)),
    (digamma(S.Half + x) - log(x), (0, 2)),
    (digamma(a + b * x) - digamma(a), (-1, 0)),
    (digamma(1 + 2 * x) - log(2 * x), (0, 1)),
    (3 * (digamma(1 + x**2) + EulerGamma), (-2, 0)),
    (polygamma(1, 1 + x), (0, 1)),
    (polygamma(2, a + x), (0, 2)),
    (polygamma(1, 1 + x) - 1 / x, (1, 2)),
    (polygamma(1, 1 + x) - pi**2 / 6, (-1, 0)),
    (loggamma(1 + x) + EulerGamma * x, (-2, -1)),
    (log(gamma(1 + x)) + EulerGamma * x, (-2, -1)),
    (loggamma(2 + x) - (1 - EulerGamma) * x, (-2, -1)),
    (STIRLING, (0, 1)),
    ((STIRLING / x).expand(), (1, 2)),
    (zeta(Rational(5, 2), 1 + 2 * x), (0, Rational(3, 2))),
    (zeta(p, a + x), (0, p - 1)),
    (x**2 * (digamma(1 + x) - log(x)), (-2, -1)),
]


@pytest.mark.parametrize(("f", "strip"), FUNCTIONS, ids=str)
def test_against_quadrature(f: Expr, strip: tuple) -> None:
    found = zeta_transform(f, x)
    assert found is not None
    assert (found.lower, found.upper) == strip
    low, high = (S(e).subs(VALUES) for e in strip)
    at = low + (high - low) * Rational(5, 9)
    value = found.at(s).subs(VALUES).subs(s, at).evalf(15)
    g = lambdify(x, f.subs(VALUES), "mpmath")
    with mpmath.workdps(60):

        def integrand(u: mpmath.mpf) -> mpmath.mpf:
            return mpmath.exp(u * mpmath.mpf(at.p) / at.q) * g(mpmath.exp(u))

        wanted = mpmath.quad(integrand, [-60, -30, -10, -3, 0, 3, 10, 30, 60], maxdegree=6)
    assert float(value) == pytest.approx(float(wanted), rel=1e-7)


def test_published_value() -> None:
    """Titchmarsh, The Theory of the Riemann Zeta-Function (1951), 2.9.2."""
    found = zeta_transform(digamma(1 + x) - log(x), x)
    assert found is not None
    assert found.at(s) == -pi * zeta(1 - s) / sin(pi * s)


@pytest.mark.parametrize(
    "f",
    [
        digamma(1 + x),
        digamma(x),
        digamma(1 + x) + 1,
        loggamma(1 + x),
        polygamma(1, 1 - x),
        polygamma(a, 1 + x),
        digamma(1 + x) - digamma(2 + x),
        exp(-x) * polygamma(1, 1 + x),
        digamma(1 + x) ** 2,
        zeta(S.Half, 1 + x),
        zeta(1 + x),
    ],
    ids=str,
)
def test_refused(f: Expr) -> None:
    assert zeta_transform(f, x) is None
