"""Inverse Mellin transforms against the contour integral, and the pFq table against mpmath's series."""

from __future__ import annotations

import random
from fractions import Fraction

import mpmath as mp
import pytest
from sympy import (
    Ci,
    Expr,
    I,
    Piecewise,
    Rational,
    S,
    Si,
    besselk,
    cos,
    erfc,
    exp,
    expint,
    gamma,
    hyper,
    log,
    meijerg,
    pi,
    simplify,
    sin,
    sqrt,
    symbols,
)

from sympy_mellin_ext.inverse import inverse_mellin, named_pfq
from sympy_mellin_ext.inverse.rows import FIXED
from sympy_mellin_ext.inverse.signature import Signature, normalise

z = symbols("z", positive=True)
HALF = S.Half
Factor = tuple[Expr, Rational, int]
POINTS = (Rational(3, 10), Rational(9, 10), Rational(17, 10), Rational(5))


def factors_of(sig: Signature) -> list[Factor]:
    rows = []
    for params, slope, e in zip(sig, (1, -1, 1, -1), (1, 1, -1, -1), strict=True):
        rows += [(S(a), Rational(slope), e) for a in params]
    return rows


def contour(factors: list[Factor], x: mp.mpf, phase: float = 0.0) -> mp.mpc:
    """The Mellin-Barnes integral by the trapezoidal rule, which converges exponentially here."""
    rows = [(mp.mpf(a.p) / a.q, mp.mpf(k.p) / k.q, e) for a, k, e in factors]
    low = max((-a / k for a, k, e in rows if e > 0 and k > 0), default=-mp.inf)
    high = min((-a / k for a, k, e in rows if e > 0 and k < 0), default=mp.inf)
    assert low < high, "the test needs a straight contour"
    if mp.isinf(low):
        c = high - 0.5
    else:
        c = low + 0.5 if mp.isinf(high) else (low + high) / 2
    rate = mp.pi / 2 * sum(e * abs(k) for a, k, e in rows) - abs(phase)
    assert rate > 0.7, "the test needs exponential decay"
    h = min(mp.mpf(1) / 25, (high - low) / 12)
    total = mp.mpc(0)
    logx = mp.log(x) + 1j * phase
    last = int(34 / rate / h)
    for n in range(-last if phase else 0, last + 1):
        u = mp.mpc(c, n * h)
        term = mp.exp(sum(e * mp.loggamma(a + k * u) for a, k, e in rows) - u * logx)
        total += term if phase else mp.re(term) * (2 if n else 1)
    return total * h / (2 * mp.pi)


def reference(factors: list[Factor], x: mp.mpf) -> mp.mpc:
    """The contour integral, or mpmath's G-function where the contour does not decay exponentially."""
    if sum(e * abs(k) for a, k, e in factors) > 0:
        return contour(factors, x)
    lists = [
        [mp.mpf(a.p) / a.q for a, k, e in factors if (k > 0) == side and e == power]
        for side, power in ((True, 1), (False, 1), (True, -1), (False, -1))
    ]
    a, b, c, d = lists
    return mp.meijerg([[1 - t for t in b], c], [a, [1 - t for t in d]], x)


def agree(value: Expr, factors: list[Factor], points: tuple[Rational, ...] = POINTS) -> None:
    for x in points:
        expected = reference(factors, mp.mpf(x.p) / x.q)
        found = complex(value.subs(z, x).evalf(15))
        assert abs(found - complex(expected)) < 1e-9 * (1 + abs(expected)), (x, found, expected, value)


def generic(rng: random.Random, low: int = 1, high: int = 9) -> Rational:
    return Rational(rng.randint(low * 7, high * 7 // 3), 7) + Rational(1, 11)


# Signatures, all parameters free or tied as the row demands: A, B, C, D as functions of (p, q, r, t).
p, q, r, t = symbols("p q r t", positive=True)
FREE_ROWS = {
    "exp": ((p,), (), (), ()),
    "binomial": ((p,), (q,), (), ()),
    "bessel_k": ((p, q), (), (), ()),
    "kummer": ((p,), (q,), (), (r,)),
    "gauss": ((p,), (q, r), (), (t,)),
    "gauss_around_one": ((p, q), (r, t), (), ()),
    "tricomi": ((p, q), (r,), (), ()),
    "tricomi_inverse": ((p,), (q, r), (), ()),
    "incomplete_gamma": ((p, q), (1 - p,), (), ()),
    "incomplete_gamma_2": ((p, q), (2 - p,), (), ()),
    "tricomi_bessel": ((p, p + q), (HALF - p - q / 2 + 1,), (), ()),
    "damped_tricomi": ((p, q), (), (p + q + r,), ()),
    "damped_gamma": ((p, q), (), (p + 1,), ()),
    "damped_bessel_k": ((p + q, p - q), (), (p + HALF,), ()),
    "uppergamma_exp": ((p, q), (r,), (q + 1,), ()),
    "flip": ((p, 0), (1,), (1,), ()),
    "flip_twice": ((p, 0), (2,), (1,), ()),
    "bessel_ik": ((p, p + q), (HALF - p,), (), (1 + q - p,)),
    "bessel_jk": ((p, p + HALF, p + q / 2), (), (), (1 + q / 2 - p,)),
    "bessel_k_square": ((p, p + q, p - q), (), (p + HALF,), ()),
    "bessel_kk": ((p + q, p - q, p + r, p - r), (), (p, p + HALF), ()),
    "bessel_jj": ((p,), (HALF,), (), (1 + q, 1)),
    "laplace_1/(1+x^2)^p": ((0, HALF, p), (HALF,), (), ()),
    "half_step": ((0,), (p, p + HALF), (), (HALF,)),
    "half_step_3/2": ((HALF,), (p, p + HALF), (), (1,)),
    "half_step_2a": ((p,), (q, q + HALF), (), (p + 2 * q,)),
    "half_step_2a+1": ((p,), (q, q + HALF), (), (p + 2 * q + 1,)),
    "polynomial": ((p,), (q + 2, r), (), (q,)),
    "left_polynomial": ((p + 2, r), (q,), (p,), ()),
    "doubled": ((p, p + HALF), (q, q + HALF), (), ()),
    "log_tail": ((1,), (0, 0, p), (), (1,)),
    "unit": ((0, p), (1, 1), (), ()),
}
VALUES = ({p: "5/11", q: "9/7", r: "4/3", t: "25/11"}, {p: "1/3", q: "6/5", r: "3/4", t: "13/7"})


@pytest.mark.parametrize("name", FREE_ROWS)
def test_rows_with_free_parameters(name: str) -> None:
    lists = FREE_ROWS[name]
    sig = Signature(*(tuple(S(a) for a in params) for params in lists))
    value = inverse_mellin(factors_of(sig), z)
    assert value is not None
    assert not value.free_symbols - {z, p, q, r, t}
    for values in VALUES:
        numbers = {k: Rational(v) for k, v in values.items()}
        fixed = [(a.subs(numbers), k, e) for a, k, e in factors_of(sig)]
        low = max(-a for a, k, e in fixed if e > 0 and k > 0)
        if any(e > 0 and k < 0 and a <= low for a, k, e in fixed):
            continue
        agree(value.subs(numbers), fixed, POINTS[::3] if value.has(meijerg) else POINTS)


NUMBERS = [
    # A, B, C, D of rows that need all parameters: logs, arcs, elliptic and error functions
    ("0", "1 1", "", "2"),
    ("0 1/2", "1/2 1/2", "", ""),
    ("0 0", "1 1", "", ""),
    ("0 1/2", "1 1", "", ""),
    ("0 0", "1/2 1/2", "", ""),
    ("0 1", "1 2", "", ""),
    ("0 1/2", "1 5/2", "", ""),
    ("0 0", "1", "", ""),
    ("0 1", "2", "", ""),
    ("0 1/2", "1", "", ""),
    ("0 1/2", "3/2", "", ""),
    ("1/2 1/2", "1/2", "", ""),
    ("0 1/2", "", "1", ""),
    ("0 1/2", "", "2", ""),
    ("0 3/2", "", "5/2", ""),
    ("0", "1/2 1/2", "", "1"),
    ("0", "1/2 3/2", "", "1"),
    ("0", "1/2 1", "", "3/2"),
    ("0", "1/2 5/2", "", "3/2"),
    ("0", "1/2 1/2", "", "3/2"),
    ("0", "1 1", "", "3/2"),
    ("0", "1/2 1", "", "2"),
    ("0", "1/2", "", "3/2"),
    ("0", "3/2", "", "5/2"),
    ("0", "1", "", "3/2"),
    ("0", "2", "", "3/2"),
    ("0", "1/2", "", "1"),
    ("0", "3/2", "", "2"),
    ("0", "1", "", "3"),
    ("0 0 1/2", "1 3/2", "1", ""),
    ("0 1/2 1", "1/2 1", "3/2", ""),
    ("0 0", "1 1/2", "1", ""),
    ("0", "1/4 3/4", "", "1/2"),
    ("0", "1/2 1/2 1", "", "3/2"),
    ("0 0 1/2", "1 1", "3/2", ""),
    ("1/2 1 1/2", "1/2", "", ""),
    ("0 1/2 1/2", "5/2", "", ""),
    ("1/3 2/3", "1/3 5/6", "", ""),
    ("0 0 0", "1", "1 1", ""),
    ("1/2 1/2", "", "", ""),
    ("0 3/2", "", "", ""),
    ("0 5/2", "", "", ""),
]


@pytest.mark.parametrize("lists", NUMBERS, ids=["|".join(row) for row in NUMBERS])
def test_rows_with_numbers(lists: tuple[str, ...]) -> None:
    sig = Signature(*(tuple(Rational(a) for a in text.split()) for text in lists))
    value = inverse_mellin(factors_of(sig), z)
    assert value is not None
    agree(value, factors_of(sig), POINTS if not value.has(meijerg) else POINTS[::3])


@pytest.mark.parametrize("row", FIXED, ids=lambda row: row.source)
def test_fixed_rows_and_their_neighbours(row: object) -> None:
    for left, right in ((0, 0), (1, 0), (0, 1)):
        sig = row.signature  # type: ignore[attr-defined]
        given = Signature(
            (sig.left[0] + left, *sig.left[1:]),
            (sig.right[0] + right, *sig.right[1:]),
            sig.left_den,
            sig.right_den,
        )
        value = inverse_mellin(factors_of(given), z)
        assert value is not None and not value.has(hyper, meijerg)
        agree(value, factors_of(given))


# Upper and lower parameters, signs of the argument.
SERIES = [
    ("", "", "+-"), ("1/3", "", "+-"), ("", "1/2", "+-"), ("", "3/2", "+-"), ("", "7/2", "+-"),
    ("", "-3/2", "+-"), ("", "4/3", "+-"), ("2", "2", "+-"), ("-3", "1/3", "+-"), ("4/3", "1/3", "+-"),
    ("1/2", "3/2", "+-"), ("1", "2", "+-"), ("1/3", "4/3", "-"), ("1", "4/3", "+"), ("1", "3/2", "+-"),
    ("1/3", "2/3", "+-"), ("1/2", "1", "+-"), ("2", "5", "+-"), ("3", "5/2", "+-"), ("5/2", "9/2", "+-"),
    ("3/2", "3", "+-"), ("3/2", "1", "+-"), ("5/3", "8/3", "-"), ("4/3", "5/3", "+-"), ("2", "4/3", "+"),
    ("1/2", "5/2", "+-"), ("1/3 1/5", "1/5", "+-"), ("-2 1/3", "1/7", "+-"), ("1/3 4/3", "1/3", "+-"),
    ("7/3 1/2", "4/3", "+-"), ("1/3 5/6", "1/2", "+-"), ("1/3 5/6", "3/2", "+-"),
    ("1/3 5/6", "2/3", "+-"), ("1/3 5/6", "5/3", "+-"), ("1/3 5/6", "8/3", "+-"),
    ("1/3 11/6", "5/2", "+-"), ("1/3 -1/3", "1/2", "+-"), ("1/3 2/3", "1/2", "+-"),
    ("1/3 2/3", "3/2", "+-"), ("1/3 5/3", "3/2", "+-"), ("1/3 5/3", "5/2", "+-"), ("1/2 1", "3/2", "+-"),
    ("1/2 1/2", "3/2", "+-"), ("1 1", "2", "+-"), ("1 1", "3/2", "+-"), ("1/2 1/2", "1", "+-"),
    ("-1/2 1/2", "1", "+-"), ("3/2 1/2", "1", "+-"), ("3/2 3/2", "2", "+-"), ("1/3 1", "2", "+-"),
    ("4/3 2", "3", "+-"), ("1/2 1", "2", "+-"), ("2 2", "3", "+-"), ("1 2", "4", "+-"),
    ("1 2", "5/2", "+-"), ("3/2 2", "5/2", "+-"), ("1/2 2", "3", "+-"), ("5/2 1", "3", "+-"),
    ("1/2", "3/2 3/2", "+-"), ("1/3", "5/6 2/3", "+-"), ("4/3", "11/6 5/3", "+-"),
    ("1/2", "4/3 2/3", "+-"), ("1/4", "1/2 5/4", "-"), ("3/4", "3/2 7/4", "-"), ("1", "3/2 2", "+-"),
    ("1", "2 5/2", "+-"), ("1", "5/2 3", "+-"), ("1", "2 4/3", "+-"), ("7/3", "4/3 1/2", "+-"),
    ("1 1", "2 2", "+-"), ("1 1", "2 2 3/2", "+-"), ("2/3 7/6", "4/3 8/7 25/21", "+-"),
    ("1 1 1", "2 2", "+-"), ("1 1 1 1", "2 2 2", "+-"), ("1/2 1/3", "3/2 4/3", "-"),
    ("1 1/2", "2 3/2", "-"),
]  # fmt: skip


@pytest.mark.parametrize("case", SERIES, ids=lambda case: ";".join(case))
def test_named_series_against_mpmath(case: tuple[str, str, str]) -> None:
    upper, lower = ([Rational(a) for a in text.split()] for text in case[:2])
    a, b = ([mp.mpf(c.p) / c.q for c in side] for side in (upper, lower))
    for sign in case[2]:
        found = named_pfq(upper, lower, z if sign == "+" else -z)
        assert found is not None and not found.has(hyper)
        for x in (Rational(1, 5), Rational(7, 10)) + (() if sign == "+" else (Rational(4),)):
            expected = mp.hyper(a, b, (mp.mpf(x.p) / x.q) * (1 if sign == "+" else -1))
            value = complex(found.subs(z, x).evalf(18))
            assert abs(value - complex(expected)) < 1e-10 * (1 + abs(expected)), (sign, x, found)


def test_unknown_series_are_left_alone() -> None:
    assert named_pfq([Rational(1, 3), Rational(1, 7)], [Rational(2, 11)], -z) is None
    assert named_pfq([1], [-2], z) is None


UNIT = [
    ("1/3 1/4", "2", 1), ("1/3 1/4", "13/12", -1), ("1/2 1/2", "3/2", -1), ("1 1", "2", -1),
    ("-3 1/3 2", "1/2 7/2", 1), ("1/3 1/5 1/7", "17/15 25/21", 1), ("1/3 1/5 1", "23/30 2", 1),
    ("1/3 2/3 3/2", "3/4 13/4", 1), ("1 1 1/3", "2 7/2", 1),
]  # fmt: skip


@pytest.mark.parametrize("case", UNIT, ids=str)
def test_summation_theorems(case: tuple[str, str, int]) -> None:
    upper, lower = ([Rational(a) for a in text.split()] for text in case[:2])
    found = named_pfq(upper, lower, S(case[2]))
    assert found is not None
    a, b = ([mp.mpf(c.p) / c.q for c in side] for side in (upper, lower))
    assert abs(complex(found.evalf(15)) - complex(mp.hyper(a, b, case[2]))) < 1e-9


def test_divergent_sum_at_one_is_refused() -> None:
    assert named_pfq([1, 1], [2], S.One) is None


def test_normalisation_keeps_the_integral() -> None:
    given = [(Rational(a), Rational(k), 1) for a, k in (("1/3", "2/3"), ("5/4", "-1/2"), ("2", "1/6"))]
    norm = normalise(given)
    x = mp.mpf("1.3")
    inner = mp.mpf(norm.scale.p) / norm.scale.q * x ** int(norm.power)
    expected = contour(given, x)
    found = complex(norm.constant.evalf()) * contour(factors_of(norm.signature), inner)
    assert abs(found - expected) < 1e-9


def test_rational_slopes() -> None:
    half, third = Rational(1, 2), Rational(1, 3)
    for given in (
        [(S.Zero, half, 1), (S(1), S(-1), 1)],  # exp(-x**2) and exp(-x)
        [(S.Zero, half, 1), (HALF, -half, -1), (S(1), S(-1), 1)],  # cos and exp
        [(S.Zero, S(1), 1), (third, third, 1), (S(2), -half, 1)],
    ):
        value = inverse_mellin(given, z)
        assert value is not None
        agree(value, given, POINTS[::2])


def test_truncated_powers() -> None:
    a, b = symbols("a b", positive=True)
    found = inverse_mellin([(a, S(1), 1), (a + b, S(1), -1)], z)
    assert isinstance(found, Piecewise)
    assert found.subs(z, 2) == 0
    assert simplify(found.args[0][0] - z**a * (1 - z) ** (b - 1) / gamma(b)) == 0
    assert inverse_mellin([(a, S(1), 1), (a + b, S(1), -1)], S(3)) == 0


def test_weber_schafheitlin() -> None:
    """Two Bessel functions of different scales (DLMF 10.22.56) on both sides of equal scales."""
    mu, nu = Rational(1, 3), Rational(3, 5)
    given = [(nu / 2, HALF, 1), (1 + nu / 2, -HALF, -1), ((mu + 1) / 2, -HALF, 1), ((mu + 1) / 2, HALF, -1)]
    found = inverse_mellin(given, z)
    assert isinstance(found, Piecewise)
    for x, y in ((mp.mpf("0.4"), 0), (mp.mpf("2.5"), 1)):
        m, n = mp.mpf(1) / 3, mp.mpf(3) / 5
        a, b = (mp.mpf(1), x) if not y else (x, mp.mpf(1))
        u, v = (m, n) if not y else (n, m)
        # int J_u(a t) J_v(b t) dt for a > b
        weber = (
            b**v / a ** (v + 1) * mp.gamma((u + v + 1) / 2) / (mp.gamma(v + 1) * mp.gamma((u - v + 1) / 2))
            * mp.hyp2f1((u + v + 1) / 2, (v - u + 1) / 2, v + 1, (b / a) ** 2)
        )
        assert abs(complex(found.subs(z, Rational(str(x))).evalf()) - complex(2 * weber)) < 1e-9


def test_argument_one() -> None:
    """Barnes' lemmas, DLMF 5.13.3 and 5.13.4."""
    a, b, c, d, e = (Rational(n, 7) for n in (2, 3, 5, 4, 6))
    first = [(a, S(1), 1), (b, S(1), 1), (c, S(-1), 1), (d, S(-1), 1)]
    found = inverse_mellin(first, S.One)
    assert abs(complex(found.evalf()) - complex(contour(first, mp.mpf(1)))) < 1e-9
    second = [*first, (e, S(1), 1), (a + b + c + d + e, S(1), -1)]
    found = inverse_mellin(second, S.One)
    assert found is not None and not found.has(hyper)
    assert abs(complex(found.evalf()) - complex(contour(second, mp.mpf(1)))) < 1e-9


def test_complex_argument() -> None:
    b = symbols("b", positive=True)
    given = [(S.Zero, S(1), 1), (S(1), S(-1), 1), (S(1), S(-1), 1)]
    found = inverse_mellin(given, I * b)
    value = complex(found.subs(b, Rational(7, 5)).evalf())
    assert abs(value - complex(contour(given, mp.mpf(7) / 5, phase=float(mp.pi / 2)))) < 1e-9


def test_refusals() -> None:
    assert inverse_mellin([(S.Zero, S(1), 1), (S.Zero, S(-1), 1)], z) is None  # no contour
    assert inverse_mellin([], z) is None
    n = symbols("n", integer=True, positive=True)
    found = inverse_mellin([(S.Zero, S(1), 1), (n, S(1), 1), (Rational(1, 3), S(-1), 1)], z)
    assert found.has(meijerg)  # double poles at a place that depends on n


_x = 2 * sqrt(z)
PUBLISHED = [
    # DLMF 6.2.2 with 8.19.1; 6.7.13-14 with 6.2.17-18; 7.7.1 (Laplace of exp(-t**2)); 10.32.10; 13.4.4
    ("0 0", "1", "", "", exp(z) * expint(1, z)),
    ("0 1/2 1/2", "1/2", "", "", 2 * sqrt(pi) * (Ci(_x) * sin(_x) + (pi / 2 - Si(_x)) * cos(_x))),
    ("0 1/2", "1/2", "", "", pi * exp(z) * erfc(sqrt(z))),
    ("0 0", "", "", "", 2 * besselk(0, 2 * sqrt(z))),
    ("0 1/2", "", "", "", sqrt(pi) * exp(-2 * sqrt(z))),
    ("0 0", "1 1", "", "", log(z) / (z - 1)),
]  # fmt: skip


@pytest.mark.parametrize("row", PUBLISHED, ids=lambda row: str(row[4]))
def test_published_forms(row: tuple[str, str, str, str, Expr]) -> None:
    sig = Signature(*(tuple(Rational(a) for a in text.split()) for text in row[:4]))
    found = inverse_mellin(factors_of(sig), z)
    assert simplify(found - row[4]) == 0
    assert Fraction(found.count_ops(), row[4].count_ops()) <= 2
