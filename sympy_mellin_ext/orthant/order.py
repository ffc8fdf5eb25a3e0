"""Oscillating kernels: the region of the iterated integral in the order given, one variable after another.

Each integration joins at most two kernels to one, whose transform is again a Gamma product with its own strip
(DLMF 1.14.39); where the single integrals converge is decided in the variable itself, as for one variable.
Sources: R. B. Paris and D. Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), sections 2.3 and 3.3.
"""
from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sympy import Dummy, Expr, Mul, S
from sympy.logic.boolalg import Boolean

from ..behaviour import converge_product
from ..gamma.product import Factor, GammaProduct, cancel
from ..gamma.shortest import positive_power
from ..kernels.elementary import EXP
from ..kernels.elementary import power as power_transform
from ..matching import Kernel, Term
from ..pieces import Piece
from ..region import Facts
from ..strategies.finite_part import Divergence, converge
from .integrand import Product


@dataclass(frozen=True)
class _Kernel:
    """A kernel of the monomial with these exponents; the scale is inside the Gamma product."""

    name: str
    product: GammaProduct
    exponents: tuple[Expr, ...]


def region_in_order(product: Product, facts: Facts) -> Boolean | None:
    """The condition under which an index-0 product converges in the order of its variables, or None."""
    if not product.rational() or not product.positive(facts) or product.index != 0:
        return None
    kernels = _kernels(product)
    if kernels is None:
        return None
    powers = list(product.powers)
    condition: Boolean = S.true
    for i in range(len(powers)):
        involved = [k for k in kernels if k.exponents[i] is not S.Zero]
        rest = [k for k in kernels if k.exponents[i] is S.Zero]
        if len(involved) == 1:
            found = _alone(involved[0], powers[i], i, facts)
        elif len(involved) == 2:
            found = _joined(involved, powers[i], i, facts)
        else:
            return None
        if found is None:
            return None
        part, joined, shift = found
        condition = condition & part
        kernels = rest + ([joined] if joined is not None else [])
        powers = [(p + q).expand() for p, q in zip(powers, shift, strict=True)]
    return condition


def _kernels(product: Product) -> list[_Kernel] | None:
    found = [_Kernel("exp", EXP.with_scale(c), e) for c, e in product.exponent]
    for base, p in product.sums:
        if len(base) != 2:
            return None
        found.append(_Kernel("power", power_transform(p).with_scale(base[1].coefficient), base[1].exponents))
    for special in product.specials:
        if len(special.argument) != 1 or special.domain:
            return None
        c, e = special.argument[0]
        found.append(_Kernel(special.name, special.product.with_scale(c), e))
    return found


Found = tuple[Boolean, _Kernel | None, Sequence[Expr]]


def _alone(kernel: _Kernel, power: Expr, i: int, facts: Facts) -> Found | None:
    r = kernel.exponents[i]
    piece = Piece(S.One, power, 0, kernel.product, r)
    outcome = converge([piece], facts)
    if isinstance(outcome, Divergence):
        return None
    u = (power + 1) / r
    shift = [S.Zero if j == i else -u * e for j, e in enumerate(kernel.exponents)]
    return outcome[0].to_boolean(), None, shift


def _joined(pair: Sequence[_Kernel], power: Expr, i: int, facts: Facts) -> Found | None:
    """``int x**P*g1(M1*x**r1)*g2(M2*x**r2) dx`` as a function of ``M1*M2**(-r1/r2)`` times a power of M2."""
    first, second = pair
    r1, r2 = first.exponents[i], second.exponents[i]
    scales = [Dummy(f"m{j}", positive=True) for j in (1, 2)]
    term = Term(S.One, power, 0, tuple(
        Kernel(k.name, k.product.with_scale(m), k.exponents[i], None, S.true, True)
        for k, m in zip(pair, scales, strict=True)
    ))  # fmt: skip
    converged = converge_product(term, facts)
    if isinstance(converged, str):
        return None
    condition = converged.region.to_boolean()
    if condition.has(*scales) or condition is S.false:
        return None
    rho, v = r1 / r2, (power + 1) / r2
    lam = first.product.lam + second.product.lam * abs(rho)
    if not lam.is_positive:
        return None  # the contour integral of the two transforms may not converge
    factors = list(first.product.factors)
    factors += [Factor((a + A * v).expand(), -A * rho, e) for a, A, e in second.product.factors]
    scale = Mul(first.product.scale, positive_power(second.product.scale, -rho))
    joined = GammaProduct(S.One, scale, cancel(tuple(factors)))
    exponents = tuple((a - rho * b) for a, b in zip(first.exponents, second.exponents, strict=True))
    shift = [S.Zero if j == i else -v * e for j, e in enumerate(second.exponents)]
    return condition, _Kernel("joined", joined, exponents), shift


__all__ = ["region_in_order"]
