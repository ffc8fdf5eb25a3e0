"""Products of two kernels (and three that merge): published values, regions, continuation, sums."""
from __future__ import annotations

import random

import mpmath
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy import (
    Abs,
    Ci,
    Eq,
    Expr,
    I,
    Integral,
    Ne,
    Piecewise,
    Rational,
    S,
    Si,
    Symbol,
    airyai,
    atan,
    besseli,
    besselj,
    besselk,
    bessely,
    cos,
    diff,
    erf,
    erfc,
    exp,
    expint,
    fresnelc,
    fresnels,
    gamma,
    hankel1,
    hyper,
    log,
    lowergamma,
    oo,
    pi,
    sin,
    sinh,
    sqrt,
    symbols,
    uppergamma,
)

from sympy_mellin_ext import Refusal, closed_form, integrate, mellin
from sympy_mellin_ext.behaviour import INFINITE_END, ZERO_END, components, converge_product
from sympy_mellin_ext.matching import read_terms
from sympy_mellin_ext.region import Facts
from sympy_mellin_ext.strategies.continuation import holomorphic, single_valued
from sympy_mellin_ext.strategies.mellin_barnes import MellinBarnes
from sympy_mellin_ext.strategies.subtraction import without_head
from sympy_mellin_ext.strategies.tidy import tidy
from sympy_mellin_ext.verify import quad
from sympy_mellin_ext.verify.numeric import evaluate, holds

x, a, b, c, k, p, q, z = symbols("x a b c k p q z", positive=True)
s, mu, nu, r, t = symbols("s mu nu r t", real=True)
w = Symbol("w")
POINT = {
    a: Rational(7, 5), b: Rational(11, 9), c: Rational(5, 4), k: Rational(4, 7), p: Rational(13, 10),
    q: Rational(3, 8), z: Rational(12, 5), s: Rational(5, 9), mu: Rational(1, 3), nu: Rational(2, 7),
    r: Rational(-3, 4), t: Rational(9, 8), w: Rational(6, 5) + I / 3,
}  # fmt: skip
# another point, on the other side of a = b, k = z
OTHER = POINT | {a: Rational(3, 5), b: Rational(8, 5), k: Rational(9, 4), p: Rational(2, 3), r: Rational(5, 6)}


def at(expr: Expr, point: dict) -> mpmath.mpc:
    return mpmath.mpc(evaluate(expr, {v: n for v, n in point.items() if expr.has(v)}))


def solved(f: Expr, given: tuple = ()) -> Expr:
    answer = closed_form(f, (x, 0, oo), given=given)
    assert answer is not None, f
    assert not answer.value.free_symbols - f.free_symbols
    return answer


def bold_hyper(up: list, down: list, y: Expr) -> Expr:
    """The regularised function of DLMF 13.2.3 and 15.2.2."""
    value = hyper(up, down, y)
    for d in down:
        value /= gamma(d)
    return value


PUBLISHED = [
    # integrand, value, source
    (x**(s - 1)*exp(-a*x)*besselj(nu, b*x),
     (b/2)**nu*gamma(s + nu)/a**(s + nu)*bold_hyper([(s + nu)/2, (s + nu + 1)/2], [nu + 1], -b**2/a**2),
     "DLMF 10.22.49"),
    (x**(s - 1)*exp(-p**2*x**2)*besselj(nu, b*x),
     (b/(2*p))**nu*gamma((nu + s)/2)/(2*p**s)*exp(-b**2/(4*p**2))
     * bold_hyper([(nu - s)/2 + 1], [nu + 1], b**2/(4*p**2)), "DLMF 10.22.54"),
    (x**nu*bessely(nu, a*x)/(x**2 + b**2), -b**(nu - 1)*besselk(nu, a*b), "DLMF 10.22.47"),
    (besselj(mu, a*x)*besselj(mu - 1, b*x), Piecewise((b**(mu - 1)/a**mu, b < a), (0, True)), "DLMF 10.22.63"),
    (x**(s - 1)*besselj(mu, a*x)*besselj(nu, b*x), Piecewise(
        (a**mu*gamma((mu + nu + s)/2)/(2**(1 - s)*b**(mu + s)*gamma((nu - mu - s)/2 + 1))
         * bold_hyper([(mu + nu + s)/2, (mu - nu + s)/2], [mu + 1], a**2/b**2), a < b),
        (b**nu*gamma((mu + nu + s)/2)/(2**(1 - s)*a**(nu + s)*gamma((mu - nu - s)/2 + 1))
         * bold_hyper([(mu + nu + s)/2, (nu - mu + s)/2], [nu + 1], b**2/a**2), True)), "DLMF 10.22.56"),
    (cos(a*x)*besselk(0, x), pi/(2*sqrt(1 + a**2)), "DLMF 10.43.20-type"),
    (sin(a*x)*besselk(0, x), log(a + sqrt(1 + a**2))/sqrt(1 + a**2), "DLMF 10.43.21-type"),
    (x**(nu + 1)*exp(-p**2*x**2)*besseli(nu, b*x), b**nu/(2*p**2)**(nu + 1)*exp(b**2/(4*p**2)), "DLMF 10.43.23"),
    (exp(-p**2*x**2)*besseli(nu, b*x), sqrt(pi)/(2*p)*exp(b**2/(8*p**2))*besseli(nu/2, b**2/(8*p**2)), "DLMF 10.43.24"),
    (exp(-p**2*x**2)*besselk(nu, b*x),
     sqrt(pi)/(4*p*cos(pi*nu/2))*exp(b**2/(8*p**2))*besselk(nu/2, b**2/(8*p**2)), "DLMF 10.43.25"),
    (x**(s - 1)*besselk(mu, a*x)*besselj(nu, b*x),
     b**nu*gamma((nu + mu + s)/2)*gamma((nu - mu + s)/2)/(2**(2 - s)*a**(nu + s))
     * bold_hyper([(nu + mu + s)/2, (nu - mu + s)/2], [nu + 1], -b**2/a**2), "DLMF 10.43.26"),
    (x**(-nu - 1)*exp(-x - z**2/(4*x)), 2*(z/2)**(-nu)*besselk(nu, z), "DLMF 10.32.10"),
    (cos(a*x)/(x**2 + z**2)**(p + S.Half),
     sqrt(pi)*a**p*besselk(p, a*z)/(gamma(p + S.Half)*(2*z)**p), "DLMF 10.32.11 (Basset)"),
    (exp(-a*x)*erf(b*x), exp(a**2/(4*b**2))*erfc(a/(2*b))/a, "DLMF 7.14.2"),
    (exp(-a*x)*erf(sqrt(b*x)), sqrt(b/(a + b))/a, "DLMF 7.14.3"),
    (exp(-a*x)*fresnelc(sqrt(2*x/pi)), sqrt(sqrt(a**2 + 1) + a)/(2*a*sqrt(a**2 + 1)), "DLMF 7.14.7"),
    (exp(-a*x)*fresnels(sqrt(2*x/pi)), sqrt(sqrt(a**2 + 1) - a)/(2*a*sqrt(a**2 + 1)), "DLMF 7.14.8"),
    (exp(-a*x)/sqrt(x + z**2), sqrt(pi/a)*exp(a*z**2)*erfc(sqrt(a)*z), "DLMF 7.7.4"),
    (x**(a - 1)*exp(-z*x)*lowergamma(b, x),
     gamma(a + b)/(b*(1 + z)**(a + b))*hyper([1, a + b], [1 + b], 1/(1 + z)), "DLMF 8.14.5"),
    (x**(a - 1)*exp(-z*x)*uppergamma(b, x),
     gamma(a + b)/(a*(1 + z)**(a + b))*hyper([1, a + b], [1 + a], z/(1 + z)), "DLMF 8.14.6"),
    (exp(-a*x)*expint(1, x), log(1 + a)/a, "DLMF 6.14.1"),
    (exp(-a*x)*Ci(x), -log(1 + a**2)/(2*a), "DLMF 6.14.2"),
    (sin(x)/(x + z), Ci(z)*sin(z) + (pi/2 - Si(z))*cos(z), "DLMF 6.7.13 with 6.2.17"),
    (cos(x)/(x + z), -Ci(z)*cos(z) + (pi/2 - Si(z))*sin(z), "DLMF 6.7.14 with 6.2.18"),
    (exp(-z*x)/(x**2 + 1), Ci(z)*sin(z) + (pi/2 - Si(z))*cos(z), "DLMF 6.7.13"),
    (exp(-p*x)*airyai(x), exp(-p**3/3)*(S.One/3
     - p*hyper([S.One/3], [Rational(4, 3)], p**3/3)/(3**Rational(4, 3)*gamma(Rational(4, 3)))
     + p**2*hyper([Rational(2, 3)], [Rational(5, 3)], p**3/3)/(3**Rational(5, 3)*gamma(Rational(5, 3)))),
     "DLMF 9.10.14"),
    (x*exp(-p*x)*besselj(0, 2*sqrt(a*x)), (1 - a/p)*exp(-a/p)/p**2, "DLMF 10.22.51, differentiated in p**2"),
    (sin(a*x)*besselj(0, b*x), Piecewise((1/sqrt(a**2 - b**2), a > b), (0, True)), "DLMF 10.22.59"),
    (exp(-a*x)*besseli(0, b*x)*x**(s - 1), gamma(s)/a**s*hyper([s/2, (s + 1)/2], [1], b**2/a**2),
     "DLMF 10.22.49, b -> I*b"),
    (exp(-z*x)*x**(s - 1)*hyper([a], [c], k*x), gamma(s)/z**s*hyper([a, s], [c], k/z), "DLMF 13.10.3"),
    (x*exp(-p**2*x**2)*besselj(nu, a*x)*besseli(nu, b*x),
     exp((b**2 - a**2)/(4*p**2))*besselj(nu, a*b/(2*p**2))/(2*p**2), "DLMF 10.22.67, b -> I*b"),
    (log(1 + a**2*x**2)/(1 + b**2*x**2), pi/b*log(1 + a/b), "from memory: Gradshteyn-Ryzhik 4.295.7"),
    (atan(a*x)/(x*(1 + x**2)), pi/2*log(1 + a), "from memory: Gradshteyn-Ryzhik 4.535.7"),
    (exp(-b*sqrt(x**2 + a**2)), a*besselk(1, a*b), "from memory: Gradshteyn-Ryzhik 3.461.6"),
    (besselj(0, b*sqrt(x**2 + a**2)), cos(a*b)/b, "from memory: Gradshteyn-Ryzhik 6.677.1-type"),
    (log(x)*exp(-a/x - b*x)/x, log(a/b)*besselk(0, 2*sqrt(a*b)), "DLMF 10.32.10, differentiated in the order at 0"),
]  # fmt: skip


@pytest.mark.parametrize("f, value, source", PUBLISHED, ids=[source for _, _, source in PUBLISHED])
def test_published_value(f: Expr, value: Expr, source: str) -> None:
    answer = solved(f)
    checked = 0
    for point in (POINT, OTHER):
        used = {v: n for v, n in point.items() if f.has(v)}
        if holds(answer.condition, used):
            assert mpmath.almosteq(at(answer.value, point), at(value, point), 1e-11), (source, answer.value)
            checked += 1
    assert checked


# Forms that must come out as short as published: exact equality.
SHORT = [
    (exp(-a*x)*besselj(0, b*x), 1/sqrt(a**2 + b**2)),
    (x*exp(-a*x**2)*besselj(0, b*x), exp(-b**2/(4*a))/(2*a)),
    (exp(-a*x)*log(1 + b*x), exp(a/b)*expint(1, a/b)/a),
    (exp(-a*x)/(x + b), exp(a*b)*expint(1, a*b)),
    (exp(-a/x - b*x)/x**Rational(3, 2), sqrt(pi)*exp(-2*sqrt(a)*sqrt(b))/sqrt(a)),
    (sin(a*x)/(x*(x**2 + b**2)), pi*(1 - exp(-a*b))/(2*b**2)),
    (cos(a*x)/(x**2 + b**2), pi*exp(-a*b)/(2*b)),
    (exp(-b*sqrt(x**2 + a**2))/sqrt(x**2 + a**2), besselk(0, a*b)),
    (exp(-x)*x**(s - 1)*hyper([a], [b], x), gamma(b)*gamma(s)*gamma(b - a - s)/(gamma(b - a)*gamma(b - s))),
    (exp(-z*x)*x**(b - 1)*hyper([a], [b], x), z**(a - b)*gamma(b)/(z - 1)**a),
]  # fmt: skip


@pytest.mark.parametrize("f, value", SHORT, ids=[str(f) for f, _ in SHORT])
def test_short_form(f: Expr, value: Expr) -> None:
    assert solved(f).value == value


REGIONS = [
    # DLMF 10.22.56 and the table of behaviours: what the integral needs, no more
    (x**(s - 1)*besselj(mu, a*x)*besselj(nu, b*x), (s < 2) & (mu + nu + s > 0) & Ne(a, b)),
    (x**(s - 1)*besselj(nu, 2*x)*besselj(mu, 3*x), (s < 2) & (mu + nu + s > 0)),
    (x**(s - 1)*cos(a*x)/(1 + x**2)**p, (s > 0) & (s < 2*p + 1)),
    (x**(s - 1)*sin(x)*besselj(nu, x**2), (s < 3) & (2*nu + s > -1)),
    (x**(s - 1)*besselj(nu, a*x)/(1 + x**2)**p, (s > -nu) & (s < 2*p + Rational(3, 2))),
    (exp(-a*x)*besseli(nu, b*x), (a > b) & (nu > -1)),
    (x**(s - 1)*besselk(mu, a*x)*besseli(nu, b*x), (a > b) & (nu + s > Abs(mu))),
    (x**(s - 1)*exp(-a*x**2 - r*x), s > 0),
    (x**(s - 1)*exp(-r*x)*besselj(0, x), (s > 0) & (r > 0)),
    (x**(s - 1)*exp(-a*x)*log(1 + b*x), s > -1),
    (x**(s - 1)*exp(-a*x)*erf(b*x), s > -1),
    (x**(s - 1)*log(1 + a*x)/(1 + x)**p, (s > -1) & (s < p)),
    (x**(s - 1)*exp(-a*x)*cos(b*x)*besselj(nu, x), nu + s > 0),
    (x**(s - 1)*besselj(nu, a/x)*exp(-b*x), s > -Rational(3, 2)),
    # terms that cancel at 0 widen the region: 10.22.49 without its first term
    (x**(s - 1)*exp(-p*x)*(1 - besselj(0, b*x)), s > -2),
    (x**(s - 1)*exp(-p*x)*(erf(a*x) - erf(b*x)), s > -1),
    (x**(s - 1)*exp(-p*x)*sinh(q*x)*besselj(0, x), (s > -1) & (p > q)),
    (x**(s - 1)*exp(-b*sqrt(x**2 + a**2)), s > 0),
    (x**(s - 1)*cos(b*sqrt(x**2 + a**2)), (s > 0) & (s < 1)),
]  # fmt: skip


@pytest.mark.parametrize("f, region", REGIONS, ids=[str(f) for f, _ in REGIONS])
def test_region(f: Expr, region: Expr) -> None:
    found = converge(f)
    assert found is not None
    draw = random.Random(7)
    inside = 0
    for _ in range(150):
        names = sorted(f.free_symbols, key=str)
        point = {v: Rational(draw.randint(1 if v.is_positive else -40, 40), 11) for v in names}
        expected = holds(region, point)
        assert expected is not None
        assert holds(found, point) == expected, (found, point)
        inside += bool(expected)
    assert inside > 0


def converge(f: Expr) -> Expr | None:
    answer = closed_form(f, (x, 0, oo))
    return None if answer is None else answer.condition


DIVERGENT = [
    x**2*cos(3*x)*besselj(0, x), exp(x)*besselk(0, x/2), exp(-x)*log(1 + x)/x**2, besselj(0, x)/(x*(1 + x)),
    x**2*erf(x)*exp(-1/x), x*besselj(0, 2*x)*besselj(1, x), exp(-a*x)*besseli(0, 2*a*x), x*sin(x)*besselj(1, 2*x),
]  # fmt: skip


@pytest.mark.parametrize("f", DIVERGENT, ids=[str(f) for f in DIVERGENT])
def test_divergence_is_proved_and_not_handed_on(f: Expr) -> None:
    with pytest.raises(Refusal) as caught:
        closed_form(f, (x, 0, oo), strict=True)
    assert caught.value.reason == "diverges"
    assert isinstance(integrate(f, (x, 0, oo)), Integral)


def test_edge_where_frequencies_meet() -> None:
    """At a = b the product of DLMF 10.22.56 has a constant part: it needs Re s < 1 (DLMF 10.22.57)."""
    f = x**(s - 1)*besselj(mu, a*x)*besselj(nu, b*x)
    assert converge(f.subs(s, Rational(1, 2))) == (mu + nu > -Rational(1, 2))
    assert converge(f.subs(s, Rational(3, 2))) == (Ne(a, b) & (mu + nu > -Rational(3, 2)))


def test_branches_meet_where_the_integral_is_continuous() -> None:
    # DLMF 10.22.60-type: the value at a = b is the common limit
    value = solved(sin(a*x)*besselj(0, b*x)/x).value
    for u, v, expected in ((2, 1, pi/2), (1, 2, pi/6), (1, 1, pi/2)):
        assert value.subs({a: u, b: v}) == expected
    # an elliptic integral that has no value there as a formula
    assert solved(besselj(1, a*x)*besselj(1, b*x)/x**2).condition == Ne(a, b)


SUMS = [
    # terms that diverge one by one
    (exp(-p*x)*(besselj(0, b*x) - 1)/x, log(2*p/(p + sqrt(p**2 + b**2))), "DLMF 10.22.49, integrated in p"),
    ((exp(-a*x) - exp(-b*x))*besselj(0, x)/x, log((b + sqrt(b**2 + 1))/(a + sqrt(a**2 + 1))),
     "DLMF 10.22.49, likewise"),
    ((erf(a*x) - erf(b*x))*exp(-p*x)/x, None, ""),
    ((besselj(0, a*x) - besselj(0, b*x))*exp(-p*x)/x**Rational(3, 2), None, ""),
    ((1 - cos(a*x))*besselk(0, p*x)/x, None, ""),
    ((exp(-a*x) - 1 + a*x)*exp(-p*x**2)/x**2, None, ""),
    (x**(s - 1)*(log(1 + a*x) - log(1 + b*x))*exp(-p*x), None, ""),
    (exp(-a*x)*cos(t*x)*besselj(nu, b*x), None, ""),
    (exp(-a*x)*sin(t*x)*erfc(sqrt(b*x)), None, ""),
    (exp(-w*x)*besselj(nu, b*x)*x, None, ""),
    (exp(-w*x)/sqrt(x + b), None, ""),
    (exp(-a*x**2 + b*x)*x**(s - 1), None, ""),
    (exp(-a*x**2 - r*x), None, ""),
    (exp(-a*x)*hankel1(0, b*x), None, ""),
    (exp(I*a*x)/(1 + x**2), None, ""),
    (exp(k*x)*besselk(0, z*x), None, ""),
]  # fmt: skip


@pytest.mark.parametrize("f, value, source", SUMS, ids=[str(f) for f, _, _ in SUMS])
def test_against_quadrature(f: Expr, value: Expr | None, source: str) -> None:
    answer = solved(f)
    checked = 0
    for point in (POINT, OTHER):
        used = {v: n for v, n in point.items() if f.has(v)}
        if not holds(answer.condition, used):
            continue
        found = at(answer.value, point)
        if value is not None:
            assert mpmath.almosteq(found, at(value, point), 1e-11), source
        number, _, reliable, note = quad(f, (x, 0, oo), used, digits=10)
        assert reliable, note
        assert mpmath.almosteq(found, number, 1e-8)
        checked += 1
    assert checked


def test_values_where_poles_of_terms_meet() -> None:
    answer = solved(x**(s - 1)*exp(-p*x)*(besselj(0, b*x) - 1))
    places = [where for where, _ in answer.special]
    assert places == [Eq(s, 0), Eq(s, -1)]
    for where, value in answer.special:
        near = {s: where.rhs + Rational(1, 10**9), p: Rational(13, 10), b: Rational(4, 3)}
        assert abs(at(value, near) - at(answer.value, near)) < 1e-7


def test_log_in_a_product_is_a_derivative_in_the_exponent() -> None:
    # DLMF 10.32.10 differentiated in the order; 10.38.4 at integers, 10.38.7 at half-integers
    for power in (0, 2, -Rational(3, 2)):
        f = x**power*log(x)*exp(-a/x - b*x)
        number, _, reliable, _ = quad(f, (x, 0, oo), {a: POINT[a], b: POINT[b]}, digits=10)
        assert reliable
        assert mpmath.almosteq(at(solved(f).value, POINT), number, 1e-8)
    assert closed_form(log(x)*exp(-a*x)*besselj(nu, x), (x, 0, oo)) is None


def test_strip_of_a_product() -> None:
    u = Symbol("s")
    assert mellin(exp(-a*x)*besselj(nu, x), x, u).strip == (-nu, oo)
    assert mellin(cos(a*x)*besselj(nu, b*x), x, u).strip == (-nu, Rational(3, 2))
    assert mellin(exp(-b*sqrt(x**2 + a**2)), x, u).strip == (0, oo)


# -- parts -----------------------------------------------------------------------------------------------


def kernel_of(f: Expr):  # type: ignore[no-untyped-def]
    (term,) = read_terms(f, x, Facts())
    (kernel,) = term.kernels
    return kernel


def test_components_of_single_kernels() -> None:
    # DLMF 10.17.3: J_nu ~ sqrt(2/(pi x)) cos(x - ...)
    waves = components(kernel_of(besselj(nu, a*x)), INFINITE_END)
    assert waves is not None
    assert {(w.exponent, w.power, w.frequency) for w in waves} == {(-S.Half, 1, a), (-S.Half, 1, -a)}
    assert [w.exponent for w in components(kernel_of(besselj(nu, a*x)), ZERO_END)] == [-nu]
    # DLMF 9.7.5: Ai ~ x**(-1/4) exp(-2/3 x**(3/2))
    (decay,) = components(kernel_of(airyai(x)), INFINITE_END)
    assert (decay.exponent, decay.power, decay.rate) == (-Rational(1, 4), Rational(3, 2), Rational(2, 3))
    # DLMF 10.40.1: I_nu grows like exp(x)/sqrt(x)
    (growth,) = components(kernel_of(besseli(nu, b*x)), INFINITE_END)
    assert (growth.exponent, growth.power, growth.rate) == (-S.Half, 1, -b)
    # DLMF 13.7.1: M(a, c, k*x) ~ exp(k*x) x**(a - c), beside x**(-a)
    power, growth = components(kernel_of(hyper([a], [c], k*x)), INFINITE_END)
    assert (power.exponent, growth.exponent, growth.rate) == (-a, a - c, -k)
    # DLMF 6.12.3: Si ~ pi/2 - cos(x)/x
    power, *waves = components(kernel_of(Si(x)), INFINITE_END)
    assert power.exponent == 0 and {w.exponent for w in waves} == {-1}


def test_growth_against_decay_of_the_same_power() -> None:
    (term,) = read_terms(exp(-a*x)*hyper([b], [c], k*x), x, Facts())
    assert converge_product(term, Facts()).region.to_boolean() == (a > k)  # type: ignore[union-attr]
    (term,) = read_terms(exp(-x)*hyper([b], [c], 2*x), x, Facts())
    assert converge_product(term, Facts()) == "divergence"


@pytest.mark.parametrize("f, count", [(besselj(0, a*x), 1), (cos(a*x), 2), (erf(a*x), 1), (exp(-a*x), 3)])
def test_kernel_without_its_head(f: Expr, count: int) -> None:
    """Its transform on the next strip is that of the function minus its first terms."""
    rest, heads = without_head(kernel_of(f), count)  # type: ignore[misc]
    polynomial = sum(h.coefficient*x**h.power for h in heads)
    left, right = rest.product.strip()
    low, high = max(l.subs(a, 1) for l in left), min(r.subs(a, 1) for r in right)
    assert low < high
    middle = (low + high)/2 if high - low > Rational(1, 2) else low + (high - low)/3
    if f.has(cos, besselj):
        middle = low + Rational(1, 3)
    u = middle
    number, _, reliable, note = quad(x**(u - 1)*(f - polynomial), (x, 0, oo), {a: POINT[a]}, digits=10)
    assert reliable, note
    assert mpmath.almosteq(at(rest.product.at(u), POINT), number, 1e-8)


def test_continuation_of_formulas() -> None:
    half = S.Half
    assert holomorphic(exp(z*b)*expint(1, z*b), z, half)
    assert holomorphic(1/sqrt(z**2 + 1), z, half)
    assert holomorphic(sqrt(z**2 - 1), z, half)  # off the real axis, on each side of it
    assert not holomorphic(sqrt(1 + z**3), z, half)
    assert not holomorphic(expint(1, z**4), z, half)
    assert not holomorphic(log(1 + exp(z)), z, half)
    assert single_valued(exp(z**2)*(1 - erf(z)), z)
    assert not single_valued(exp(z)*expint(1, z), z)
    assert not single_valued(sqrt(z), z)


def test_tidy_keeps_the_value() -> None:
    for expr in (
        (1/(a*sqrt(1 + b**2/a**2)))*(2*a)**s*gamma(nu + 1)/nu,
        b**2/sqrt(a**2 + b**2) + a**2/sqrt(a**2 + b**2),
        log(1 - k**2)/2 + log(b/a) - log(b) + log(2)/3,
        2**(-nu)*4**(nu/2)*b**nu*b**(1 - nu),
    ):
        short = tidy(expr)
        assert mpmath.almosteq(at(short, POINT), at(expr, POINT), 1e-13)
        assert short.count_ops() <= expr.count_ops()
    # DLMF 10.39.1
    assert tidy(besseli(S.Half, a)*exp(-a)*sqrt(a)) == sqrt(2)*(1 - exp(-2*a))/(2*sqrt(pi))


def test_only_a_real_form_for_rational_conjugates() -> None:
    value = solved(exp(-a*x)*cos(t*x)*lowergamma(2, x)).value
    assert mpmath.almosteq(at(value, POINT).imag, 0, abs_eps=1e-12)


def test_refuses_what_it_cannot_do() -> None:
    for f in (besselj(0, x)*exp(-x)*erf(x), besselj(nu, x)*besselj(mu, 2*x)*besselj(0, 4*x)):
        assert closed_form(f, (x, 0, oo)) is None
    from sympy_mellin_ext.problem import Problem

    assert MellinBarnes().attempt(Problem(exp(-x)*besselj(0, x), x, S.Zero, S.One)) is None


# -- properties ------------------------------------------------------------------------------------------

FAMILY = [
    lambda u, v: x**(s - 1)*exp(-u*x)*besselj(nu, v*x),
    lambda u, v: x**(s - 1)*exp(-u*x)*log(1 + v*x),
    lambda u, v: x**(s - 1)*exp(-u*x - v/x),
    lambda u, v: x**(s - 1)*exp(-u*x**2 - v*x),
    lambda u, v: x**(s - 1)*besselk(nu, u*x)*besselj(0, v*x),
    lambda u, v: x**(s - 1)*exp(-u*x)*erfc(sqrt(v*x)),
    lambda u, v: x**(s - 1)*cos(u*x)/(v + x**2),
    lambda u, v: x**(s - 1)*expint(1, u*x)*besselj(0, v*x),
]  # fmt: skip
numbers = st.integers(3, 24).map(lambda n: Rational(n, 8))


@settings(max_examples=12, deadline=None, derandomize=True)
@given(st.sampled_from(FAMILY), numbers, numbers, numbers)
def test_scaling_and_duality(family, m, u, v) -> None:  # type: ignore[no-untyped-def]
    """x -> m*x and x -> 1/x change the integral by their Jacobians alone."""
    f = family(a, b)
    point = {a: u, b: v, s: Rational(9, 10), nu: Rational(1, 4)}
    plain = at(solved(f).value, point)
    scaled = at(solved(f.subs(x, m*x)).value*m, point)
    dual = at(solved(f.subs(x, 1/x)/x**2).value, point)
    assert mpmath.almosteq(plain, scaled, 1e-10)
    assert mpmath.almosteq(plain, dual, 1e-10)


@settings(max_examples=10, deadline=None, derandomize=True)
@given(st.sampled_from(FAMILY[:4]), numbers, numbers)
def test_differentiation_under_the_integral(family, u, v) -> None:  # type: ignore[no-untyped-def]
    """d/da of the value is the value of d/da of the integrand."""
    f = family(a, b)
    point = {a: u, b: v, s: Rational(6, 5), nu: Rational(1, 4)}
    with mpmath.workdps(30):
        h = mpmath.mpf(10)**-8

        def value(shift: int) -> mpmath.mpc:
            return mpmath.mpc(evaluate(solved(f).value, {**point, a: u + shift*Rational(1, 10**8)}, 25))

        slope = (value(1) - value(-1))/(2*h)
    assert mpmath.almosteq(slope, at(solved(diff(f, a)).value, point), 1e-9)
