"""Bessel, Hankel and Airy functions of any order."""
from __future__ import annotations

from sympy import Expr, I, Rational, airyai, airyaiprime, besseli, besselj, besselk, bessely, exp, hankel1, hankel2, pi

from ..gamma import GammaProduct
from .table import Row

_H, _T, _QUARTER = Rational(1, 2), Rational(1, 3), Rational(1, 4)
of = GammaProduct.of


def _j(nu: Expr) -> GammaProduct:
    return of(up=[(nu / 2, _H)], down=[(1 + nu / 2, -_H)], constant=_H, scale=_H)


def _k(nu: Expr, constant: Expr = _QUARTER) -> GammaProduct:
    return of(up=[(nu / 2, _H), (-nu / 2, _H)], constant=constant, scale=_H)


ROWS = (
    Row(besselj, _j, "DLMF 10.22.43"),
    Row(
        bessely,
        lambda nu: of(
            up=[(nu / 2, _H), (-nu / 2, _H)],
            down=[(_H - nu / 2, _H), (_H + nu / 2, -_H)],
            constant=-_H,
            scale=_H,
        ),
        "DLMF 10.22.44",
    ),
    Row(besselk, _k, "DLMF 10.43.19"),
    # Kernels with a turned scale: I_nu(z) = exp(-I*pi*nu/2)*J_nu(I*z) grows, and serves in products only.
    Row(
        besseli,
        lambda nu: GammaProduct.of(constant=exp(-I * pi * nu / 2)) * _j(nu),
        "DLMF 10.27.6",
        turn=_H,
    ),
    Row(hankel1, lambda nu: _k(nu, exp(-I * pi * nu / 2) / (2 * pi * I)), "DLMF 10.27.8 with 10.43.19", turn=-_H),
    Row(hankel2, lambda nu: _k(nu, -exp(I * pi * nu / 2) / (2 * pi * I)), "DLMF 10.27.8 with 10.43.19", turn=_H),
    Row(
        airyai,
        lambda: of(up=[(0, 1)], down=[(2 * _T, _T)], constant=3 ** (-2 * _T), scale=3**_T),
        "DLMF 9.10.17",
    ),
    Row(
        airyaiprime,
        lambda: of(up=[(0, 1)], down=[(_T, _T)], constant=-(3**-_T), scale=3**_T),
        "DLMF 9.10.17, by parts",
    ),
)
