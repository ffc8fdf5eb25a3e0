"""Whether an expression is one analytic function on an interval: no branch is crossed.

Source: common practice (a continuous base without zeros keeps its sign; zeros by norms and Sturm's theorem).
"""

from __future__ import annotations

from sympy import Expr, Poly, S, Symbol
from sympy.polys.rings import PolyElement

from .frobenius import NoSeries, pieces
from .growth import Sign
from .tower import Tower


def is_analytic(tower: Tower, t: Symbol, sign: Sign, end: Expr) -> bool:
    """Whether every base of a power or argument of a logarithm stays positive for 0 < x < end."""
    for expr, element in tower.positive:
        if expr.is_positive:
            continue
        norm = tower.norm(element)
        if not norm or not all(_no_root(tower, p, sign, end) for p in (norm.numer, norm.denom)):
            return False
        try:
            ((_, series),) = pieces(expr, t, 4).items()
        except (NoSeries, ValueError):
            return False
        head = next((c for c in series if c is not S.Zero), S.Zero)
        if sign(head) != 1:
            return False
    return True


def _no_root(tower: Tower, polynomial: PolyElement, sign: Sign, end: Expr) -> bool:
    """Whether a polynomial in ``x`` and the parameters has no zero for 0 < x < end."""
    by_power: dict[int, PolyElement] = {}
    ring = polynomial.ring
    for exponents, c in polynomial.terms():
        rest = ring({(0, *exponents[1:]): c})
        by_power[exponents[0]] = by_power.get(exponents[0], ring.zero) + rest
    coefficients = {p: tower.to_expr(tower.K(c)) for p, c in sorted(by_power.items())}
    signs = {sign(c) for c in coefficients.values()}
    if signs in ({1}, {-1}):
        return True
    low, high = min(coefficients), max(coefficients)
    if all(c.is_Rational for c in coefficients.values()):
        x = Symbol("x")
        reduced = Poly({p - low: c for p, c in coefficients.items()}, x)
        if end is S.Infinity:
            return reduced.count_roots(0, None) == 0
        while reduced.eval(end) == 0:
            reduced = reduced.quo(Poly(x - end, x))
        return reduced.count_roots(0, end) == 0
    if high - low == 2:
        a, c = coefficients[high], coefficients[low]
        return sign((coefficients.get(low + 1, S.Zero) ** 2 - 4 * a * c).expand()) == -1
    return False
