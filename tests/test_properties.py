"""Properties of the transform: scaling, shift, differentiation, duality, linearity, agreeing with one another."""
from fractions import Fraction
from functools import cache

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from mpmath import mp
from sympy import (
    Rational,
    Symbol,
    airyai,
    atan,
    besselj,
    besselk,
    bessely,
    cos,
    cosh,
    diff,
    erf,
    erfc,
    exp,
    expint,
    hyper,
    log,
    oo,
    sin,
    sinh,
    sqrt,
    symbols,
    tanh,
    uppergamma,
)

from sympy_mellin_ext import closed_form
from sympy_mellin_ext.verify import quad
from sympy_mellin_ext.verify.numeric import evaluate, holds

x, a = symbols("x a", positive=True)
s = Symbol("s", real=True)
R = Rational

# f, and an interval inside its strip (the strip itself where it is finite)
KERNELS = {
    "exp": (exp(-x), 0, 4),
    "gauss": (exp(-(x**2)), 0, 4),
    "exp - 1": (exp(-x) - 1, -1, 0),
    "sin": (sin(x), -1, 1),
    "cos": (cos(x), 0, 1),
    "1 - cos": (1 - cos(x), -2, 0),
    "power": ((1 + x) ** R(-5, 2), 0, R(5, 2)),
    "rational": (1 / (1 + x + x**2), 0, 2),
    "log": (log(1 + x), -1, 0),
    "atan": (atan(x), -1, 0),
    "erf": (erf(x), -1, 0),
    "erfc": (erfc(x), 0, 3),
    "expint": (expint(1, x), 0, 3),
    "uppergamma": (uppergamma(R(1, 3), x), 0, 3),
    "besselj": (besselj(1, x), -1, R(3, 2)),
    "bessely": (bessely(0, x), 0, R(3, 2)),
    "besselk": (besselk(R(1, 3), x), R(1, 3), 3),
    "besselj squared": (besselj(0, x) ** 2, 0, 1),
    "airyai": (airyai(x), 0, 3),
    "1F1": (hyper((R(1, 2),), (R(4, 3),), -x), 0, R(1, 2)),
    "2F1": (hyper((R(1, 2), 2), (R(7, 3),), -x), 0, R(1, 2)),
    "Bose": (1 / (exp(x) - 1), 1, 4),
    "Fermi": (1 / (exp(x) + 1), 0, 4),
    "sech": (1 / cosh(x), 0, 4),
    "cosech": (1 / sinh(x), 1, 4),
    "1 - tanh": (1 - tanh(x), 0, 3),
    "radical": (sqrt(1 + x**2) - x, 0, 1),
    "exp*cos": (exp(-x) * cos(2 * x), 0, 3),
    "log(1 + exp)": (log(1 + exp(-x)), 0, 3),
    "product": (exp(-x) / (1 + x), 0, 3),
}
NAMES = sorted(KERNELS)
SUMMANDS = [name for name in NAMES if name != "product"]  # that one is no single Gamma product
SCALES = st.sampled_from([R(1, 3), R(2, 5), R(1, 2), R(3, 2), R(2), R(7, 3), R(5)])
# a place in the strip, away from its edges
PLACES = st.fractions(Fraction(1, 8), Fraction(7, 8), max_denominator=40)
bounded = settings(max_examples=30, derandomize=True, deadline=None, database=None)


@cache
def transform(f):
    answer = closed_form(x ** (s - 1) * f, (x, 0, oo))
    assert answer is not None, f
    return answer


def value(f, place, **parameters):
    """The closed form at a point of its region."""
    answer = transform(f)
    point = {s: place} | {symbol: parameters[symbol.name] for symbol in f.free_symbols - {x}}
    assert holds(answer.condition, point), (f, answer.condition, point)
    return evaluate(answer._general(), point, 20)


def within(name, part, low_shift=0, high_shift=0):
    """A rational point of the strip of a kernel, of which something is cut off at the ends."""
    low, high = KERNELS[name][1] + low_shift, KERNELS[name][2] + high_shift
    return None if low >= high else low + (high - low) * R(part.numerator, part.denominator)


def same(left, right):
    assert abs(left - right) <= mp.mpf(10) ** -15 * max(abs(left), abs(right), mp.mpf(10) ** -6), (left, right)


@bounded
@given(st.sampled_from(NAMES), SCALES, PLACES)
def test_scaling(name, c, part):
    """int x**(s-1) f(c*x) dx = c**(-s) F(s), for a number and for a symbol."""
    f, place = KERNELS[name][0], within(name, part)
    expected = evaluate(c**-s, {s: place}, 20) * value(f, place)
    same(value(f.subs(x, c * x), place), expected)
    same(value(f.subs(x, a * x), place, a=c), expected)


@bounded
@given(st.sampled_from(NAMES), PLACES)
def test_shift(name, part):
    """int x**(s-1) (x*f(x)) dx = F(s + 1)."""
    f, place = KERNELS[name][0], within(name, part)
    same(value(x * f, place - 1), value(f, place))


@bounded
@given(st.sampled_from(NAMES), PLACES)
def test_duality(name, part):
    """int x**(s-1) f(1/x) dx = F(-s)."""
    f, place = KERNELS[name][0], within(name, part)
    same(value(f.subs(x, 1 / x), -place), value(f, place))


@bounded
@given(st.sampled_from(NAMES), st.sampled_from([R(2), R(3), R(1, 2)]), PLACES)
def test_powers_of_the_variable(name, ratio, part):
    """int x**(s-1) f(x**r) dx = F(s/r)/r."""
    f, place = KERNELS[name][0], within(name, part)
    same(value(f.subs(x, x**ratio), ratio * place) * evaluate(ratio, {}, 20), value(f, place))


@bounded
@given(st.sampled_from([n for n in NAMES if n not in ("1F1", "2F1", "uppergamma")]), SCALES, PLACES)
def test_differentiation_under_the_integral(name, c, part):
    """d/da int x**(s-1) f(a*x) dx = int x**(s-1) d/da f(a*x) dx, where both converge."""
    f = KERNELS[name][0]
    # the derivative of an oscillating function is larger by one power of x
    place = within(name, part, 0, -1 if name in ("sin", "besselj", "bessely", "besselj squared", "1 - cos") else 0)
    if place is None:
        return
    whole = diff(transform(f.subs(x, a * x))._general(), a)
    derivative = closed_form(x ** (s - 1) * diff(f.subs(x, a * x), a), (x, 0, oo))
    assert derivative is not None, f
    point = {s: place, a: c}
    if holds(derivative.condition, point):
        same(evaluate(derivative._general(), point, 20), evaluate(whole, point, 20))
    else:
        assert name in ("sin", "cos", "besselj", "bessely")


@bounded
@given(st.sampled_from(SUMMANDS), st.sampled_from(SUMMANDS), SCALES, SCALES, PLACES)
def test_linearity(one, other, c, d, part):
    """The transform of c*f - d*g, where the strips meet."""
    (f, low, high), (g, low_g, high_g) = KERNELS[one], KERNELS[other]
    low, high = max(low, low_g), min(high, high_g)
    if low >= high or one == other:
        return
    place = low + (high - low) * R(part.numerator, part.denominator)
    left, right = evaluate(c, {}, 20) * value(f, place), evaluate(d, {}, 20) * value(g, place)
    total = value(c * f - d * g, place)
    assert abs(total - (left - right)) <= mp.mpf(10) ** -15 * max(abs(left), abs(right))


@pytest.mark.parametrize("name", NAMES)
def test_agreement_with_quadrature(name):
    place = within(name, Fraction(2, 5))
    number, _, reliable, note = quad(x ** (s - 1) * KERNELS[name][0], (x, 0, oo), {s: place}, 8)
    assert reliable, note
    assert abs(number - value(KERNELS[name][0], place)) <= 1e-7 * abs(number)
