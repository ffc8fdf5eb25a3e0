"""Residue series of a signature over its left poles.

Every class of left parameters that differ by integers gives finitely many residues by themselves and
one hypergeometric tail (DLMF 16.17.2); double and triple poles are allowed among the first ones.
"""

from __future__ import annotations

from typing import Any, NamedTuple

from sympy import Add, Expr, S, Symbol, factorial, gamma, ilcm, log, pi, polygamma

from .signature import Signature, as_int, power

MAX_HEAD = 12


class Tail(NamedTuple):
    """``coefficient * w**exponent * pFq(upper; lower; sign*w)``."""

    coefficient: Expr
    exponent: Expr
    upper: tuple[Expr, ...]
    lower: tuple[Expr, ...]
    sign: int


class ResidueSeries(NamedTuple):
    head: Expr
    tails: tuple[Tail, ...]


def _expansion(x: Any, order: int) -> tuple[int, Any, Any, Any]:
    """Gamma(x+e) = leading*e**(-pole)*exp(g1*e + g2*e**2/2 + ...); the logs only up to `order`."""
    n = as_int(x)
    if n is not None and n <= 0:
        m = -n
        g1 = polygamma(0, m + 1) if order > 1 else S.Zero
        g2 = pi**2 / 3 - polygamma(1, m + 1) if order > 2 else S.Zero
        return 1, S.NegativeOne**m / factorial(m), g1, g2
    g1 = polygamma(0, x) if order > 1 else S.Zero
    g2 = polygamma(1, x) if order > 2 else S.Zero
    return 0, gamma(x), g1, g2


def residue_at(sig: Signature, point: Any, order: int, w: Symbol) -> Any:
    """Residue of ``G(u)*w**(-u)`` at u = point, a pole of the given order (at most 3)."""
    lead: Any = S.One
    poles, l1, l2 = 0, (-log(w) if order > 1 else S.Zero), S.Zero
    for params, side, e in zip(sig, (1, -1, 1, -1), (1, 1, -1, -1), strict=True):
        for a in params:
            pole, g, g1, g2 = _expansion(a + side * point, order)
            poles += e * pole
            lead *= (g * side**pole) ** e
            l1 += e * side * g1
            l2 += e * g2
    if poles != order:
        raise ValueError("the order of the pole is not the one stated")
    value = (S.One, l1, (l1**2 + l2) / 2)[order - 1]
    return lead * value * power(w, -point)


def left_series(sig: Signature, w: Symbol) -> ResidueSeries | None:
    """The sum of the residues at the left poles; None for infinitely many double poles.

    Whether it converges (delta >= 0, and inside the unit circle for delta = 0) is the caller's question.
    """
    if any((n := as_int(a + b)) is not None and n <= 0 for a in sig.left for b in sig.right):
        return None  # a left and a right pole coincide: no contour
    head: Any = S.Zero
    tails: list[Tail] = []
    waiting = list(sig.left)
    while waiting:
        a0 = waiting[0]
        offsets = []
        rest = []
        for a in waiting:
            n = as_int(a - a0)
            if n is not None:
                offsets.append(n)
            elif _may_be_integer(a - a0):
                return None  # a double pole at a place that depends on a symbol
            else:
                rest.append(a)
        waiting = rest
        base = a0 + min(offsets)
        starts = [n - min(offsets) for n in offsets]
        ends = [n for c in sig.left_den if (n := as_int(c - base)) is not None]
        gone = [-n for d in sig.right_den if (n := as_int(d + base)) is not None and n <= 0]
        first = max([*starts, *ends, *(n + 1 for n in gone), 0])
        rank = len(starts) - len(ends)
        if first > MAX_HEAD or rank > 1:
            return None
        for m in range(first):
            order = sum(n <= m for n in starts) - sum(n <= m for n in ends) - sum(m <= n for n in gone)
            if order > 3:
                return None
            if order > 0:
                head += residue_at(sig, -base - m, order, w)
        if rank == 1:
            tails.append(_tail(sig, base + first, w))
    return ResidueSeries(head, tuple(tails))


def _may_be_integer(difference: Expr) -> bool:
    """Whether it is an integer for some values of its symbols, all of which are integers.

    Other symbols make it one at isolated values only, where the sum of the residues has a limit.
    """
    if difference.is_integer or difference.is_Rational:
        return bool(difference.is_integer)
    symbols = difference.free_symbols
    if not symbols or not all(v.is_integer for v in symbols):
        return False
    constant, linear = difference.as_coeff_Add()
    coefficients = [term.as_coeff_Mul() for term in Add.make_args(linear)]
    if not constant.is_Rational or not all(c.is_Rational and v.is_Symbol for c, v in coefficients):
        return True
    return bool((constant * ilcm(1, *(c.q for c, _ in coefficients))).is_integer)


def _tail(sig: Signature, a: Any, w: Symbol) -> Tail:
    """All the simple poles u = -a, -a-1, ..."""
    coefficient = residue_at(sig, -a, 1, w) / power(w, a)
    upper = [a + b for b in sig.right] + [1 - c + a for c in sig.left_den]
    lower = [1 - c + a for c in sig.left] + [d + a for d in sig.right_den]
    ones = [b for b in lower if as_int(b) == 1]
    if ones:
        lower.remove(ones[0])
    else:
        upper.append(S.One)
    sign = -1 if (len(sig.left) + len(sig.left_den)) % 2 else 1
    return Tail(coefficient, a, tuple(upper), tuple(lower), sign)
