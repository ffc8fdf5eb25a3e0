"""A dozen integrals of the buoy crew."""
from __future__ import annotations

from typing import NamedTuple

from sympy import (
    Expr,
    Rational,
    Symbol,
    besselj,
    besselk,
    cos,
    erfc,
    exp,
    gamma,
    log,
    oo,
    pi,
    sqrt,
    symbols,
)


class Example(NamedTuple):
    """One integral with the question behind it."""

    question: str
    integrand: Expr
    limits: tuple[Symbol, Expr, Expr]


x = Symbol("x", positive=True)
t = Symbol("t", real=True)
a, b, c, d, g, h, k, m, n, w = symbols("a b c d g h k m n w", positive=True)
q, s = symbols("q s", real=True)

BUOYS: tuple[Example, ...] = (
    Example("q-th moment of the life of a mooring chain (Weibull density, shape k, scale a)",
            x**q * (k / a) * (x / a) ** (k - 1) * exp(-((x / a) ** k)), (x, 0, oo)),
    Example("mean log-life of a lamp (gamma density, shape k, scale a)",
            log(x) * x ** (k - 1) * exp(-x / a) / (gamma(k) * a**k), (x, 0, oo)),
    Example("bit error rate of the radio link, averaged over fading of order m at mean level g",
            erfc(sqrt(x)) / 2 * (m / g) ** m * x ** (m - 1) * exp(-m * x / g) / gamma(m), (x, 0, oo)),
    Example("mean rate of the link over a fading of order 1",
            log(1 + x) * exp(-x / g) / g, (x, 0, oo)),
    Example("moment of the repair time (Pareto-like tail, power d)",
            x ** (q - 1) * (1 + x / b) ** (-d), (x, 0, oo)),
    Example("surface disturbance of a point source at distance b, water that damps short waves",
            x * exp(-a**2 * x**2) * besselj(0, b * x), (x, 0, oo)),
    Example("field of the anchor cable at depth h and distance b",
            exp(-h * x) * besselj(0, b * x), (x, 0, oo)),
    Example("moment of the height of a wave group (K density of order n)",
            x ** (s - 1) * besselk(n, a * x), (x, 0, oo)),
    Example("autocorrelation of a damped swell with spectrum 1/(x**2 + c**2)",
            cos(w * x) / (x**2 + c**2), (x, 0, oo)),
    Example("heat lost by the housing to a cold sky (Planck spectrum)",
            x**3 / (exp(h * x) - 1), (x, 0, oo)),
    Example("two corrosion rates compared: the log-ratio integral",
            (exp(-a * x) - exp(-b * x)) / x, (x, 0, oo)),
    Example("normalisation of the drift angle's tangent (Student-like density)",
            (1 + t**2 / n) ** (-(n + 1) / 2), (t, -oo, oo)),
    Example("power of the third-order spectrum between two cut-offs that cancel",
            (1 - cos(b * x)) / x ** Rational(5, 2) * sqrt(2 / pi), (x, 0, oo)),
)
