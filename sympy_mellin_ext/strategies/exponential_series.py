"""Exponential series: rational functions of exponentials times powers, logarithms, sines and other pieces.

``f = sum c_n*exp(-b_n*x)`` is integrated term by term: Gamma(s) times a Dirichlet series, where the series
converges absolutely; beyond, by analytic continuation in s and in the fugacity, up to the first singularity
on the half line.  The strip follows from the order of the total at x = 0.

Sources: DLMF 25.5.1-6, 25.11.25-27, 25.12.11-15, 25.14.5; D. Zagier, The Mellin transform and related
analytic techniques (2006), section 1; P. Flajolet, X. Gourdon, P. Dumas, Mellin transforms and asymptotics
(1995).
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from sympy import Add, Eq, Expr, S, Symbol, cos, pi

from ..closed_form import ClosedForm, Step
from ..dirichlet import NoClosedForm
from ..dirichlet.forms import shortest
from ..dirichlet.reader import SeriesReader, has_exponential_series
from ..matching.waves import Draft, finish
from ..pieces import Piece
from ..problem import Problem
from ..region import Region
from ..steps import SeriesTransform
from .finite_part import Edge
from .master_theorem import closed_form_of_pieces, special_values
from .registry import attempt

if TYPE_CHECKING:
    from ..dirichlet.expansion import Expansion

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
            return problem.refuse("no kernel", "{} is not a series of exponentials", problem.integrand)
        try:
            expansions = [expand(d, problem.facts) for d in drafts if d.series]
            answer = _sum_of_parts(problem, expansions, [d for d in drafts if not d.series], self.name)
        except (Unsupported, NoClosedForm) as reason:
            return problem.refuse("no kernel", str(reason))
        return None if answer is None else _with_meetings(problem, drafts, answer)


def _with_meetings(problem: Problem, drafts: list[Draft], answer: ClosedForm) -> ClosedForm:
    """Add the values where a frequency vanishes or conjugate phases meet: the formula may read 0/0."""
    points: dict[Symbol, list[Expr]] = {}
    for d in drafts:
        frequencies = [c for _, c, _ in d.trig]
        for i, c in enumerate(frequencies):
            for gap in (
                c,
                *(c + other for other in frequencies[:i]),
                *(c - other for other in frequencies[:i]),
            ):
                for v in sorted(gap.free_symbols, key=str):
                    slope = gap.diff(v)
                    if slope.is_zero is False and not slope.has(v):
                        points.setdefault(v, []).append((v - gap / slope).expand())
                        break
        for factor in d.series:
            for _, c in factor.base.terms:
                for node in sorted(c.atoms(cos), key=str):
                    if isinstance(node.args[0], Symbol):
                        points.setdefault(node.args[0], []).extend((S.Zero, pi))
    special = list(answer.special)
    for v, places in points.items():
        for point in dict.fromkeys(places):
            where = Eq(v, point)
            if where == False or answer.condition.subs(v, point) == False:  # noqa: E712 - SymPy Booleans
                continue
            if not answer.value.subs(v, point).has(S.NaN, S.ComplexInfinity):
                continue
            met = attempt(problem.changed(problem.integrand.subs(v, point)))
            if met is not None and met.special == ():
                special.append((where, met.value))
    return replace(answer, special=tuple(special)) if len(special) > len(answer.special) else answer


def _sum_of_parts(
    problem: Problem, expansions: list[Expansion], plain: list[Draft], name: str
) -> ClosedForm | None:
    """Dirichlet series, Beta integrals and logarithms, each part convergent by itself."""
    parts: list[ClosedForm] = []
    logarithmic = [e for e in expansions if e.logarithms]
    if logarithmic:
        from ..dirichlet.logarithms import logarithmic_value

        value, condition = logarithmic_value(logarithmic, problem.facts)
        where = Region(problem.facts).holds(condition)
        if where.empty:
            return problem.refuse("empty region", "the conditions contradict one another")
        parts.append(ClosedForm(value, where.to_boolean(), None, name, (), (_SOURCE,)))
    plain = [*plain, *(d.times(Draft(power=e.power, logs=e.logs)) for e in expansions for d in e.plain)]
    powers = [e for e in expansions if e.beta]
    if powers:
        from ..dirichlet.beta import closed_form_of_beta, is_finite

        finite = [d for d in plain if is_finite(d, powers[0].ratio)]
        answer = closed_form_of_beta(problem, powers, finite, name)
        if answer is None:
            return None
        parts.append(answer)
        plain = [d for d in plain if d not in finite]
    if plain or any(e.rays for e in expansions):
        answer = _series(problem, expansions, plain, name)
        if answer is None:
            return None
        parts.append(answer)
    return _finished(parts[0] if len(parts) == 1 else _added(problem, parts, name)) if parts else None


def _added(problem: Problem, parts: list[ClosedForm], name: str) -> ClosedForm:
    special = []
    for i, part in enumerate(parts):
        for where, value in part.special:
            others = [p.value.subs(where.lhs, where.rhs) for j, p in enumerate(parts) if j != i]
            special.append((where, Add(value, *others)))
    region = Region(problem.facts).holds(*(p.condition for p in parts))
    return ClosedForm(
        Add(*(p.value for p in parts)), region.to_boolean(), None, name,
        tuple(s for p in parts for s in p.steps), tuple(dict.fromkeys(s for p in parts for s in p.sources)),
        tuple(special),
    )  # fmt: skip


def _series(
    problem: Problem, expansions: list[Expansion], plain: list[Draft], name: str
) -> ClosedForm | None:
    from ..dirichlet.gather import gather

    pieces, rest = gather(expansions)
    terms = finish([*plain, *rest], problem.facts)
    if terms is None:
        return problem.refuse("no kernel", "a factor is not in the table")
    if any(len(t.kernels) > 1 for t in terms):
        return problem.refuse("too many kernels", "a term has more than one kernel")
    pieces = [*pieces, *(Piece.of_term(t) for t in terms)]
    if not pieces:
        return ClosedForm(S.Zero, strategy=name)
    steps = [
        Step("series of exponentials, transform in s", _SOURCE, SeriesTransform(p))
        for p in pieces
        if p.dirichlet
    ]
    answer = closed_form_of_pieces(problem, pieces, name, (_SOURCE,), tuple(steps))
    return None if answer is None else _with_removable(problem, pieces, answer)


def _with_removable(problem: Problem, pieces: list[Piece], answer: ClosedForm) -> ClosedForm:
    """Add the values where poles of single Dirichlet series cancel, so that their formula reads oo - oo."""
    exponents = [
        (p.power - p.ratio * u).expand()
        for p in pieces
        for d in p.dirichlet
        for u in d.removable()  # type: ignore[attr-defined]
    ]
    if not any(e.free_symbols for e in exponents):
        return answer
    region = Region(problem.facts).holds(answer.condition)
    special = special_values(pieces, Edge(cancelled=exponents), Edge(), region)
    known = [where for where, _ in answer.special]
    return replace(answer, special=(*answer.special, *(s for s in special if s[0] not in known)))


def _finished(answer: ClosedForm) -> ClosedForm:
    return replace(
        answer,
        value=shortest(answer.value),
        special=tuple((where, shortest(v)) for where, v in answer.special),
    )


STRATEGIES = (ExponentialSeries(),)
