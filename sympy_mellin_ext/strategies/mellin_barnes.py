"""Index 1: a product of two kernels is one Mellin-Barnes integral, done by the inverse transform.

With G1, G2 the transforms of two kernels (Parseval's formula for Mellin transforms),

    int x**(s-1) g1(x**r1) g2(x**r2) dx = 1/(2*pi*I) int G1(u) G2((s - r1*u)/r2)/abs(r2) du.

Where the integral converges is decided from the kernels' behaviour in x; a value proved where the contour
exists continues analytically through that connected region.

Sources: DLMF 1.14.39 (Parseval's formula), 16.17.1; R. B. Paris and D. Kaminski, Asymptotics and
Mellin-Barnes Integrals (2001), section 3.3.
"""
from __future__ import annotations

from collections.abc import Sequence

from sympy import Add, Expr, Max, Min, S, oo
from sympy.logic.boolalg import Boolean

from ..behaviour import INFINITE_END, ZERO_END, Convergence, converge_product
from ..closed_form import ClosedForm, Step
from ..matching import Term, read_terms
from ..pieces import Piece
from ..problem import Problem
from ..region import Facts, Region, real_part
from .master_theorem import closed_form_of_pieces
from .parseval import parseval
from .subtraction import subtract_head

_SOURCE = "DLMF 1.14.39"


class MellinBarnes:
    """Sums of terms with at most two kernels each, on the half line."""

    name = "Mellin-Barnes"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line:
            return None
        terms = read_terms(problem.integrand, problem.variable, problem.facts)
        if terms is None or all(len(t.kernels) < 2 for t in terms):
            return None
        if any(len(t.kernels) > 2 for t in terms):
            return problem.refuse("too many kernels", "a term has more than two kernels")
        return closed_form_of_products(problem, terms, self.name)


def closed_form_of_products(problem: Problem, terms: Sequence[Term], name: str) -> ClosedForm | None:
    """The closed form of a sum of terms with at most two kernels each."""
    facts = problem.facts
    single = [t for t in terms if len(t.kernels) < 2]
    double: list[tuple[Term, Convergence]] = []
    for term in terms:
        if len(term.kernels) < 2:
            continue
        converged = converge_product(term, facts)
        if isinstance(converged, str):
            split = subtract_head(term, facts) if len(terms) > 1 and converged == "diverges" else None
            if split is None:
                return problem.refuse(converged, f"the product of {_names(term)} at 0 or at oo")
            term, converged, heads = split
            single += heads
        double.append((term, converged))
    region = Region(facts)
    for _, converged in double:
        region = region.meet(converged.region)
    rest = None
    if single:
        rest = closed_form_of_pieces(problem, [Piece.of_term(t) for t in single], name)
        if rest is None:
            return None
        region = region.holds(rest.condition)
    if region.empty:
        return problem.refuse("diverges", "the terms converge nowhere together")
    values = [] if rest is None else [rest.value]
    for term, _ in double:
        value = parseval(term, facts, region)
        if value is None:
            return problem.refuse("no kernel", f"no closed form of the Mellin-Barnes integral of {_names(term)}")
        values.append(value)
    total = values[0] if len(values) == 1 else Add(*values)
    condition = region.to_boolean()
    if condition is S.false:
        return problem.refuse("empty region", "the conditions contradict one another")
    kernels = [k for t, _ in double for k in t.kernels]
    sources = tuple(dict.fromkeys(k.source for k in kernels if k.source))
    special: tuple[tuple[Boolean, Expr], ...] = ()
    if rest is not None and rest.special:
        others = Add(*values[1:])
        special = tuple((where, value + others) for where, value in rest.special)
    return ClosedForm(
        total,
        condition,
        _strip([c for _, c in double], problem.reference or double[0][0].power, rest),
        name,
        (
            *(Step(f"kernel {k.name}, its transform", k.source) for k in kernels),
            Step("two transforms joined to one contour integral", _SOURCE, total),
        ),
        (*sources, _SOURCE),
        special,
    )


def _names(term: Term) -> str:
    return " and ".join(k.name for k in term.kernels)


def _strip(
    found: Sequence[Convergence], reference: Expr, rest: ClosedForm | None
) -> tuple[Expr, Expr]:
    """Bounds of Re s for the integrand without ``x**reference``, ``reference = s - 1``."""
    lower = [real_part((reference - e).expand()) for c in found for e in c.at_zero]
    upper = [real_part((reference - e).expand()) for c in found for e in c.at_infinity]
    if rest is not None and rest.strip is not None:
        lower.append(rest.strip[0])
        upper.append(rest.strip[1])
    return (Max(*lower) if lower else -oo), (Min(*upper) if upper else oo)


STRATEGIES = (MellinBarnes(),)

__all__ = ["INFINITE_END", "ZERO_END", "Facts", "MellinBarnes", "closed_form_of_products"]
