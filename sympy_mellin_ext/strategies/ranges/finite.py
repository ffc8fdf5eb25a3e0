"""Any range brought to (0, 1) or to the half line: scaling, shift, inversion, x = exp(-t)."""

from __future__ import annotations

from dataclasses import replace

from sympy import Dummy, Expr, Gt, S, Symbol, acos, asin, exp, oo, sqrt
from sympy.logic.boolalg import Boolean

from ...closed_form import ClosedForm, Step
from ...problem import Problem
from ...region import Facts
from ...steps import CHANGE, SYMMETRY, Question
from ..registry import MAX_DEPTH, attempt
from .combined import added, replaced
from .unit import solve_unit


def handed_on(
    problem: Problem, integrand: Expr, x: Symbol, lower: Expr = S.Zero, upper: Expr = oo
) -> ClosedForm | None:
    """The changed problem, with another variable, given back to the registry.

    It must be equivalent to the problem or a part of its range: where it is shown to diverge, so does the whole.
    """
    if problem.depth >= MAX_DEPTH:
        return None
    inner = replace(problem.changed(integrand, lower, upper), variable=x)
    seen = len(problem.diagnosis.proved) if problem.diagnosis is not None else 0
    answer = attempt(inner)
    if answer is not None:
        question = Step("integral to be done", CHANGE, subject=Question(integrand, (x, lower, upper)))
        return replace(answer, steps=(question, *answer.steps))
    if problem.diagnosis is not None and inner.depth in problem.diagnosis.proved[seen:]:
        return problem.diverges("after a change of variable, or over a part of the range")
    return answer


def shown_divergent(problem: Problem) -> bool:
    """Whether somebody has shown that this integral diverges; known only where refusals are collected."""
    return problem.diagnosis is not None and problem.depth in problem.diagnosis.proved


def fresh(problem: Problem, **assumptions: bool) -> Dummy:
    """A new variable of integration."""
    return Dummy(problem.variable.name, **assumptions)


def doubled(problem: Problem, answer: ClosedForm | None, factor: Expr, action: str) -> ClosedForm | None:
    """``factor`` times an answer."""
    return None if answer is None else added(
        problem, [(factor, answer)], Step(action, SYMMETRY if factor != 1 else CHANGE)
    )


def on_unit(problem: Problem, integrand: Expr, x: Symbol) -> ClosedForm | None:
    """``int integrand dx`` over (0, 1): directly, under x -> 1 - x, or by ``x = exp(-t)``."""
    answer = solve_unit(problem, integrand, x)
    if answer is None and not shown_divergent(problem):
        answer = solve_unit(problem, integrand.xreplace({x: 1 - x}), x)
    if answer is None and integrand.has(acos, asin):
        # x = sqrt(1 - y): acos(x) = asin(sqrt(y))
        y = sqrt(1 - x)
        keep = Dummy()
        inner = integrand.xreplace({acos(x): keep}).xreplace({x: y}).xreplace({keep: asin(sqrt(x))}) / (2 * y)
        answer = solve_unit(problem, inner, x)
    if answer is not None or shown_divergent(problem):
        return answer
    t = fresh(problem, positive=True)
    answer = handed_on(problem, integrand.xreplace({x: exp(-t)}) * exp(-t), t)
    if answer is None and (problem.lower is not S.Zero or problem.upper is not S.One):
        # for strategies that know (0, 1) themselves
        return handed_on(problem, integrand, x, S.Zero, S.One)
    return doubled(problem, answer, S.One, "substitution x = exp(-t)")


def on_finite(problem: Problem) -> ClosedForm | None:
    """(a, b) by ``x = a + (b - a)*t``."""
    f, x, a, b = problem.integrand, problem.variable, problem.lower, problem.upper
    t = fresh(problem, positive=True)
    if a is S.Zero:
        return (
            on_unit(problem, f.xreplace({x: b * t}) * b, t)
            if b is not S.One
            else on_unit(problem, f.xreplace({x: t}), t)
        )
    if (a + b).expand() is S.Zero:
        answer = _symmetric(problem, t)
        if answer is not None:
            return answer
    width = (b - a).expand()
    if width.is_number:
        return on_unit(problem, f.xreplace({x: a + width * t}) * width, t)
    w = Dummy("w", positive=True)
    if b.is_Symbol and not a.has_free(b):
        inner, table = f.xreplace({x: a + w * t}), {b: a + w}
    elif a.is_Symbol and not b.has_free(a):
        inner, table = f.xreplace({x: b - w + w * t}), {a: b - w}
    else:
        return on_unit(problem, f.xreplace({x: a + width * t}) * width, t)
    answer = on_unit(problem, inner.xreplace(table) * w, t)
    return None if answer is None else replaced(answer, w, width, S.true, problem.facts)


def _symmetric(problem: Problem, t: Symbol) -> ClosedForm | None:
    """(-b, b) for an even or an odd integrand: (0, b), whose half must converge by itself."""
    f, x, b = problem.integrand, problem.variable, problem.upper
    y = fresh(problem, real=True)
    right, left = f.xreplace({x: y}), f.xreplace({x: -y})
    for factor, other in ((2, left), (0, -left)):
        if right == other:
            answer = on_unit(problem, f.xreplace({x: b * t}) * b, t)
            return doubled(problem, answer, S(factor), "even integrand" if factor else "odd integrand")
    return None


def on_tail(problem: Problem) -> ClosedForm | None:
    """(a, oo): ``x = a/t`` for positive a, else and otherwise ``x = a + t``."""
    f, x, a = problem.integrand, problem.variable, problem.lower
    t = fresh(problem, positive=True)
    if problem.facts.sign(a) == 1:
        answer = solve_unit(problem, f.xreplace({x: a / t}) * a / t**2, t)
        if answer is not None:
            return answer
    answer = handed_on(problem, f.xreplace({x: a + t}), t)
    if answer is None and a is S.One:
        answer = handed_on(problem, f.xreplace({x: exp(t)}) * exp(t), t)
    return doubled(problem, answer, S.One, "shift of the lower end to 0")


def ordered(problem: Problem) -> tuple[Problem, Boolean] | None:
    """The problem with what ``lower < upper`` says taken as known, and that condition; None where it is false."""
    a, b = problem.lower, problem.upper
    if a is -oo or b is oo:
        return problem, S.true
    gap = (b - a).expand()
    if not gap.is_extended_real:
        return None
    known = problem.facts.sign(gap)
    if known == 1:
        return problem, S.true
    if known is not None:
        return None
    condition = Gt(b, a)
    return replace(problem, facts=Facts((*problem.facts.given, condition))), condition
