"""Coefficients read into Gammas, growth of phi, and the coefficient formula."""

from __future__ import annotations

import mpmath
import pytest
from sympy import (
    EulerGamma,
    Expr,
    I,
    Rational,
    S,
    bernoulli,
    beta,
    binomial,
    catalan,
    cos,
    exp,
    factorial,
    factorial2,
    ff,
    gamma,
    harmonic,
    lambdify,
    log,
    pi,
    polygamma,
    polylog,
    rf,
    sin,
    sqrt,
    symbols,
    zeta,
)

from sympy_mellin_ext.gamma import Factor
from sympy_mellin_ext.series import (
    Growth,
    SeriesTransform,
    coefficient_transform,
    gamma_form,
    growth_ok,
    phi_transform,
    term_ratio,
)

n, s = symbols("n s")
a, b, alpha = symbols("a b alpha", positive=True)
VALUES = {a: Rational(7, 5), b: Rational(9, 4), alpha: Rational(3, 4)}

COEFFICIENTS = [
    1 / factorial(2 * n + 1),
    (-1) ** n * binomial(2 * n, n) / 4**n,
    binomial(a, n),
    binomial(2 * n + 1, n),
    rf(a, n) / rf(b, 2 * n),
    ff(a, n),
    factorial2(2 * n + 1) * factorial2(2 * n),
    gamma(alpha * n + a) / gamma(n + b),
    gamma(a - n),
    1 / gamma(a - 2 * n),
    beta(n + a, b),
    catalan(n),
    (3 * n + 2) / (n**2 + 3 * n + 2),
    (n**2 + 1) / (n + a) ** 2,
    1 / (n + 1) - 1 / (n + 3),
    sin(pi * n / 3 + 1),
    cos(pi * n + 1),
    exp(-2 * n + 1) * a ** (n + 1),
    zeta(n + 2) - 1,
    harmonic(n) * sqrt(n + a),
    polygamma(1, n + 1) * log(n + 2),
    polylog(n + 1, Rational(1, 3)),
    bernoulli(2 * n + 2) / factorial(2 * n + 2),
]


@pytest.mark.parametrize("c", COEFFICIENTS, ids=str)
def test_form_has_the_values_of_the_coefficient(c: Expr) -> None:
    form = gamma_form(c, n)
    assert form is not None
    whole = form.constant * form.base**n
    for shift, slope, power in form.factors:
        whole *= gamma(shift + slope * n) ** power
    for extra in form.extras:
        whole *= extra.value
    for k in range(4):
        wanted, got = (e.subs(VALUES).subs(n, k).evalf(20) for e in (c, whole))
        assert abs(wanted - got) < 1e-12 * (1 + abs(wanted))


@pytest.mark.parametrize("c", [exp(n**2), n**n, 2 ** sqrt(n), 1 / zeta(n + 2), factorial2(n)], ids=str)
def test_unknown_coefficients_are_refused(c: Expr) -> None:
    assert gamma_form(c, n) is None


@pytest.mark.parametrize("c", [c for c in COEFFICIENTS if c not in COEFFICIENTS[-8:]], ids=str)
def test_term_ratio(c: Expr) -> None:
    ratio = term_ratio(c, n)
    if c.has(alpha) or c.has(sin):
        assert ratio is None
        return
    for k in range(3):
        quotient = (c.subs(n, k + 1) / c.subs(n, k)).subs(VALUES).evalf(20)
        assert abs(ratio.subs(n, k).subs(VALUES).evalf(20) - quotient) < 1e-12 * (1 + abs(quotient))


# Hardy, Ramanujan (1940), ch. XI, and Carlson's theorem: which phi the master theorem admits.
ADMITTED = [
    (S.One, gamma(s)),  # exp(-x)
    (gamma(n + 1), pi / sin(pi * s)),  # 1/(1+x)
    (1 / gamma(n + 1), gamma(s) / gamma(1 - s)),  # J_0(2*sqrt(x)): DLMF 10.22.43
    (gamma(n + a) / gamma(n + b), gamma(s) * gamma(a - s) / gamma(b - s)),  # DLMF 13.10.10
    (cos(pi * n / 2), gamma(s) * cos(pi * s / 2)),  # cos: DLMF 5.9.6
    (-sin(pi * n / 2), gamma(s) * sin(pi * s / 2)),  # sin: DLMF 5.9.7
    (zeta(n + 2), gamma(s) * zeta(2 - s)),
    (gamma(2 * n + 1) / gamma(n + 1), gamma(s) * gamma(1 - 2 * s) / gamma(1 - s)),
    (cos(pi * n / 3), gamma(s) * cos(pi * s / 3)),  # exp(-x/2)*cos(sqrt(3)*x/2)
    (1 / (n + a), gamma(s) / (a - s)),
    (harmonic(n), gamma(s) * harmonic(-s)),
    (polygamma(0, n + 1) + EulerGamma, gamma(s) * (polygamma(0, 1 - s) + EulerGamma)),
]


@pytest.mark.parametrize(("phi", "value"), ADMITTED, ids=str)
def test_admitted(phi: Expr, value: Expr) -> None:
    transform = phi_transform(phi, n)
    assert isinstance(transform, SeriesTransform)
    assert transform.growth.ok
    at = {**VALUES, s: Rational(3, 11)}
    got = transform.product.as_expr(s) * transform.extra_at(n, s)
    assert abs((got - value).subs(at).evalf(20)) < 1e-15


REFUSED = [
    (gamma(n + S.Half) / gamma(-n), 1 / gamma(-n)),
    (1 / gamma(n + 1) ** 2, 1 / gamma(n + 1)),  # 0F2(-x) grows
    (gamma(n + 1) ** 2, gamma(n + 1)),  # divergent series
    (cos(pi * n), (-1) ** n),  # exp(x)
    ((-2) ** n * gamma(n + 1), (-2) ** n),  # pole on the half line
    (cos(2 * pi * n / 3), 1 / gamma(S.Half - 2 * n / 3)),  # exp(x/2)*cos(sqrt(3)*x/2)
    (gamma(1 - n / 2), gamma(1 - n / 2)),  # poles of phi that are none of the coefficients
    (rf(-5, n), rf(-5, n)),  # a polynomial
    (gamma(n + 1) / gamma(3 * n + 1), 1 / gamma(3 * n + 1)),
]


@pytest.mark.parametrize(("phi", "culprit"), REFUSED, ids=str)
def test_refused_with_the_factor_to_blame(phi: Expr, culprit: Expr) -> None:
    outcome = phi_transform(phi, n)
    growth = outcome if isinstance(outcome, Growth) else outcome.growth
    assert growth.ok is False
    assert growth.culprit == culprit


def test_mittag_leffler_is_decided_by_alpha() -> None:
    """E_alpha(-x): DLMF 10.46.3; the transform exists for 0 < alpha < 2."""
    free = phi_transform(gamma(n + 1) / gamma(alpha * n + 1), n)
    assert isinstance(free, SeriesTransform)
    assert free.growth.ok is None
    assert len(free.growth.needs) == 1
    assert free.growth.needs[0].subs(alpha, Rational(3, 2)) > 0 > free.growth.needs[0].subs(alpha, 3)
    for value, verdict in (
        (Rational(1, 2), True),
        (Rational(3, 2), True),
        (2, True),
        (Rational(5, 2), False),
    ):
        outcome = phi_transform(gamma(n + 1) / gamma(value * n + 1), n)
        assert outcome.growth.ok is verdict
    known = phi_transform(gamma(n + 1) / gamma(alpha * n + 1), n, lambda e: 1)
    assert known.growth.ok is True


def test_complex_scale_counts_its_angle() -> None:
    one = [Factor(S.Zero, S.One, 1)]
    assert growth_ok(one, pi / 3).ok is True
    assert growth_ok(one, pi / 2).ok is True  # exp(i*x): boundary, Delta > 0
    assert growth_ok(one, 2 * pi / 3).ok is False
    binomial_series = [*one, Factor(S.Half, -S.One, 1)]
    assert growth_ok(binomial_series, pi).ok is False  # boundary with Delta = 0: singular on x > 0
    assert growth_ok(one, extra_type=pi / 4).ok is True
    assert coefficient_transform((I / 2) ** n / factorial(n), n).growth.ok is True


SERIES = [
    ((-1) ** n / factorial(2 * n), lambda x: mpmath.cos(mpmath.sqrt(x)), None),
    (binomial(-a, n), lambda x: (1 + x) ** mpmath.mpf(-1.4), (0, 1.4)),
    ((-1) ** n / factorial(n) ** 2, None, None),
    ((-1) ** n / (n + 1), lambda x: mpmath.log(1 + x) / x, (0, 1)),
    ((-1) ** n * rf(a, n) / rf(b, n) / factorial(n), lambda x: mpmath.hyp1f1(1.4, 2.25, -x), (0, 1.4)),
]


@pytest.mark.parametrize(("c", "f", "strip"), SERIES, ids=lambda v: str(v) if isinstance(v, Expr) else "")
def test_coefficient_formula(c: Expr, f: object, strip: tuple | None) -> None:
    transform = coefficient_transform(c, n)
    assert isinstance(transform, SeriesTransform)
    assert transform.growth.ok
    if f is None or strip is None:
        return
    left, right = transform.product.strip()
    assert float(max(left)) == strip[0]
    assert min(float(r.subs(VALUES)) for r in right) == pytest.approx(strip[1])
    value = lambdify(s, transform.product.at(s).subs(VALUES), "mpmath")(0.4)
    quadrature = mpmath.quad(lambda x: x ** (0.4 - 1) * f(x), [0, 1, 10, 1e3, 1e6, mpmath.inf])
    assert value == pytest.approx(float(quadrature), rel=1e-6)
