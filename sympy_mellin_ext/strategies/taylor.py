"""Series that no table holds: phi from a differential equation, or built on zeta functions."""
from __future__ import annotations

from sympy import Add, Expr, Function, Mul, S, Symbol, hyper, log

from ..closed_form import ClosedForm, Step
from ..gamma.shortest import collect_powers
from ..matching.monomials import monomial
from ..pieces import Piece
from ..problem import Problem
from ..region import Region, real_part
from .master_theorem import closed_form_of_pieces

_SOURCE = "Koepf, Power series in computer algebra, JSC 13 (1992)"
_THEOREM = "Hardy, Ramanujan: Twelve Lectures (1940), ch. XI"


class TaylorSeries:
    """``C*x**p*log(x)**k*f(x)`` with f given by a formula whose Taylor coefficients have a two-term recurrence.

    The recurrence comes from a differential equation that annihilates f, and from equal initial terms.
    """

    def __init__(self, name: str, first: bool) -> None:
        self.name = name
        self.first = first

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if self.first and not _shares_argument(problem.integrand, problem.variable):
            return None
        from ..series import taylor_transform

        unit = problem.lower is S.Zero and problem.upper is S.One
        if not (problem.half_line or unit):
            return None
        x = problem.variable
        coefficient, power, logs, f = split_front(problem.integrand, x)
        if f is S.One:
            return None
        if unit:
            return self._on_unit_interval(problem, coefficient, power, logs, f)
        found = taylor_transform(f, x, problem.facts)
        if found is None:
            return problem.refuse("no kernel", "no two-term recurrence for the Taylor coefficients")
        piece = Piece(coefficient, power, logs, found.product)
        steps = tuple(Step(action, _SOURCE, result) for action, result in found.steps)
        return closed_form_of_pieces(problem, [piece], self.name, (_SOURCE,), steps)

    def _on_unit_interval(
        self, problem: Problem, coefficient: Expr, power: Expr, logs: int, f: Expr
    ) -> ClosedForm | None:
        """Term by term on (0, 1): a generalised hypergeometric function at one point for each interlaced series."""
        from ..inverse import named_pfq
        from ..series import hypergeometric_pieces

        series = None if logs else hypergeometric_pieces(f, problem.variable, problem.facts)
        if series is None:
            return None
        region, total = Region(problem.facts), S.Zero
        for part in series:
            region = region.positive(real_part(part.exponent + power + 1))
            if len(part.upper) == len(part.lower) + 1 and part.argument == 1:
                region = region.positive(real_part(Add(*part.lower) - Add(*part.upper)) + 1)
            moment = part.moment(power + 1)
            for h in moment.atoms(hyper):
                named = named_pfq(tuple(h.ap), tuple(h.bq), h.argument, problem.facts)
                if named is not None:
                    moment = moment.xreplace({h: named})
            total += moment
        condition = region.to_boolean()
        if region.empty or condition is S.false:
            return problem.refuse("diverges", "at 0 or at 1")
        value = collect_powers(coefficient * total)
        steps = (Step("integrated term by term", "DLMF 16.5.2", value),)
        return ClosedForm(value, condition, None, self.name, steps, (_SOURCE, "DLMF 16.5.2"))


class ZetaCoefficients:
    """``C*x**p*f(x)`` with f a digamma, loggamma, polygamma or Hurwitz zeta function less its leading terms."""

    name = "zeta coefficients"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        from ..series import zeta_transform

        if not problem.half_line:
            return None
        x = problem.variable
        coefficient, power, logs, f = split_front(problem.integrand, x)
        found = None if logs else zeta_transform(f, x, problem.facts)
        if found is None:
            return None
        u = power + 1
        region = Region(problem.facts).positive(real_part(u) - found.lower, found.upper - real_part(u))
        if region.empty:
            return problem.diverges("its behaviour at 0 or at oo")
        value = collect_powers(coefficient * found.at(u))
        if value.has(S.NaN, S.ComplexInfinity):
            return problem.refuse("no kernel", "the formula is not finite at a pole of the transform")
        reference = S.Zero if problem.reference is None else problem.reference - power
        strip = (found.lower + reference, found.upper + reference)
        return ClosedForm(
            value, region.to_boolean(), strip, self.name, (Step("phi is built on zeta", found.source, value),),
            (found.source, _THEOREM),
        )  # fmt: skip


def _shares_argument(integrand: Expr, x: Symbol) -> bool:
    """Whether two functions of one argument are multiplied: then one Gamma product beats a sum of series."""
    seen = set()
    for factor in Mul.make_args(integrand):
        base, exponent = factor.as_base_exp()
        if not isinstance(base, Function) or not base.args[-1].has_free(x):
            continue
        if base.args[-1] in seen or exponent == 2:
            return True
        seen.add(base.args[-1])
    return False


def split_front(integrand: Expr, x: Symbol) -> tuple[Expr, Expr, int, Expr]:
    """``C*x**p*log(x)**k`` in front, and the rest of a product."""
    coefficient, power, logs, rest = S.One, S.Zero, 0, []
    for factor in Mul.make_args(integrand):
        single = monomial(factor, x)
        if single is not None:
            coefficient, power = coefficient * single[0], power + single[1]
        elif type(factor) is log and factor.args[0] == x:
            logs += 1
        elif _is_log_power(factor, x):
            logs += int(factor.exp)
        else:
            rest.append(factor)
    return coefficient, power, logs, Mul(*rest)


def _is_log_power(factor: Expr, x: Symbol) -> bool:
    if not factor.is_Pow or not factor.exp.is_Integer or factor.exp < 0:
        return False
    return type(factor.base) is log and bool(factor.base.args[0] == x)


STRATEGIES = (ZetaCoefficients(), TaylorSeries("Taylor coefficients of one argument", True))
LATER = (TaylorSeries("Taylor coefficients", False),)
