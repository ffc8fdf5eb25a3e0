"""The list of strategies and the loop that tries them."""
from __future__ import annotations

import warnings
from functools import cache
from typing import Protocol

from ..closed_form import ClosedForm
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


_strategies: list[Strategy] = []
_reported: set[tuple[str, str]] = set()


@cache
def _load_built_in() -> None:
    from . import exponential_series, master_theorem, mellin_barnes, ranges, taylor

    _strategies[:0] = [
        *master_theorem.STRATEGIES,
        *exponential_series.STRATEGIES,
        *mellin_barnes.STRATEGIES,
        *taylor.STRATEGIES,
        *ranges.STRATEGIES,
    ]


def strategies() -> tuple[Strategy, ...]:
    """The strategies in the order in which they are tried."""
    _load_built_in()
    return tuple(_strategies)


def register(strategy: Strategy, before: str | None = None, after: str | None = None) -> None:
    """Add a strategy, at the end or next to a named one.

    Raises
    ------
    ValueError
        If a strategy of this name is there already, or the named neighbour is not.
    """
    _load_built_in()
    names = [s.name for s in _strategies]
    if strategy.name in names:
        raise ValueError(f"a strategy named {strategy.name!r} is registered already; unregister it first")
    neighbour = before if before is not None else after
    if neighbour is None:
        _strategies.append(strategy)
        return
    if neighbour not in names:
        raise ValueError(f"no strategy named {neighbour!r}; there are {', '.join(names)}")
    _strategies.insert(names.index(neighbour) + (before is None), strategy)


def unregister(name: str) -> None:
    """Remove the strategy of this name; ValueError if there is none."""
    _load_built_in()
    for strategy in _strategies:
        if strategy.name == name:
            _strategies.remove(strategy)
            return
    raise ValueError(f"no strategy named {name!r}; there are {', '.join(s.name for s in _strategies)}")


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
            _report(strategy.name, error)
            continue
        if answer is not None:
            return answer
    return None


def _report(name: str, error: Exception) -> None:
    """Say once for each kind of failure that a strategy is broken; the call goes on without it."""
    key = (name, type(error).__name__)
    if key not in _reported:
        _reported.add(key)
        warnings.warn(
            f"strategy {name!r} failed with {type(error).__name__}: {error}; it is skipped", RuntimeWarning, 3
        )
