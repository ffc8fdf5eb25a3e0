"""Formulas found for a positive parameter, continued to the real line or into a sector.

A formula made of principal branches is one holomorphic function in a sector if no cut is met there.  That is
shown by intervals: with arg(z) in [0, t], every base of a power and every argument of a function with a cut
must have its own argument in an interval that the cut does not touch.
"""
from __future__ import annotations

from sympy import (
    Add,
    Chi,
    Ci,
    Ei,
    Expr,
    I,
    Mul,
    Piecewise,
    Pow,
    S,
    Shi,
    Si,
    Symbol,
    acos,
    acosh,
    asin,
    asinh,
    atan,
    atanh,
    besseli,
    besselj,
    besselk,
    bessely,
    cos,
    cosh,
    elliptic_e,
    elliptic_k,
    erf,
    erfc,
    erfi,
    exp,
    expint,
    fraction,
    fresnelc,
    fresnels,
    hyper,
    log,
    lowergamma,
    meijerg,
    pi,
    polylog,
    sin,
    sinh,
    together,
    uppergamma,
)

# Open interval of arg/pi; None: not known.
Interval = tuple[Expr, Expr] | None

_ENTIRE = (exp, erf, erfc, erfi, sin, cos, sinh, cosh, Si, Shi, fresnels, fresnelc)
_CUT_ON_NEGATIVE_AXIS = (log, Ei, Ci, Chi, expint, uppergamma, lowergamma, besselj, besseli, besselk, bessely, meijerg)
_CUT_ON_IMAGINARY_AXIS = (asinh, atan)
_CUT_ON_REAL_AXIS = (elliptic_k, elliptic_e, polylog, acosh, acos, asin, atanh)


class _Cut(Exception):
    """A branch cut may be met."""


def holomorphic(expr: Expr, z: Symbol, opening: Expr) -> bool:
    """Whether a formula for z > 0 holds for ``abs(arg(z)) < pi*opening`` with principal branches.

    It is enough to look at ``0 < arg(z) < pi*opening``; below the axis values are conjugate.

    Examples
    --------
    >>> from sympy import S, sqrt, symbols
    >>> from sympy_mellin_ext.strategies.continuation import holomorphic
    >>> b, z = symbols('b z', positive=True)
    >>> holomorphic(1/sqrt(z**2 + b**2), z, S.Half), holomorphic(1/sqrt(z**4 + b**2), z, S.Half)
    (True, False)
    """
    try:
        _argument(expr, z, opening)
    except _Cut:
        return False
    return True


def _argument(expr: Expr, z: Symbol, t: Expr) -> Interval:
    if not expr.has(z):
        return (S.Zero, S.Zero) if expr.is_positive else (S.One, S.One) if expr.is_negative else None
    if expr == z:
        return S.Zero, t
    if expr.is_Mul:
        return _times([_argument(factor, z, t) for factor in expr.args])
    if expr.is_Add:
        return _plus([_argument(a, z, t) for a in expr.args])
    if expr.is_Pow:
        base = _argument(expr.base, z, t)
        if expr.exp.has(z):
            raise _Cut
        if not expr.exp.is_Integer:
            _off_negative_axis(base)
        if base is None or not expr.exp.is_Rational:
            return None
        ends = (base[0] * expr.exp, base[1] * expr.exp)
        return min(ends), max(ends)
    _function(expr, z, t)
    return None


def _times(factors: list[Interval]) -> Interval:
    low, high = S.Zero, S.Zero
    for found in factors:
        if found is None:
            return None
        low, high = low + found[0], high + found[1]
    turn = 2 if low >= 1 else -2 if high <= -1 else 0
    return low - turn, high - turn


def _plus(terms: list[Interval]) -> Interval:
    """Terms in one half plane have their sum in it."""
    known = [p for p in terms if p is not None]
    if len(known) < len(terms):
        return None
    moving = [p for p in known if p[0] != p[1]]
    if any(p[0] < 0 for p in moving):
        # a negative number has the argument -pi as well
        known = [(-p[0], -p[1]) if p == (1, 1) else p for p in known]
    low, high = min(p[0] for p in known), max(p[1] for p in known)
    return (low, high) if high - low <= 1 else None


def _off_negative_axis(interval: Interval) -> None:
    if interval is None or interval[0] < -1 or interval[1] > 1:
        raise _Cut


def _off_real_axis(interval: Interval) -> None:
    if interval is None or not ((interval[0] >= 0 and interval[1] <= 1) or (interval[0] >= -1 and interval[1] <= 0)):
        raise _Cut


def _function(expr: Expr, z: Symbol, t: Expr) -> None:
    if isinstance(expr, hyper):
        last, orders = expr.argument, (*expr.ap, *expr.bq)
    elif isinstance(expr, meijerg):
        last, orders = expr.argument, (*expr.an, *expr.aother, *expr.bm, *expr.bother)
    else:
        last, orders = expr.args[-1], expr.args[:-1]
    if any(a.has(z) for a in orders) or isinstance(expr, Piecewise):
        raise _Cut
    inside = _argument(last, z, t)
    if isinstance(expr, _ENTIRE):
        return
    if isinstance(expr, hyper):
        if len(expr.ap) == len(expr.bq) + 1:
            _off_real_axis(inside)
    elif isinstance(expr, _CUT_ON_NEGATIVE_AXIS):
        _off_negative_axis(inside)
    elif isinstance(expr, _CUT_ON_REAL_AXIS):
        _off_real_axis(inside)
    elif not (
        isinstance(expr, _CUT_ON_IMAGINARY_AXIS)
        and inside is not None
        and inside[0] >= -S.Half
        and inside[1] <= S.Half
    ):
        raise _Cut


def single_valued(expr: Expr, z: Symbol) -> bool:
    """Whether a formula for z > 0 is one holomorphic function near the whole real line."""
    if not expr.has(z) or expr == z:
        return True
    if expr.is_Pow and not expr.base.is_Number:
        whole = expr.exp.is_Integer and (expr.exp.is_positive or expr.base == z)
        return bool(whole or not expr.base.has(z)) and single_valued(expr.base, z) and not expr.exp.has(z)
    if isinstance(expr, hyper):
        entire = len(expr.ap) <= len(expr.bq)
        return entire and not any(p.has(z) for p in (*expr.ap, *expr.bq)) and single_valued(expr.argument, z)
    if isinstance(expr, besselj | besseli) and not expr.args[0].is_Integer:
        return False
    if not (expr.is_Add or expr.is_Mul or expr.is_Pow or isinstance(expr, (*_ENTIRE, besselj, besseli))):
        return False
    return all(single_valued(a, z) for a in expr.args)


def conjugate_sum(expr: Expr, z: Symbol, real: Expr, imaginary: Expr, phase: Expr) -> Expr:
    """``sum over +- of exp(-+I*phase)/2 * expr(real +- I*imaginary)``, made real where it is rational."""
    parts = []
    for turn in (1, -1):
        parts.append(exp(-turn * I * phase) / 2 * expr.xreplace({z: real + turn * I * imaginary}))
    total = Add(*parts)
    if expr.is_rational_function(z) and phase in (0, -pi / 2):
        top, bottom = fraction(together(total))
        return Mul(top.expand(), Pow(bottom.expand(), -1))
    return total


__all__ = ["conjugate_sum", "holomorphic", "single_valued"]
