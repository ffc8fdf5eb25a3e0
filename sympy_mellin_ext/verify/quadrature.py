"""One integral as a number, with an estimate of its error: `quad`."""
from __future__ import annotations

import math
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from itertools import pairwise
from typing import Any

from mpmath import mp
from sympy import Expr, Symbol, Tuple, oo, sympify

from .functions import Number
from .integrand import Integrand
from .numeric import NUMERIC_ERRORS, evaluate
from .phases import Phase, Phases
from .rules import Diverges, OutOfTime, Piece, SlowEnd, fejer, tanh_sinh
from .singular import MARK_DIGITS, marks
from .tails import expansions_hold, frequencies, has_slow, rotated, split_by_phase, top_power, windowed

# doublings of x that are looked at on each side of the scale, to see where the integrand has its mass
_DOUBLINGS = 20
# beyond so many radians an exponentially damped oscillation is treated as an undamped one
_MANY_RADIANS = 2000
_WIDE = 3


@dataclass
class _Setting:
    """One way to do the calculation; two different ones are compared."""

    digits: int
    dps: int
    shift: Number  # factor on every freely chosen break point
    count: int  # nodes of Fejer's rule
    tolerance: Number = field(default_factory=lambda: mp.zero)

    def adopt(self, g: Integrand) -> None:
        self.tolerance = g.size * mp.mpf(10) ** (-self.digits - 2)


class Wild(Exception):
    """An oscillation that no power of x describes, such as cos(exp(x))."""


def _settings(digits: int) -> list[_Setting]:
    return [_Setting(digits, digits + 10, mp.mpf(1), 18 + digits),
            _Setting(digits + 1, digits + 16, mp.mpf("1.3171"), 23 + digits)]


def quad(f: Any, limits: Any, point: Mapping[Any, Any] | None = None, digits: int = 15,
         seconds: float = 10) -> tuple[Number, Number, bool, str]:
    """Numerical value of an integral at given parameters.

    Parameters
    ==========
    f : Expr
        The integrand.
    limits : tuple
        ``(x, a, b)``; the ends may be infinite and may contain parameters.
    point : mapping, optional
        Values of the parameters, by symbol or by name.
    digits : int
        Digits asked for.
    seconds : float
        Time budget, in processor time.

    Returns
    =======
    (value, error_estimate, reliable, note)
        The calculation is done twice with different break points, rules and precision; `error_estimate` is at
        least their difference. Where `reliable` is False, `note` says why and the value is not to be used. A
        value of infinity with `reliable` True means that the integral diverges.

    Raises
    ======
    TypeError, ValueError
        For limits or parameters that are not as above.

    Examples
    ========
    >>> from sympy import exp, oo, sin, Rational
    >>> from sympy.abc import a, x
    >>> from sympy_mellin_ext.verify import quad
    >>> value, error, reliable, note = quad(sin(a*x)/x, (x, 0, oo), {a: Rational(1, 3)})
    >>> print(value, reliable)
    1.5707963267949 True
    """
    expr, x, low, high, values = checked(f, limits, point)
    if not seconds > 0:
        raise ValueError(f"seconds: a positive number is accepted, not {seconds!r}")
    deadline = time.process_time() + seconds
    results: list[Piece] = []
    note = ""
    with mp.workdps(digits + 10):
        for setting in _settings(digits):
            with mp.workdps(setting.dps):
                try:
                    g = Integrand(expr, x, values, deadline)
                    results.append(_interval(g, low, high, values, setting))
                except Diverges:
                    if not g.doubtful and not _hidden_oscillation(g, low, high):
                        return mp.inf, mp.zero, True, "the integral diverges"
                    note = "it seems to diverge, but the integrand oscillates or loses its digits"
                except SlowEnd:
                    note = "the integrand decays too slowly at an end"
                except Wild:
                    note = "the integrand oscillates faster than any power"
                except OutOfTime:
                    note = f"not finished within {seconds:g} s"
                except NUMERIC_ERRORS as error:
                    note = f"the integrand could not be evaluated ({type(error).__name__}: {error})"
            if note:
                return (results[0].value if results else mp.nan), mp.inf, False, note
        return _judged(results, g, digits)


def _hidden_oscillation(g: Integrand, low: Expr, high: Expr) -> bool:
    """Whether the integrand changes sign again and again far out (or near 0) without a phase known for it."""
    reader = Phases(g.variable, g.point)
    if any(reader.of(g.expr)) or oo not in (high, -low):
        return False
    changes = 0
    before = None
    for k in range(120):
        x = mp.mpf(3) * mp.mpf("1.0617") ** k * (1 if high == oo else -1)
        try:
            value = g(x)
        except (*NUMERIC_ERRORS, OutOfTime):
            continue
        sign = (mp.sign(mp.re(value)), mp.sign(mp.im(value)))
        changes += before is not None and sign != before
        before = sign
    return changes > 6


def _judged(results: list[Piece], g: Integrand, digits: int) -> tuple[Number, Number, bool, str]:
    first, second = results
    difference = abs(first.value - second.value)
    size = abs(second.value) + g.size * mp.mpf(10) ** -3
    error = max(difference, abs(second.value) * mp.mpf(10) ** (-digits - 3))
    value = second.value
    if abs(mp.im(value)) <= error and _real(g):
        value = mp.re(value)
    if difference > size * mp.mpf(10) ** -min(8, digits):
        return value, error, False, f"two settings differ by {mp.nstr(difference / size, 2)} relative"
    trouble = first.trouble or second.trouble
    if trouble and difference > size * mp.mpf(10) ** -min(11, digits):
        return value, error, False, trouble
    return value, error, True, ""


def _real(g: Integrand) -> bool:
    return all(sympify(v).is_real for v in g.point.values()) and not g.expr.has(sympify("I"))


def checked_limits(f: Any, limits: Any) -> tuple[Expr, Symbol, Expr, Expr]:
    """Integrand, variable and ends as SymPy objects, with errors that name the argument."""
    expr = sympify(f) if isinstance(f, (Expr, int, float, complex)) else f
    if not isinstance(expr, Expr):
        raise TypeError(f"f: an expression is accepted, not {type(f).__name__}")
    if not isinstance(limits, (tuple, list, Tuple)):
        raise TypeError(f"limits: a tuple (x, a, b) is accepted, not {type(limits).__name__}")
    ends = tuple(sympify(v) for v in limits)
    if len(ends) != 3:
        raise ValueError(f"limits: a tuple (x, a, b) is accepted, not {len(ends)} items")
    x, low, high = ends
    if not isinstance(x, Symbol):
        raise TypeError(f"limits: the variable must be a Symbol, not {x}")
    for end in (low, high):
        if not isinstance(end, Expr):
            raise TypeError(f"limits: the ends must be expressions, not {end}")
    return expr, x, low, high


def checked(f: Any, limits: Any, point: Mapping[Any, Any] | None) -> tuple[
        Expr, Symbol, Expr, Expr, dict[Symbol, Any]]:
    """The arguments of `quad` as SymPy objects, with errors that name the argument."""
    expr, x, low, high = checked_limits(f, limits)
    names = sorted((expr.free_symbols | low.free_symbols | high.free_symbols) - {x}, key=str)
    given = dict(point or {})
    values = {}
    for name in names:
        if name in given:
            values[name] = sympify(given[name])
        elif name.name in given:
            values[name] = sympify(given[name.name])
        else:
            raise ValueError(f"point: no value for {name}")
        if not values[name].is_number:
            raise ValueError(f"point: the value of {name} must be a number, not {values[name]}")
    return expr, x, low, high, values


def _interval(g: Integrand, low: Expr, high: Expr, values: dict[Symbol, Any], setting: _Setting) -> Piece:
    x = g.variable
    if low == high:
        return Piece(mp.zero, mp.zero)
    if low == oo or high == -oo:
        piece = _interval(g, high, low, values, setting)
        return Piece(-piece.value, piece.error, piece.trouble)
    if low == -oo and high == oo:
        y = Symbol("y", positive=True)
        halves = g.derived(g.expr.subs(x, y), y), g.derived(g.expr.subs(x, -y), y)
        right, left = (_half_line(half, setting) for half in halves)
        g.size = max(half.size for half in halves)  # what a total of zero is measured by
        return right + left
    if low == -oo:
        y = Symbol("y", real=True)
        g = Integrand(g.expr.subs(x, -y), y, values, g.deadline)
        return _interval(g, -high, oo, values, setting)
    if high == oo:
        if low != 0:
            y = Symbol("y", positive=True)
            g = Integrand(g.expr.subs(x, low + y), y, values, g.deadline)
        return _half_line(g, setting)
    with mp.workdps(MARK_DIGITS):
        a, b = evaluate(low, values, MARK_DIGITS), evaluate(high, values, MARK_DIGITS)
    if a > b:
        piece = _interval(g, high, low, values, setting)
        return Piece(-piece.value, piece.error, piece.trouble)
    return _finite(g, a, b, setting)


def _finite(g: Integrand, a: Number, b: Number, setting: _Setting) -> Piece:
    if a == 0 and _phases(_inverted(g))[0]:
        return _outer(_inverted(g), 1 / b, [], setting, at_mark=True)
    inside = marks(g.expr, g.variable, g.point, a, b)
    bounds = [a, *inside, b]
    for p, q in pairwise(bounds):
        for part in (mp.mpf("0.13"), mp.mpf("0.47"), mp.mpf("0.81")):
            try:
                g.size = max(g.size, abs(g(p + part * (q - p))) * (q - p))
            except NUMERIC_ERRORS:
                continue
    setting.adopt(g)
    total = Piece(mp.zero, mp.zero)
    for p, q in pairwise(bounds):
        middle = p + (q - p) * setting.shift / (1 + setting.shift)
        total += _from_mark(g, p, 1, middle - p, setting) + _from_mark(g, q, -1, q - middle, setting)
    return total


def _from_mark(g: Integrand, end: Number, side: int, length: Number, setting: _Setting,
               depth: int = 8) -> Piece:
    """Integral over the piece of given length on one side of `end`, which may be singular."""
    def at(distance: Number) -> Number:
        return g.near(end, side, distance, length)

    def far(distance: Number) -> Number:
        return at(length - distance)

    piece = tanh_sinh((at, far), length, setting.tolerance)
    if not piece.trouble or depth == 0:
        return piece
    cut = length / 6
    return (_from_mark(g, end, side, cut, setting, depth - 1)
            + fejer(at, cut, length, setting.tolerance, setting.count))


def _half_line(g: Integrand, setting: _Setting) -> Piece:
    """Integral over (0, oo)."""
    points = marks(g.expr, g.variable, g.point, mp.zero, mp.inf)
    scale = (points[0] if points else mp.one) * setting.shift * mp.mpf("1.0713")
    heights = {0: g.envelope(scale)}
    g.size = heights[0]
    inverse = _inverted(g)
    inner_phases = _phases(inverse)[0]
    outer_phases = _phases(g)[0]
    right = _edge(g, scale, 1, heights, points, top_power(outer_phases))
    left = _edge(g, scale, -1, heights, points, top_power(inner_phases))
    if g.size == 0:
        return Piece(mp.zero, mp.zero)
    setting.adopt(g)
    if points:
        # pieces up to the first mark, between marks, and outwards from the last one
        first, last = points[0], points[-1]
        middle = first * setting.shift / (1 + setting.shift)
        total = _from_mark(g, first, -1, first - middle, setting)
        for p, q in pairwise(points):
            half = p + (q - p) * setting.shift / (1 + setting.shift)
            total += _from_mark(g, p, 1, half - p, setting) + _from_mark(g, q, -1, q - half, setting)
        beyond = last * (1 + setting.shift)
        total += _from_mark(g, last, 1, beyond - last, setting)
    else:
        middle = beyond = scale
        total = Piece(mp.zero, mp.zero)
    if left is not None:
        total += _body(g, min(left, middle), middle, setting)
    elif inner_phases:
        inverse.size = g.size
        total += _tail(inverse, 1 / middle, setting, heights, -1)
    else:
        total += _from_mark(g, mp.zero, 1, middle, setting)
    if right is not None and not _long(outer_phases, right):
        return total + _body(g, beyond, max(right, beyond), setting)
    return total + _tail(g, beyond, setting, heights, 1)


def _long(phases: set[Phase], right: Number) -> bool:
    r = top_power(phases)
    return bool(r) and not has_slow(phases, r) and frequencies(phases, r)[-1] * right**r > _MANY_RADIANS


def _outer(g: Integrand, start: Number, points: list[Number], setting: _Setting, at_mark: bool) -> Piece:
    """Integral over (start, oo) where only the end at infinity oscillates."""
    heights = {k: g.envelope(start * mp.mpf(2) ** k) for k in range(_DOUBLINGS)}
    g.size = max(heights.values())
    setting.adopt(g)
    first = _from_mark(g, mp.mpf(start), 1, mp.mpf(start), setting) if at_mark else Piece(mp.zero, mp.zero)
    return first + _tail(g, start * (2 if at_mark else 1), setting, heights, 1)


def _edge(g: Integrand, scale: Number, side: int, heights: dict[int, Number], points: list[Number],
          power: float) -> Number | None:
    """Where the integrand becomes negligible on one side; None if it decays like a power only.

    Raises `Diverges` where it grows beyond all bounds.
    """
    negligible = mp.mpf(10) ** (-mp.dps)
    small = rising = 0
    for k in range(1, _DOUBLINGS + 1):
        x = scale * mp.mpf(2) ** (side * k)
        height = heights[side * k] = g.envelope(x)
        g.size = max(g.size, height)
        before = heights[side * (k - 1)]
        small = small + 1 if height <= g.size * negligible else 0
        rising = rising + 1 if height > before * mp.mpf(2) ** (power + 0.05) else 0
        past = not points or (x > points[-1] if side > 0 else x < points[0])
        if small >= 2 and past:
            return x
        if rising >= 4 and height > before * mp.mpf(10) ** 30:
            raise Diverges
    if rising >= 8 and min(_exponents(heights, side)) > power + 0.03:
        raise Diverges
    return None


def _body(g: Integrand, low: Number, high: Number, setting: _Setting) -> Piece:
    """Integral over [low, high], which lies on one side of all singular points."""
    total = Piece(mp.zero, mp.zero)
    while low < high:
        following = min(low * 3, high)
        total += fejer(g, low, following, setting.tolerance, setting.count)
        low = following
    return total


def _tail(g: Integrand, start: Number, setting: _Setting, heights: dict[int, Number], side: int) -> Piece:
    """Integral over (start, oo), start beyond all singular points."""
    phases, opaque = _phases(g)
    if not phases:
        return _algebraic_tail(g, start, setting)
    r = top_power(phases)
    omegas = frequencies(phases, r)
    _check_decay(heights, side, r)
    ways: list[Callable[[], Piece | None]] = [
        lambda: windowed(g, start, r, omegas, setting.digits, setting.shift, setting.tolerance,
                         setting.count),
        lambda: _split_tail(g, start, r, omegas, setting)]
    # a window that is wide for the fastest oscillation costs more than the turned path
    if has_slow(phases, r) or omegas[-1] > _WIDE * omegas[0]:
        ways.reverse()
    for way in ways:
        piece = way()
        if piece is not None:
            return Piece(piece.value, piece.error,
                         piece.trouble or ("periodic function inside another" if opaque else ""))
    return Piece(mp.nan, mp.inf, "no rule for this oscillation")


def _check_decay(heights: dict[int, Number], side: int, r: float) -> None:
    """The amplitude in v = x**r must vanish: abs(x*f) must grow more slowly than x**r."""
    plain, apart = _exponents(heights, side)
    if min(plain, apart) > r + 0.01:
        raise Diverges
    if plain > r - 0.01:
        raise SlowEnd


def _dot(p: list[float], q: list[float]) -> float:
    return sum(u * v for u, v in zip(p, q, strict=True))


def _exponents(heights: dict[int, Number], side: int) -> tuple[float, float]:
    """The power of x that abs(x*f) grows with, from a fit of e*k + c, and from one of e*k + m*log(k) + c.

    The latter is the power apart from those of log(x), but the less certain of the two.
    """
    rows = [(float(k), float(mp.log(k, 2)), float(mp.log(heights[side * k], 2)))
            for k in range(5, max(k * side for k in heights) + 1) if heights.get(side * k)]
    if len(rows) < 6:
        return -math.inf, -math.inf
    steps, logs, values = ([v - sum(column) / len(rows) for v in column] for column in zip(*rows, strict=True))
    share = _dot(steps, logs) / _dot(logs, logs)
    residual = [k - share * v for k, v in zip(steps, logs, strict=True)]
    return _dot(steps, values) / _dot(steps, steps), _dot(residual, values) / _dot(residual, steps)


def _split_tail(g: Integrand, start: Number, r: float, omegas: list[float],
                setting: _Setting) -> Piece | None:
    parts = split_by_phase(g, r)
    if parts is None:
        return None
    beyond = max(start, expansions_hold(parts, g))
    total = _body(g, start, beyond, setting)
    start = beyond
    for part, side in zip(parts, (1, -1, 0), strict=True):
        if part == 0:
            continue
        h = g.derived(part, g.variable)
        h.size = g.size
        if side:
            total += rotated(h, side, start, r, omegas, setting.tolerance, setting.count)
        else:
            heights = {k: h.envelope(start * mp.mpf(2) ** k) for k in range(_DOUBLINGS)}
            total += _tail(h, start, setting, heights, 1)
    return total


def _algebraic_tail(g: Integrand, start: Number, setting: _Setting, depth: int = 8) -> Piece:
    """Integral over (start, oo) in the variable y = start/x."""
    def at_infinity(y: Number) -> Number:
        x = start / y
        return g.near(mp.zero, 1, x, start) * x / y

    def at_start(y: Number) -> Number:
        return at_infinity(1 - y)

    piece = tanh_sinh((at_infinity, at_start), mp.one, setting.tolerance)
    if not piece.trouble or depth == 0:
        return piece
    return (_body(g, start, 6 * start, setting)
            + _algebraic_tail(g, 6 * start, setting, depth - 1))


def _phases(g: Integrand) -> tuple[set[Phase], bool]:
    """Phases at infinity, empty if nothing oscillates; and whether they were guessed."""
    reader = Phases(g.variable, g.point)
    found = reader.of(g.expr)
    if reader.wild:
        raise Wild
    return (set() if not any(found) else found), reader.opaque


def _inverted(g: Integrand) -> Integrand:
    return g.derived(g.expr.subs(g.variable, 1 / g.variable) / g.variable**2, g.variable)
