"""One variable after another, where Tonelli's theorem makes that a proof: integrands of one sign.

The inner integral must hold for every value of the outer variables; then the integral converges iff both do, and
its value does not depend on the order.

Source: Whittaker and Watson, A Course of Modern Analysis (1927), section 4.51 (inversion of repeated integrals).
"""
from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import islice, permutations

from sympy import And, Dummy, Expr, Gt, Lt, S, Symbol, besselk, erfc, exp, expint, oo, uppergamma
from sympy.logic.boolalg import Boolean

from ..closed_form import ClosedForm, Step
from ..problem import Problem
from ..region import Facts, Region
from ..strategies.registry import attempt

Limits = Sequence[tuple[Symbol, Expr, Expr]]
_POSITIVE = (besselk, erfc, expint, uppergamma)
_MOST_ORDERS = 6
_LONGEST = 80  # a longer inner result is not worth another integration
_SOURCE = "Tonelli's theorem"


def iterated(f: Expr, limits: Limits, facts: Facts) -> ClosedForm | None:
    """The integral over any nested ranges, innermost first, for an integrand that is never negative.

    Examples
    --------
    >>> from sympy import exp, oo, symbols
    >>> from sympy_mellin_ext.orthant.iterated import iterated
    >>> from sympy_mellin_ext.region import Facts
    >>> x, y, a, b = symbols('x y a b', positive=True)
    >>> iterated(x**(a - 1)*(y - x)**(b - 1)*exp(-y), [(x, 0, y), (y, 0, oo)], Facts()).value
    gamma(a)*gamma(b)
    """
    limits = [(x, S(lower), S(upper)) for x, lower, upper in limits]
    names = {x: _name(x, lower) for x, lower, _ in limits}
    f = f.xreplace(names)
    ranges = [(names[x], a.xreplace(names), b.xreplace(names)) for x, a, b in limits]
    if f.is_polynomial(*names.values()) or not nonnegative(f, Facts((*facts.given, *_relations(ranges)))):
        return None
    for order in islice(_orders(ranges), _MOST_ORDERS):
        answer = _in_order(f, order, facts)
        if answer is not None:
            return answer
    return None


def _name(x: Symbol, lower: Expr) -> Dummy:
    return Dummy(x.name, positive=True) if lower.is_nonnegative else Dummy(x.name, real=True)


def _relations(ranges: Limits) -> list[Boolean]:
    found: list[Boolean] = []
    for x, lower, upper in ranges:
        if lower is not -oo and lower is not S.Zero:
            found.append(Gt(x, lower))
        if upper is not oo:
            found.append(Lt(x, upper))
    return [r for r in found if r not in (S.true, S.false)]


def _orders(ranges: Limits) -> Iterator[Limits]:
    """The order given; then the others, where the limits are constants."""
    names = [x for x, _, _ in ranges]
    yield ranges
    if not any(b.has(*names) for r in ranges for b in r[1:]):
        yield from (order for order in permutations(ranges) if list(order) != list(ranges))


def _in_order(f: Expr, ranges: Limits, facts: Facts) -> ClosedForm | None:
    condition: Boolean = S.true
    answer: ClosedForm | None = None
    steps: tuple[Step, ...] = ()
    sources: tuple[str, ...] = (_SOURCE,)
    for place, (x, lower, upper) in enumerate(ranges):
        outer = [v for v, _, _ in ranges[place + 1 :]]
        within = Facts((*facts.given, *_relations(ranges[place + 1 :])))
        if not f.has_free(x):
            return None
        answer = attempt(Problem(f, x, lower, upper, within, depth=1))
        if answer is None or (outer and (answer.special or answer.condition.has(*outer))):
            return None
        if outer and answer.value.count_ops() > _LONGEST:
            return None
        told = f"integrated over {x.name}, for all values of the other variables"
        steps = (*steps, Step(told, _SOURCE, answer.value))
        steps, sources = (*steps, *answer.steps), (*sources, *answer.sources)
        condition, f = And(condition, answer.condition), answer.value
    region = Region(facts).holds(condition)
    if answer is None or region.empty or f.has(*(x for x, _, _ in ranges)):
        return None
    return replace(
        answer, value=f, condition=region.to_boolean(), strip=None, strategy="iterated", steps=steps,
        sources=tuple(dict.fromkeys(sources)),
    )  # fmt: skip


def nonnegative(expr: Expr, facts: Facts) -> bool:
    """Whether an expression is >= 0, by what is easily seen."""
    if expr.is_Mul:
        return all(nonnegative(a, facts) for a in expr.args)
    if type(expr) is exp:
        return bool(expr.args[0].is_real)
    if expr.is_Pow:
        whole = expr.exp.is_even and expr.base.is_real
        return bool(whole) or (bool(expr.exp.is_real) and nonnegative(expr.base, facts))
    if isinstance(expr, _POSITIVE):
        return all(a.is_real for a in expr.args[:-1]) and facts.sign(expr.args[-1]) == 1
    if expr.is_Add and all(nonnegative(a, facts) for a in expr.args):
        return True
    return bool(expr.is_nonnegative) or (bool(expr.is_extended_real) and facts.sign(expr) in (0, 1))


__all__ = ["iterated", "nonnegative"]
