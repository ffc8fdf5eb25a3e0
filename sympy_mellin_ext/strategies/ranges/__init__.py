"""Ranges other than the half line, and changes of variable."""

from __future__ import annotations

from dataclasses import replace

from sympy import DiracDelta, S, SingularityFunction, oo, sinc
from sympy.logic.boolalg import And

from ...closed_form import ClosedForm
from ...gamma.sums import shortest_sum
from ...problem import Problem
from ...region import Region
from . import circular, finite, whole
from .changes import HalfLineChanges, plain_sinc, split
from .combined import added
from .split import BROKEN


class Ranges:
    """Everything that is not (0, oo), brought to (0, 1) or to the half line."""

    name = "ranges"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if problem.half_line:
            return None
        lower, upper = problem.lower, problem.upper
        if lower == upper:
            return ClosedForm(S.Zero, strategy=self.name)
        if lower.has_free(problem.variable) or upper.has_free(problem.variable):
            return problem.refuse("range", "the ends depend on the variable")
        if problem.integrand.has(DiracDelta, SingularityFunction):
            return problem.refuse("no kernel", "a distribution may sit where the range is cut")
        if (lower is oo or upper is -oo) or self._reversed(problem):
            answer = self._forward(problem.changed(problem.integrand, upper, lower))
            return None if answer is None else added(problem, [(S.NegativeOne, answer)])
        answer = self._forward(problem)
        if answer is None or problem.depth:
            return answer
        return replace(answer, value=shortest_sum(answer.value))

    @staticmethod
    def _reversed(problem: Problem) -> bool:
        gap = problem.upper - problem.lower
        return gap.is_extended_real is True and not gap.is_infinite and problem.facts.sign(gap) == -1

    @staticmethod
    def _forward(problem: Problem) -> ClosedForm | None:
        for end in (problem.lower, problem.upper):
            if not end.is_extended_real:
                return problem.refuse("range", "the end {} is not known to be real", end)
        found = finite.ordered(problem)
        if found is None:
            return problem.refuse("range", "which end is the lower one is not known")
        inner, condition = found
        answer = _dispatch(inner)
        if answer is None or condition is S.true:
            return answer
        region = Region(problem.facts).holds(And(answer.condition, condition)).to_boolean()
        return replace(answer, condition=region)


def _dispatch(problem: Problem) -> ClosedForm | None:
    lower, upper = problem.lower, problem.upper
    f, x = problem.integrand, problem.variable
    if problem.half_line:
        return finite.handed_on(problem, f, x)
    if f.has(sinc):
        return plain_sinc(problem)
    if lower is -oo and upper is oo:
        answer = whole.on_line(problem)
        if answer is None and f.has(*BROKEN):
            answer = split(problem)
        return answer
    if lower is not -oo and upper is not oo and f.has(*circular.CIRCULAR):
        answer = circular.on_quarters(problem)
        if answer is not None or finite.shown_divergent(problem):
            return answer
    if f.has(*BROKEN):
        return split(problem)
    if lower is -oo:
        return whole.on_left(problem)
    if upper is oo:
        return finite.on_tail(problem)
    return finite.on_finite(problem)


STRATEGIES = (Ranges(),)
CHANGES = (HalfLineChanges(),)
__all__ = ["CHANGES", "STRATEGIES", "HalfLineChanges", "Ranges"]
