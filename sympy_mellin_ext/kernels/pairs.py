"""Products of two functions of one argument whose transform is a single Gamma product again."""
from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from sympy import Expr, Integer, Rational, S, cos, gamma, pi, sqrt

from ..gamma import GammaProduct
from .general import hyper_transform

_H = Rational(1, 2)
of = GammaProduct.of


@dataclass(frozen=True)
class Pair:
    """A row for ``f(z)*g(z**square)`` (square = 1 unless stated), orders of f first, then of g.

    ``turned`` says whether f is a growing exponential ``exp(+z)`` instead of ``exp(-z)``.
    ``square``: the first function's argument is the second's to this power.
    """

    names: tuple[str, str]
    transform: Callable[..., GammaProduct | None]
    source: str
    turned: bool = False
    square: Integer = S.One


def _jj(mu: Expr, nu: Expr) -> GammaProduct:
    d, t = (nu - mu) / 2, (nu + mu) / 2
    return of(
        up=[(t, _H), (1, -1)], down=[(1 + d, -_H), (1 + t, -_H), (1 - d, -_H)], constant=_H, scale=_H
    )


def _jy(mu: Expr, nu: Expr) -> GammaProduct:
    d, t = (mu - nu) / 2, (mu + nu) / 2
    return of(
        up=[(d, _H), (t, _H), (1, -1)],
        down=[(_H + d, _H), (_H - d, -_H), (1 + d, -_H), (1 + t, -_H)],
        constant=-_H,
        scale=_H,
    )


def _with_wave(transform: Callable[[Expr, Expr], GammaProduct], mu: Expr) -> Callable[[Expr], GammaProduct]:
    """With cos(z) (mu = -1/2) or sin(z) (mu = 1/2) for J_mu: sqrt(pi*z/2)*J_mu(z), DLMF 10.16.1."""
    return lambda nu: of(constant=sqrt(pi / 2)) * transform(mu, nu).shifted(_H)


def _ik(mu: Expr, nu: Expr) -> GammaProduct:
    d, t = (mu - nu) / 2, (mu + nu) / 2
    return of(
        up=[(d, _H), (t, _H), (1, -1)], down=[(1 + d, -_H), (1 + t, -_H)], constant=Rational(1, 4), scale=_H
    )


def _kk(mu: Expr, nu: Expr) -> GammaProduct:
    d, t = (mu - nu) / 2, (mu + nu) / 2
    return of(
        up=[(t, _H), (d, _H), (-d, _H), (-t, _H)], down=[(0, 1)], constant=Rational(1, 8), scale=_H
    )


PAIRS = (
    Pair(("besselj", "besselj"), _jj, "DLMF 10.22.57"),
    Pair(("besselj", "bessely"), _jy, "DLMF 10.22.57 with 10.2.3"),
    Pair(("cos", "besselj"), _with_wave(_jj, -_H), "DLMF 10.22.57 with 10.16.1"),
    Pair(("sin", "besselj"), _with_wave(_jj, _H), "DLMF 10.22.57 with 10.16.1"),
    Pair(("cos", "bessely"), _with_wave(_jy, -_H), "DLMF 10.22.57 with 10.2.3 and 10.16.1"),
    Pair(("sin", "bessely"), _with_wave(_jy, _H), "DLMF 10.22.57 with 10.2.3 and 10.16.1"),
    Pair(("besseli", "besselk"), _ik, "DLMF 10.43.28-type; from memory: Gradshteyn-Ryzhik 6.576.5"),
    Pair(("besselk", "besselk"), _kk, "from memory: Gradshteyn-Ryzhik 6.576.4"),
    Pair(
        ("exp", "besseli"),
        lambda nu: of(up=[(nu, 1), (_H, -1)], down=[(1 + nu, -1)], constant=1 / sqrt(pi), scale=2),
        "DLMF 10.43.23-type; from memory: Gradshteyn-Ryzhik 6.623.3",
    ),
    Pair(("exp", "turned 1F1"), lambda a, b: hyper_transform((b - a,), (b,)), "DLMF 13.2.39"),
    Pair(
        ("exp", "besselk"),
        lambda nu: of(up=[(nu, 1), (-nu, 1)], down=[(_H, 1)], constant=sqrt(pi), scale=2),
        "DLMF 10.43.22-type; from memory: Gradshteyn-Ryzhik 6.621.3",
    ),
    Pair(
        ("exp", "besselk"),
        lambda nu: of(up=[(nu, 1), (-nu, 1), (_H, -1)], constant=cos(pi * nu) / sqrt(pi), scale=2),
        "from memory: Gradshteyn-Ryzhik 6.625.10-type",
        turned=True,
    ),
    # exp(z)*f(z) as a Laplace integral over (1+t)**(-n), DLMF 7.7.2, 8.6.5 and 8.19.3
    Pair(
        ("exp", "erfc"),
        lambda: of(up=[(0, _H), (_H, -_H), (_H, _H)], constant=1 / (2 * pi)),
        "DLMF 7.7.2-type with 5.9.1",
        turned=True,
        square=Integer(2),
    ),
    Pair(
        ("exp", "uppergamma"),
        lambda b: None
        if b.is_integer and b.is_positive
        else of(up=[(0, 1), (1 - b, -1), (b, 1)], constant=1 / gamma(1 - b)),
        "DLMF 8.6.5-type with 5.12.3",
        turned=True,
    ),
    Pair(
        ("exp", "expint"),
        lambda n: of(up=[(0, 1), (1, -1), (n - 1, 1)], constant=1 / gamma(n)),
        "DLMF 8.19.3 with 5.12.3",
        turned=True,
    ),
)
