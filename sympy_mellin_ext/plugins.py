"""Extensions of the package that other distributions bring along, found by their entry points.

An installed distribution may announce, in its metadata,

- in the group `sympy_mellin_ext.strategies`: a strategy, or a class to be called without arguments;
- in the group `sympy_mellin_ext.kernels`: a `Row` of the table, or a sequence of them.

They are looked up on first use, never at import time.
"""
from __future__ import annotations

import threading
import warnings
from collections.abc import Iterator
from typing import Any

STRATEGY_GROUP = "sympy_mellin_ext.strategies"
ROW_GROUP = "sympy_mellin_ext.kernels"

_reported: set[tuple[str, str]] = set()
_lock = threading.Lock()


def plug_ins(group: str) -> Iterator[tuple[str, Any]]:
    """The names and the objects of a group, by name; what cannot be loaded is reported and left out."""
    from importlib.metadata import entry_points

    for entry in sorted(entry_points(group=group), key=lambda e: (e.name, e.value)):
        try:
            yield entry.name, entry.load()
        except Exception as error:
            report(f"plug-in {entry.name!r}", error)


def report(who: str, error: Exception) -> None:
    """Warn, once for each kind of failure; the work goes on without the one who failed."""
    key = (who, type(error).__name__)
    with _lock:
        if key in _reported:
            return
        _reported.add(key)
    warnings.warn(f"{who} failed with {type(error).__name__}: {error}; it is skipped", RuntimeWarning, 4)
