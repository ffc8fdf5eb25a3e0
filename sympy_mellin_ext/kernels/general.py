"""Functions with free parameter lists: the generalised hypergeometric function and Meijer's G."""
from __future__ import annotations

from sympy import Expr, Mul, S, gamma, meijerg

from ..gamma import GammaProduct
from ..gamma.product import Factor, cancel


def hyper_transform(ap: tuple[Expr, ...], bq: tuple[Expr, ...]) -> GammaProduct | None:
    """Transform of ``z -> pFq(ap; bq; -z)`` by the coefficient formula, for p <= q + 1 (DLMF 16.5.1).

    The term ratio ``-prod(n + a)/(prod(n + b)*(n + 1))`` gives
    ``phi(n) = prod Gamma(a + n)/Gamma(a) * prod Gamma(b)/Gamma(b + n)``, and the transform is
    ``Gamma(s)*phi(-s)``.  None for a terminating or an undefined series.
    """
    if len(ap) > len(bq) + 1:
        return None
    if any(p.is_Integer and p.is_nonpositive for p in (*ap, *bq)):
        return None
    constant = Mul(*(gamma(b) for b in bq), *(1 / gamma(a) for a in ap))
    factors = [Factor(S.Zero, S.One, 1)]
    factors += [Factor(a, S.NegativeOne, 1) for a in ap] + [Factor(b, S.NegativeOne, -1) for b in bq]
    return GammaProduct(constant, S.One, cancel(tuple(factors)))


def gauss_transform(a: Expr, b: Expr, c: Expr) -> GammaProduct | None:
    """Transform of ``z -> 2F1(a, b; c; 1 - z)`` (Barnes' integral for both exponents at z = 0, DLMF 15.6.7)."""
    if any(p.is_Integer and p.is_nonpositive for p in (a, b, c, c - a, c - b)):
        return None
    constant = gamma(c) / (gamma(a) * gamma(b) * gamma(c - a) * gamma(c - b))
    product = GammaProduct.of(up=[(0, 1), (c - a - b, 1), (a, -1), (b, -1)])
    return GammaProduct(constant, S.One, product.factors)


def meijer_transform(g: meijerg) -> GammaProduct:
    """Transform of ``z -> G(z)``, the integrand of its definition (DLMF 16.17.1)."""
    up = [(b, 1) for b in g.bm] + [(1 - a, -1) for a in g.an]
    down = [(1 - b, -1) for b in g.bother] + [(a, 1) for a in g.aother]
    product = GammaProduct.of(up=up, down=down)
    return GammaProduct(S.One, S.One, cancel(product.factors))
