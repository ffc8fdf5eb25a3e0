"""Special values, Laurent series in a parameter, expansions at 0 and at oo; numbers by mpmath."""
from __future__ import annotations

from collections.abc import Callable

import mpmath
import pytest
from mpmath import mp, mpf
from sympy import (
    EulerGamma,
    Expr,
    Rational,
    S,
    Symbol,
    besselj,
    besselk,
    cos,
    erfc,
    exp,
    gamma,
    hyper,
    lambdify,
    log,
    oo,
    pi,
    polygamma,
    sin,
    symbols,
    tan,
    uppergamma,
    zeta,
)

from sympy_mellin_ext import Refusal, closed_form, mellin
from sympy_mellin_ext.expansions import (
    expansion,
    expansion_of_integral,
    expansion_of_sum,
    parameter_series,
)
from sympy_mellin_ext.expansions.arithmetic import NotMeromorphic
from sympy_mellin_ext.expansions.special import _limit
from sympy_mellin_ext.verify import quad
from sympy_mellin_ext.verify.numeric import evaluate

x, a, b, k = symbols("x a b k", positive=True)
s, t = symbols("s t", real=True)
z, d, eps = symbols("z d epsilon")


def number(value: Expr, digits: int = 30) -> mpf:
    return evaluate(value, {}, digits)


# -- special values --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("f", "values"),
    [
        (x ** (s - 1) / ((x + a) * (x + b)), {"s": 1}),  # 0*oo
        (x ** (s - 1) / ((x + a) * (x + b)), {"a": 2, "b": 2}),  # two roots meet
        (x ** (s - 1) / ((x + a) * (x + b)), {"a": 2, "b": 2, "s": 1}),  # both at once
        (x ** (s - 1) * (exp(-a * x) - exp(-b * x)), {"s": 0}),  # oo - oo
        (x ** (s - 1) * (exp(-a * x) - exp(-b * x)), {"s": 0, "a": 3, "b": 1}),
        (x ** (s - 1) * (exp(-x) - 1 + x - x**2 / 2), {"s": Rational(-5, 2)}),
        (x ** (s - 1) * sin(a * x), {"s": 0, "a": 2}),
    ],
)
def test_value_at_special_parameters(f: Expr, values: dict) -> None:
    answer = closed_form(f, (x, 0, oo))
    value = answer.at(**values)
    point = {Symbol(n, **{"positive": True} if n in "ab" else {"real": True}): v for n, v in values.items()}
    rest = {p: q for p, q in ((a, Rational(13, 7)), (b, Rational(5, 4)), (s, Rational(2, 3))) if p not in point}
    found, _, reliable, note = quad(f.subs(point).subs(rest), (x, 0, oo), {}, digits=10, seconds=20)
    assert reliable, note
    assert mpmath.almosteq(number(value.subs(rest)), found, rel_eps=1e-9)


@pytest.mark.parametrize(
    ("value", "point", "expected"),
    [
        # one parameter: the constant term itself
        (pi * (a ** (s - 1) - b ** (s - 1)) / ((b - a) * sin(pi * s)), {s: S.One}, log(a / b) / (a - b)),
        # two parameters that meet with a third one at its own removable singularity
        (pi * (a ** (s - 1) - b ** (s - 1)) / ((b - a) * sin(pi * s)), {s: S.One, a: b}, 1 / b),
        ((polygamma(0, s) - polygamma(0, t)) / (s - t), {s: S(2), t: S(2)}, pi**2 / 6 - 1),
        (gamma(s - t) * (cos(pi * (s - t)) - 1) / tan(s - t), {s: S(3), t: S(3)}, -(pi**2) / 2),
        (gamma(s) * (1 - 2 ** (-s)) * zeta(1 + s) * s, {s: S.Zero}, log(2)),
    ],
)
def test_limit_in_perturbed_parameters(value: Expr, point: dict, expected: Expr) -> None:
    found = _limit(value, point)
    assert found is not None
    rest = {a: Rational(13, 7), b: Rational(5, 4)}
    assert mpmath.almosteq(number(found.subs(rest)), number(expected.subs(rest)), rel_eps=1e-25)


def test_a_limit_that_depends_on_the_direction_is_none() -> None:
    assert _limit(s / (s + t), {s: S.Zero, t: S.Zero}) is None
    assert _limit(gamma(s), {s: S.Zero}) is None


def test_at_refuses_outside_the_region_and_unknown_names() -> None:
    answer = closed_form(x ** (s - 1) * exp(-a * x), (x, 0, oo))
    assert answer.at(s=3) == 2 / a**3
    with pytest.raises(Refusal, match="outside the region"):
        answer.at(s=-1)
    with pytest.raises(ValueError, match="q is not one of the parameters"):
        answer.at(q=1)


# -- Laurent series in a parameter -------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "parameter", "point", "order"),
    [
        (gamma(2 - d / 2) * gamma(d / 2 - 1) ** 2 / gamma(d - 2), d, 4, 3),  # the massless bubble
        (gamma(eps) * a**-eps * (4 * pi) ** eps, eps, 0, 4),  # the massive tadpole, to eps**4
        (gamma(s) * zeta(s), s, 1, 3),
        (gamma(s) * zeta(s), s, 0, 2),
        (gamma(s) * zeta(s, a) * a**s, s, 1, 2),
        (polygamma(1, s) / sin(pi * s), s, -2, 2),
        (gamma(s**2 + s) * (pi / tan(pi * s / 2)), s, 0, 3),
        (pi / sin(pi * s) * (2**s - 3**s) / s, s, 0, 4),
        (erfc(s) * exp(s) / s**2, s, 0, 2),
        (hyper([a, 1], [b], s / 3) / s, s, 0, 3),
        (log(gamma(1 + s)) / s**3 + (1 + s) ** a, s, 0, 2),
    ],
)
def test_laurent_against_numbers(value: Expr, parameter: Symbol, point: int, order: int) -> None:
    rest = {a: Rational(13, 7), b: Rational(5, 4)}
    series = parameter_series(value, parameter, point, order)
    assert series.order == order
    h = Rational(1, 10**6)
    with mp.workdps(60):
        found = number(series.as_expr().subs(rest).subs(parameter, point + h), 45)
        exact = number(value.subs(rest).subs(parameter, point + h), 45)
        assert abs(found - exact) < mpf(10) ** (-6 * (order + 1) + 4), (found, exact)
        assert abs(found - exact) > 0  # truncated


def test_one_loop_coefficients() -> None:
    # DLMF 5.7.3: Gamma(eps) = 1/eps - gamma + (gamma**2/2 + pi**2/12)*eps + ...
    series = parameter_series(gamma(eps), eps, 0, 1)
    assert series.valuation == -1
    assert series.coefficients == (1, -EulerGamma, EulerGamma**2 / 2 + pi**2 / 12)
    series = parameter_series(gamma(2 - d / 2) * gamma(d / 2 - 1) ** 2 / gamma(d - 2), d, 4, 0)
    assert series.coefficients == (-2, 2 - EulerGamma)  # common practice: 1/eps - gamma + 2, d = 4 - 2*eps
    assert "O(epsilon**2)" in str(parameter_series(gamma(eps), eps, 0, 1))


def test_laurent_of_a_closed_form() -> None:
    # int k**(d-1)/(k**2+m**2)**2: the bubble at zero momentum
    answer = closed_form(x ** (3 - 2 * eps) / (x**2 + a**2) ** 2, (x, 0, oo))
    series = answer.laurent(eps, 0, 0)
    assert series.coefficient(-1) == Rational(1, 2)
    assert (series.coefficient(0) - (-log(a) - Rational(1, 2))).expand() == 0
    assert series.coefficient(-3) == 0


def test_laurent_says_what_stands_in_the_way() -> None:
    with pytest.raises(NotMeromorphic, match="branch point"):
        parameter_series(s ** Rational(1, 2), s, 0, 2)
    with pytest.raises(NotMeromorphic, match="essential"):
        parameter_series(exp(1 / s), s, 0, 2)
    with pytest.raises(NotMeromorphic, match="besselj"):
        parameter_series(besselj(s, 1), s, 0, 1)
    assert parameter_series(gamma(s + 1) - s * gamma(s), s, Rational(1, 3), 1).coefficients == (0,)
    with pytest.raises(ValueError, match="finite"):
        parameter_series(gamma(s), s, oo, 1)


# -- asymptotics --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("f", "at", "order", "beyond"),
    [
        (besselk(0, x), 0, 6, 0),  # DLMF 10.31.2
        (besselk(Rational(1, 3), x) * exp(-x), 0, 4, 0),
        (log(1 + x) ** 2 / (1 + x), oo, 5, 0),
        (uppergamma(Rational(7, 5), x), 0, 5, 0),
        (hyper([a], [b], -x), oo, 5, 1),  # DLMF 13.7.2
        (besselj(0, x) ** 2, 0, 6, 0),
        (1 / (exp(x) - 1), 0, 7, 0),  # Bernoulli numbers, DLMF 24.2.1
        (log(1 - exp(-x)), 0, 4, 0),
        (1 / (exp(x) + 1) ** 2, 0, 4, 0),
        (cos(x) / (1 + x), 0, 5, 0),
        (polygamma(0, 1 + x) + EulerGamma, 0, 4, 0),  # DLMF 5.7.4
    ],
)
def test_expansion(f: Expr, at: Expr, order: int, beyond: int) -> None:
    rest = {a: Rational(13, 7), b: Rational(5, 4)}
    found = expansion(f, x, at, order)
    assert found is not None
    assert len(found.beyond) == beyond
    check(lambda y: number(f.subs(rest).subs(x, y)), found.as_expr().subs(rest), x, at, order)


def check(exact: object, series: Expr, variable: Symbol, at: Expr, order: int) -> None:
    """The error is smaller than the last term that is there, and falls as the order says."""
    errors = []
    for y in (Rational(1, 64), Rational(1, 256)) if at == 0 else (Rational(256), Rational(1024)):
        errors.append(abs(exact(y) - number(series.subs(variable, y))))
    ratio = mpf(4) ** order
    assert errors[0] < 4000 * mpf(64 if at == 0 else 256) ** (-order)
    assert errors[1] * ratio < errors[0] * mpf("1.5") or errors[1] < mpf("1e-25"), errors


def test_exponentially_small_and_oscillating_parts() -> None:
    assert expansion(erfc(x), x, oo, 4).beyond == (exp(-(x**2)) / x,)
    assert expansion(erfc(x), x, oo, 4).terms == ()
    squares = expansion(besselj(0, x) ** 2, x, oo, 3)  # DLMF 10.17.3 squared
    assert squares.terms[0] == (1 / pi, -1, 0)
    assert squares.beyond == (cos(2 * x) / x,)
    assert expansion(exp(x) * besselk(0, x), x, oo, 2) is not None
    assert expansion(hyper([a], [b], x), x, oo, 2) is None  # grows
    assert expansion(besselj(0, x) * besselj(1, 2 * x), x, oo, 2) is None  # two waves


def test_expansion_of_a_transform() -> None:
    answer = mellin(exp(-x) / (1 + x), x, z)
    assert answer.expansion(0, 2).as_expr() == 1 - 2 * x + Rational(5, 2) * x**2
    with pytest.raises(ValueError, match=r"x\*\*\(s - 1\)"):
        closed_form(exp(-a * x), (x, 0, oo)).expansion(0, 2)
    with pytest.raises(ValueError, match="at must be"):
        answer.expansion(1, 2)


@pytest.mark.parametrize(
    ("f", "g", "at", "order"),
    [
        (1 / (1 + x), exp(-x), 0, 4),  # DLMF 6.6.2, logarithms
        (1 / (1 + x), exp(-x), oo, 5),  # DLMF 6.12.1
        (1 / (1 + x**2), besselj(0, x), 0, 5),
        (exp(-x), log(1 + x), 0, 3),
        (exp(-x), log(1 + x), oo, 3),
        (x * exp(-(x**2)), besselk(0, x), oo, 6),
        (1 / (exp(x) - 1), x / (1 + x**2), oo, 3),
    ],
)
def test_integral_with_a_large_or_small_parameter(f: Expr, g: Expr, at: Expr, order: int) -> None:
    found = expansion_of_integral(f, g, x, k, at, order)
    assert found is not None

    def exact(y: Rational) -> mpf:
        integrand = f * g.subs(x, y * x)
        if at == 0 and integrand.has(besselj):
            return number(closed_form(integrand, (x, 0, oo)).value, 25)
        with mp.workdps(30):
            return trapezoid(lambdify(x, integrand * x, "mpmath"))

    check(exact, found.as_expr(), k, at, order)


def trapezoid(g: Callable[[mpf], mpf]) -> mpf:
    """``int g(x) dx/x`` by the trapezoidal rule in log(x)."""
    total, step = mpf(0), mpf(1) / 8
    for sign in (1, -1):
        for n in range(0 if sign > 0 else 1, 1500):
            y = mp.exp(sign * n * step)
            value = g(y)
            total += value
            if n > 40 and abs(value) < mpf("1e-26") * abs(total):
                break
    return total * step


def test_oscillating_remainder_of_an_integral() -> None:
    found = expansion_of_integral(x * besselj(0, x**2), cos(x), x, k, oo, 4)
    assert found.beyond == (cos(k**2 / 4),)
    assert expansion_of_integral(exp(-x) / x, exp(-x) / x, x, k) is None  # no common strip


@pytest.mark.parametrize(
    ("series", "abscissa", "f", "order", "term"),
    [
        (zeta(s), 1, exp(-x), 7, lambda n, y: mp.exp(-n * y)),
        (zeta(2 * s), Rational(1, 2), exp(-x), 6, lambda n, y: mp.exp(-n * n * y)),  # DLMF 20.7.32
        (zeta(s) ** 2, 1, exp(-x), 4, lambda n, y: mp.exp(-n * y) / -mp.expm1(-n * y)),  # divisors, DLMF 27.4.3
        (zeta(s + 1), 0, exp(-x), 5, lambda n, y: mp.exp(-n * y) / n),
        (zeta(s, a), 1, exp(-(x**2)), 4, lambda n, y: mp.exp(-(((n - 1 + mpf(13) / 7) * y) ** 2))),
    ],
)
def test_harmonic_sum(series: Expr, abscissa: Expr, f: Expr, order: int, term: object) -> None:
    found = expansion_of_sum(series, s, f, x, 0, order, abscissa=abscissa)
    assert found is not None
    value = found.as_expr().subs(a, Rational(13, 7))

    def exact(y: Rational) -> mpf:
        with mp.workdps(30):
            total, n, y = mpf(0), 1, mpf(y.p) / y.q
            while True:
                change = term(n, y)
                total += change
                if change < mpf(10) ** -28:
                    return total
                n += 1

    if order == 6:  # the theta function: nothing but exponentially small terms is left
        assert abs(exact(Rational(1, 4)) - number(value.subs(x, Rational(1, 4)))) < mpf("1e-15")
    else:
        check(exact, value, x, 0, order)


def test_harmonic_sum_at_infinity() -> None:
    found = expansion_of_sum(zeta(s), s, 1 / (1 + x**2), x, oo, 6)
    assert found.terms == ((pi**2 / 6, -2, 0), (-(pi**4) / 90, -4, 0), (pi**6 / 945, -6, 0))
