"""Parameter values inside a region, the same in every run."""
from __future__ import annotations

import random
from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Any

from mpmath import mp
from sympy import And, Expr, I, Integer, Rational, Symbol, sympify
from sympy.logic.boolalg import Boolean

from .functions import Number
from .numeric import NUMERIC_ERRORS, as_number, compiled, holds

Point = dict[Symbol, Any]
_TRIES = 4000
_DENOMINATORS = (3, 5, 7, 9, 11, 13)


def draw(symbol: Symbol, source: random.Random, turned: bool, wide: int = 1) -> Expr:
    """A value that the assumptions of `symbol` allow; `turned` asks for an imaginary part if they do."""
    if symbol.is_integer:
        low = 1 if symbol.is_positive else 0 if symbol.is_nonnegative else -5 * wide
        high = -1 if symbol.is_negative else 0 if symbol.is_nonpositive else 5 * wide
        return Integer(source.randint(min(low, high), max(low, high)))
    denominator = source.choice(_DENOMINATORS)
    size = Rational(source.randint(1, 3 * denominator + 1) * denominator + 1, denominator**2)
    size *= wide
    if symbol.is_positive or symbol.is_nonnegative:
        return size
    if symbol.is_negative or symbol.is_nonpositive:
        return -size
    value = size if source.random() < 0.5 else -size
    if turned and symbol.is_real is None:
        value += I * Rational(source.choice((-1, 1)) * source.randint(1, 4), 6)
    return value


def inside_test(condition: Boolean, symbols: Sequence[Symbol]) -> Callable[[Point], bool]:
    """The condition as a fast numerical test; what cannot be decided is not inside."""
    fast: Callable[..., Number] | None = None
    if not condition.is_Atom:
        try:
            fast = compiled(condition, symbols)
        except NUMERIC_ERRORS:
            fast = None

    def inside(point: Point) -> bool:
        if fast is not None:
            try:
                return bool(fast(*[as_number(point[v]) for v in symbols]))
            except NUMERIC_ERRORS:
                pass
        return holds(condition, point) is True

    return inside


def sample(symbols: Iterable[Symbol], condition: Any = True, given: Any = (), count: int = 4) -> list[Point]:
    """At most `count` different points where `condition` and `given` hold.

    One in three has an imaginary part in a symbol that may be complex. Fewer points, or none, come back where
    the region is too thin to be hit.
    """
    names = sorted(symbols, key=str)
    relations = given if isinstance(given, (tuple, list)) else (given,)
    region = And(sympify(condition), *[sympify(r) for r in relations])
    if region == False:  # noqa: E712 - SymPy's false is not Python's
        return []
    if not names:
        return [{}]
    inside = inside_test(region, names)
    source = random.Random("parameters " + " ".join(str(n) for n in names))
    accepted: list[Point] = []
    wide = 1
    for number in range(_TRIES):
        turned = len(accepted) % 3 == 2 and number % 2 == 0
        if not accepted and number > _TRIES // 2:
            wide = 4
        point = {name: draw(name, source, turned, wide) for name in names}
        if inside(point):
            if point not in accepted:
                accepted.append(point)
            if len(accepted) == count:
                break
    return accepted


def as_point(point: Mapping[Any, Any], symbols: Iterable[Symbol]) -> Point:
    """A point given by symbols or names, for the symbols of the problem."""
    by_name = {s.name: s for s in symbols}
    result: Point = {}
    for key, value in point.items():
        name = key.name if isinstance(key, Symbol) else key
        if not isinstance(name, str):
            raise TypeError(f"points: keys are symbols or names, not {key!r}")
        number = sympify(value)
        if not number.is_number:
            raise ValueError(f"points: the value of {name} must be a number, not {value!r}")
        if name in by_name:
            result[by_name[name]] = number
    missing = sorted(n for n, s in by_name.items() if s not in result)
    if missing:
        raise ValueError(f"points: no value for {', '.join(missing)} in {dict(point)}")
    return result


def show(value: Any) -> str:
    """A number of a point or of a table in few characters."""
    return str(value) if not isinstance(value, (type(mp.one), type(mp.mpc(1)))) else mp.nstr(value, 10)
