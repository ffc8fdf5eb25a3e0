"""SymPy's own integrate, called for an integral that we have refused, and the note that says so.

SymPy's integrator calls itself for the same integral again (with a variable of better assumptions), and
under :func:`extend_sympy` every such call comes back to us.  The note lets the hook recognise the
integral, so that no integral is tried twice.  It lives in a context variable: one for each thread and task.
"""
from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Any

from sympy import Add, Dummy, Expr, Integral, Mul, Pow, Symbol, cos, cosh, degree, exp, sin, sinh

Question = tuple[Any, tuple[Any, ...]]

_refused: ContextVar[Question | None] = ContextVar("refused", default=None)


@contextmanager
def refused(f: Any, limits: tuple[Any, ...]) -> Iterator[None]:
    """Within the block, the integral of ``f`` over ``limits`` counts as tried."""
    token = _refused.set((f, limits))
    try:
        yield
    finally:
        _refused.reset(token)


def is_refused(integral: Integral) -> bool:
    """Whether this is the integral that was tried just now, up to the names of its variables."""
    question = _refused.get()
    if question is None:
        return False
    f, limits = question
    if len(limits) != len(integral.limits):
        return False
    if integral.function == f and integral.limits == limits:
        return True
    names = {
        new[0]: old[0]
        for new, old in zip(integral.limits, limits, strict=True)
        if type(new[0]) is Dummy and new[0] != old[0]
    }
    return bool(names) and integral.xreplace(names).args == (f, *limits)


def has_plain_antiderivative(f: Expr, x: Symbol) -> bool:
    """Whether SymPy finds an antiderivative at sight: powers, exponentials, normal densities, waves.

    It holds for ends of any sign and order then, as a change of variable to (0, 1) may not.
    """
    if type(f) is Add:
        return all(has_plain_antiderivative(term, x) for term in f.args)
    roots = 0
    for factor in f.args if type(f) is Mul else (f,):
        if not factor.has_free(x) or factor == x:
            continue
        if type(factor) is Pow and not factor.exp.has_free(x):
            if not factor.base.is_polynomial(x):
                return False
            if not (factor.exp.is_Integer and factor.exp > 0):
                roots += 1
        elif type(factor) in (exp, sin, cos, sinh, cosh):
            highest = 2 if type(factor) is exp else 1
            if not (factor.args[0].is_polynomial(x) and degree(factor.args[0], x) <= highest):
                return False
        elif not factor.is_polynomial(x):
            return False
    return roots <= 1
