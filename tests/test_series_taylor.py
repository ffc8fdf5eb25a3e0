"""Transforms from two-term recurrences, against quadrature and published values."""

from __future__ import annotations

from collections.abc import Callable

import mpmath
import pytest
from sympy import (
    Expr,
    Rational,
    S,
    Symbol,
    airyai,
    airyaiprime,
    airybi,
    asin,
    asinh,
    besseli,
    besselj,
    besselk,
    cos,
    erfc,
    exp,
    gamma,
    lambdify,
    log,
    pi,
    sin,
    sinh,
    sqrt,
    symbols,
)

from sympy_mellin_ext.series import hypergeometric_pieces, taylor_transform
from sympy_mellin_ext.series.jets import shape_of
from sympy_mellin_ext.series.matching import constant_form
from sympy_mellin_ext.series.recurrence import two_term
from sympy_mellin_ext.series.tower import Tower, constants_of

x, k, nu, a = symbols("x k nu a", positive=True)
s = Symbol("s")
VALUES = {k: Rational(9, 4), nu: Rational(3, 5), a: Rational(6, 5)}

# function, real part of s inside the strip
FUNCTIONS = [
    (((sqrt(1 + 4 * x) - 1) / (2 * x)) ** k, 0.6),
    ((sqrt(1 + x**2) - x) ** k, 0.9),
    ((sqrt(1 + x**2) - x) ** k / sqrt(1 + x**2), 1.3),
    ((1 + sqrt(1 + a * x)) ** (-k), 0.4),
    (exp(-k * asinh(sqrt(x))), 0.5),
    ((1 + x + sqrt(x**2 + 2 * x)) ** (-k), 0.7),
    (exp(-k * asinh(1 / x)), -0.8),
    (1 / (sqrt(x) + sqrt(1 + x)), 0.25),
    (asinh(x) ** 2, -1.1),
    (asinh(x) / x, 0.4),
    (airyai(x) ** 2, 1.7),
    (airyai(x) * airyaiprime(x), 0.8),
    (airyai(a * x), 1.2),
    (airyaiprime(x**2), 1.5),
    (exp(-x) * besseli(nu, x), 0.1),
    (exp(-a * x) * besselk(nu, a * x), 1.4),
    (besselj(nu, a * x) * besselk(nu, a * x), 1.3),
    (besseli(nu, x) * besselk(nu, x), 0.5),
    (besselk(nu, x) ** 2, 2.3),
    (exp(-x) * sin(x), 0.8),
    (exp(-x) * (cos(x) + sin(x)), 1.1),
    (exp(-a * x) * cos(a * x), 0.8),
    (exp(-x / 2) * sin(sqrt(3) * x / 2), 1.4),
    (1 / (x**2 + x + 1), 0.7),
    (exp(-(x ** Rational(1, 3))), 0.9),
]


def quadrature(f: Expr, at: float) -> float:
    """``int x**(at-1)*f`` after ``x = exp(u)``; f is evaluated with room for cancellation."""
    g = evaluator(f)
    reach = 60 if f.has(airyai, airyaiprime, besseli, besselj, besselk) else 120
    with mpmath.workdps(130):

        def integrand(u: mpmath.mpf) -> mpmath.mpf:
            with mpmath.workdps(20 if reach == 60 else 130):
                point = mpmath.exp(u)
            # beyond this a decaying integrand is below every digit asked for, but slow to evaluate
            if point > 1e3 and f.has(airyai, airyaiprime, besselj, exp) and decays(f):
                return mpmath.mpf(0)
            with mpmath.workdps(40 if reach == 60 else 130):
                return mpmath.exp(u * mpmath.mpf(at)) * g(point)

        marks = [-reach, -40, -20, -10, -5, -2, 0, 1, 2, 3, 4, 5, 7, 10, 20, 40, reach]
        with mpmath.workdps(20):
            return float(mpmath.quad(integrand, marks, maxdegree=7).real)


def evaluator(f: Expr) -> Callable[[mpmath.mpf], mpmath.mpf]:
    own = {"airyaiprime": lambda z: mpmath.airyai(z, derivative=1)}
    return lambdify(x, f.subs(VALUES), [own, "mpmath"])


def decays(f: Expr) -> bool:
    value = evaluator(f)(mpmath.mpf(300))
    return bool(abs(value) < mpmath.mpf(10) ** -30)


@pytest.mark.parametrize(("f", "at"), FUNCTIONS, ids=str)
def test_against_quadrature(f: Expr, at: float) -> None:
    found = taylor_transform(f, x)
    assert found is not None
    left, right = ([float(h.subs(VALUES)) for h in side] for side in found.product.strip())
    assert max(left) < at
    assert all(at < h for h in right)
    value = lambdify(s, found.product.at(s).subs(VALUES), "mpmath")(mpmath.mpf(at))
    assert float(value) == pytest.approx(quadrature(f, at), rel=1e-9)
    assert found.steps[0][0].startswith("differential equation")


PUBLISHED = [
    (airyai(x), gamma(s) / (3 ** ((s + 2) / 3) * gamma((s + 2) / 3)), "DLMF 9.10.17"),
    (
        airyai(x) ** 2,
        2 * gamma(s) / (sqrt(pi) * 12 ** ((2 * s + 5) / 6) * gamma(s / 3 + Rational(5, 6))),
        "DLMF 9.11.15",
    ),
    (
        exp(-x) * besselk(nu, x),
        sqrt(pi) * gamma(s + nu) * gamma(s - nu) / (2**s * gamma(s + S.Half)),
        "from memory: DLMF 10.43(iv)",
    ),
    (
        besselk(nu, x) ** 2,
        2 ** (s - 3) / gamma(s) * gamma(s / 2 + nu) * gamma(s / 2) ** 2 * gamma(s / 2 - nu),
        "from memory: DLMF 10.43(iv)",
    ),
    (exp(x) * erfc(sqrt(x)), gamma(s) / cos(pi * s), "DLMF 13.10.11 with a = b = 1/2, and 13.6.8"),
    (exp(x**2) * erfc(x), gamma(s / 2) / (2 * cos(pi * s / 2)), "DLMF 13.10.11 with a = b = 1/2, and 13.6.8"),
    (exp(-x) * sin(x), 2 ** (-s / 2) * gamma(s) * sin(pi * s / 4), "DLMF 5.9.7 with a complex scale"),
    (exp(-x) * cos(x), 2 ** (-s / 2) * gamma(s) * cos(pi * s / 4), "DLMF 5.9.6 with a complex scale"),
]


@pytest.mark.parametrize(("f", "value", "source"), PUBLISHED, ids=str)
def test_published(f: Expr, value: Expr, source: str) -> None:
    found = taylor_transform(f, x)
    assert found is not None, source
    for point in (Rational(13, 7), Rational(29, 9)):
        gap = (found.product.at(s) / value).subs(VALUES).subs(s, point)
        assert abs(gap.evalf(20) - 1) < 1e-15


REFUSED = [
    (airybi(x), "grows"),
    (sin(x) * sinh(x), "grows"),
    (cos(k * asin(x)), "singular at x = 1"),
    (((x - 1) ** 2) ** (k / 2), "branch at x = 1"),
    (exp(-x) * sin(x**2), "no two-term recurrence"),
    (log(1 + x) ** 2, "harmonic numbers"),
    (exp(-exp(x)), "no linear equation of low order"),
    (exp(-1 / x - x), "essential singularity at 0"),
    (1 / (1 - x), "pole at x = 1"),
    (1 / (1 - x - x**2), "pole on the half line"),
    (sqrt(1 - x + x**2 - x**3), "branch at x = 1"),
    (gamma(x), "not known"),
    (exp(-(x**k)), "symbolic power"),
]


@pytest.mark.parametrize(("f", "why"), REFUSED, ids=str)
def test_refused(f: Expr, why: str) -> None:
    assert taylor_transform(f, x) is None, why


def test_parameter_that_comes_out_wrong_sided_leaves_no_strip() -> None:
    """exp(k*asinh(x)) grows for k > 0: its formula must not claim a strip."""
    found = taylor_transform(exp(k * asinh(x)), x)
    if found is not None:
        left, right = found.product.strip()
        assert max(left) >= min(h.subs(k, 1) for h in right)


def test_real_parameter_gives_the_same_formula() -> None:
    r = Symbol("r", real=True)
    found = taylor_transform(exp(-r * asinh(x)), x)
    assert found is not None
    assert found.product.strip() == ([0], [r])


def test_power_in_front_and_plain_symbol() -> None:
    y = Symbol("y")
    plain = taylor_transform(y**a * airyai(y), y)
    assert plain is not None
    assert plain.product.strip()[0] == [-a]
    assert not plain.product.as_expr(s).free_symbols - {a, s}


def test_recurrence_of_higher_order_than_the_equation() -> None:
    """exp(-x)*sin(x) satisfies a second-order equation; its two-term one has order 4 and step 4."""
    f = exp(-x) * sin(x)
    tower = Tower(x, constants_of(f, x))
    assert shape_of(f, x, []) == (4, 4)
    recurrence = two_term(tower, tower.element(f), Symbol("theta"), 4, 4)
    assert (recurrence.step, recurrence.left, recurrence.ratio) == (4, (0, 1, 2, 3), Rational(1, 4))


@pytest.mark.parametrize(
    ("f", "at"),
    [(cos(k * asin(x)), 0.7), (sin(k * asin(x)), 1.2), (asin(x) ** 2, 0.3), (asin(x) / sqrt(1 - x**2), 0.6)],
    ids=str,
)
def test_hypergeometric_pieces_on_the_unit_interval(f: Expr, at: float) -> None:
    found = hypergeometric_pieces(f, x)
    assert found is not None
    g = lambdify(x, f.subs(VALUES), "mpmath")
    near = sum(
        complex(p.coefficient.subs(VALUES))
        * 0.4 ** float(p.exponent)
        * mpmath.hyper(
            [q.subs(VALUES) for q in p.upper],
            [q.subs(VALUES) for q in p.lower],
            float(p.argument) * 0.4**p.step,
        )
        for p in found
    )
    assert complex(near) == pytest.approx(complex(g(0.4)), rel=1e-12)
    value = sum(p.moment(Rational(str(at))) for p in found).subs(VALUES).evalf(15)

    def integrand(u: mpmath.mpf) -> mpmath.mpf:
        with mpmath.workdps(90):
            point = mpmath.cos(u)
            return point ** (mpmath.mpf(str(at)) - 1) * mpmath.sin(u) * g(point)

    with mpmath.workdps(20):
        wanted = mpmath.quad(integrand, [0, 1, mpmath.pi / 2])
    assert complex(value) == pytest.approx(complex(wanted), rel=1e-8)


def test_integer_order_by_continuation() -> None:
    """K_1 has a logarithm at 0: the order is made generic, and put back at the end."""
    found = taylor_transform(besselj(1, x) * besselk(1, x), x)
    assert found is not None
    assert found.product.as_expr(s).free_symbols == {s}
    wanted = mpmath.quad(lambda v: v**-0.1 * mpmath.besselj(1, v) * mpmath.besselk(1, v), [0, 1, 5, 20, 45])
    assert float(found.product.at(S(9) / 10).evalf()) == pytest.approx(float(wanted), rel=1e-8)


def test_constants_come_out_short() -> None:
    assert constant_form(pi / (sin(pi * nu) * gamma(nu) * gamma(1 - nu))) == 1
    assert constant_form(2 ** (k - 1) * 2 ** (1 - k)) == 1
