"""Certificates: points at the edges and outside, several variables, and the hint ``certify``."""
from unittest import mock

import pytest
import sympy
from sympy import Integral, Symbol, cos, exp, gamma, oo, pi, re, sin, symbols

from sympy_mellin_ext import closed_form, integrate, principal_value
from sympy_mellin_ext.verify import verify
from sympy_mellin_ext.verify.certify import holds_up
from sympy_mellin_ext.verify.nested import quad_nested
from sympy_mellin_ext.verify.sampling import sample

x, y, a, b = symbols("x y a b", positive=True)
s = Symbol("s", real=True)
z = Symbol("z")


def test_points_near_each_edge_and_beyond():
    record = verify(x ** (s - 1) * sin(a * x), (x, 0, oo), a**-s * gamma(s) * sin(pi * s / 2), (s > -1) & (s < 1),
                    digits=8)
    assert record.ok is True and record.sharp is True, str(record)
    values = [p[s] for p in record.points]
    assert min(values) < -0.9 and max(values) > 0.9
    assert sorted(p[s] for p, _ in record.outside) == [-sympy.Rational(9, 8), sympy.Rational(9, 8)]
    assert {verdict for _, verdict in record.outside} == {"diverges"}
    assert "outside" in str(record)


def test_complex_points_where_a_parameter_may_be_complex():
    record = verify(x ** (z - 1) * exp(-x), (x, 0, oo), gamma(z), re(z) > 0, digits=8)
    assert record.ok is True and record.sharp is True, str(record)
    near = record.points[-1][z]
    assert not near.is_real and 0 < re(near) < 0.1


@pytest.mark.parametrize(("condition", "sharp"), [(s > 1, False), (s > 0, True)])
def test_a_region_that_is_too_narrow_is_said(condition, sharp):
    record = verify(x ** (s - 1) * exp(-x), (x, 0, oo), gamma(s), condition, digits=8)
    assert record.ok is True and record.sharp is sharp
    assert record.outside[0][1].startswith("diverges" if sharp else "converges to")


def test_a_pole_inside_the_range_is_divergence():
    p = Symbol("p", real=True)
    record = verify(1 / (x + p), (x, 0, 1), sympy.log((1 + p) / p), p > 0, digits=8)
    assert record.ok is True and record.sharp is True, str(record)


def test_points_far_from_the_origin_are_found():
    n = Symbol("n", integer=True, positive=True)
    assert len(sample([b], b > 5)) == len(sample([n], n > 6)) == 4


def test_what_cannot_be_checked_outside_is_said():
    wild = verify(exp(-s * x) * cos(exp(x)), (x, 0, oo), 1 / s, s > 0, digits=8, seconds=1)
    assert wild.sharp is None and all(v.startswith("could not be checked: ") for _, v in wild.outside)


def test_logarithms_near_an_edge_are_no_divergence():
    # fuzz seed 1316: x**(s - 1)*log(x)**2 grows towards 0 for a long while before it falls
    record = closed_form(x ** (s - 1) * exp(-x / 2) * sympy.log(x) ** 2, (x, 0, oo)).verify(digits=8)
    assert record.ok is True and record.sharp is True, str(record)


# -- several variables ------------------------------------------------------------------------------------


@pytest.mark.parametrize(("f", "limits", "value"), [
    (exp(-x - y) * x**2 * y, ((x, 0, oo), (y, 0, oo)), 2),  # DLMF 5.2.1, twice
    (1 / (1 + x + y) ** 4, ((x, 0, oo), (y, 0, oo)), sympy.Rational(1, 6)),  # DLMF 5.12.3, twice
    (x * y, ((y, 0, 1 - x), (x, 0, 1)), sympy.Rational(1, 24)),  # Dirichlet's integral, DLMF 5.14.1
    (exp(-x**2 - s**2), ((x, 0, oo), (s, -oo, oo)), pi / 2),  # DLMF 7.7.1 at 0
])
def test_nested_quadrature_reaches_known_values(f, limits, value):
    number, _, reliable, note = quad_nested(f, limits, {})
    assert reliable, note
    assert abs(number - value) < 1e-6 * value


def test_nested_quadrature_recognises_divergence_and_says_what_it_cannot():
    assert quad_nested(1 / (1 + x + y) ** 2, ((x, 0, oo), (y, 0, oo)), {})[::2] == (oo, True)
    _, _, reliable, note = quad_nested(sin(x * y) / (1 + x), ((x, 0, oo), (y, 0, oo)), {}, seconds=2)
    assert not reliable and note


def test_two_variables_are_verified():
    answer = closed_form(x ** (s - 1) / (1 + x + y) ** 4, (x, 0, oo), (y, 0, oo))
    record = answer.verify()
    assert record.ok is True and record.sharp is True, str(record)
    wrong = verify(answer.integrand, answer.limits, 2 * answer.value, answer.condition)
    assert wrong.ok is False


# -- certify ----------------------------------------------------------------------------------------------


def test_certified_answers_are_the_same():
    assert integrate(x**2 * exp(-a * x), (x, 0, oo), certify=True) == 2 / a**3
    plain = integrate(x ** (s - 1) * exp(-x), (x, 0, oo))
    assert integrate(x ** (s - 1) * exp(-x), (x, 0, oo), certify=True) == plain
    pair = integrate(x ** (s - 1) * exp(-x), (x, 0, oo), conds="separate", certify=True)
    assert pair == (gamma(s), s > 0)
    assert integrate(x ** (s - 1) * exp(-x), (x, 0, oo), conds="none", certify=True) == gamma(s)
    assert integrate(1 / x, (x, 1, oo), certify=True) is oo


def test_a_wrong_answer_is_not_given():
    f, limits = x ** (s - 1) * exp(-x), (x, 0, oo)
    wrong = closed_form(f, limits).times(2)
    with mock.patch("sympy_mellin_ext.integrate.attempt", return_value=wrong):
        assert integrate(f, limits, certify=True) == Integral(f, limits)
        assert integrate(f, limits, certify=False) != Integral(f, limits)


def test_stock_answers_are_certified_too_and_the_hint_is_not_passed_on():
    seen = []

    def stock(*args, **hints):
        seen.append(hints)
        return answers.pop()

    with mock.patch.object(sympy, "integrate", stock):
        answers = [sympy.Integer(7)]
        assert integrate(exp(x), (x, 0, 1), certify=True, risch=True) == Integral(exp(x), (x, 0, 1))
        answers = [(exp(2) - 1) / 2]
        assert integrate(exp(2 * x), (x, 0, 1), certify=True, risch=True) == (exp(2) - 1) / 2
    assert seen[-1] == {"risch": True} and all("certify" not in hints for hints in seen)


def test_no_certificate_without_a_number():
    assert integrate(exp(-x), x, certify=True) == Integral(exp(-x), x)
    assert not holds_up(1, exp(-x), (x,))
    assert not holds_up(Integral(exp(-x), (x, 0, oo)), exp(-x), ((x, 0, oo),))
    with pytest.raises(TypeError, match="certify"):
        integrate(exp(-x), (x, 0, oo), certify=1)
    record = principal_value(x / (x**3 - a**3), (x, 0, oo)).verify()
    assert record.ok is None and "principal value" in record.note
