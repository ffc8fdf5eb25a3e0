"""Checks of the arguments of the public calls; every error names the argument and what is accepted."""
from __future__ import annotations

from typing import Any, TypeAlias

from sympy import Expr, Symbol, sympify
from sympy.core.relational import Relational
from sympy.logic.boolalg import Boolean, BooleanAtom

# a relation or several; SymPy ships no annotations that could say more
Given: TypeAlias = Any


def relations(given: Given) -> tuple[Boolean, ...]:
    """The relations of a ``given=`` argument as a tuple; TypeError for anything else."""
    items = (given,) if isinstance(given, (Boolean, bool)) else tuple(given)
    for item in items:
        if not isinstance(item, (Relational, Boolean, BooleanAtom, bool)):
            raise TypeError(f"given takes a relation such as a > b or a list of them, not {item!r}")
    return tuple(sympify(item) for item in items)


def expression(f: Any, name: str) -> Expr:
    """``f`` as an expression; TypeError that names the argument."""
    if isinstance(f, str):
        raise TypeError(f"{name} must be a SymPy expression, not the string {f!r}")
    f = sympify(f)
    if not isinstance(f, Expr):
        raise TypeError(f"{name} must be a SymPy expression, not {type(f).__name__}")
    return f


def symbol(s: Any, name: str) -> Symbol:
    """``s`` if it is a Symbol; TypeError that names the argument otherwise."""
    if not isinstance(s, Symbol):
        raise TypeError(f"{name} must be a Symbol, not {s!r}")
    return s
