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

from sympy import Add, Eq, Expr, Gt, Lt, Max, Min, Ne, Piecewise, S, oo
from sympy.core.sorting import default_sort_key
from sympy.logic.boolalg import Boolean

from ..behaviour import Convergence, converge_product
from ..closed_form import ClosedForm, Step
from ..matching import Term
from ..pieces import Piece
from ..problem import Problem
from ..region import Facts, Region, real_part
from ..steps import Contour
from .finite_part import total_value
from .lemmas import weber
from .parseval import parseval
from .registry import attempt
from .subtraction import subtract_head
from .tidy import tidy
from .totals import converge_total

_SOURCE = "DLMF 1.14.39"
# So many values at removable singularities are worked out.
_MOST_SPECIAL = 4


class MellinBarnes:
    """Sums of terms with at most two kernels each, on the half line."""

    name = "Mellin-Barnes"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line:
            return None
        terms = problem.terms
        if terms is None or all(len(t.kernels) < 2 for t in terms):
            return None
        if any(len(t.kernels) > 2 and weber(t, problem.facts) is None for t in terms):
            return problem.refuse("too many kernels", "a term has more than two kernels")
        return closed_form_of_products(problem, terms, self.name)


def closed_form_of_products(problem: Problem, terms: Sequence[Term], name: str) -> ClosedForm | None:
    """The closed form of a sum of terms with at most two kernels each."""
    facts = problem.facts
    parts: Sequence[Term] = terms
    gaps: list[Expr] = []
    if len(terms) > 1:
        total = converge_total(terms, facts)
        if isinstance(total, str):
            return problem.refuse(total, "the sum at 0 or at oo")
        converged, gaps = total.convergence, total.gaps()
        if total.hits():
            split = _regularised(terms, facts)
            if split is None:
                return problem.refuse("diverges", "terms with poles that cancel, and no way to part them")
            parts = split
    else:
        outcome = converge_product(terms[0], facts)
        if isinstance(outcome, str):
            detail = f"the product of {_names(terms[0])} at 0 or at oo"
            return problem.diverges(detail) if outcome == "divergence" else problem.refuse(outcome, detail)
        converged = outcome
    values = []
    double = [t for t in parts if len(t.kernels) > 1]
    for term in double:
        value = parseval(term, facts, converged.region) if len(term.kernels) == 2 else weber(term, facts)
        if value is None:
            return problem.refuse("too many kernels", f"no closed form of the Mellin-Barnes integral of {_names(term)}")
        values.append(value)
    if len(double) < len(parts):
        values.append(total_value([Piece.of_term(t) for t in parts if len(t.kernels) < 2]))
    value = values[0] if len(values) == 1 else tidy(Add(*values))
    if value.has(S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity):
        return problem.refuse("diverges", "the formula is not finite")
    special, region = _special_values(problem, gaps, converged.region)
    for pieces in sorted(value.atoms(Piecewise), key=default_sort_key):
        where = pieces.args[-1][1]
        if isinstance(where, Lt | Gt):
            # neither branch has a value where they meet
            region = region.holds(Ne(where.lhs, where.rhs))
    condition = region.to_boolean()
    if condition is S.false:
        return problem.refuse("empty region", "the conditions contradict one another")
    kernels = list(dict.fromkeys(k for t in terms for k in t.kernels))
    if all(len(t.kernels) < 3 for t in parts):
        last = Step("two transforms joined to one contour integral", _SOURCE, value, Contour(tuple(parts)))
    else:
        last = Step("Weber's second exponential integral", "DLMF 10.22.67", value)
    sources = tuple(dict.fromkeys(k.source for k in kernels if k.source))
    return ClosedForm(
        value,
        condition,
        _strip(converged, problem.reference or terms[0].power),
        name,
        (
            *(Step(f"kernel {k.name}, its transform", k.source, k.product, k) for k in kernels),
            last,
        ),
        (*sources, _SOURCE),
        special,
    )


def _special_values(
    problem: Problem, gaps: Sequence[Expr], region: Region
) -> tuple[tuple[tuple[Boolean, Expr], ...], Region]:
    """Values where poles of single terms meet and cancel; where there is none, the place is left out."""
    special: list[tuple[Boolean, Expr]] = []
    for gap in gaps:
        where = None
        for symbol in sorted(gap.free_symbols, key=default_sort_key):
            slope = gap.diff(symbol)
            if slope.has(symbol) or slope.is_zero:
                continue
            point = (symbol - gap / slope).expand()
            met = None
            if len(special) < _MOST_SPECIAL:
                met = attempt(problem.changed(problem.integrand.subs(symbol, point)))
            if met is not None and not met.special:
                where = Eq(symbol, point)
                special.append((where, met.value))
            break
        if where is None:
            region = region.holds(Ne(gap, 0))
    return tuple(special), region


def _regularised(terms: Sequence[Term], facts: Facts) -> list[Term] | None:
    """Products that diverge at 0, without the first terms of a kernel there; those terms by themselves."""
    parts: list[Term] = []
    for term in terms:
        if len(term.kernels) != 2 or not isinstance(converge_product(term, facts), str):
            parts.append(term)
            continue
        split = subtract_head(term, facts)
        if split is None:
            return None
        rest, heads = split
        parts += [rest, *heads]
    return parts


def _names(term: Term) -> str:
    return " and ".join(k.name for k in term.kernels)


def _strip(found: Convergence, reference: Expr) -> tuple[Expr, Expr]:
    """Bounds of Re s for the integrand without ``x**reference``, ``reference = s - 1``."""
    lower = [real_part((reference - e).expand()) for e in found.at_zero]
    upper = [real_part((reference - e).expand()) for e in found.at_infinity]
    return (Max(*lower) if lower else -oo), (Min(*upper) if upper else oo)


STRATEGIES = (MellinBarnes(),)

__all__ = ["MellinBarnes", "closed_form_of_products"]
