"""Derivatives of Gamma products in a parameter: powers of the logarithm of a kernel.

``log(1+z)**k*(1+z)**(-c)`` is the k-th derivative in ``delta`` of ``(1+z)**(delta-c)`` at 0, and so is its
transform.  The expansion is nested, first in delta, then in eps around the point of evaluation, so that
poles which move with delta become poles of higher order.
"""
from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

from sympy import Add, Expr, Integer, Mul, S, binomial, factorial

from .laurent import Series, gamma_series
from .shortest import shortest_quotient

_Double = dict[tuple[int, int], Expr]  # (power of delta, power of eps) -> coefficient


class TiltedFactor(NamedTuple):
    """``Gamma(shift + slope*s + rate*delta)**power``; the slope may be 0."""

    shift: Expr
    slope: Expr
    rate: Expr
    power: int


@dataclass(frozen=True)
class Tilt:
    """``(d/d delta)**order`` at ``delta = 0`` of a product of tilted factors."""

    order: int
    factors: tuple[TiltedFactor, ...]

    def laurent(self, s0: Expr, rate: Expr, lowest: int, terms: int) -> Series:
        """Laurent series in eps at ``s0 + rate*eps``, from ``eps**lowest`` on."""
        k, top = self.order, lowest + terms - 1
        arguments = [(shift + slope * s0).expand() for shift, slope, _, _ in self.factors]
        singular = [a.is_Integer and bool(a.is_nonpositive) for a in arguments]
        poles = sum(s and f.power > 0 for s, f in zip(singular, self.factors, strict=True))
        # a moving pole costs one power of eps, and one more for each delta
        reach = top + (poles + k if poles else 0)
        ups: list[Expr] = []
        downs: list[Expr] = []
        product: _Double = {(0, 0): S.One}
        for argument, pole, factor in zip(arguments, singular, self.factors, strict=True):
            series = gamma_series(argument, S.One, factor.power, max(reach, 0) + k + 2)
            if not pole:
                (ups if factor.power > 0 else downs).append(argument)
                series = Series(series.valuation, series.coefficients)
            spread = _spread(series, factor.rate, factor.slope * rate, k, reach)
            product = _multiply(product, spread, k, reach)
        coefficients = tuple(
            factorial(k) * product.get((k, j), S.Zero).expand(log=False, func=False) for j in range(lowest, top + 1)
        )
        return Series(lowest, coefficients, shortest_quotient(ups, downs))


def _spread(series: Series, tilt: Expr, rate: Expr, k: int, reach: int) -> _Double:
    """Write a Laurent series in ``w = tilt*delta + rate*eps`` in powers of delta and eps."""
    result: dict[tuple[int, int], list[Expr]] = {}
    for n, c in enumerate(series.coefficients, start=series.valuation):
        if c is S.Zero:
            continue
        c = c * series.head
        for i in range(k + 1):
            j = n - i
            if n >= 0 and j < 0:
                break
            if j > reach or (rate is S.Zero and j != 0) or (tilt is S.Zero and i):
                continue
            weight = binomial(Integer(n), i) * tilt**i * (rate**j if j else S.One)
            result.setdefault((i, j), []).append(c * weight)
    return {key: Add(*column) for key, column in result.items()}


def _multiply(left: _Double, right: _Double, k: int, reach: int) -> _Double:
    result: dict[tuple[int, int], list[Expr]] = {}
    for (i, j), a in left.items():
        for (m, n), b in right.items():
            if i + m <= k and j + n <= reach:
                result.setdefault((i + m, j + n), []).append(Mul(a, b))
    return {key: Add(*column) for key, column in result.items()}
