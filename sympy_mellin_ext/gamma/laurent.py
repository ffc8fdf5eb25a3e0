"""Laurent series of Gamma products by logarithmic derivatives; no limits are taken.

Sources: DLMF 5.2.1 and 5.7.3 (Gamma at and near its poles), 5.15 (polygamma functions).
"""
from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from sympy import (
    Add,
    Dummy,
    Expr,
    Integer,
    Mul,
    Rational,
    S,
    cos,
    cot,
    factorial,
    gamma,
    harmonic,
    log,
    pi,
    polygamma,
    sin,
    zeta,
)

from ..expanding import expanded
from .shortest import positive_power


class Series(NamedTuple):
    """``head * eps**valuation * (coefficients[0] + coefficients[1]*eps + ...)``, truncated."""

    valuation: int
    coefficients: tuple[Expr, ...]
    head: Expr = S.One

    def coefficient(self, n: int) -> Expr:
        """The coefficient of ``eps**n``; raises IndexError beyond the truncation."""
        k = n - self.valuation
        if k < 0 or self.head is S.Zero:
            return S.Zero
        return self.head * self.coefficients[k]

    def times(self, constant: Expr) -> Series:
        return Series(self.valuation, self.coefficients, self.head * constant)


def multiply(left: Series, right: Series, terms: int) -> Series:
    """Product to ``terms`` coefficients."""
    a, b = left.coefficients, right.coefficients
    coefficients = tuple(
        Add(*(Mul(a[j], b[k - j]) for j in range(k + 1) if j < len(a) and k - j < len(b))) for k in range(terms)
    )
    if terms > 1:
        coefficients = tuple(c.expand(log=False, func=False, trig=False, power_base=False) for c in coefficients)
    return Series(left.valuation + right.valuation, coefficients, left.head * right.head)


def exponential(exponents: Sequence[Expr], terms: int) -> tuple[Expr, ...]:
    """Coefficients of ``exp(sum_k exponents[k-1]*eps**k)`` (recursion for exp of a series)."""
    result = [S.One]
    for n in range(1, terms):
        total = Add(*(k * exponents[k - 1] * result[n - k] for k in range(1, n + 1)))
        result.append(expanded(total / n))
    return tuple(result)


def gamma_series(argument: Expr, rate: Expr, power: int, terms: int) -> Series:
    """Series of ``Gamma(argument + rate*eps)**power``, at a pole too."""
    if argument.is_Integer and argument.is_nonpositive:
        m = -argument
        # log of delta*(-1)**m*m!*Gamma(-m + delta), delta = rate*eps
        logs = [] if terms == 1 else [(-S.EulerGamma + harmonic(m)) * rate] + [
            (((-1) ** k * zeta(k) + harmonic(m, k)) / k) * rate**k for k in range(2, terms)
        ]
        head = (S.NegativeOne**m / (factorial(m) * rate)) ** power
        valuation = -power
    else:
        logs = [polygamma(k - 1, argument) * rate**k / factorial(k) for k in range(1, terms)]
        head = gamma(argument) ** Integer(power)
        valuation = 0
    return Series(valuation, exponential([power * c for c in logs], terms), head)


def sine_series(x: Expr, rate: Expr, power: int, terms: int) -> Series:
    """Series of ``(pi/sin(pi*(x + rate*eps)))**power`` = (Gamma(x)*Gamma(1-x))**power, DLMF 5.5.3."""
    if x.is_Integer:
        logs = [S.Zero if k % 2 else 2 * zeta(k) * rate**k / k for k in range(1, terms)]
        head, valuation = (S.NegativeOne**x / rate) ** power, -power
    else:
        # d/dx log(pi/sin(pi x)) = -pi*cot(pi x); further derivatives are polynomials in the cotangent
        t = Dummy("t")
        cotangent, derivative, logs = cot((pi * x).expand()), -pi * t, []
        for k in range(1, terms):
            logs.append(derivative.subs(t, cotangent) * rate**k / factorial(k))
            derivative = (-pi * (1 + t**2) * derivative.diff(t)).expand()
        head, valuation = (pi / sin((pi * x).expand())) ** Integer(power), 0
    return Series(valuation, exponential([power * c for c in logs], terms), head)


def cotangent_series(x: Expr, rate: Expr, terms: int) -> Series:
    """Series of ``pi*cot(pi*(x + rate*eps))``, DLMF 4.19.6 and 4.20.9."""
    if x.is_Integer:
        # pi*cot(pi*d) = 1/d - 2*sum zeta(2k)*d**(2k-1)
        coefficients = [S.One] + [
            S.Zero if k % 2 else -2 * zeta(k) * rate**k for k in range(1, terms)
        ]
        return Series(-1, tuple(coefficients), 1 / rate)
    # every derivative is a polynomial in the cotangent over sin**2
    t = Dummy("t")
    cotangent, square = cot((pi * x).expand()), sin((pi * x).expand()) ** 2
    coefficients, polynomial = [pi * cotangent], -(pi**2)
    for k in range(1, terms):
        coefficients.append(polynomial.subs(t, cotangent) / square * rate**k / factorial(k))
        # d/dx (p(t)/sin**2) = -pi*((1 + t**2)*p'(t) + 2*t*p(t))/sin**2
        polynomial = (-pi * ((1 + t**2) * polynomial.diff(t) + 2 * t * polynomial)).expand()
    return Series(0, tuple(coefficients))


def linear_series(value: Expr, rate: Expr, power: int, terms: int) -> Series:
    """Series of ``(value + rate*eps)**power`` for power +1 or -1."""
    if value is S.Zero:
        return Series(power, (S.One,) + (S.Zero,) * (terms - 1), rate**power)
    step = rate / value
    coefficients = [S.One, step] + [S.Zero] * terms if power > 0 else [(-step) ** k for k in range(terms)]
    return Series(0, tuple(coefficients[:terms]), value**power)


def power_series(base: Expr, exponent: Expr, rate: Expr, terms: int) -> Series:
    """Series of ``base**(exponent + rate*eps)``."""
    if base is S.One or terms == 1:
        return Series(0, (S.One,) + (S.Zero,) * (terms - 1), positive_power(base, exponent))
    step = rate * log(base)
    return Series(0, exponential([step] + [S.Zero] * (terms - 2), terms), positive_power(base, exponent))


def cosine_series(phase: Expr, rate: Expr, terms: int) -> Series:
    """Series of ``cos(phase + rate*eps)``; may start with zero coefficients."""
    half_turn = Rational(1, 2) * S.Pi
    return Series(0, tuple(cos(phase + k * half_turn) * rate**k / factorial(k) for k in range(terms)))
