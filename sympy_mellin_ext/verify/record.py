"""The comparison of a closed form with quadrature: `verify` and its record."""
from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from mpmath import mp
from sympy import Expr, Symbol, Tuple, sympify
from sympy.logic.boolalg import Boolean

from .edges import edges
from .functions import Number
from .nested import quad_nested
from .numeric import Undefined, Unevaluated, evaluate
from .quadrature import checked_limits, quad
from .sampling import Point, as_point, sample, show

Ranges = tuple[tuple[Symbol, Expr, Expr], ...]
_OUTSIDE_DIGITS = 8
# how close to an edge, inside and outside; nested quadrature needs more room
_MARGINS = ((Fraction(1, 12), Fraction(1, 8)), (Fraction(1, 3), Fraction(1, 3)))


@dataclass(frozen=True)
class Verification:
    """What a comparison found.

    Attributes
    ==========
    points : tuple of dict
        Parameter values, symbol -> number.
    closed, quadrature : tuple
        Value of the closed form and of the integral at each point; nan where there is none.
    digits : tuple of float
        Digits in which the two agree, at most those that the quadrature has; 0 where one of them is missing.
    ok : bool or None
        True if all points agree, False if one disagrees, None if at least one could not be checked.
    note : str
        What was wrong, or could not be checked, and where.
    outside : tuple of (dict, str)
        Points just outside the region, and what the integral does there: ``diverges``, ``converges to ...``, or
        ``could not be checked: ...``.
    """

    points: tuple[dict[Symbol, Any], ...]
    closed: tuple[Number, ...]
    quadrature: tuple[Number, ...]
    digits: tuple[float, ...]
    ok: bool | None
    note: str = ""
    outside: tuple[tuple[dict[Symbol, Any], str], ...] = ()

    @property
    def sharp(self) -> bool | None:
        """Whether the integral diverges just outside the region; None where that is not known."""
        verdicts = [verdict for _, verdict in self.outside]
        if any(verdict.startswith("converges") for verdict in verdicts):
            return False
        return True if verdicts and all(verdict == "diverges" for verdict in verdicts) else None

    def __str__(self) -> str:
        verdict = {True: "agrees", False: "DISAGREES", None: "could not be checked"}[self.ok]
        lines = [f"{verdict} at {len(self.points)} point{'' if len(self.points) == 1 else 's'}"]
        for point, closed, value, digits in zip(self.points, self.closed, self.quadrature, self.digits,
                                                strict=True):
            lines.append(f"  {_where(point)}: closed form {show(closed)}, quadrature {show(value)}, "
                         f"{digits:.1f} digits")
        lines += [f"  outside, {_where(point)}: {verdict}" for point, verdict in self.outside]
        if self.note:
            lines.append(self.note)
        return "\n".join(lines)


def verify(f: Any, limits: Any, value: Any, condition: Any = True, digits: int = 15,
           points: Sequence[Mapping[Any, Any]] | None = None, given: Any = (),
           seconds: float = 10) -> Verification:
    """Compare a closed form with numerical quadrature at points inside its region.

    Parameters
    ==========
    f : Expr
        The integrand.
    limits : tuple
        ``(x, a, b)``, or a sequence of them, innermost first: several variables are done to six digits.
    value : Expr
        The closed form.
    condition : Boolean
        The region in which it is claimed to hold.
    digits : int
        Digits asked of the quadrature.
    points : list of mappings, optional
        Parameter values by symbol or name; without them, points inside the region are made from the
        assumptions on the symbols, always the same ones; some lie close to the edges, and just outside the
        region the integral is looked at too.
    given : relation or list of relations
        Further restrictions on the points.
    seconds : float
        Time budget for each point, in processor time.

    Returns
    =======
    Verification

    Raises
    ======
    TypeError, ValueError
        Naming the argument and what is accepted.

    Examples
    ========
    >>> from sympy import exp, gamma, oo
    >>> from sympy.abc import s, x
    >>> from sympy import re
    >>> from sympy_mellin_ext.verify import verify
    >>> verify(x**(s - 1)*exp(-x), (x, 0, oo), gamma(s), re(s) > 0).ok
    True
    >>> verify(x**(s - 1)*exp(-x), (x, 0, oo), gamma(s + 1), re(s) > 0).ok
    False
    """
    expr, ranges = _checked_ranges(f, limits)
    closed_form = value if isinstance(value, str) else sympify(value)
    if not isinstance(closed_form, Expr):
        raise TypeError(f"value: an expression is accepted, not {type(value).__name__}")
    region = condition if isinstance(condition, str) else sympify(condition)
    if not isinstance(region, (Boolean, bool)) or isinstance(region, Symbol):
        raise TypeError(f"condition: a Boolean is accepted, not {type(condition).__name__}")
    if not isinstance(digits, int) or isinstance(digits, bool) or not 1 <= digits <= 200:
        raise ValueError(f"digits: an integer from 1 to 200 is accepted, not {digits!r}")
    symbols = expr.free_symbols | closed_form.free_symbols
    symbols = symbols.union(*(end.free_symbols for limit in ranges for end in limit[1:]))
    symbols = symbols - {limit[0] for limit in ranges}
    outside: list[Point] = []
    if points is None:
        names = symbols | getattr(region, "free_symbols", set())
        inside = sample(names, region, given, count=3)
        near, outside = edges(names, region, given, inside, margins=_MARGINS[len(ranges) > 1])
        inside += near
    elif isinstance(points, Mapping) or not all(isinstance(p, Mapping) for p in points):
        raise TypeError("points: a list of mappings from symbol or name to number is accepted")
    else:
        inside = [as_point(p, symbols) for p in points]
    if not inside:
        return Verification((), (), (), (), None, "no point inside the region was found")
    rows = [_compared(expr, ranges, closed_form, p, digits, seconds) for p in inside]
    verdicts = [row[3] for row in rows]
    notes = [f"at {_where(p)}: {row[4]}" for p, row in zip(inside, rows, strict=True) if row[4]]
    return Verification(
        points=tuple(inside),
        closed=tuple(row[0] for row in rows),
        quadrature=tuple(row[1] for row in rows),
        digits=tuple(row[2] for row in rows),
        ok=False if False in verdicts else None if None in verdicts else True,
        note="; ".join(notes),
        outside=tuple((p, _beyond(expr, ranges, p, digits, seconds)) for p in outside),
    )


def _checked_ranges(f: Any, limits: Any) -> tuple[Expr, Ranges]:
    """The integrand, and its ranges, innermost first."""
    if isinstance(limits, (tuple, list)) and limits and all(isinstance(v, (tuple, list, Tuple)) for v in limits):
        several = [checked_limits(f, limit) for limit in limits]
        return several[0][0], tuple(limit[1:] for limit in several)
    expr, x, low, high = checked_limits(f, limits)
    return expr, ((x, low, high),)


def _number(expr: Expr, ranges: Ranges, point: Point, digits: int, seconds: float,
            ) -> tuple[Number, Number, bool, str]:
    if len(ranges) == 1:
        return quad(expr, ranges[0], point, digits, seconds)
    return quad_nested(expr, ranges, point, digits, seconds)


def _beyond(expr: Expr, ranges: Ranges, point: Point, digits: int, seconds: float) -> str:
    """What the integral does at a point outside the region."""
    value, _, reliable, note = _number(expr, ranges, point, min(digits, _OUTSIDE_DIGITS), seconds / 2)
    if not reliable:
        return f"could not be checked: quadrature is not reliable: {note}"
    return f"converges to {mp.nstr(value, 8)}" if mp.isfinite(value) else "diverges"


def _where(point: Mapping[Symbol, Any]) -> str:
    items = sorted(point.items(), key=lambda item: str(item[0]))
    return ", ".join(f"{k} = {show(v)}" for k, v in items) or "no parameters"


def _compared(expr: Expr, ranges: Ranges, closed_form: Expr, point: dict[Symbol, Any],
              digits: int, seconds: float) -> tuple[Number, Number, float, bool | None, str]:
    """(closed, quadrature, digits, verdict, note) at one point."""
    integral, error, reliable, note = _number(expr, ranges, point, digits, seconds)
    try:
        closed = evaluate(closed_form, point, digits)
    except (Undefined, Unevaluated) as cause:
        kind = "undefined" if isinstance(cause, Undefined) else "no number"
        return mp.nan, integral, 0.0, None, f"the closed form is {kind} ({cause})"
    if not reliable:
        return closed, integral, 0.0, None, f"quadrature is not reliable: {note}"
    if not mp.isfinite(integral):
        return closed, integral, 0.0, False, note
    size = max(abs(closed), abs(integral))
    difference = abs(closed - integral)
    if size == 0:
        return closed, integral, float(digits), True, ""
    agreed = float(digits) if difference == 0 else float(-mp.log10(difference / size))
    known = float(-mp.log10(max(error / size, mp.mpf(10) ** (-digits))))
    # an estimate of an error may itself be off, but hardly by three digits
    if agreed >= min(known, digits) - 3:
        return closed, integral, min(agreed, float(digits)), True, ""
    return closed, integral, max(agreed, 0.0), False, (
        f"closed form {mp.nstr(closed, 12)} against {mp.nstr(integral, 12)}")
