"""The public names: what they accept, return and refuse."""
from __future__ import annotations

import pytest
from sympy import (
    Eq,
    Integral,
    Piecewise,
    Rational,
    S,
    besselj,
    cos,
    cot,
    exp,
    gamma,
    log,
    oo,
    pi,
    polygamma,
    sin,
    sqrt,
    symbols,
    zeta,
)

from sympy_mellin_ext import (
    ClosedForm,
    Refusal,
    closed_form,
    integrate,
    master_theorem,
    mellin,
    principal_value,
)

x, a, b = symbols("x a b", positive=True)
s, t, k = symbols("s t k", real=True)
z, n = symbols("z n")


def test_bare_expression_where_the_assumptions_imply_the_region() -> None:
    # DLMF 5.9.1
    assert integrate(x**3 * exp(-a * x), (x, 0, oo)) == 6 / a**4


def test_piecewise_elsewhere_and_the_other_conds() -> None:
    f = x ** (s - 1) * exp(-a * x)
    value, region = a**-s * gamma(s), s > 0
    assert integrate(f, (x, 0, oo)) == Piecewise((value, region), (Integral(f, (x, 0, oo)), True))
    assert integrate(f, (x, 0, oo), conds="none") == value
    assert integrate(f, (x, 0, oo), conds="separate") == (value, region)


def test_given_decides_the_region_and_is_stripped() -> None:
    f = exp(-a * x + b * x)
    assert closed_form(f, (x, 0, oo)).condition == (a > b)
    assert integrate(f, (x, 0, oo), given=a > b) == 1 / (a - b)
    assert integrate(sin(x), x, given=[a > b]) == -cos(x)
    with pytest.raises(TypeError, match="given takes a relation"):
        closed_form(f, (x, 0, oo), given="a > b")


def test_closed_form_record() -> None:
    answer = closed_form(x ** (z - 1) * sin(a * x), (x, 0, oo))
    assert isinstance(answer, ClosedForm)
    # DLMF 5.9.7; the form is regular at z = 0, which lies inside the region
    assert answer.value.subs(z, 0) == pi / 2
    assert answer.strip == (-1, 1)
    assert answer.strategy == "master theorem"
    assert any("5.9" in source for source in answer.sources)
    assert "sin" in str(answer.steps[0])
    assert "gamma" in str(answer)
    assert r"\int" in answer._repr_latex_()
    with pytest.raises(AttributeError):
        answer.value = S.One  # type: ignore[misc]


def test_removable_singularity_stands_first() -> None:
    # common practice: int x**(s-1)/((1+x)*(2+x)) = pi*(1-2**(s-1))/sin(pi*s), and log(2) at s = 1
    answer = closed_form(x ** (s - 1) / ((1 + x) * (2 + x)), (x, 0, oo))
    assert answer.condition == (s > 0) & (s < 2)
    piecewise = answer.as_piecewise()
    assert piecewise.args[0].cond == Eq(s, 1)
    assert piecewise.subs(s, 1) == log(2)


@pytest.mark.parametrize(
    ("f", "reason"),
    [
        (exp(-x) / x**2, "diverges"),
        (x**2 * besselj(0, x), "diverges"),
        (1 / (x - a), "diverges"),
        (x ** (s - 1) * exp(a * x), "growth"),
        (x * S(2), "diverges"),
        (gamma(x + Rational(1, 2)) * exp(-sqrt(x)), "no kernel"),
    ],
)
def test_refusals_say_why(f, reason) -> None:
    assert closed_form(f, (x, 0, oo)) is None
    with pytest.raises(Refusal) as caught:
        closed_form(f, (x, 0, oo), strict=True)
    assert caught.value.reason == reason
    assert caught.value.detail


def test_divergent_integral_gets_no_finite_value_from_the_fallback() -> None:
    # SymPy alone returns a finite value that steps over the pole at a
    assert integrate(1 / (x**2 - a**2), (x, 0, oo)).has(Integral)


def test_mellin() -> None:
    answer = mellin(log(1 + x), x, z)  # DLMF 5.12.3 differentiated; Gradshteyn-Ryzhik 4.293.3, from memory
    assert answer.value == pi / (z * sin(pi * z))
    assert answer.strip == (-1, 0)
    assert mellin(x**2 * exp(-x), x, z).strip == (-2, oo)
    with pytest.raises(ValueError, match="must differ"):
        mellin(x**z, x, z)
    with pytest.raises(TypeError, match="x must be a Symbol"):
        mellin(x, 3, z)


def test_master_theorem() -> None:
    # Hardy, Ramanujan: Twelve Lectures (1940), ch. XI
    assert master_theorem(S.One, n, z).value == gamma(z)
    assert master_theorem(gamma(n + a) / gamma(a), n, z).strip == (0, a)
    # Mittag-Leffler function E_alpha(-x): DLMF 10.46.3 for the series; alpha < 2 for the growth
    answer = master_theorem(gamma(n + 1) / gamma(a * n + 1), n, z)
    assert answer.condition.subs({a: 3, z: Rational(1, 2)}) == False  # noqa: E712
    assert answer.condition.subs({a: 1, z: Rational(1, 2)}) == True  # noqa: E712
    assert master_theorem(gamma(n + 1) * zeta(n + 2), n, z).value == pi * zeta(2 - z) / sin(pi * z)


def test_master_theorem_refuses_what_grows_too_fast() -> None:
    # phi vanishes at every whole n, so that f = 0, yet Gamma(s)*phi(-s) is the transform of another function
    phi = gamma(n + S.Half) / gamma(-n)
    assert master_theorem(phi, n, z) is None
    with pytest.raises(Refusal) as caught:
        master_theorem(phi, n, z, strict=True)
    assert caught.value.reason == "growth"
    assert "gamma(-n)" in caught.value.detail


def test_principal_value() -> None:
    # DLMF 4.27-type; common practice: the transform of 1/(1-x) is pi*cot(pi*s)
    assert principal_value(x ** (s - 1) / (1 - x), (x, 0, oo)).value == pi * cot(pi * s)
    assert principal_value(1 / (x**2 - a**2), (x, 0, oo)).value == 0
    assert principal_value(1 / (x - a), (x, 0, oo)) is None  # the tail diverges


def test_bad_arguments_name_themselves() -> None:
    with pytest.raises(TypeError, match="f must be a SymPy expression"):
        closed_form("exp(-x)", (x, 0, oo))
    with pytest.raises(ValueError, match="limits must be"):
        closed_form(exp(-x), x)
    with pytest.raises(ValueError, match="limits must be one tuple"):
        closed_form(exp(-x))


def test_powers_of_the_logarithm() -> None:
    # DLMF 5.9.19 at n = 1 and 2
    assert closed_form(x ** (s - 1) * exp(-x) * log(x), (x, 0, oo)).value == gamma(s) * polygamma(0, s)
    second = closed_form(x ** (s - 1) * exp(-x) * log(x) ** 2, (x, 0, oo)).value
    expected = gamma(s) * (polygamma(1, s) + polygamma(0, s) ** 2)
    assert abs((second - expected).subs(s, Rational(7, 3)).evalf(30)) < 1e-25
