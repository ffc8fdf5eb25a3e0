"""The power series behind a Gamma product: phi of the master theorem, and the ratio of neighbouring terms.

At the poles ``s = -(a + n)/A`` of a numerator Gamma of positive slope the residues give, with t = x**(1/A),

    f(x) = t**a * sum_n phi(n)*(-t)**n/n!,      phi(n) = G(s)/Gamma(a + A*s)/A  at  s = -(a + n)/A,

so that G(s) = A*Gamma(a + A*s)*phi(-(a + A*s)): Ramanujan's form for t.

Source: G. H. Hardy, Ramanujan: Twelve Lectures (1940), ch. XI; R. B. Paris and D. Kaminski, Asymptotics and
Mellin-Barnes Integrals (2001), section 2.2 (residues of Gamma products).
"""
from __future__ import annotations

from dataclasses import dataclass
from math import lcm

from sympy import Expr, Integer, Mul, Pow, Rational, S, Symbol, gamma, rf

from ..gamma import GammaProduct
from ..gamma.product import Factor

# A term ratio with more linear factors than this is not written out.
_MOST_FACTORS = 16


@dataclass(frozen=True)
class PowerSeries:
    """``x**head * sum_n phi(n)*(-x**step)**n/n!`` with ``c(n+period)/c(n)`` a rational function of n, or None.

    ``c(n)`` is the whole coefficient, ``phi(n)*(-1)**n/n!``.
    """

    head: Expr
    step: Rational
    phi: Expr
    ratio: Expr | None
    period: int


def power_series(product: GammaProduct, n: Symbol) -> list[PowerSeries]:
    """The series at 0 of the function with this transform, one for each unending ladder of simple poles.

    Parameters
    ----------
    product : GammaProduct
    n : Symbol

    Returns
    -------
    list of PowerSeries
        Empty where poles are known to coincide (logarithms), or where no ladder goes on for ever.

    Examples
    --------
    >>> from sympy import Symbol
    >>> from sympy_mellin_ext.gamma import GammaProduct
    >>> n = Symbol('n')
    >>> (series,) = power_series(GammaProduct.of(up=[(0, 1), (1, -1)], scale=3), n)  # 1/(1 + 3*x)
    >>> series.phi, series.ratio
    (3**n*gamma(n + 1), -3)
    """
    found: list[PowerSeries] = []
    ladders = {l.start: l for l in product.ladders(1)}
    if any(not isinstance(f.slope, Rational) for f in product.factors):
        return []
    for place, factor in enumerate(product.factors):
        a, A, e = factor
        if e < 0 or A < 0:
            continue
        ladder = next((l for l in ladders.values() if l.step == 1 / A and _counts((l.start + a / A) * -A)), None)
        if ladder is None or ladder[2] is not None:
            continue
        if any(product.order_at((ladder.start - j * ladder.step).expand()) > 1 for j in range(3)):
            return []
        rest = product.factors[:place] + product.factors[place + 1 :]
        found.append(_series(GammaProduct(product.constant, product.scale, rest), factor, n))
    return found


def _counts(number: Expr) -> bool:
    """Whether a rung of the Gamma's own ladder: a whole number of steps from its head."""
    number = number.expand()
    return bool(number.is_Integer and number >= 0)


def _series(rest: GammaProduct, factor: Factor, n: Symbol) -> PowerSeries:
    a, A, _ = factor
    pole = -(a + n) / A
    gammas = []
    for b, B, e in rest.factors:
        gammas.append(Pow(gamma((b + B * pole).expand()), Integer(e)))
    phi = Mul(rest.constant / A, Pow(rest.scale, (-pole).expand()), *gammas)
    ratio, period = _ratio(rest, factor, n)
    return PowerSeries((a / A).expand(), 1 / A, phi, ratio, period)


def _ratio(rest: GammaProduct, factor: Factor, n: Symbol) -> tuple[Expr | None, int]:
    """``c(n+m)/c(n)`` for the least m that makes it rational in n."""
    a, A, _ = factor
    moves = [-B / A for _, B, _ in rest.factors]
    m = lcm(*(int(k.q) for k in moves)) if moves else 1
    if m + sum(abs(k) * m for k in moves) > _MOST_FACTORS:
        return None, m
    parts: list[Expr] = [Pow(rest.scale, m / A), S.NegativeOne**m, 1 / rf(n + 1, m)]
    for (b, B, e), k in zip(rest.factors, moves, strict=True):
        argument, whole = (b - B * (a + n) / A).expand(), int(k * m)
        move = rf(argument, whole) if whole >= 0 else 1 / rf(argument + whole, -whole)
        parts.append(Pow(move, Integer(e)))
    return Mul(*parts), m
