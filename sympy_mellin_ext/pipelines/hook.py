"""SymPy's own calls, with our strategies tried first: one seam, `Integral.doit`.

Every definite integral that SymPy does on request ends in `Integral.doit`: `integrate`, `Expr.integrate`,
`sympy.stats`, `mellin_transform`, `laplace_transform` (where its own rules end), the Fourier, sine, cosine
and Hankel transforms.  `integrate` itself is no seam: some twenty modules hold it under its own name.
`Integral._eval_integral` is none either: it sees no limits.

While nobody asks for the extension, `Integral.doit` is SymPy's own function object.  While somebody does,
it is a dispatcher that asks at each call whether the extension is on *here*: in this context
(`extend_sympy`) or in the process (`enable`).

What SymPy does with an integral that we have refused is its own business, except that the *other* definite
integrals that it meets on the way (those inside the integrand, the elements of a matrix, the terms of a
sum) come back to us.  The refused integral itself does not (`fallback`), nor does anything that a strategy
of ours asks of SymPy.
"""
from __future__ import annotations

import functools
import threading
from collections.abc import Callable
from contextlib import ContextDecorator
from contextvars import ContextVar
from types import TracebackType
from typing import Any

from sympy import Expr, Integral
from sympy.core.cache import CACHE

from ..fallback import is_refused, refused
from ..integrate import try_strategies

_depth: ContextVar[int] = ContextVar("depth", default=0)  # of with-blocks around us, in this context
_busy: ContextVar[bool] = ContextVar("busy", default=False)  # a strategy of ours is at work
_lock = threading.RLock()


class _Seam:
    """Who asks for the extension, and what stands in SymPy's place meanwhile; guarded by the lock."""

    def __init__(self) -> None:
        self.users = 0
        self.everywhere = False
        self.original: Callable[..., Any] | None = None
        self.installed: Callable[..., Any] | None = None

    def acquire(self) -> None:
        with _lock:
            self.users += 1
            if self.users == 1:
                self.original = Integral.__dict__["doit"]
                self.installed = _dispatcher(self.original)
                Integral.doit = self.installed
            _forget()

    def release(self) -> None:
        with _lock:
            self.users -= 1
            # what somebody else has put over ours meanwhile stays: it calls ours, which is off from here on
            if self.users == 0 and Integral.__dict__["doit"] is self.installed:
                Integral.doit = self.original
            _forget()


_seam = _Seam()


def _forget() -> None:
    """Drop what `sympy.stats` remembers of distribution and characteristic functions: they are integrals."""
    for cached in list(CACHE):
        if cached.__module__.startswith("sympy.stats"):
            cached.cache_clear()


def _dispatcher(original: Callable[..., Any]) -> Callable[..., Any]:
    @functools.wraps(original)
    def doit(self: Integral, **hints: Any) -> Any:
        if not is_enabled() or _busy.get() or type(self) is not Integral or not hints.get("integrals", True):
            return original(self, **hints)
        if is_refused(self):
            return original(self, **hints)
        f = self.function
        if hints.get("deep", True) and isinstance(f, Expr) and len(self.limits) == 1:
            f = f.doit(**hints)
        token = _busy.set(True)
        try:
            outcome = try_strategies(f, self.limits, (), hints, nested=True)
        finally:
            _busy.reset(token)
        if outcome.settled:
            return outcome.answer
        if outcome.question is None:
            return original(self, **hints)
        with refused(self.function, self.limits):
            return outcome.judged(original(self, **hints))

    return doit


class extend_sympy(ContextDecorator):
    """Within the block, SymPy's own calls that end in a definite integral try our strategies first.

    That holds in the context of the block (`contextvars`: the thread, or the task of an event loop), and
    nowhere else; blocks may be nested, in any number of threads, and an exception undoes them like any
    other exit.  With no block open and `enable` not in force, SymPy is what it was, to the same function
    object.

    Notes
    -----
    `sympy.stats` remembers distribution functions; this memory is shared by all threads, and is emptied
    whenever a block opens or closes.

    Examples
    --------
    >>> import sympy
    >>> from sympy import besselj, exp, oo, symbols
    >>> from sympy_mellin_ext import extend_sympy
    >>> x, a, s = symbols('x a s', positive=True)
    >>> with extend_sympy():
    ...     sympy.integrate(x**(s - 1)*exp(-a*x**3), (x, 0, oo))
    gamma(s/3)/(3*a**(s/3))
    """

    def __enter__(self) -> extend_sympy:
        _seam.acquire()
        _depth.set(_depth.get() + 1)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        _depth.set(_depth.get() - 1)
        _seam.release()


def enable() -> None:
    """The same as `extend_sympy`, in the whole process and until `disable`; a second call changes nothing.

    Examples
    --------
    >>> from sympy_mellin_ext import disable, enable
    >>> enable()
    >>> disable()
    """
    with _lock:
        if not _seam.everywhere:
            _seam.acquire()
            _seam.everywhere = True


def disable() -> None:
    """Undo `enable`; blocks of `extend_sympy` that are open stay in force."""
    with _lock:
        if _seam.everywhere:
            _seam.everywhere = False
            _seam.release()


def is_enabled() -> bool:
    """Whether SymPy's own calls try our strategies, here and now."""
    return _seam.everywhere or _depth.get() > 0
