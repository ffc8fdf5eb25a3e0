"""Gamma products: algebra, poles, growth, Laurent expansion, shortest form."""
from __future__ import annotations

import pytest
from mpmath import mp, mpc, mpf
from sympy import Expr, Rational, S, Symbol, cos, exp, gamma, hyper, oo, pi, sin, symbols

from sympy_mellin_ext import closed_form
from sympy_mellin_ext.gamma import GammaProduct, shortest_quotient
from sympy_mellin_ext.gamma.shortest import collect_powers, positive_power
from sympy_mellin_ext.kernels.bessel import ROWS as BESSEL
from sympy_mellin_ext.kernels.elementary import COS, EXP, LOG1P, SIN, power
from sympy_mellin_ext.kernels.general import hyper_transform

s, nu, b = symbols("s nu b")
a = Symbol("a", positive=True)
x = Symbol("x", positive=True)
HALF = Rational(1, 2)
of = GammaProduct.of


def number(expr: Expr, **values: Expr) -> mpc:
    return mpc(expr.subs({Symbol(k): v for k, v in values.items()}).evalf(25))


PRODUCTS = [EXP, SIN, LOG1P, of(up=[(0, HALF), (Rational(1, 3), -1)], down=[(2, 1)], constant=3, scale=a)]


@pytest.mark.parametrize("product", PRODUCTS, ids=str)
def test_algebra_agrees_with_the_gammas_as_they_stand(product: GammaProduct) -> None:
    point = Rational(-3, 7) + S.ImaginaryUnit / 3
    other = of(up=[(HALF, 1)], scale=2)
    sample = {"a": Rational(5, 3)}
    plain = product.as_expr(s).subs(a, sample["a"])
    assert abs(number(product.at(point).subs(a, sample["a"])) - number(plain, s=point)) < 1e-12
    both = (product * other).as_expr(s).subs(a, sample["a"])
    assert abs(number(both, s=point) - number(plain, s=point) * number(other.as_expr(s), s=point)) < 1e-12
    shifted = product.shifted(HALF).as_expr(s).subs(a, sample["a"])
    assert abs(number(shifted, s=point) - number(plain, s=point + HALF)) < 1e-12
    rescaled = product.rescaled(Rational(2, 3)).as_expr(s).subs(a, sample["a"])
    assert abs(number(rescaled, s=point) - number(plain, s=point * 2 / 3)) < 1e-12


def test_poles_with_multiplicity_after_cancellation() -> None:
    assert EXP.poles(1, 3) == [(0, 1), (-1, 1), (-2, 1)]
    assert LOG1P.poles(-1, 2) == [(0, 2), (1, 1)]
    # DLMF 5.9.7: the sine's transform has no pole at 0
    assert SIN.poles(1, 2) == [(-1, 1), (-3, 1)]
    assert power(a).poles(-1, 1) == [(a, 1)]
    # a denominator of the same slope leaves finitely many: Gamma(s)/Gamma(s+2) = 1/(s*(s+1))
    assert of(up=[(0, 1)], down=[(2, 1)]).poles(1, 5) == [(0, 1), (-1, 1)]


@pytest.mark.parametrize(
    ("product", "lam", "delta", "kappa"),
    [
        (EXP, 1, 1, s - HALF),
        (SIN, 0, 1, s - HALF),
        (COS, 0, 1, s - HALF),
        (next(r for r in BESSEL if r.name == "besselj").transform(nu), 0, 1, s - 1),
        (of(up=[(0, 1)], down=[(b, 1)]), 0, 0, -b),
    ],
)
def test_growth_on_vertical_lines(product: GammaProduct, lam: int, delta: int, kappa: Expr) -> None:
    """Paris and Kaminski (2001), section 2.1, on the kernels that the design lists."""
    assert (product.lam, product.delta) == (lam, delta)
    difference = product.kappa(s).subs({symbols("nu"): 0}) - kappa
    assert difference.replace(lambda e: e.func.__name__ == "re", lambda e: e.args[0]).expand().subs(nu, 0) == 0


def test_growth_decides_the_regions() -> None:
    t = Symbol("t", real=True)
    assert closed_form(x ** (t - 1) * sin(x), (x, 0, oo)).condition == (t > -1) & (t < 1)
    assert closed_form(x ** (t - 1) * cos(x), (x, 0, oo)).condition == (t > 0) & (t < 1)
    assert hyper_transform((), (a, a + 1)).lam == -1
    assert closed_form(x ** (t - 1) * hyper((), (a, a + 1), -x), (x, 0, oo)) is None


@pytest.mark.parametrize("at", [0, -2, 3, Rational(1, 3)])
def test_laurent_expansion(at: Expr) -> None:
    """Against the values on a small circle: the coefficients are its Fourier coefficients."""
    product = of(up=[(0, 1), (1, -1)], down=[(HALF, HALF)], scale=a)
    series = product.laurent(S(at), 5)
    with mp.workdps(40):
        radius, n = mpf(1) / 5, 64
        points = [radius * mp.expjpi(2 * mpf(k) / n) for k in range(n)]
        rho, c = mpf(at) if S(at).is_Integer else mpf(1) / 3, mpf(7) / 5
        values = [
            mp.gamma(rho + e) * mp.gamma(1 - rho - e) / mp.gamma(mpf(1) / 2 + (rho + e) / 2) * c ** (-(rho + e))
            for e in points
        ]
        for k in range(series.valuation, series.valuation + 5):
            expected = sum(v * e ** (-k) for v, e in zip(values, points, strict=True)) / n
            found = mpc(series.coefficient(k).subs(a, Rational(7, 5)).evalf(30))
            assert abs(found - expected) < 1e-12 * max(1, abs(expected)), k


def test_identities_that_shorten() -> None:
    # DLMF 5.5.3, 5.5.5, 5.5.1
    assert shortest_quotient([s, 1 - s], []) == pi / sin(pi * s)
    assert shortest_quotient([s], [s + 1]) == 1 / s
    assert shortest_quotient([], [S.Zero, s]) == 0
    k = Symbol("k", integer=True, positive=True)
    assert str(shortest_quotient([k], [])) == "factorial(k - 1)"


@pytest.mark.parametrize(
    ("up", "down"),
    [
        ([s, 1 - s], []), ([s, s + HALF], []), ([s / 2], [HALF - s / 2]), ([2 * s], [s]), ([2 * s], [s + HALF]),
        ([s + 3], [s]), ([s], [s + 4]), ([s + 1, -s], [1 - s]), ([s, 2 - s], [s + HALF]), ([], [s, 2 - s]),
        ([Rational(7, 3), s], [Rational(1, 3)]), ([s, -s], []), ([s + 1], [s, s + HALF]),
    ],
)  # fmt: skip
def test_every_identity_keeps_the_value(up: list[Expr], down: list[Expr]) -> None:
    point = Rational(2, 7) + S.ImaginaryUnit / 5
    plain = S.One
    for e in up:
        plain *= gamma(e)
    for e in down:
        plain /= gamma(e)
    assert abs(number(shortest_quotient(up, down), s=point) - number(plain, s=point)) < 1e-12


def test_powers() -> None:
    c, k = symbols("c k", positive=True)
    assert collect_powers(a ** (1 - c) * a ** (c + k) / a) == a**k
    assert collect_powers(2**s * 2 ** (1 - s) * exp(a)) == 2 * exp(a)
    assert positive_power(1 / a, -s) == a**s
    assert positive_power(a / 2, -s) == 2**s * a**-s
