"""A rewriting rule: every definite integral inside an expression that we can do, done."""
from __future__ import annotations

from typing import Any

from sympy import Basic, Integral, Piecewise

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
    if not isinstance(expr, Basic) or not expr.has(Integral):
        return expr
    if isinstance(expr, Piecewise) and _is_done(expr):
        return expr
    args = [evaluate_integrals(arg) for arg in expr.args]
    if any(new is not old for new, old in zip(args, expr.args, strict=True)):
        expr = expr.func(*args)
    if type(expr) is not Integral:
        return expr
    outcome = try_strategies(expr.function, expr.limits, (), {})
    return outcome.answer if outcome.found else expr


def _is_done(expr: Piecewise) -> bool:
    """Whether this is what the integral in its last branch becomes, which holds it again."""
    last = expr.args[-1][0]
    if type(last) is not Integral or expr.args[-1][1] != True:  # noqa: E712 - SymPy Boolean
        return False
    for nested in (False, True):
        if try_strategies(last.function, last.limits, (), {}, nested).answer == expr:
            return True
    return False
