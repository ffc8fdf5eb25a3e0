"""Pieces: Piecewise, Heaviside, Abs, sign, Min and Max split the range at their break points."""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from functools import cmp_to_key

from sympy import (
    Abs,
    DiracDelta,
    Expr,
    Heaviside,
    Max,
    Min,
    Piecewise,
    S,
    Symbol,
    log,
    oo,
    preorder_traversal,
    sign,
)
from sympy.core.relational import Ge, Gt, Le, Lt, Relational

from ...matching.monomials import monomials
from ...region import Facts

BROKEN = (Piecewise, Heaviside, Abs, sign, Min, Max)
_MOST_BREAKS = 12


class Unsplit(Exception):
    """A break point that cannot be placed."""


def differences(f: Expr, x: Symbol) -> Iterator[Expr]:
    """Expressions in x whose change of sign breaks the integrand."""
    for node in preorder_traversal(f):
        kind = type(node)
        if kind in (Heaviside, Abs, sign):
            if node.args[0].has_free(x):
                yield node.args[0]
        elif kind in (Min, Max):
            args = node.args
            for i, a in enumerate(args):
                for b in args[i + 1 :]:
                    if (a - b).has_free(x):
                        yield a - b
        elif kind is Piecewise:
            for _, condition in node.args:
                for relation in sorted(condition.atoms(Relational), key=str):
                    if relation.has_free(x):
                        if not isinstance(relation, (Gt, Ge, Lt, Le)):
                            raise Unsplit
                        yield relation.lhs - relation.rhs
        elif kind is DiracDelta:
            raise Unsplit


def roots(g: Expr, x: Symbol, lower: Expr, facts: Facts) -> list[Expr]:
    """Where ``g`` changes sign; raises Unsplit where that is not plain."""
    if type(g) is log and not lower.is_negative:
        return roots(g.args[0] - 1, x, lower, facts)
    parts = monomials(g, x) if not lower.is_negative else None
    if parts is not None:
        if len(parts) == 1:
            return [S.Zero]
        if len(parts) == 2:
            (c0, p0), (c1, p1) = parts
            s0, s1, turn = facts.sign(c0), facts.sign(c1), facts.sign(p1 - p0)
            if s0 is not None and s1 is not None and turn:
                if s0 * s1 >= 0:
                    return []
                return [(-c0 / c1) ** (1 / (p1 - p0))]
    slope = g.diff(x)
    if slope.has_free(x) or slope.is_zero:
        raise Unsplit
    return [(x - g / slope).expand()]


def broken(f: Expr, x: Symbol, lower: Expr, upper: Expr, facts: Facts) -> list[tuple[Expr, Expr, Expr]] | None:
    """Parts (integrand, lower, upper) without broken nodes, or None where the order is not known."""
    try:
        gaps = list(dict.fromkeys(differences(f, x)))
        points = list(dict.fromkeys(p for g in gaps for p in roots(g, x, lower, facts)))
        inside = [p for p in points if _order(p, lower, facts) > 0 and _order(p, upper, facts) < 0]
        inside.sort(key=cmp_to_key(lambda p, q: _order(p, q, facts)))
        if len(inside) > _MOST_BREAKS:
            return None
        edges = [lower, *inside, upper]
        return [(_plain(f, x, a, b, facts), a, b) for a, b in itertools.pairwise(edges) if _order(a, b, facts) != 0]
    except Unsplit:
        return None


def _order(p: Expr, q: Expr, facts: Facts) -> int:
    if p == q:
        return 0
    if q is oo or p is -oo:
        return -1
    if q is -oo or p is oo:
        return 1
    known = facts.sign((p - q).expand())
    if known is None:
        raise Unsplit
    return known


def _sign(g: Expr, x: Symbol, a: Expr, b: Expr, facts: Facts) -> int:
    """The sign of ``g`` on (a, b), where it does not change: at a point inside, or by its only root."""
    points = roots(g, x, a, facts)
    if b is oo and a is -oo:
        middle = S.Zero
    elif b is oo:
        middle = a + 1
    elif a is -oo:
        middle = b - 1
    else:
        middle = (a + b) / 2
    known = facts.sign(g.subs(x, middle).expand())
    if known in (1, -1):
        return known
    if len(points) == 1:
        slope = facts.sign(g.subs(x, points[0] + 1)) if b is oo or _order(points[0], b, facts) < 0 else None
        if slope is None:
            slope_left = facts.sign(g.diff(x))
            if slope_left is None or _order(points[0], a, facts) <= 0:
                raise Unsplit
            return -slope_left
        if _order(points[0], a, facts) <= 0:
            return slope
        return -slope
    raise Unsplit


def _plain(f: Expr, x: Symbol, a: Expr, b: Expr, facts: Facts) -> Expr:
    """``f`` on (a, b) without broken nodes."""
    if not f.has(*BROKEN):
        return f
    args = [_plain(arg, x, a, b, facts) if isinstance(arg, Expr) else arg for arg in f.args]
    kind = type(f)
    if kind in (Heaviside, Abs, sign) and args[0].has_free(x):
        s = _sign(args[0], x, a, b, facts)
        if kind is Abs:
            return s * args[0]
        return S.One * s if kind is sign else (S.One if s == 1 else S.Zero)
    if kind in (Min, Max) and f.has_free(x):
        best = args[0]
        for other in args[1:]:
            gap = other - best
            turn = _sign(gap, x, a, b, facts) if gap.has_free(x) else facts.sign(gap)
            if turn is None:
                raise Unsplit
            if (turn > 0) == (kind is Max):
                best = other
        return best
    if kind is Piecewise:
        for value, condition in f.args:
            table = {}
            for relation in sorted(condition.atoms(Relational), key=str):
                if relation.has_free(x):
                    above = _sign(relation.lhs - relation.rhs, x, a, b, facts) == 1
                    table[relation] = S.true if above == isinstance(relation, (Gt, Ge)) else S.false
            decided = condition.xreplace(table) if table else condition
            if decided is S.true or decided == True:  # noqa: E712 - SymPy Boolean
                return _plain(value, x, a, b, facts)
            if decided is not S.false and decided != False:  # noqa: E712
                raise Unsplit
        raise Unsplit
    return f.func(*args)
