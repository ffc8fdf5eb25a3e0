"""The integrand at given parameters as a numerical function that keeps its digits next to singular points."""
from __future__ import annotations

import time
from collections.abc import Mapping
from typing import Any

from mpmath import mp
from sympy import Expr, Symbol

from .functions import Number
from .numeric import NUMERIC_ERRORS, as_number, compiled
from .rules import OutOfTime

# uneven, and enough of them to come close to a maximum of an oscillation
_NEARBY = ("1", "1.0473", "1.0931", "1.1417", "1.1979", "1.2611", "1.3089", "1.3733", "1.4277")


class Integrand:
    """f(x) with the parameters fixed.

    Differences such as 1/(exp(x) - 1) - 1/x lose digits near a singular point, more the nearer one comes.
    `near` measures that loss, once for each range of distances, and raises the working precision by it.
    """

    def __init__(self, expr: Expr, variable: Symbol, point: Mapping[Symbol, Any], deadline: float) -> None:
        self.expr, self.variable, self.deadline = expr, variable, deadline
        self.point = {k: point[k] for k in sorted(expr.free_symbols - {variable}, key=str)}
        self._function = compiled(expr, [variable, *self.point])
        self._arguments: dict[int, list[Number]] = {}
        self._precision: dict[tuple[Any, ...], int] = {}
        self.size = mp.zero  # the largest abs(x*f(x)) seen: what "negligible" is measured by
        self.doubtful = False  # some values have fewer digits than they should

    def derived(self, expr: Expr, variable: Symbol) -> Integrand:
        """Another expression in the same parameters."""
        return Integrand(expr, variable, self.point, self.deadline)

    def __call__(self, x: Number) -> Number:
        if time.process_time() > self.deadline:
            raise OutOfTime
        arguments = self._arguments.get(mp.prec)
        if arguments is None:
            arguments = self._arguments[mp.prec] = [as_number(v) for v in self.point.values()]
        value = mp.mpmathify(self._function(x, *arguments))
        if not mp.isfinite(value):
            raise ValueError(f"not finite at {mp.nstr(x, 8)}")
        return value

    def near(self, end: Number, side: int, distance: Number, scale: Number) -> Number:
        """f(end + side*distance), with as many digits as the working precision has."""
        reference = abs(end) if end else scale
        depth = mp.log10(distance / reference)
        if end and depth > 0:
            depth = mp.zero
        key = (end, side, depth > 0, int(mp.ceil(mp.log(1 + abs(depth), 2))), mp.dps)
        dps = self._precision.get(key)
        if dps is None:
            far = mp.mpf(10) ** (mp.sign(depth) * (2 ** key[3] - 1)) * reference
            dps = self._precision[key] = self._needed(end, side, far, key[3])
        if dps == mp.dps:
            return self(end + side * distance)
        with mp.workdps(dps):
            return self(end + side * distance)

    def _needed(self, end: Number, side: int, distance: Number, octave: int) -> int:
        base = mp.dps
        dps = base + (2**octave if end else 0)
        negligible = self.size * mp.mpf(10) ** (-base - 5)
        before = None
        for extra in (0, 12, 2**octave + 16, 3 * 2**octave + 12, 8 * 2**octave + 40):
            try:
                with mp.workdps(dps + extra):
                    value = self(end + side * distance)
            except NUMERIC_ERRORS:
                value = None  # a difference that vanished in a denominator, say
            # a difference that came out as exactly zero has no digits at all
            if value and before is not None:
                change = abs(value - before[1])
                if change <= abs(value) * mp.mpf(10) ** (3 - base) or change * distance <= negligible:
                    return before[0]
            before = None if value is None else (dps + extra, value)
        if before is not None and before[1] == 0:
            return dps
        self.doubtful = True
        return dps + 8 * 2**octave + 40

    def envelope(self, x: Number) -> Number:
        """About the largest abs(x*f(x)) close to x; 0 where f cannot be evaluated."""
        largest = mp.zero
        for factor in _NEARBY:
            y = x * mp.mpf(factor)
            try:
                largest = max(largest, abs(y * self.near(mp.zero, 1, y, mp.one)))
            except NUMERIC_ERRORS:
                continue
        return largest
