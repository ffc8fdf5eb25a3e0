"""Laurent series of Gamma products by logarithmic derivatives; no limits are taken.

Sources: DLMF 5.2.1 and 5.7.3 (Gamma at and near its poles), 5.15 (polygamma functions).
"""
from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from sympy import Add, Expr, Integer, Mul, Rational, S, cos, factorial, gamma, harmonic, log, polygamma, zeta

from .shortest import positive_power


class Series(NamedTuple):
    """``eps**valuation * (coefficients[0] + coefficients[1]*eps + ...)``, truncated."""

    valuation: int
    coefficients: tuple[Expr, ...]

    def coefficient(self, n: int) -> Expr:
        """The coefficient of ``eps**n``; raises IndexError beyond the truncation."""
        k = n - self.valuation
        return S.Zero if k < 0 else self.coefficients[k]

    def times(self, constant: Expr) -> Series:
        return Series(self.valuation, tuple(constant * c for c in self.coefficients))


def multiply(left: Series, right: Series, terms: int) -> Series:
    """Product to ``terms`` coefficients."""
    a, b = left.coefficients, right.coefficients
    coefficients = tuple(
        Add(*(Mul(a[j], b[k - j]) for j in range(k + 1) if j < len(a) and k - j < len(b))) for k in range(terms)
    )
    return Series(left.valuation + right.valuation, coefficients)


def exponential(head: Expr, exponents: Sequence[Expr], terms: int) -> tuple[Expr, ...]:
    """Coefficients of ``head * exp(sum_k exponents[k-1]*eps**k)`` (recursion for exp of a series)."""
    result = [S.One]
    for n in range(1, terms):
        total = Add(*(k * exponents[k - 1] * result[n - k] for k in range(1, n + 1)))
        result.append((total / n).expand())
    return tuple(head * c for c in result)


def gamma_series(argument: Expr, rate: Expr, power: int, terms: int) -> Series:
    """Series of ``Gamma(argument + rate*eps)**power``, at a pole too."""
    if argument.is_Integer and argument.is_nonpositive:
        m = -argument
        # log of delta*(-1)**m*m!*Gamma(-m + delta), delta = rate*eps
        logs = [(-S.EulerGamma + harmonic(m)) * rate] + [
            (((-1) ** k * zeta(k) + harmonic(m, k)) / k) * rate**k for k in range(2, terms)
        ]
        head = (S.NegativeOne**m / (factorial(m) * rate)) ** power
        valuation = -power
    else:
        logs = [polygamma(k - 1, argument) * rate**k / factorial(k) for k in range(1, terms)]
        head = gamma(argument) ** Integer(power)
        valuation = 0
    return Series(valuation, exponential(head, [power * c for c in logs], terms))


def power_series(base: Expr, exponent: Expr, rate: Expr, terms: int) -> Series:
    """Series of ``base**(exponent + rate*eps)``."""
    if base is S.One or terms == 1:
        return Series(0, (positive_power(base, exponent),) + (S.Zero,) * (terms - 1))
    step = rate * log(base)
    return Series(0, exponential(positive_power(base, exponent), [step] + [S.Zero] * (terms - 2), terms))


def cosine_series(phase: Expr, rate: Expr, terms: int) -> Series:
    """Series of ``cos(phase + rate*eps)``; may start with zero coefficients."""
    half_turn = Rational(1, 2) * S.Pi
    return Series(0, tuple(cos(phase + k * half_turn) * rate**k / factorial(k) for k in range(terms)))
