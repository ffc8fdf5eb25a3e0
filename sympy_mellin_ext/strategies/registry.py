"""The list of strategies and the loop that tries them."""
from __future__ import annotations

import threading
from typing import Protocol

from ..closed_form import ClosedForm
from ..plugins import STRATEGY_GROUP, plug_ins, report
from ..problem import Problem

# A strategy may hand a changed problem on; more rounds than this would be running in circles.
MAX_DEPTH = 4


class Strategy(Protocol):
    """One method of integration.

    ``attempt`` looks before it computes, returns None for what it does not know, and never returns what
    it has not justified.
    """

    name: str

    def attempt(self, problem: Problem) -> ClosedForm | None:
        """The closed form of the problem, or None."""


_strategies: tuple[Strategy, ...] | None = None  # replaced, never changed: readers need no lock
_lock = threading.RLock()


def strategies() -> tuple[Strategy, ...]:
    """The strategies in the order in which they are tried: built-in, of plug-ins, registered."""
    return _strategies if _strategies is not None else _load()


def _load() -> tuple[Strategy, ...]:
    global _strategies
    with _lock:
        if _strategies is None:
            from . import (
                abel_plana,
                exponential_series,
                hyperbolic,
                master_theorem,
                mellin_barnes,
                radical,
                ranges,
                taylor,
                zeta_sums,
            )

            found: list[Strategy] = [
                *master_theorem.STRATEGIES,
                *exponential_series.STRATEGIES,
                *abel_plana.STRATEGIES,
                *ranges.STRATEGIES,  # before term-by-term integration of series over (0, 1)
                *taylor.STRATEGIES,
                *mellin_barnes.STRATEGIES,
                *taylor.LATER,
                *zeta_sums.STRATEGIES,
                *radical.STRATEGIES,
                *hyperbolic.STRATEGIES,
                *ranges.CHANGES,
            ]
            for name, strategy in plug_ins(STRATEGY_GROUP):
                try:
                    found = _with(found, strategy() if isinstance(strategy, type) else strategy)
                except Exception as error:
                    report(f"plug-in {name!r}", error)
            _strategies = tuple(found)
        return _strategies


def register(strategy: Strategy, before: str | None = None, after: str | None = None) -> None:
    """Add a strategy, at the end or next to a named one.

    Parameters
    ----------
    strategy : Strategy
        Any object with a ``name`` and a method ``attempt(problem) -> ClosedForm | None``.
    before, after : str
        At most one of them: the name of the neighbour.

    Raises
    ------
    TypeError
        If it lacks a name or the method.
    ValueError
        If a strategy of this name is there already, or the named neighbour is not, or two are named.

    Examples
    --------
    >>> from sympy import Function, Symbol, oo
    >>> from sympy_mellin_ext import ClosedForm, integrate, register, unregister
    >>> x, f = Symbol('x'), Function('f')
    >>> class Normalised:
    ...     name = "normalised density"
    ...     def attempt(self, problem):
    ...         if problem.half_line and problem.integrand == f(problem.variable):
    ...             return ClosedForm(problem.integrand.func(0), strategy=self.name)
    >>> register(Normalised(), before="master theorem")
    >>> integrate(f(x), (x, 0, oo))
    f(0)
    >>> unregister("normalised density")
    """
    global _strategies
    with _lock:
        _strategies = tuple(_with(list(strategies()), strategy, before, after))


def _with(
    found: list[Strategy], strategy: Strategy, before: str | None = None, after: str | None = None
) -> list[Strategy]:
    """The list with one strategy more."""
    name, method = getattr(strategy, "name", None), getattr(strategy, "attempt", None)
    if not isinstance(name, str) or not callable(method):
        raise TypeError(f"a strategy has a name (string) and a method attempt(problem), unlike {strategy!r}")
    if before is not None and after is not None:
        raise ValueError("give before= or after=, not both")
    names = [s.name for s in found]
    if strategy.name in names:
        raise ValueError(f"a strategy named {strategy.name!r} is registered already; unregister it first")
    neighbour = before if before is not None else after
    if neighbour is None:
        return [*found, strategy]
    place = _place(names, neighbour) + (before is None)
    return [*found[:place], strategy, *found[place:]]


def _place(names: list[str], name: str) -> int:
    if name not in names:
        raise ValueError(f"no strategy named {name!r}; there are {', '.join(names)}")
    return names.index(name)


def unregister(name: str) -> None:
    """Remove the strategy of this name; ValueError if there is none."""
    global _strategies
    with _lock:
        found = strategies()
        place = _place([s.name for s in found], name)
        _strategies = found[:place] + found[place + 1 :]


def attempt(problem: Problem) -> ClosedForm | None:
    """Try the strategies in order."""
    if problem.depth > MAX_DEPTH:
        return None
    for strategy in strategies():
        try:
            answer = strategy.attempt(problem)
        except RecursionError:
            raise
        except Exception as error:
            report(f"strategy {strategy.name!r}", error)
            continue
        if isinstance(answer, ClosedForm):
            return answer
        if answer is not None:
            wrong = TypeError(f"attempt returned {answer!r}, which is no ClosedForm")
            report(f"strategy {strategy.name!r}", wrong)
    return None
