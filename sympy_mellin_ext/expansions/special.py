"""The exact value of a closed form at special parameters, where its formula may read 0*oo or oo - oo."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from sympy import Dummy, Expr, Rational, S, Symbol, Tuple
from sympy.logic.boolalg import BooleanFalse

from ..arguments import expression
from .arithmetic import NotMeromorphic, series_of, vanishes
from .parameter import named

if TYPE_CHECKING:
    from ..closed_form import ClosedForm

_BAD = (S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity)
# Directions in the space of parameters: two that agree show that the singularity is removable.
_RATES = (
    (Rational(1), Rational(-2), Rational(5), Rational(-7), Rational(11)),
    (Rational(3), Rational(1), Rational(-4), Rational(13), Rational(-5)),
    (Rational(-2), Rational(7), Rational(1), Rational(3), Rational(-8)),
)
_MOST_TERMS = 12


def point_of(answer: ClosedForm, values: Mapping[Symbol | str, Any]) -> dict[Symbol, Expr]:
    """The values by symbol; an error names a parameter that the integral does not have."""
    bound = {x for x, _, _ in answer.limits}
    free = answer.integrand.free_symbols | Tuple(*(t for _, a, b in answer.limits for t in (a, b))).free_symbols
    free |= answer.value.free_symbols | answer.condition.free_symbols
    parameters = sorted(free - bound, key=str)
    point: dict[Symbol, Expr] = {}
    for key, value in values.items():
        matches = [p for p in parameters if p == key or p.name == key]
        if len(matches) != 1:
            raise ValueError(f"{key} is not one of the parameters {', '.join(map(str, parameters))}")
        point[matches[0]] = expression(value, str(key))
    return point


def value_at(answer: ClosedForm, values: Mapping[Symbol | str, Any]) -> Expr:
    """See :meth:`ClosedForm.at`."""
    from ..problem import Refusal

    point = point_of(answer, values)
    where = answer.condition.subs(point, simultaneous=True)
    if isinstance(where, BooleanFalse):
        raise Refusal("diverges", f"{_shown(point)} lies outside the region {answer.condition}")
    for value in (_asked_anew(answer, point), _stated(answer, point), _substituted(answer, point)):
        if value is not None:
            return value
    value = _limit(answer.value, point)
    if value is None:
        raise Refusal("no kernel", f"no closed form of the value at {_shown(point)}")
    return value


def _shown(point: Mapping[Symbol, Expr]) -> str:
    return ", ".join(f"{p} = {v}" for p, v in point.items())


def _asked_anew(answer: ClosedForm, point: Mapping[Symbol, Expr]) -> Expr | None:
    """The strategies, put to the integral with the values in it: exact, and with its own proof."""
    from ..integrate import _solve, _solve_several
    from ..region import Facts

    if not answer.limits or answer.strategy.startswith("principal value"):
        return None
    integrand = answer.integrand.subs(point, simultaneous=True)
    limits = [(x, a.subs(point), b.subs(point)) for x, a, b in answer.limits]
    if integrand.has(*_BAD) or not integrand.has_free(limits[0][0]):
        return None
    given = tuple(g for g in (c.subs(point) for c in answer.given) if g not in (True, False))
    facts = Facts(given)
    if len(limits) == 1:
        found = _solve(integrand, *limits[0], facts, None)
    else:
        found = _solve_several(integrand, limits, facts, None)
    if found is None or found.value.has(*_BAD) or found.special:
        return None
    return found.value


def _stated(answer: ClosedForm, point: Mapping[Symbol, Expr]) -> Expr | None:
    """A value at a removable singularity that came with the answer."""
    for where, value in answer.special:
        if where.subs(point, simultaneous=True) == True:  # noqa: E712 - SymPy Boolean
            return _substituted(replace(answer, value=value), point)
    return None


def _substituted(answer: ClosedForm, point: Mapping[Symbol, Expr]) -> Expr | None:
    value = answer.value.subs(point, simultaneous=True)
    return None if value.has(*_BAD) else value


def _limit(value: Expr, point: Mapping[Symbol, Expr]) -> Expr | None:
    """The constant term of the expansion in a perturbation of all parameters, the same in two directions."""
    found: list[Expr] = []
    for rates in _RATES:
        eps = Dummy("epsilon")
        moved = {p: v + rates[i % len(rates)] * eps for i, (p, v) in enumerate(point.items())}
        constant = _constant_term(value.xreplace(moved), eps)
        if constant is None:
            continue
        found.append(named(constant))
        if len(found) == 2:
            return min(found, key=lambda c: c.count_ops()) if vanishes(found[0] - found[1]) else None
    return None


def _constant_term(value: Expr, eps: Dummy) -> Expr | None:
    for terms in range(2, _MOST_TERMS, 2):
        try:
            series = series_of(value, eps, terms)
        except NotMeromorphic:
            continue
        if series.valuation > 0 or series.head is S.Zero:
            return S.Zero
        if series.valuation < 0 and not all(vanishes(series.coefficient(k)) for k in _negative(series)):
            return None
        if series.valuation + len(series.coefficients) > 0:
            return series.coefficient(0)
    return None


def _negative(series: Any) -> range:
    return range(series.valuation, min(0, series.valuation + len(series.coefficients)))
