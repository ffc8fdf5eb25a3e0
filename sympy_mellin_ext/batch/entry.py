"""One integral of a list, and the key by which a journal knows it again."""
from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from sympy import Expr, Integral, Symbol, Tuple, srepr
from sympy.logic.boolalg import Boolean

from .names import ASSUMPTIONS

DIGITS = 12
Limits = tuple[tuple[Symbol, Expr, Expr], ...]


@dataclass(frozen=True)
class Entry:
    """One integral of a list.

    Attributes
    ----------
    name : str
        Unique in its list.
    integrand : Expr
    limits : tuple of (variable, lower, upper)
        Innermost first.
    given : tuple of Boolean
        What the parameters are known to satisfy.
    expected : Expr or None
        A formula to be checked against ours.
    sweep : tuple of dict
        Parameter values at which numbers are wanted.
    digits : int
        Digits of the numbers and of the check.
    note : str
    """

    name: str
    integrand: Expr
    limits: Limits
    given: tuple[Boolean, ...] = ()
    expected: Expr | None = None
    sweep: tuple[dict[Symbol, Expr], ...] = ()
    digits: int = DIGITS
    note: str = ""

    @cached_property
    def key(self) -> str:
        """Hash of what is asked; the name and the note are no part of it."""
        content = [
            srepr(self.integrand),
            [srepr(Tuple(*limit)) for limit in self.limits],
            [srepr(g) for g in self.given],
            None if self.expected is None else srepr(self.expected),
            [sorted((str(k), srepr(v)) for k, v in point.items()) for point in self.sweep],
            self.digits,
        ]
        return hashlib.sha256(json.dumps(content).encode()).hexdigest()[:32]

    @property
    def parameters(self) -> tuple[Symbol, ...]:
        """Free symbols of the integral, by name."""
        return tuple(sorted(Integral(self.integrand, *self.limits).free_symbols, key=str))

    def described(self) -> dict[str, Any]:
        """The question as a journal keeps it."""
        result: dict[str, Any] = {
            "integrand": str(self.integrand),
            "limits": [[str(part) for part in limit] for limit in self.limits],
            "assume": {s.name: word(s) for s in self.parameters},
        }
        if self.given:
            result["given"] = [str(g) for g in self.given]
        if self.note:
            result["note"] = self.note
        return result


def word(symbol: Symbol) -> str:
    """The word for a symbol's assumptions; a list of them where there is none."""
    stated = symbol.assumptions0
    for kind, assumptions in ASSUMPTIONS.items():
        if Symbol(symbol.name, **assumptions).assumptions0 == stated:
            return kind
    return ", ".join(name for name, value in sorted(stated.items()) if value)


def as_entry(problem: Any, number: int) -> Entry:
    """An entry from what `evaluate_many` accepts: an entry, a table of the schema, an Integral, (f, limits...).

    Raises
    ------
    TypeError, ValueError
        For anything else; the message gives the number of the problem in its list.
    """
    if isinstance(problem, Entry):
        return problem
    if isinstance(problem, Mapping):
        from .reader import entry_from_table

        return entry_from_table({"name": str(number), **problem})
    if isinstance(problem, Integral):
        problem = (problem.function, *problem.limits)
    if not isinstance(problem, (tuple, list)) or len(problem) < 2 or not isinstance(problem[0], Expr):
        raise TypeError(f"problem {number}: an Entry, a table, an Integral or (integrand, (x, lower, upper)) is "
                        f"expected, not {str(problem)[:60]!r}")  # fmt: skip
    limits = []
    for limit in problem[1:]:
        if not isinstance(limit, (tuple, list, Tuple)) or len(limit) != 3 or not isinstance(limit[0], Symbol):
            raise ValueError(f"problem {number}: limits are tuples (x, lower, upper), not {limit!r}")
        limits.append(tuple(Tuple(*limit)))
    return Entry(str(number), problem[0], tuple(limits))
