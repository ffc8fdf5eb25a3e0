"""Error functions, incomplete Gammas, exponential, sine and cosine integrals, Fresnel integrals, polylogarithm.

Most are integrals of elementary kernels: the transform of ``int_z^oo g`` is that of ``g`` at ``s + 1``
over ``s`` (integration by parts), ``1/s`` being Gamma(s)/Gamma(s+1) with its pole to the left, and
``-1/s`` being Gamma(-s)/Gamma(1-s) with its pole to the right.
"""
from __future__ import annotations

from sympy import (
    Ci,
    Ei,
    Expr,
    Rational,
    S,
    Si,
    erf,
    erfc,
    expint,
    fresnelc,
    fresnels,
    lowergamma,
    pi,
    polylog,
    sqrt,
    uppergamma,
)

from ..gamma import GammaProduct
from .table import Row

_H, _Q = Rational(1, 2), Rational(1, 4)
of = GammaProduct.of


def _polylog(order: Expr) -> GammaProduct:
    """Li_m(-z) = sum (-z)**n/n**m, n >= 1, on -1 < Re s < 0: by the master theorem, phi(n) = n!*n**(-m)."""
    m = int(order)
    return of(up=[(1, 1), (0, -1)] + [(0, -1)] * m, down=[(1, -1)] * m, constant=-S.One)


ROWS = (
    Row(
        erf,
        lambda: of(up=[(_H, _H), (0, -_H)], down=[(1, -_H)], constant=1 / (2 * sqrt(pi))),
        "DLMF 7.7.1 with 7.2.1, by parts",
        parity=-1,
    ),
    Row(
        erfc,
        lambda: of(up=[(_H, _H), (0, _H)], down=[(1, _H)], constant=1 / (2 * sqrt(pi))),
        "DLMF 7.14.1-type, by parts from 5.9.1",
    ),
    Row(
        uppergamma,
        lambda b: of(up=[(b, 1), (0, 1)], down=[(1, 1)]),
        "DLMF 8.14.4",
        argument=1,
    ),
    Row(
        lowergamma,
        lambda b: of(up=[(b, 1), (0, -1)], down=[(1, -1)]),
        "DLMF 8.14.3",
        argument=1,
        domain=lambda b: (b,),
    ),
    Row(
        expint,
        lambda n: of(up=[(0, 1), (n - 1, 1)], down=[(n, 1)]),
        "DLMF 8.19.2 and 8.14.4",
        argument=1,
    ),
    Row(Ei, lambda: of(up=[(0, 1), (0, 1)], down=[(1, 1)], constant=-S.One), "DLMF 6.2.6, 6.14.1-type", sign=-1),
    Row(
        Si,
        lambda: of(
            up=[(_H, _H), (0, -_H)], down=[(1, -_H), (1, -_H)], constant=sqrt(pi) / 4, scale=_H
        ),
        "DLMF 6.2.9 with 5.9.7, by parts",
        parity=-1,
    ),
    Row(
        Ci,
        lambda: of(
            up=[(0, _H), (0, _H)], down=[(_H, -_H), (1, _H)], constant=-sqrt(pi) / 4, scale=_H
        ),
        "DLMF 6.2.11 with 5.9.6, by parts",
    ),
    Row(
        fresnels,
        lambda: of(
            up=[(3 * _Q, _Q), (0, -_Q)], down=[(3 * _Q, -_Q), (1, -_Q)], constant=Rational(1, 8), scale=sqrt(pi) / 2
        ),
        "DLMF 7.2.8 with 5.9.7, by parts",
        parity=-1,
    ),
    Row(
        fresnelc,
        lambda: of(
            up=[(_Q, _Q), (0, -_Q)], down=[(_Q, -_Q), (1, -_Q)], constant=Rational(1, 8), scale=sqrt(pi) / 2
        ),
        "DLMF 7.2.7 with 5.9.6, by parts",
        parity=-1,
    ),
    Row(
        polylog,
        _polylog,
        "DLMF 25.12.10 with the master theorem",
        argument=1,
        sign=-1,
        domain=lambda m: (m if m.is_Integer else S.Zero,),
    ),
)
