"""Quadrature and the comparison of closed forms with it."""
from __future__ import annotations

import pytest
from mpmath import mp
from sympy import (
    Abs,
    Ci,
    EulerGamma,
    Heaviside,
    I,
    Integral,
    Max,
    Min,
    Piecewise,
    Rational,
    Symbol,
    airyai,
    besseli,
    besselj,
    besselk,
    bessely,
    cos,
    dirichlet_eta,
    erfc,
    exp,
    expint,
    fresnels,
    gamma,
    hankel1,
    hyper,
    lerchphi,
    log,
    meijerg,
    oo,
    pi,
    polylog,
    re,
    sin,
    sinc,
    sqrt,
    symbols,
    uppergamma,
    zeta,
)

from sympy_mellin_ext.verify import quad, verify
from sympy_mellin_ext.verify.numeric import Undefined, Unevaluated, evaluate, holds
from sympy_mellin_ext.verify.sampling import sample

x = Symbol("x", positive=True)
a, b, nu = symbols("a b nu", positive=True)
s = Symbol("s", real=True)
z = Symbol("z")
R = Rational

# integrand, lower, upper, value: handbooks, as named
KNOWN = [
    pytest.param(x**R(-99, 100) * exp(-x), 0, oo, gamma(R(1, 100)), id="gamma-near-its-pole"),  # DLMF 5.2.1
    pytest.param((1 - x) ** R(-9, 10), 0, 1, 10, id="singular-upper-end"),
    pytest.param(sin(x) / x, 0, oo, pi / 2, id="sine-integral"),  # DLMF 6.2.10
    pytest.param(sin(x) ** 2 / x**2, 0, oo, pi / 2, id="steady-part-of-a-square"),
    pytest.param(cos(x) * x**R(-1, 2), 0, oo, sqrt(pi / 2), id="cosine-moment"),  # DLMF 5.9.6
    pytest.param(sin(x**2), 0, oo, sqrt(pi / 8), id="quadratic-phase"),  # DLMF 7.2.8 in the limit
    pytest.param(cos(x**3 / 3 + x), 0, oo, pi * airyai(1), id="airy-integral"),  # DLMF 9.5.1
    pytest.param(besselj(0, x), 0, oo, 1, id="bessel"),  # DLMF 10.22.43
    pytest.param(besselj(1, x) * besselj(2, x) / x, 0, oo, 2 / (3 * pi), id="equal-scales"),  # DLMF 10.22.57
    pytest.param(besselj(0, 2 * x) * sin(x) / x, 0, oo, pi / 6, id="bessel-and-sine"),  # DLMF 10.22.59
    pytest.param(fresnels(x) - R(1, 2), 0, oo, -1 / pi, id="fresnel"),
    pytest.param(airyai(-x), 0, oo, R(2, 3), id="airy"),  # DLMF 9.10.11
    pytest.param(exp(I * x**2), 0, oo, sqrt(pi) / 2 * exp(I * pi / 4), id="complex-phase"),
    pytest.param(sin(1 / x), 0, 1, sin(1) - Ci(1), id="oscillation-at-zero"),
    pytest.param(log(x) / (x**2 - 1), 0, oo, pi**2 / 4, id="removable-point-inside"),
    pytest.param(1 / (exp(x) - 1) - exp(-x) / x, 0, oo, EulerGamma, id="cancellation-at-zero"),  # DLMF 5.9.18
    pytest.param(hyper([], [R(7, 4)], -x) * x**R(-1, 2), 0, oo,
                 gamma(R(1, 2)) * gamma(R(7, 4)) / gamma(R(5, 4)), id="hypergeometric"),
    pytest.param(Abs(x - 2) * Heaviside(5 - x), 0, oo, R(13, 2), id="jump-and-kink"),
    pytest.param(exp(-x) * Max(x, 2), 0, oo, 2 + exp(-2), id="maximum"),
    pytest.param(x * besselk(0, x), 0, oo, 1, id="modified-bessel"),  # DLMF 10.43.19
]


@pytest.mark.parametrize(("integrand", "low", "high", "value"), KNOWN)
def test_quad_reaches_published_values(integrand, low, high, value):
    number, error, reliable, note = quad(integrand, (x, low, high))
    assert reliable, note
    expected = evaluate(value, {}, 20)
    assert abs(number - expected) < mp.mpf(10) ** -13 * abs(expected)
    assert abs(number - expected) < 100 * error


@pytest.mark.parametrize("integrand", [
    1 / x, 1 / (x - 2), exp(x / 9), exp(-x) / x**2, x**2 * besselj(0, x), sin(x) ** 2 / x, sin(x) / x**2,
    x * sin(x)])
def test_divergence_is_recognised(integrand):
    value, _, reliable, note = quad(integrand, (x, 0, oo))
    assert (value, reliable) == (mp.inf, True), note


@pytest.mark.parametrize("integrand", [
    cos(exp(x)), exp(-x) * log(Abs(sin(x))), 1 / ((2 + cos(x)) * (1 + x**2))])
def test_what_cannot_be_done_is_said(integrand):
    _, error, reliable, note = quad(integrand, (x, 0, oo), seconds=1)
    assert not reliable and note and error > 0


@pytest.mark.parametrize(("expr", "value"), [
    (polylog(R(3, 2), -exp(3)) * 1, None),
    (dirichlet_eta(1), log(2)),
    (zeta(2, R(1, 2)), pi**2 / 2),
    (uppergamma(R(1, 2), 2), sqrt(pi) * erfc(sqrt(2))),
    (expint(R(1, 2), 2), sqrt(pi / 2) * erfc(sqrt(2))),
    (hyper([1, 1], [2], -7), log(8) / 7),
    (hyper([R(1, 2)], [], -3), R(1, 2)),
    (meijerg([[], []], [[0], []], 2), exp(-2)),
    (lerchphi(R(1, 2), 1, 1), 2 * log(2)),
    (sinc(0) * 1, 1),
    (Heaviside(0) * 1, R(1, 2)),
])
def test_functions_evaluate(expr, value):
    got = evaluate(expr, {}, 20)
    if value is None:
        # complete Fermi integral: -polylog(3/2, -exp(3)) is the integral of 2*sqrt(t/pi)/(exp(t - 3) + 1)
        with mp.workdps(25):
            value = -mp.quad(lambda t: 4 * t**2 / mp.sqrt(mp.pi) / (mp.exp(t**2 - 3) + 1), [0, 1, 2, 4, 10])
        assert abs(got - value) < 1e-12
    else:
        assert abs(got - evaluate(value, {}, 20)) < 1e-18 * max(1, abs(got))


@pytest.mark.parametrize("order", [0, 1, 3, R(1, 3), R(13, 2)])
@pytest.mark.parametrize("argument", [R(1, 10**8), R(2, 3), 7, 29, 300])
@pytest.mark.parametrize("function", [besselj, bessely, besseli, besselk, hankel1])
def test_bessel_functions_of_our_own(function, order, argument):
    got = evaluate(function(order, argument), {}, 25)
    with mp.workdps(60):
        expected = getattr(mp, function.__name__)(evaluate(order, {}, 60), evaluate(argument, {}, 60))
        assert abs(got - expected) < mp.mpf(10) ** -25 * abs(expected)


def test_branches_derivatives_and_integrals():
    expr = Piecewise((zeta(z).diff(z), re(z) > 2), (Integral(exp(-x), (x, 0, z)), True))
    with mp.workdps(20):
        assert abs(evaluate(expr, {z: 3}) - mp.zeta(3, 1, 1)) < 1e-14
    with pytest.raises(Unevaluated):
        evaluate(expr, {z: 1})
    with pytest.raises(Undefined):
        evaluate(gamma(z), {z: -1})
    with pytest.raises(Unevaluated, match="no value for z"):
        evaluate(gamma(z), {})
    assert holds((z > 1) | (a > 1), {z: I, a: R(3, 2)}) is True
    assert holds(z > 1, {z: I}) is None


def test_verify_agrees_and_disagrees():
    good = verify(x ** (z - 1) * exp(-a * x), (x, 0, oo), a**-z * gamma(z), re(z) > 0)
    assert good.ok is True, str(good)
    assert min(good.digits) >= 12
    assert len(good.points) == len(good.closed) == len(good.quadrature) == len(good.digits) == 4
    bad = verify(x ** (z - 1) * exp(-a * x), (x, 0, oo), a**-z * gamma(z) * (1 + R(1, 10**9)), re(z) > 0)
    assert bad.ok is False and "against" in bad.note and "DISAGREES" in str(bad)


def test_verify_finds_a_region_that_is_too_wide():
    record = verify(x ** (s - 1) * sin(x), (x, 0, oo), gamma(s) * sin(pi * s / 2), (s > -1) & (s < 3))
    assert record.ok is False and "diverges" in record.note


def test_verify_is_open_where_nothing_can_be_said():
    record = verify(cos(exp(x)), (x, 0, oo), 1)
    assert record.ok is None and "not reliable" in record.note
    assert verify(exp(-a * x), (x, 0, oo), 1 / a, a < 0).ok is None  # no point has a < 0
    left = verify(exp(-a * x), (x, 0, oo), Integral(exp(-a * x), (x, 0, oo)), points=[{"a": 1}])
    assert left.ok is None and "no number" in left.note


def test_given_points_and_relations():
    value = (b / a) ** nu / (2 * nu)
    integrand = besselj(nu, a * x) * besselj(nu, b * x) / x
    record = verify(integrand, (x, 0, oo), value, points=[{"a": 2, b: 1, "nu": R(1, 2)}], seconds=30)
    assert record.ok is True, str(record)
    assert all(p[a] > p[b] for p in sample([a, b, nu], given=[a > b]))
    assert verify(integrand, (x, 0, oo), value.subs(b, 2 * b), points=[{a: 2, b: 1, nu: R(1, 2)}]).ok is False


def test_samples_follow_assumptions_and_condition():
    n = Symbol("n", integer=True, positive=True)
    points = sample([s, z, n, a], (s > 1) & (re(z) < s) & (Min(a, n) > 1), count=6)
    assert len(points) == 6
    assert points == sample([a, n, z, s], (s > 1) & (re(z) < s) & (Min(a, n) > 1), count=6)
    assert any(not p[z].is_real for p in points)
    for p in points:
        assert p[n].is_Integer and p[n] > 1 and p[a] > 1 and p[s] > 1 and re(p[z]) < p[s]
    assert sample([a], a < 0) == []


@pytest.mark.parametrize(("arguments", "error", "word"), [
    (("x", (x, 0, oo), 1), TypeError, "f:"),
    ((x, x, 1), TypeError, "limits:"),
    ((x, (x, 0), 1), ValueError, "limits:"),
    ((x, (2, 0, 1), 1), TypeError, "limits:"),
    ((x, (x, 0, 1), "1/2"), TypeError, "value:"),
    ((x, (x, 0, 1), R(1, 2), a), TypeError, "condition:"),
    ((x, (x, 0, 1), R(1, 2), True, 0), ValueError, "digits:"),
    ((x, (x, 0, 1), R(1, 2), True, 15, {"a": 1}), TypeError, "points:"),
    ((a * x, (x, 0, 1), a / 2, True, 15, [{"b": 1}]), ValueError, "points:"),
])
def test_bad_arguments_are_named(arguments, error, word):
    with pytest.raises(error, match=word):
        verify(*arguments)
    with pytest.raises(ValueError, match="point:"):
        quad(exp(-a * x), (x, 0, oo))
