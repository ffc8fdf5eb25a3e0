"""Integrals over several variables by nested double exponential rules, to a few digits.

Takahasi and Mori, Publ. RIMS 9 (1974).
"""
from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from itertools import pairwise
from typing import Any

from mpmath import mp
from sympy import Expr, Symbol, oo, sympify

from .functions import Number
from .numeric import NUMERIC_ERRORS, as_number, compiled
from .rules import OutOfTime

_DPS = 30
# the range of t; x reaches exp(pi/2*sinh(t))
_REACHES = ("3.75", "4.5", "5.25")
_MOST_DIGITS = 6
# partial integrals that grow at least like a logarithm, from one reach to the next
_GROWTH = mp.mpf("1.9")


@dataclass
class _Nest:
    """One calculation: step and reach of the rule, and what was seen on the way."""

    f: _Function
    ends: Sequence[tuple[Symbol, Any, Any]]  # outermost first; the ends are compiled functions
    step: Number
    reach: Number
    signs: set[int] = field(default_factory=set)
    outer_end: Number = mp.zero  # the largest outermost term at the ends of the range
    loose: bool = False  # an inner integral does not decay at an end
    tolerance: Number = mp.mpf(10) ** -_MOST_DIGITS
    scales: dict[int, Number] = field(default_factory=dict)  # where an inner integrand was largest, by depth

    def total(self) -> Number:
        return self._level(0, [])

    def _level(self, depth: int, fixed: list[Number]) -> Number:
        if depth == len(self.ends):
            value = self.f(fixed[-1], *fixed[:-1])
            if value:
                self.signs.add(int(mp.sign(mp.re(value))) if not mp.im(value) else 0)
            return value
        _, low, high = self.ends[depth]
        a, b = low(*fixed), high(*fixed)
        if a == b:
            return mp.zero
        if depth:
            self.scales[depth] = self._scale(a, b, depth, fixed)
        total = self._term(mp.zero, a, b, depth, fixed)
        largest = abs(total)
        for direction in (-1, 1):
            small, k = 0, 1
            while small < 4 and k * self.step <= self.reach:
                term = self._term(direction * k * self.step, a, b, depth, fixed)
                total += term
                largest = max(largest, abs(term))
                small = small + 1 if abs(term) <= largest * mp.mpf(10) ** -14 and k * self.step > 2 else 0
                k += 1
            if depth == 0:
                self.outer_end = max(self.outer_end, abs(term) * self.step)
            # far out the range of an inner integral may end too early, and that does not matter
            elif abs(term) > abs(total) * self.tolerance and all(mp.mpf("0.01") < abs(v) < 100 for v in fixed):
                self.loose = True
        return total * self.step

    def _scale(self, a: Number, b: Number, depth: int, fixed: list[Number]) -> Number:
        """Where the innermost integrand times the distance from the finite end is largest, from the last place."""
        scale = self.scales.get(depth, mp.one)
        if depth < len(self.ends) - 1 or mp.isinf(a) is mp.isinf(b):
            return scale

        def height(distance: Number) -> Number:
            return distance * abs(self.f(a + distance if mp.isinf(b) else b - distance, *fixed))

        best = height(scale)
        for ratio in (mp.e, 1 / mp.e):
            ahead, rises = height(scale * ratio), 0
            while ahead > best and rises < 60:
                scale, best, rises = scale * ratio, ahead, rises + 1
                ahead = height(scale * ratio)
        return scale

    def _term(self, t: Number, a: Number, b: Number, depth: int, fixed: list[Number]) -> Number:
        sinh, weight = mp.sinh(t) * mp.pi / 2, mp.cosh(t) * mp.pi / 2
        if mp.isinf(a) and mp.isinf(b):
            x, weight = mp.sinh(sinh), weight * mp.cosh(sinh)
        elif mp.isinf(b):
            e = mp.exp(sinh) * self.scales.get(depth, mp.one)
            x, weight = a + e, weight * e
        elif mp.isinf(a):
            e = mp.exp(sinh) * self.scales.get(depth, mp.one)
            x, weight = b - e, weight * e
        else:
            q = mp.exp(-2 * abs(sinh))
            near = (b - a) * q / (1 + q)
            x, weight = a + near if t < 0 else b - near, weight * 2 * (b - a) * q / (1 + q) ** 2
            if x in (a, b):
                return mp.zero
        return weight * self._level(depth + 1, [*fixed, x])


class _Function:
    """The integrand in the order that `_Nest` calls it, with a time limit."""

    def __init__(self, expr: Expr, names: Sequence[Symbol], values: Mapping[Symbol, Any], deadline: float) -> None:
        fixed = sorted(expr.free_symbols - set(names), key=str)
        self._function = compiled(expr, [*names, *fixed])
        self._fixed = [as_number(values[v]) for v in fixed]
        self.deadline = deadline

    def __call__(self, *arguments: Number) -> Number:
        if time.process_time() > self.deadline:
            raise OutOfTime
        value = mp.mpmathify(self._function(*arguments, *self._fixed))
        if not mp.isfinite(value):
            raise ValueError("not finite")
        return value


def quad_nested(expr: Expr, limits: Sequence[tuple[Symbol, Expr, Expr]], values: Mapping[Symbol, Any],
                digits: int = _MOST_DIGITS, seconds: float = 10) -> tuple[Number, Number, bool, str]:
    """As `quad`, over several variables (innermost first), to at most six digits.

    The steps 1/4, 1/8 and 1/16 are compared. Divergence is recognised for integrands of one sign, from partial
    integrals that keep growing.

    Examples
    ========
    >>> from sympy import exp, oo
    >>> from sympy.abc import x, y
    >>> from mpmath import nstr
    >>> from sympy_mellin_ext.verify.nested import quad_nested
    >>> value, error, reliable, note = quad_nested(exp(-x - y - x*y), [(x, 0, oo), (y, 0, oo)], {})
    >>> nstr(value, 6), reliable
    ('0.596347', True)
    """
    deadline = time.process_time() + seconds
    digits = min(digits, _MOST_DIGITS)
    outer = [tuple(sympify(v) for v in limit) for limit in reversed(limits)]
    names = [limit[0] for limit in outer]
    with mp.workdps(_DPS):
        try:
            f = _Function(expr, [names[-1], *names[:-1]], values, deadline)
            ends = [(x, _end(low, names[:k], values), _end(high, names[:k], values))
                    for k, (x, low, high) in enumerate(outer)]
            before = None
            for halving in (2, 3, 4):
                nest = _Nest(f, ends, mp.mpf(2) ** -halving, mp.mpf(_REACHES[-1]))
                value = nest.total()
                if nest.loose or nest.outer_end > abs(value) * nest.tolerance:
                    return _growing(f, ends, nest)
                if before is not None:
                    error = abs(value - before)
                    if error <= abs(value) * mp.mpf(10) ** (-digits):
                        return value, max(error, abs(value) * mp.mpf(10) ** (-digits - 3)), True, ""
                before = value
        except OutOfTime:
            return mp.nan, mp.inf, False, f"not finished within {seconds:g} s"
        except NUMERIC_ERRORS as error:
            return mp.nan, mp.inf, False, f"the integrand could not be evaluated ({type(error).__name__}: {error})"
    return value, error, False, "the nested rules do not settle"


def _end(expr: Any, names: Sequence[Symbol], values: Mapping[Symbol, Any]) -> Any:
    if expr in (oo, -oo):
        infinity = mp.inf if expr == oo else -mp.inf
        return lambda *_: infinity
    fixed = sorted(expr.free_symbols - set(names), key=str)
    function = compiled(expr, [*names, *fixed])
    numbers = [as_number(values[v]) for v in fixed]
    return lambda *outer: mp.mpmathify(function(*outer, *numbers))


def _growing(f: Any, ends: Any, nest: _Nest) -> tuple[Number, Number, bool, str]:
    """Divergence, where partial integrals of an integrand of one sign keep growing."""
    if len(nest.signs) != 1 or 0 in nest.signs:
        return mp.nan, mp.inf, False, "the integrand changes its sign, and does not decay at an end"
    partial = [_Nest(f, ends, mp.mpf(1) / 4, mp.mpf(reach)).total() for reach in _REACHES]
    if partial[1] and all(abs(q) > _GROWTH * abs(p) for p, q in pairwise(partial)):
        return mp.inf, mp.zero, True, "the integral diverges"
    return mp.nan, mp.inf, False, "the integrand decays too slowly at an end"
