"""Points on both sides of each edge of a region, the same in every run."""
from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from fractions import Fraction
from typing import Any

from sympy import And, Eq, I, Ne, Rational, Symbol, sympify
from sympy.logic.boolalg import Boolean

from .sampling import Point, inside_test

# distances inside and outside: a power of x that is off by so much is recognised as divergence
_NEAR, _BEYOND = Fraction(1, 12), Fraction(1, 8)
_HALVINGS = 24
_DENOMINATOR = 120
# crossings looked at for one relation
_SIDES = 2

Test = Callable[[Point], bool]


def edges(symbols: Iterable[Symbol], condition: Any, given: Any, inside: Sequence[Point],
          most: int = 4,
          margins: tuple[Fraction, Fraction] = (_NEAR, _BEYOND)) -> tuple[list[Point], list[Point]]:
    """Points just inside and points just outside, at most `most` of each.

    Outside, one relation of the condition is violated while all others, `given` and the assumptions hold. A
    symbol that may be complex has an imaginary part inside.
    """
    parts = sorted(And.make_args(sympify(condition)), key=str)
    relations = given if isinstance(given, (tuple, list)) else (given,)
    names = sorted(symbols, key=str)
    near: list[Point] = []
    beyond: list[Point] = []
    for part in parts:
        if part.is_Atom or isinstance(part, (Eq, Ne)):
            continue
        rest = And(*[p for p in parts if p is not part], *[sympify(r) for r in relations])
        for good, bad in _crossings(part, inside_test(part, names), inside_test(rest, names), inside,
                                     margins):
            if good is not None and len(near) < most and good not in (*inside, *near):
                near.append(good)
            if bad is not None and len(beyond) < most and bad not in beyond:
                beyond.append(bad)
    return near, beyond


def _crossings(part: Boolean, holds: Test, rest: Test, inside: Sequence[Point],
               margins: tuple[Fraction, Fraction]) -> list[tuple[Point | None, Point | None]]:
    """Pairs (just inside, just outside) along one parameter, from the first point where there are any."""
    for start in inside:
        for symbol in sorted(part.free_symbols, key=str):
            if not sympify(start[symbol]).is_Rational:
                continue
            found = [c for c in (_crossing(start, symbol, d, holds, rest, margins) for d in (-1, 1)) if c is not None]
            if found:
                return found[:_SIDES]
    return []


def _crossing(start: Point, symbol: Symbol, direction: int, holds: Test, rest: Test,
              margins: tuple[Fraction, Fraction]) -> tuple[Point | None, Point | None] | None:
    value = Fraction(int(start[symbol].p), int(start[symbol].q))

    def at(distance: Fraction, turned: bool = False) -> Point | None:
        new = value + direction * distance
        sign_known = ((symbol.is_positive and new <= 0) or (symbol.is_negative and new >= 0)
                      or (symbol.is_nonnegative and new < 0) or (symbol.is_nonpositive and new > 0))
        if sign_known:
            return None
        number = Rational(new.numerator, new.denominator)
        return {**start, symbol: number + I / 3 if turned else number}

    def is_inside(distance: Fraction) -> bool | None:
        point = at(distance)
        return None if point is None else holds(point)

    last, step = Fraction(0), Fraction(1) if symbol.is_integer else Fraction(1, 8)
    while True:
        ahead = is_inside(last + step)
        if ahead is None or last > 40:
            return None
        if not ahead:
            break
        last += step
        step = step if symbol.is_integer else step * 2
    if symbol.is_integer:
        pair = at(last) if last else None, at(last + step)
    else:
        low, high = last, last + step
        for _ in range(_HALVINGS):
            middle = (low + high) / 2
            low, high = (middle, high) if is_inside(middle) else (low, middle)
        edge = (low + high) / 2
        turned = symbol.is_real is None
        inner = at(_rounded(edge - margins[0], value, direction), turned) if edge > margins[0] else None
        pair = inner, at(_rounded(edge + margins[1], value, direction))
    good, bad = pair
    good = good if good is not None and holds(good) and rest(good) else None
    bad = bad if bad is not None and not holds(bad) and rest(bad) else None
    return None if good is bad is None else (good, bad)


def _rounded(distance: Fraction, value: Fraction, direction: int) -> Fraction:
    """The distance to a nearby point with a small denominator."""
    return direction * ((value + direction * distance).limit_denominator(_DENOMINATOR) - value)
