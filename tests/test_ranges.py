"""Ranges other than the half line, and changes of variable: published values, regions, refusals."""
from __future__ import annotations

import pytest
from mpmath import mp
from sympy import (
    Abs,
    Catalan,
    Ci,
    Eq,
    EulerGamma,
    Heaviside,
    Integer,
    Max,
    Min,
    Piecewise,
    Rational,
    S,
    Symbol,
    acos,
    asin,
    atan,
    besseli,
    besselj,
    besselk,
    beta,
    cos,
    cosh,
    cot,
    digamma,
    elliptic_k,
    erf,
    exp,
    expint,
    gamma,
    log,
    lowergamma,
    oo,
    pi,
    sech,
    sign,
    sin,
    sinc,
    sqrt,
    symbols,
    tan,
    trigamma,
    uppergamma,
    zeta,
)  # fmt: skip
from sympy.logic.boolalg import BooleanTrue

from sympy_mellin_ext import Refusal, closed_form, integrate
from sympy_mellin_ext.region import Facts
from sympy_mellin_ext.strategies.ranges.beta import BetaTerm, convergence, total_value
from sympy_mellin_ext.verify import quad
from sympy_mellin_ext.verify.numeric import evaluate

x, a, b, c = symbols("x a b c", positive=True)
y, p, q, s = symbols("y p q s", real=True)
POINT = {a: Rational(13, 10), b: Rational(7, 10), c: Rational(9, 5), p: Rational(2, 5), q: Rational(3, 10)}
UNIT = (x, 0, 1)
QUARTER = (x, 0, pi / 2)

# integrand, limits, value, source
PUBLISHED = [
    (x ** (a - 1) * (1 - x) ** (b - 1), UNIT, beta(a, b), "DLMF 5.12.1"),
    (sin(x) ** (2 * a - 1) * cos(x) ** (2 * b - 1), QUARTER, beta(a, b) / 2, "DLMF 5.12.2"),
    (cos(x) ** (a - 1) * cos(b * x), QUARTER, pi / (2**a * a * beta((a + b + 1) / 2, (a - b + 1) / 2)), "DLMF 5.12.5"),
    ((1 - x**a) / (1 - x), UNIT, digamma(a + 1) + EulerGamma, "DLMF 5.9.16"),
    (1 / log(x) + 1 / (1 - x), UNIT, EulerGamma, "DLMF 5.9.17-type, t = -log(x)"),
    (log(log(1 / x)), UNIT, -EulerGamma, "DLMF 5.9.18, t = -log(x)"),
    (log(x) / (1 + x), UNIT, -(pi**2) / 12, "DLMF 25.5.3 at s = 2"),
    (log(x) / (1 + x**2), UNIT, -Catalan, "DLMF 25.11.40"),
    (log(x) * log(1 - x) / x, UNIT, zeta(3), "DLMF 25.6.10-type"),
    (log(1 - x) ** 2 / x, UNIT, 2 * zeta(3), "from memory: Gradshteyn-Ryzhik 4.315.3"),
    (1 / (1 + x + x**2), UNIT, pi / (3 * sqrt(3)), "common practice"),
    (x ** (a - 1) / (1 + x**b), UNIT, (digamma((a + b) / (2 * b)) - digamma(a / (2 * b))) / (2 * b), "GR 3.241.1"),
    (atan(x) / x, UNIT, Catalan, "DLMF 25.11.40-type"),
    (asin(x) / x, UNIT, pi * log(2) / 2, "from memory: Gradshteyn-Ryzhik 4.521.1"),
    (x * acos(x), UNIT, pi / 8, "common practice"),
    (elliptic_k(x**2), UNIT, 2 * Catalan, "from memory: Gradshteyn-Ryzhik 6.141.1"),
    (x ** (a - 1) * exp(-x), (x, 0, b), lowergamma(a, b), "DLMF 8.2.1"),
    (x ** (a - 1) * exp(-x), (x, b, oo), uppergamma(a, b), "DLMF 8.2.2"),
    (exp(-a * x) / x, (x, b, oo), expint(1, a * b), "DLMF 6.2.1"),
    (exp(-(x**2)), (x, 0, a), sqrt(pi) * erf(a) / 2, "DLMF 7.2.1"),
    (cos(a * x) / sqrt(1 - x**2), UNIT, pi * besselj(0, a) / 2, "DLMF 10.9.4"),
    (cos(a * sin(x)), (x, 0, pi), pi * besselj(0, a), "DLMF 10.9.1"),
    (exp(a * cos(x)), (x, 0, pi), pi * besseli(0, a), "DLMF 10.32.1"),
    (exp(-b * x) / sqrt(x**2 - a**2), (x, a, oo), besselk(0, a * b), "DLMF 10.32.8"),
    (exp(-b * sqrt(x**2 + a**2)), (x, 0, oo), a * besselk(1, a * b), "DLMF 10.32.9, x = a*sinh(t)"),
    (x * besselj(0, a * x), UNIT, besselj(1, a) / a, "DLMF 10.22.1"),
    (1 / sqrt(1 - b**2 * sin(x) ** 2), QUARTER, elliptic_k(b**2), "DLMF 19.2.4"),
    (log(a + b * cos(x)), (x, 0, pi), pi * log((a + sqrt(a**2 - b**2)) / 2), "from memory: Gradshteyn-Ryzhik 4.224.9"),
    (log(1 + a * tan(x) ** 2), QUARTER, pi * log(1 + sqrt(a)), "from memory: Gradshteyn-Ryzhik 4.227.17-type"),
    ((1 - exp(-x)) / x, (x, 0, a), expint(1, a) + log(a) + EulerGamma, "DLMF 6.2.3 with 6.2.4"),
    ((1 - cos(x)) / x, (x, 0, a), log(a) + EulerGamma - Ci(a), "DLMF 6.2.13"),
    (log(sin(x)), QUARTER, -pi * log(2) / 2, "DLMF 4.26-type; Gradshteyn-Ryzhik 4.224.3"),
    (log(tan(x)) ** 2, QUARTER, pi**3 / 8, "from memory: Gradshteyn-Ryzhik 4.227.7"),
    (tan(x) ** q, QUARTER, pi / (2 * cos(pi * q / 2)), "from memory: Gradshteyn-Ryzhik 3.622.1"),
    (1 / (a + b * cos(x)), (x, 0, pi), pi / sqrt(a**2 - b**2), "from memory: Gradshteyn-Ryzhik 3.613.1"),
    (1 / (a + b * sin(x)), (x, 0, 2 * pi), 2 * pi / sqrt(a**2 - b**2), "from memory: Gradshteyn-Ryzhik 3.661.4"),
    (x * sin(x) / (1 + cos(x) ** 2), (x, 0, pi), pi**2 / 4, "common practice"),
    (1 / (1 + tan(x) ** a), QUARTER, pi / 4, "common practice"),
    (exp(-a * y**2 + p * y), (y, -oo, oo), sqrt(pi / a) * exp(p**2 / (4 * a)), "common practice"),
    (y**4 * exp(-((y - p) ** 2) / (2 * a**2)) / (a * sqrt(2 * pi)), (y, -oo, oo), 3 * a**4 + 6 * a**2 * p**2 + p**4,
     "common practice (fourth moment of the normal distribution)"),
    (exp(-(y**2)) * erf(a * y + p), (y, -oo, oo), sqrt(pi) * erf(p / sqrt(1 + a**2)), "from memory: Prudnikov 2.8.9.1"),
    (exp(p * y) / cosh(y), (y, -oo, oo), pi / cos(pi * p / 2), "from memory: Gradshteyn-Ryzhik 3.511.4-type"),
    (y**2 * sech(y) ** 2, (y, -oo, oo), pi**2 / 6, "from memory: Gradshteyn-Ryzhik 3.527.5"),
    (y * exp(-y - exp(-y)), (y, -oo, oo), EulerGamma, "common practice (mean of Gumbel's distribution)"),
    (1 / ((y - p) ** 2 + a**2), (y, -oo, oo), pi / a, "common practice (Cauchy distribution)"),
    (y**2 * exp(-Abs(y - p)), (y, -oo, oo), 2 * p**2 + 4, "common practice (Laplace distribution)"),
    (x**p * exp(-((log(x) - q) ** 2) / (2 * a**2)) / (x * a * sqrt(2 * pi)), (x, 0, oo), exp(p * q + p**2 * a**2 / 2),
     "common practice (moments of the lognormal distribution)"),
    (exp(-a * (exp(b * x) - 1)), (x, 0, oo), exp(a) * expint(1, a) / b, "common practice (Gompertz' mean life)"),
    ((x - a) ** (b - 1) * (c - x) ** (p - 1), (x, a, c), (c - a) ** (b + p - 1) * beta(b, p), "DLMF 5.12.1, linear"),
    (1 / (x * sqrt(x**2 - 1)), (x, 1, oo), pi / 2, "common practice"),
    (Min(x, a) * exp(-x), (x, 0, oo), 1 - exp(-a), "common practice (limited expected value)"),
    (Max(x - a, 0) * exp(-x), (x, 0, oo), exp(-a), "common practice (stop loss)"),
    (Abs(x - 1) * exp(-x), (x, 0, oo), 2 * exp(-1), "common practice"),
    (Heaviside(a - x) * x, (x, 0, oo), a**2 / 2, "common practice"),
    (Piecewise((x, x < 1), (exp(1 - x), True)), (x, 0, oo), Rational(3, 2), "common practice"),
    (Abs(sin(y)), (y, 0, 2 * pi), Integer(4), "common practice"),
    (sinc(y) ** 2, (y, -oo, oo), pi, "from memory: Gradshteyn-Ryzhik 3.821.9"),
    (y**3 * exp(-(y**4)), (y, -oo, oo), Integer(0), "odd"),
    ((1 - y) ** (a - 1) * (1 + y) ** (b - 1), (y, -1, 1), 2 ** (a + b - 1) * beta(a, b), "DLMF 5.12.1"),
]  # fmt: skip


@pytest.mark.parametrize(("f", "limits", "value", "source"), PUBLISHED)
def test_published_value(f, limits, value, source):
    answer = closed_form(f, limits, given=[b < a, a < c])
    assert answer is not None, source
    assert answer.condition.subs(POINT) == True  # noqa: E712 - SymPy Boolean
    got, expected = evaluate(answer.value, POINT), evaluate(S(value), POINT)
    assert abs(got - expected) < 1e-10 * (1 + abs(expected)), (answer.value, source)


QUADRATURE = [
    (log(x) ** 3 * log(1 - x) ** 2, UNIT),
    (x**p * (1 - x) ** 2 * log(x) ** 2, UNIT),
    (x ** (p - 1) * log(x) / (1 + x**2), UNIT),
    (x**p / (1 - x + x**2), UNIT),
    ((x**p - x ** (-p)) / (1 - x), UNIT),
    (sqrt(x) * log(x) / sqrt(1 - x), UNIT),
    (log(1 + x + x**2) / x, UNIT),
    (x ** (a - 1) * (1 - x) ** (b - 1) / (1 + c * x), UNIT),
    (exp(a * x) * x ** (b - 1) * (1 - x) ** (c - 1), UNIT),
    (besselj(0, a * x) / sqrt(1 - x**2), UNIT),
    (besselk(0, x), (x, a, oo)),
    ((1 - cos(x)) / x, UNIT),
    (sqrt(x - a) * exp(-x), (x, a, oo)),
    ((x - a) ** (b - 1) * x ** (-3), (x, a, oo)),
    (y * exp(-a * y**2 + p * y) * sin(q * y + 1), (y, -oo, oo)),
    (y * exp(-(y**2)) * erf(a * y), (y, -oo, oo)),
    (cos(a * y) * sech(y) ** 2, (y, -oo, oo)),
    (y**2 * exp(y), (y, -oo, p)),
    (x**2 * exp(-b * sqrt(x**2 + a**2)), (x, 0, oo)),
    (sqrt(Abs(x - 1)) * exp(-x), (x, 0, oo)),
    (cos(x) / (a + b * cos(x)), (x, 0, pi)),
    (exp(a * cos(x)) * sin(x) ** 2, (x, 0, pi)),
    (log(1 + a * sin(x) ** 2), QUARTER),
    (cos(2 * x) * log(sin(x)), QUARTER),
]


@pytest.mark.parametrize(("f", "limits"), QUADRATURE)
def test_against_quadrature(f, limits):
    answer = closed_form(f, limits, given=[b < a, a < c])
    assert answer is not None
    number, _, reliable, note = quad(f, limits, POINT, digits=10, seconds=10)
    assert reliable, note
    assert abs(evaluate(answer.value, POINT) - number) < 1e-8 * (1 + abs(number))


DIVERGENT = [
    (1 / x, UNIT), (1 / (1 - x), UNIT), (1 / (1 - x) ** 2, UNIT), (1 / log(x), UNIT), (1 / (x * log(x)), UNIT),
    (log(x) / (1 - x) ** 2, UNIT), (1 / (1 - x**3), UNIT), (elliptic_k(x) / (1 - x), UNIT),
    (1 / (x - 1), (x, 0, 2)), (1 / (1 - x), (x, 0, 2)), (1 / (2 * x - 1) ** 2, UNIT), (1 / y, (y, -1, 1)),
    (1 / y**2, (y, -1, 1)), (1 / sqrt(x - 1), (x, 1, oo)), (1 / x, (x, a, oo)), (Heaviside(x - 1) / x, (x, 0, oo)),
    (tan(x), (x, 0, pi)), (tan(x), QUARTER), (1 / sin(x), (x, 0, pi)), (cot(x), (x, 0, pi)),
    (1 / cos(x) ** 2, (x, 0, pi)),
    (1 / (1 + 2 * cos(x)), (x, 0, pi)), (x * tan(x), (x, 0, pi)), (y, (y, -oo, oo)), (sign(y), (y, -oo, oo)),
    (y / (1 + y**2), (y, -oo, oo)), (exp(y), (y, -oo, oo)), (exp(y**2), (y, -oo, oo)), (1 / (a - x), (x, 0, oo)),
    (exp(x) / x, UNIT), ((exp(x) - 2) / x, UNIT), ((1 - cos(x)) / x**3, UNIT),
]  # fmt: skip


@pytest.mark.parametrize(("f", "limits"), DIVERGENT)
def test_divergent_integrals_have_no_value(f, limits):
    assert closed_form(f, limits) is None


@pytest.mark.parametrize(
    ("f", "limits", "region"),
    [
        (x ** (p - 1) / (1 + x), UNIT, "p > 0"),
        (tan(x) ** p, QUARTER, "(p > -1) & (p < 1)"),
        ((1 - y) ** p * (1 + y) ** q, (y, -1, 1), "(p > -1) & (q > -1)"),
        ((x**p - x ** (-p)) / (1 - x), UNIT, "(p > -1) & (p < 1)"),
        (x ** (-p), (x, a, oo), "p > 1"),
        (1 / (a + p * cos(x)), (x, 0, pi), "a > Abs(p)"),
        (exp(p * y) / cosh(y), (y, -oo, oo), "(p > -1) & (p < 1)"),
        (Abs(y) ** p * exp(-(y**2)), (y, -oo, oo), "p > -1"),
        (exp(-p * y**2), (y, -oo, oo), "p > 0"),
        (log(1 - x) * x ** (p - 1), UNIT, "p > -1"),
        (log(x) * (1 - x) ** (p - 1), UNIT, "p > -1"),
        (sqrt(p - x), (x, 0, p), "p > 0"),
        ((y - p) ** (a - 1) * (q - y) ** (b - 1), (y, p, q), "p < q"),
        (1 / (1 + p * x), UNIT, "p > -1"),
    ],
)  # fmt: skip
def test_region(f, limits, region):
    assert str(closed_form(f, limits).condition) == region


def test_ends():
    assert integrate(x**2 * exp(-x), (x, 1, 1)) == 0
    assert integrate(x ** Rational(1, 2), (x, 1, 0)) == -Rational(2, 3)
    assert integrate(exp(-x), (x, oo, 0)) == -1
    with pytest.raises(Refusal):
        closed_form(exp(-x), (x, 0, 1 + S.ImaginaryUnit), strict=True)


@pytest.mark.parametrize(
    ("f", "limits", "limit"),
    [
        (exp(p * x), UNIT, 1),
        (x * exp(p * x), UNIT, Rational(1, 2)),
        (cos(p * x), UNIT, 1),
        (1 / (1 + p * x), UNIT, 1),
        (sin(p * x), (x, 0, pi), 0),
    ],
)
def test_value_at_a_removable_point(f, limits, limit):
    answer = closed_form(f, limits)
    assert answer.special == ((Eq(p, 0), limit),)
    for point in (Rational(-1, 2), Rational(3, 4)):
        number = quad(f, limits, {p: point}, digits=10)[0]
        assert abs(evaluate(answer.value, {p: point}) - number) < 1e-9


@pytest.mark.parametrize("k", [0, 1, 2])
@pytest.mark.parametrize("j", [0, 1, 2])
@pytest.mark.parametrize(("u", "v"), [(Rational(3, 2), Rational(1, 3)), (2, 3), (1, 1), (Rational(1, 2), 2)])
def test_derivatives_of_the_beta_function(u, v, k, j):
    """Differences of the Beta function itself, DLMF 5.12.1, stand in for its derivatives."""
    value = total_value([BetaTerm(S.One, S(u), S(v), k, j)])
    with mp.workdps(40):
        expected = mp.diff(lambda s, t: mp.beta(s, t), (mp.mpf(S(u).p) / S(u).q, mp.mpf(S(v).p) / S(v).q), (k, j))
        assert abs(evaluate(value, {}) - expected) < 1e-12 * (1 + abs(expected))


def test_poles_of_single_terms_cancel_at_both_ends():
    # int_0^1 log(x)*log(1-x)/(x*(1-x)) dx = 2*zeta(3), DLMF 25.6.10-type
    terms = [BetaTerm(S.One, S.Zero, S.Zero, 1, 1)]
    assert convergence(terms, Facts()).to_boolean() == BooleanTrue()
    assert total_value(terms) == 2 * zeta(3)
    assert convergence([BetaTerm(S.One, S.Zero, S.One)], Facts()).empty
    # (1 - x**(a-1))/(1 - x), DLMF 5.9.16
    pair = [BetaTerm(S.One, S.One, S.Zero), BetaTerm(-S.One, a, S.Zero)]
    assert not convergence(pair, Facts()).empty
    assert (total_value(pair) - digamma(a) - EulerGamma).expand() == 0


def test_trigamma_at_rationals_has_its_shortest_form():
    assert integrate(log(x) / (1 + x**2), UNIT) == -Catalan
    value = integrate(log(x) / (1 + x + x**2), UNIT)
    # DLMF 5.15.1: trigamma(1/3) and (2/3) are joined by reflection
    assert value.atoms(type(trigamma(Rational(1, 3)))) == {trigamma(Rational(1, 3))}


def test_no_symbol_of_ours_leaks():
    for f, limits, _, _ in PUBLISHED:
        answer = closed_form(f, limits, given=[b < a, a < c])
        allowed = f.free_symbols | S(limits[1]).free_symbols | S(limits[2]).free_symbols - {limits[0]}
        seen = answer.value.free_symbols | answer.condition.free_symbols
        assert seen <= allowed
        assert limits[0] not in seen


def test_beta_of_a_complex_range_is_refused_and_scaling_is_exact():
    left = closed_form(x ** (p - 1) * (c - x) ** (a - 1), (x, 0, c)).value
    right = c ** (p + a - 1) * gamma(p) * gamma(a) / gamma(p + a)
    assert abs(evaluate(left, POINT) - evaluate(right, POINT)) < 1e-12
    assert closed_form(x, (x, 0, Symbol("z"))) is None
