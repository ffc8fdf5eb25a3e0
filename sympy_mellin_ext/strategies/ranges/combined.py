"""Answers over parts of a range, added: the whole converges iff every part does."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from sympy import Add, Expr, Mul, S, Symbol, expand_mul, hyper, meijerg
from sympy.core.relational import Relational
from sympy.logic.boolalg import Boolean

from ...closed_form import ClosedForm, Step
from ...problem import Problem
from ...region import Facts, Region
from ..tidy import tidy as shortened

BAD = (S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity)

Weighted = tuple[Expr, ClosedForm]


def added(problem: Problem, parts: Sequence[Weighted], step: Step | None = None) -> ClosedForm | None:
    """``sum weight*answer`` where all parts converge; the conditions meet."""
    region = Region(problem.facts).holds(*(answer.condition for _, answer in parts))
    condition = region.to_boolean()
    if condition is S.false:
        return problem.refuse("diverges", "the parts of the range converge nowhere together")
    value = _total([(w, a.value) for w, a in parts])
    if value.has(*BAD):
        return problem.refuse("diverges", "a part of the range diverges")
    special: list[tuple[Boolean, Expr]] = []
    for where in dict.fromkeys(where for _, a in parts for where, _ in a.special):
        there = _total([(w, _at(a, where)) for w, a in parts])
        if not there.has(*BAD):
            special.append((where, there))
    steps = tuple(dict.fromkeys(s for _, a in parts for s in a.steps))
    first = parts[0][1]
    return ClosedForm(
        value,
        condition,
        first.strip if len(parts) == 1 else None,
        first.strategy,
        steps if step is None else (step, *steps),
        tuple(dict.fromkeys(s for _, a in parts for s in a.sources)),
        tuple(special),
    )


def _total(parts: Sequence[tuple[Expr, Expr]]) -> Expr:
    total = Add(*(Mul(w, v) for w, v in parts))
    if len(parts) > 1 and total.has(hyper, meijerg):
        # equal series of two parts may cancel
        total = shortened(expand_mul(total))
    return total


def _at(answer: ClosedForm, where: Boolean) -> Expr:
    """The value of an answer on one of the ``Eq`` branches."""
    for other, value in answer.special:
        if other == where:
            return value
    if isinstance(where, Relational):
        return answer.value.subs(where.lhs, where.rhs)
    return S.NaN


def replaced(answer: ClosedForm, old: Symbol, new: Expr, extra: Boolean, facts: Facts) -> ClosedForm:
    """The answer with an auxiliary positive symbol written out, and one more condition."""
    condition = Region(facts).holds(answer.condition.xreplace({old: new}), extra).to_boolean()
    strip = answer.strip
    return replace(
        answer,
        value=shortened(answer.value).xreplace({old: new}),
        condition=condition,
        strip=None if strip is None else (strip[0].xreplace({old: new}), strip[1].xreplace({old: new})),
        special=tuple((w.xreplace({old: new}), v.xreplace({old: new})) for w, v in answer.special),
        steps=tuple(step.with_replaced(old, new) for step in answer.steps),
    )
