"""Index 0: every term has at most one kernel, so that its transform is a Gamma product at once.

A single term is Ramanujan's master theorem itself; a sum is done by the finite parts of the total.

Sources: G. H. Hardy, Ramanujan: Twelve Lectures (1940), ch. XI; design of the conditions: R. B. Paris and
D. Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), ch. 2-3.
"""
from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from sympy import Eq, Expr, Max, Min, S, oo
from sympy.core.sorting import default_sort_key
from sympy.logic.boolalg import Boolean

from ..closed_form import ClosedForm, Step
from ..dirichlet import NoClosedForm
from ..gamma.shortest import positive_power
from ..matching import Term
from ..pieces import Piece
from ..problem import Problem
from ..region import Region, real_part
from ..steps import Total
from .finite_part import Divergence, Edge, converge, total_value
from .registry import attempt

_SUM_SOURCE = "D. Zagier, The Mellin transform and related analytic techniques (2006), section 1"
_THEOREM_SOURCE = "Hardy, Ramanujan: Twelve Lectures (1940), ch. XI"


class MasterTheorem:
    """Sums of powers, logarithms and one kernel each, on the half line."""

    name = "master theorem"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line:
            return problem.refuse("range", "({}, {}) is not the half line", problem.lower, problem.upper)
        terms = problem.terms
        if terms is None:
            return problem.refuse("no kernel", "a factor of {} is not in the table", problem.integrand)
        if not terms:
            return ClosedForm(S.Zero, strategy=self.name)
        if any(len(t.kernels) > 1 for t in terms):
            return problem.refuse("too many kernels", "a term has more than one kernel")
        answer = closed_form_of_terms(problem, terms, self.name)
        return None if answer is None else _with_collisions(problem, terms, answer)


def _with_collisions(problem: Problem, terms: Sequence[Term], answer: ClosedForm) -> ClosedForm:
    """Add the values where two roots of a denominator meet, so that partial fractions read oo - oo."""
    roots = list(
        dict.fromkeys(
            positive_power(k.product.scale, -1 / k.ratio) for t in terms for k in t.kernels if k.name == "power"
        )
    )
    if not any(root.free_symbols for root in roots):
        return answer
    special = list(answer.special)
    for i, first in enumerate(roots):
        for second in roots[:i]:
            for symbol in sorted(first.free_symbols | second.free_symbols, key=default_sort_key, reverse=True):
                gap = (first - second).expand()
                slope = gap.diff(symbol)
                if slope.has(symbol) or slope.is_zero:
                    continue
                point = (symbol - gap / slope).expand()
                if point.has(symbol) or not answer.value.subs(symbol, point).has(S.NaN, S.ComplexInfinity):
                    break
                met = attempt(problem.changed(problem.integrand.subs(symbol, point)))
                if met is not None and met.special == ():
                    special.append((Eq(symbol, point), met.value))
                break
    return replace(answer, special=tuple(special)) if len(special) > len(answer.special) else answer


def closed_form_of_terms(problem: Problem, terms: Sequence[Term], name: str) -> ClosedForm | None:
    """The closed form of a sum of terms with at most one kernel each."""
    sources = tuple(dict.fromkeys(k.source for t in terms for k in t.kernels if k.source))
    steps = tuple(
        Step(f"kernel {k.name}, transform in s", k.source, k.product, k)
        for t in terms
        for k in t.kernels
    )
    return closed_form_of_pieces(problem, [Piece.of_term(t) for t in terms], name, sources, steps)


def closed_form_of_pieces(
    problem: Problem,
    pieces: Sequence[Piece],
    name: str,
    sources: tuple[str, ...] = (),
    steps: tuple[Step, ...] = (),
) -> ClosedForm | None:
    """The closed form of a sum of pieces, with region, strip and values at removable singularities."""
    outcome = converge(pieces, problem.facts, problem.principal)
    if isinstance(outcome, Divergence):
        if outcome.proved:
            return problem.diverges("its behaviour at 0, at oo or at a pole between", outcome.infinity)
        if outcome.reason == "empty region":
            return problem.refuse(outcome.reason, "the conditions contradict one another")
        return problem.refuse(outcome.reason, "a kernel grows too fast, or cancels too much, for a Mellin transform")
    region, at_zero, at_infinity = outcome
    value = total_value(pieces)
    if value.has(S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity):
        return problem.refuse("diverges", "the formula is not finite")
    condition = region.to_boolean()
    if condition is S.false:
        return problem.refuse("empty region", "the conditions contradict one another")
    several = len(pieces) > 1
    reference = problem.reference or pieces[0].power
    total = Total(tuple(pieces), at_zero, at_infinity, reference)
    action, theorem = ("finite parts added", _SUM_SOURCE) if several else ("master theorem", _THEOREM_SOURCE)
    return ClosedForm(
        value,
        condition,
        strip_of(at_zero, at_infinity, reference),
        name,
        (*steps, Step(action, theorem, value, total)),
        (*sources, theorem),
        special_values(pieces, at_zero, at_infinity, region),
    )


def strip_of(at_zero: Edge, at_infinity: Edge, reference: Expr) -> tuple[Expr, Expr]:
    """Bounds of Re s for the transform of the integrand without ``x**reference``, ``reference = s - 1``."""
    lower = [real_part(reference - e) for e in at_zero.survivors]
    upper = [real_part(reference - e) for e in at_infinity.survivors]
    below = lower[0] if len(lower) == 1 else Max(*lower) if lower else -oo
    return below, upper[0] if len(upper) == 1 else Min(*upper) if upper else oo


def special_values(
    pieces: Sequence[Piece], at_zero: Edge, at_infinity: Edge, region: Region
) -> tuple[tuple[Boolean, Expr], ...]:
    """Values where poles of single pieces cancel inside the region: the formula reads oo - oo there."""
    special: list[tuple[Boolean, Expr]] = []
    for exponent in dict.fromkeys([*at_zero.cancelled, *at_infinity.cancelled]):
        gap = exponent + 1
        for symbol in sorted(gap.free_symbols, key=default_sort_key):
            slope = gap.diff(symbol)
            if slope.has(symbol) or slope.is_zero:
                continue
            point = (symbol - gap / slope).expand()
            inside = region.to_boolean().subs(symbol, point)
            if inside == False:  # noqa: E712 - SymPy Boolean
                break
            try:
                value = total_value([piece.subs(symbol, point) for piece in pieces])
            except NoClosedForm:
                break
            where = Eq(symbol, point)
            if where is not S.false and not value.has(S.NaN, S.ComplexInfinity):
                special.append((where, value))
            break
    return tuple(special)


STRATEGIES = (MasterTheorem(),)
