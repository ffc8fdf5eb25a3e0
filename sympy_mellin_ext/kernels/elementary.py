"""Elementary functions.

The exponential, sine and cosine are read by the matcher itself (they multiply together), with the
transforms of this file.
"""
from __future__ import annotations

from sympy import Expr, Rational, S, acot, asinh, atan, exp, gamma, pi, sqrt

from ..gamma import GammaProduct
from .table import Row

_H = Rational(1, 2)
of = GammaProduct.of

EXP = of(up=[(0, 1)])  # DLMF 5.9.1
COS = of(up=[(0, _H)], down=[(_H, -_H)], constant=sqrt(pi) / 2, scale=_H)  # DLMF 5.9.6
SIN = of(up=[(_H, _H)], down=[(1, -_H)], constant=sqrt(pi) / 2, scale=_H)  # DLMF 5.9.7


def power(c: Expr) -> GammaProduct:
    """(1+z)**(-c): Beta integral, DLMF 5.12.3."""
    return of(up=[(0, 1), (c, -1)], constant=1 / gamma(c))


LOG1P = of(up=[(1, 1), (0, -1), (0, -1)], down=[(1, -1)])  # log(1+z) on -1 < Re s < 0, DLMF 4.37-type

ROWS = (
    Row(exp, lambda: EXP, "DLMF 5.9.1", sign=-1),
    Row(
        atan,
        lambda: of(up=[(_H, _H), (_H, -_H), (0, -_H)], down=[(1, -_H)], constant=S.One / 4),
        "from memory: Gradshteyn-Ryzhik 4.532.2",
        parity=-1,
    ),
    Row(
        acot,
        lambda: of(up=[(0, _H), (_H, _H), (_H, -_H)], down=[(1, _H)], constant=S.One / 4),
        "from memory: Gradshteyn-Ryzhik 4.532.1",
        parity=-1,
    ),
    Row(
        asinh,
        lambda: of(up=[(_H, _H), (0, -_H), (0, -_H)], down=[(1, -_H)], constant=1 / (4 * sqrt(pi))),
        "common practice: integrate (1+x**2)**(-1/2) by parts, DLMF 5.12.3",
        parity=-1,
    ),
)
