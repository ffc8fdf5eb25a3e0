"""Move poles of a kernel across the contour: the kernel without the first terms of its expansion at 0.

The function without its first terms has the same Gamma product on the next strip, which is
``Gamma(y) -> (-1)**n * Gamma(y + n)*Gamma(1 - n - y)/Gamma(1 - y)`` for a Gamma that loses n poles.

Source: D. Zagier, The Mellin transform and related analytic techniques (2006), section 1; DLMF 5.5.3.
"""
from __future__ import annotations

from dataclasses import replace

from sympy import S

from ..behaviour import converge_product
from ..gamma import Factor, GammaProduct
from ..gamma.product import cancel
from ..matching import Kernel, Term
from ..pieces import Piece
from ..region import Facts

# So many terms of a kernel may be subtracted before we give up.
_MOST_SUBTRACTED = 6


def without_head(kernel: Kernel, count: int) -> tuple[Kernel, list[Term]] | None:
    """The kernel without its first ``count`` poles at 0, and the terms that these poles stand for.

    None where the kernel has several ladders of poles at 0, or an exponential behaviour there.
    """
    side = 1 if kernel.ratio.is_positive else -1
    if kernel.wave is not None or (kernel.product.delta != 0 and (kernel.product.delta > 0) != (side > 0)):
        return None
    ladders = list(kernel.product.ladders(side))
    if len(ladders) != 1:
        return None
    start, step = ladders[0].start, ladders[0].step
    if ladders[0].length is not None and count > ladders[0].length:
        return None
    factors = list(kernel.product.factors)
    place = next(
        i for i, (a, A, e) in enumerate(factors) if e > 0 and step == 1 / A and (a + A * start).expand().is_Integer
    )
    shift, slope, _ = factors[place]
    # rungs before the first uncancelled one move too: they carry no residue
    moved = count - int((shift + slope * start).expand())
    factors[place : place + 1] = [
        Factor((shift + moved).expand(), slope, 1),
        Factor((1 - moved - shift).expand(), -slope, 1),
        Factor((1 - shift).expand(), -slope, -1),
    ]
    rest = GammaProduct(
        kernel.product.constant * S.NegativeOne**moved, kernel.product.scale, cancel(tuple(factors))
    )
    piece = Piece.of_term(Term(kernels=(kernel,)))
    terms = []
    for n in range(count):
        exponent = (-kernel.ratio * (start - n * step)).expand()
        coefficients = piece.coefficients(exponent, 1)
        for logs, c in enumerate(coefficients):
            if c is not S.Zero:
                terms.append(Term(c, exponent, logs))
    return replace(kernel, name=f"{kernel.name} without its head", product=rest), terms


def subtract_head(term: Term, facts: Facts) -> tuple[Term, list[Term]] | None:
    """Write a divergent product as a convergent one and single kernels, by terms of one kernel at 0."""
    for count in range(1, _MOST_SUBTRACTED + 1):
        for place in (0, 1):
            kernel, other = term.kernels[place], term.kernels[1 - place]
            split = without_head(kernel, count)
            if split is None:
                continue
            rest, heads = split
            changed = replace(term, kernels=(rest, other))
            if not isinstance(converge_product(changed, facts), str):
                singles = [
                    Term(term.coefficient * h.coefficient, term.power + h.power, term.logs + h.logs, (other,))
                    for h in heads
                ]
                return changed, singles
    return None


__all__ = ["subtract_head", "without_head"]
