"""Series that no table holds: phi from the differential equation that the integrand's factor satisfies."""
from __future__ import annotations

from sympy import Expr, Mul, S, Symbol, log

from ..closed_form import ClosedForm, Step
from ..matching.monomials import monomial
from ..pieces import Piece
from ..problem import Problem
from .master_theorem import closed_form_of_pieces

_SOURCE = "Koepf, Power series in computer algebra, JSC 13 (1992); Hardy, Ramanujan: Twelve Lectures (1940), ch. XI"


class TaylorSeries:
    """``C*x**p*log(x)**k*f(x)`` with f given by a formula whose Taylor coefficients have a two-term recurrence."""

    name = "Taylor coefficients"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line:
            return None
        x = problem.variable
        coefficient, power, logs, f = split_front(problem.integrand, x)
        if f is S.One:
            return None
        from ..series import taylor_transform

        found = taylor_transform(f, x, problem.facts)
        if found is None:
            return problem.refuse("no kernel", "no two-term recurrence for the Taylor coefficients")
        piece = Piece(coefficient, power, logs, found.product)
        steps = tuple(Step(action, _SOURCE, result) for action, result in found.steps)
        return closed_form_of_pieces(problem, [piece], self.name, (_SOURCE,), steps)


def split_front(integrand: Expr, x: Symbol) -> tuple[Expr, Expr, int, Expr]:
    """``C*x**p*log(x)**k`` in front, and the rest of a product."""
    coefficient, power, logs, rest = S.One, S.Zero, 0, []
    for factor in Mul.make_args(integrand):
        single = monomial(factor, x)
        if single is not None:
            coefficient, power = coefficient * single[0], power + single[1]
        elif factor == log(x):
            logs += 1
        elif factor.is_Pow and factor.base == log(x) and factor.exp.is_Integer and factor.exp.is_positive:
            logs += int(factor.exp)
        else:
            rest.append(factor)
    return coefficient, power, logs, Mul(*rest)


STRATEGIES = (TaylorSeries(),)
