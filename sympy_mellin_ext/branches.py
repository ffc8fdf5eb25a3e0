"""Piecewise answers, built without asking SymPy again what the region has already decided."""
from __future__ import annotations

from collections.abc import Sequence

from sympy import And, Expr, Piecewise, S
from sympy.core.relational import Ge, Le, Ne, Relational
from sympy.functions.elementary.piecewise import ExprCondPair
from sympy.logic.boolalg import Boolean


def piecewise(*branches: tuple[Expr, Boolean]) -> Expr:
    """``Piecewise(*branches)`` for conditions that are reduced already.

    SymPy evaluates every inequality anew and compares the conditions with one another, which takes longer than
    many an integral.  Where the conditions are in its normal form and cannot overlap in the ways it looks for,
    the outcome is known beforehand; otherwise SymPy does it.

    Examples
    --------
    >>> from sympy import S, symbols
    >>> from sympy_mellin_ext.branches import piecewise
    >>> a, s = symbols('a s', real=True)
    >>> piecewise((a, s > 0), (1/a, S.true))
    Piecewise((a, s > 0), (1/a, True))
    """
    if not _is_reduced(branches):
        return Piecewise(*branches)
    return Piecewise(*(ExprCondPair(e, c) for e, c in branches), evaluate=False)


def _is_reduced(branches: Sequence[tuple[Expr, Boolean]]) -> bool:
    if len(branches) < 2 or branches[-1][1] is not S.true:
        return False
    seen: list[Boolean] = []
    for i, (value, condition) in enumerate(branches):
        if isinstance(value, Piecewise) or (i and value == branches[i - 1][0]):
            return False
        if condition is S.true:
            return i == len(branches) - 1
        parts = condition.args if isinstance(condition, And) else (condition,)
        if any(not isinstance(p, Relational) or not _is_normal(p) for p in parts):
            return False
        if len(branches) > 2:
            # SymPy drops what an earlier branch excludes: an equation before its negation, a weak inequality
            if any(isinstance(p, (Ne, Ge, Le)) for p in parts) or condition in seen:
                return False
            if any(p in seen for p in parts):
                return False
            seen.append(condition)
    return True


def _is_normal(relation: Relational) -> bool:
    """Whether SymPy would leave the two sides as they are."""
    left, right = relation.args
    if left.is_number or not isinstance(left, Expr) or not isinstance(right, Expr):
        return False
    if (left.is_Add or left.is_Mul) and (left.args[0].is_Rational or left.could_extract_minus_sign()):
        return False
    return bool(right.is_Rational) or relation.canonical == relation


__all__ = ["piecewise"]
