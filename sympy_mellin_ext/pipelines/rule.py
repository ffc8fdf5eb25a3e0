"""A rewriting rule: every definite integral inside an expression that we can do, done."""
from __future__ import annotations

from typing import Any

from sympy import Basic, Integral, Piecewise
from sympy.strategies.rl import rebuild

from ..integrate import try_strategies


def evaluate_integrals(expr: Any) -> Any:
    """Replace the definite integrals inside an expression by their closed forms, where we know them.

    A plain function expr -> expr for the combinators of `sympy.strategies`, `Basic.replace` and
    `bottom_up`.  It is idempotent, asks SymPy for nothing, and returns the very same object where there is
    nothing to do.

    Parameters
    ----------
    expr : Basic
        Anything else is returned as it is.

    Returns
    -------
    Basic
        A closed form that holds in part of the parameter space only stands in a Piecewise that ends in the
        integral itself.

    Examples
    --------
    >>> from sympy import Eq, Function, Integral, exp, oo, symbols
    >>> from sympy_mellin_ext import evaluate_integrals
    >>> x, a, y = symbols('x a y', positive=True)
    >>> f = Function('f')
    >>> evaluate_integrals(Eq(f(y), y*Integral(exp(-a*x**2), (x, 0, oo)) + Integral(f(x), (x, 0, y))))
    Eq(f(y), Integral(f(x), (x, 0, y)) + sqrt(pi)*y/(2*sqrt(a)))
    """
    return _rewrite(expr, frozenset()) if isinstance(expr, Basic) else expr


def _rewrite(expr: Basic, excluded: frozenset[Basic]) -> Basic:
    """Rewrite where the ``excluded`` conditions do not hold: those of earlier branches of a Piecewise.

    The integral in the last branch of our own answer is left alone in this way, and so is what powers and
    products make of that answer.
    """
    if not expr.has(Integral):
        return expr
    if isinstance(expr, Piecewise):
        return _branches(expr, excluded)
    args = [_rewrite(arg, excluded) for arg in expr.args]
    if any(new is not old for new, old in zip(args, expr.args, strict=True)):
        expr = expr.func(*args)
    if type(expr) is not Integral:
        return expr
    # the traversals of sympy.strategies put trees together without SymPy's constructors
    f, *limits = (rebuild(arg) for arg in expr.args)
    outcome = try_strategies(f, tuple(limits), (), {})
    return expr if outcome.closed is None or outcome.closed.condition in excluded else outcome.answer


def _branches(expr: Piecewise, excluded: frozenset[Basic]) -> Basic:
    branches = []
    changed = False
    for value, condition in expr.args:
        if condition in excluded:  # a traversal bottom-up has put our answer into itself
            changed = True
            continue
        new = _rewrite(value, excluded)
        changed = changed or new is not value
        branches.append((new, condition))
        excluded |= {condition}
    if not branches or not changed:
        return expr
    value, condition = branches[0]
    return value if condition == True else Piecewise(*branches)  # noqa: E712 - SymPy Boolean
