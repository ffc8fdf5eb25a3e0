"""The hint ``certify=True``: an answer is given only where quadrature confirms it."""
from __future__ import annotations

from typing import Any

from sympy import Expr, Integral, Or, Piecewise, S, Symbol, Tuple, oo
from sympy.logic.boolalg import Boolean

from .quadrature import quad
from .record import verify
from .sampling import sample

_DIGITS = 10


def holds_up(result: Any, f: Expr, limits: tuple[Any, ...], given: tuple[Any, ...] = ()) -> bool:
    """Whether quadrature confirms a closed form that carries its own conditions.

    Parameters
    ==========
    result : Expr, or pair (Expr, Boolean)
        As SymPy's ``integrate`` returns it: a value, a Piecewise that may end in the Integral, or value and condition.
    f, limits, given :
        The integral, and what its parameters are known to satisfy.

    Examples
    ========
    >>> from sympy import exp, oo
    >>> from sympy.abc import x
    >>> from sympy_mellin_ext.verify.certify import holds_up
    >>> holds_up(2, x**2*exp(-x), ((x, 0, oo),)), holds_up(3, x**2*exp(-x), ((x, 0, oo),))
    (True, False)
    """
    value, condition = result if isinstance(result, (tuple, Tuple)) and len(result) == 2 else (result, S.true)
    value = S(value)
    ranges = _ranges(limits)
    if ranges is None or not isinstance(value, Expr) or not isinstance(f, Expr):
        return False
    if isinstance(value, Piecewise):
        claimed = [(v, c) for v, c in value.args if not v.has(Integral)]
        if not claimed:
            return False
        if len(claimed) < len(value.args):
            condition = Or(*[c for _, c in claimed])
    elif value.has(Integral):
        return False
    if value in (oo, -oo):
        return _diverges(f, ranges, condition, given)
    one = len(ranges) == 1
    return verify(f, ranges[0] if one else ranges, value, condition, _DIGITS, given=given).ok is True


def _ranges(limits: tuple[Any, ...]) -> list[tuple[Any, ...]] | None:
    """The limits of a definite integral, or None."""
    if not limits or not all(isinstance(v, (tuple, list, Tuple)) and len(v) == 3 for v in limits):
        return None
    return [tuple(v) for v in limits]


def _diverges(f: Expr, ranges: list[tuple[Any, ...]], condition: Boolean, given: tuple[Any, ...]) -> bool:
    """Whether quadrature finds an integral over one variable divergent at every point that was tried."""
    if len(ranges) != 1:
        return False
    symbols: set[Symbol] = f.free_symbols | S(ranges[0][1]).free_symbols | S(ranges[0][2]).free_symbols
    points = sample(symbols - {ranges[0][0]}, condition, given, count=3)
    found = [quad(f, ranges[0], point, _DIGITS) for point in points]
    return bool(found) and all(reliable and value == oo for value, _, reliable, _ in found)


__all__ = ["holds_up"]
