"""Sums of products of kernels: where the total converges, with terms of its expansions that cancel.

Sources: D. Zagier, The Mellin transform and related analytic techniques (2006), section 1; P. Flajolet,
X. Gourdon, P. Dumas, Mellin transforms and asymptotics: harmonic sums, TCS 144 (1995), section 2.
"""
from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import islice, product

from sympy import Expr, Rational, S

from ..behaviour import INFINITE_END, ZERO_END, Convergence, restrict_kernels
from ..matching import Kernel, Term
from ..pieces import Piece
from ..region import Facts, Region, real_part
from .finite_part import vanishes

# So many terms of each expansion are looked at.
_RUNGS = 5

# exponent -> coefficients of log(x)**j
Expansion = dict[Expr, list[Expr]]


@dataclass
class Total:
    """The region of a sum, the exponents that count at each end, and those that cancel."""

    convergence: Convergence
    cancelled: list[Expr] = field(default_factory=list)

    def gaps(self) -> list[Expr]:
        """Expressions whose zeros in the region are poles of single terms."""
        gaps = dict.fromkeys((e + 1).expand() for e in self.cancelled)
        return [g for g in gaps if g.free_symbols and self.convergence.region.nonzero(g) is None]

    def hits(self) -> bool:
        """Whether an exponent that cancels is -1: single terms then have poles."""
        return any((e + 1).is_zero for e in self.cancelled)


def converge_total(terms: Sequence[Term], facts: Facts) -> Total | str:
    """Where the integral over (0, oo) of a sum converges, or the reason why there is no such place known."""
    found = Convergence(Region(facts))
    for term in terms:
        reason = restrict_kernels(found, term, facts, powers=False)
        if reason is not None:
            return reason
    result = Total(found)
    for end in (ZERO_END, INFINITE_END):
        survivors = _survivors(terms, end, result.cancelled)
        if survivors is None:
            return "diverges"
        (found.at_zero if end == ZERO_END else found.at_infinity).extend(survivors)
        for e in survivors:
            found.region = found.region.positive(end * (real_part(e) + 1))
    return "diverges" if found.region.empty else result


def _survivors(terms: Sequence[Term], end: int, cancelled: list[Expr]) -> list[Expr] | None:
    """First exponents that do not cancel, one for each class of exponents with rational differences."""
    classes: dict[Expr, dict[Rational, list[Expr]]] = {}
    unseen: dict[Expr, list[Rational]] = {}
    for term in terms:
        known, later = _expansion(term, end)
        for exponent, coefficients in known.items():
            place, kind = exponent.as_coeff_Add()
            totals = classes.setdefault(kind, {}).setdefault(place, [])
            for j, c in enumerate(coefficients):
                if j == len(totals):
                    totals.append(S.Zero)
                totals[j] += c
        for exponent in later:
            place, kind = exponent.as_coeff_Add()
            unseen.setdefault(kind, []).append(place)
    survivors = []
    for kind, places in classes.items():
        limit = min((end * p for p in unseen.get(kind, ())), default=None)
        for place in sorted(places, key=lambda p: end * p):
            if limit is not None and end * place >= limit:
                return None
            if not all(vanishes(c) for c in places[place]):
                survivors.append(place + kind)
                break
            cancelled.append(place + kind)
    return survivors


def _expansion(term: Term, end: int) -> tuple[Expansion, list[Expr]]:
    """The expansion of a term at 0 or oo in powers, as far as it is computed, and where it goes on."""
    total: Expansion = {term.power.expand(): [S.Zero] * term.logs + [term.coefficient]}
    later: list[Expr] = []
    for kernel in term.kernels:
        known, beyond = _kernel_expansion(kernel, end)
        heads = list(total)
        later = [(e + b).expand() for e, b in product(later, known)] + [
            (e + b).expand() for e, b in product(heads, beyond)
        ]
        grown: Expansion = {}
        for (e, cs), (b, ds) in product(total.items(), known.items()):
            sums = grown.setdefault((e + b).expand(), [])
            for (i, c), (j, d) in product(enumerate(cs), enumerate(ds)):
                while len(sums) <= i + j:
                    sums.append(S.Zero)
                sums[i + j] += c * d
        total = grown
    return total, later


def _kernel_expansion(kernel: Kernel, end: int) -> tuple[Expansion, list[Expr]]:
    piece = Piece.of_term(Term(kernels=(kernel,)))
    known: Expansion = {}
    later = []
    for ladder in piece.rungs(end):
        rungs = list(islice(ladder, _RUNGS + 1))
        for exponent in rungs[:_RUNGS]:
            if exponent not in known:
                coefficients = piece.coefficients(exponent, end)
                if coefficients:
                    known[exponent] = coefficients
        later.extend(rungs[_RUNGS:])
    return known, later


__all__ = ["Total", "converge_total"]
