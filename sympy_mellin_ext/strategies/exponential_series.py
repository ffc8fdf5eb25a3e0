"""Exponential series: rational functions of exponentials times powers, logarithms, sines and other pieces.

``f = sum c_n*exp(-b_n*x)`` is integrated term by term: Gamma(s) times a Dirichlet series, where the series converges
absolutely; beyond, by analytic continuation in s and in the fugacity up to the first singularity on the half line.
The strip follows from the order of the total at x = 0.

Sources: DLMF 25.5.1-6, 25.11.25-27, 25.12.11-15, 25.14.5; D. Zagier, The Mellin transform and related analytic
techniques (2006), section 1; P. Flajolet, X. Gourdon, P. Dumas, Mellin transforms and asymptotics (1995).
"""
from __future__ import annotations

from dataclasses import replace

from sympy import Expr, Symbol

from ..closed_form import ClosedForm, Step
from ..dirichlet import NoClosedForm
from ..dirichlet.forms import shortest
from ..dirichlet.reader import SeriesReader, has_exponential_series
from ..matching.waves import finish
from ..pieces import Piece
from ..problem import Problem
from ..region import Region
from .finite_part import Edge
from .master_theorem import closed_form_of_pieces, special_values

_SOURCE = "DLMF 25.5.1, 25.11.25, 25.12.11, 25.14.5"


class ExponentialSeries:
    """Planck, Bose and Fermi integrals, hyperbolic functions and their logarithms."""

    name = "exponential series"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line or not has_exponential_series(problem.integrand, problem.variable):
            return None
        from ..dirichlet.expansion import Unsupported, expand

        drafts = SeriesReader(problem.variable, problem.facts).read(problem.integrand)
        if drafts is None:
            return problem.refuse("no kernel", f"{problem.integrand} is not a series of exponentials")
        try:
            expansions = [expand(d, problem.facts) for d in drafts if d.series]
            plain = [d for d in drafts if not d.series]
            if any(e.beta for e in expansions):
                from ..dirichlet.beta import closed_form_of_beta

                return closed_form_of_beta(problem, expansions, plain, self.name)
            return _closed_form(problem, expansions, plain, self.name)
        except Unsupported as reason:
            return problem.refuse("no kernel", str(reason))
        except NoClosedForm as reason:
            return problem.refuse("no kernel", str(reason))


def _closed_form(problem: Problem, expansions: list, plain: list, name: str) -> ClosedForm | None:
    from ..dirichlet.gather import gather

    pieces, rest = gather(expansions)
    terms = finish([*plain, *rest], problem.facts)
    if terms is None:
        return problem.refuse("no kernel", "a factor is not in the table")
    if any(len(t.kernels) > 1 for t in terms):
        return problem.refuse("too many kernels", "a term has more than one kernel")
    pieces = [*pieces, *(Piece.of_term(t) for t in terms)]
    if not pieces:
        return None
    u = Symbol("s")
    steps = [
        Step("series of exponentials, transform in s", _SOURCE, _transform(p, u)) for p in pieces if p.dirichlet
    ]
    answer = closed_form_of_pieces(problem, pieces, name, (_SOURCE,), tuple(steps))
    return None if answer is None else _finished(_with_removable(problem, pieces, answer))


def _with_removable(problem: Problem, pieces: list[Piece], answer: ClosedForm) -> ClosedForm:
    """Add the values where poles of single Dirichlet series cancel, so that their formula reads oo - oo."""
    exponents = [
        (p.power - p.ratio * u).expand() for p in pieces for d in p.dirichlet for u in d.removable()  # type: ignore[attr-defined]
    ]
    if not any(e.free_symbols for e in exponents):
        return answer
    region = Region(problem.facts).holds(answer.condition)
    special = special_values(pieces, Edge(cancelled=exponents), Edge(), region)
    known = [where for where, _ in answer.special]
    return replace(answer, special=(*answer.special, *(s for s in special if s[0] not in known)))


def _finished(answer: ClosedForm) -> ClosedForm:
    return replace(
        answer, value=shortest(answer.value), special=tuple((where, shortest(v)) for where, v in answer.special)
    )


def _transform(piece: Piece, u: Symbol) -> Expr:
    assert piece.product is not None
    value = piece.constant * piece.product.as_expr(u)
    for factor in piece.dirichlet:
        value = value * factor.at(u)
    return value


STRATEGIES = (ExponentialSeries(),)
