"""`integrate` is a drop-in for SymPy's: errors, hints, assumptions, hash seeds, pickling."""
import itertools
import json
import math
import os
import pickle
import subprocess
import sys
from unittest import mock

import pytest
import sympy
from sympy import (
    Dummy,
    Eq,
    Expr,
    Function,
    I,
    Integral,
    Interval,
    Matrix,
    Mul,
    Piecewise,
    Poly,
    S,
    Symbol,
    Tuple,
    besselj,
    besselk,
    cos,
    erfc,
    exp,
    gamma,
    log,
    oo,
    pi,
    sin,
    sqrt,
    symbols,
)

from sympy_mellin_ext import ClosedForm, Refusal, closed_form, integrate, mellin

x, y, a, b = symbols("x y a b", positive=True)
s = Symbol("s")


def outcome(call, args, hints):
    try:
        return call(*args, **hints)
    except Exception as error:
        return type(error)


# -- errors and everything that is not ours -------------------------------------------------------

t = Symbol("t")
M = Symbol("M", commutative=False)
STRANGE = {
    "nothing": ((), {}),
    "no expression": ((object(), (x, 0, oo)), {}),
    "None": ((None, (x, 0, oo)), {}),
    "a list": (([1, x], (x, 0, 1)), {}),
    "a relation": ((x < 1, (x, 0, 1)), {}),
    "an equation": ((Eq(x, 1), (x, 0, 1)), {}),
    "a number": ((3, (x, 0, 1)), {}),
    "a number without a variable": ((S(3),), {}),
    "several variables and no limit": ((x * y,), {}),
    "a string": (("exp(-u)", ("u", 0, oo)), {}),
    "a string as variable": ((exp(-x), ("x", 0, 1)), {}),
    "strings as bounds": ((exp(-t), (t, "0", "oo")), {}),
    "indefinite": ((exp(-a * x), x), {}),
    "indefinite in a tuple": ((exp(-a * x), (x,)), {}),
    "upper bound only": ((exp(-a * x), (x, y)), {}),
    "no variable": ((exp(-a), (x, 0, 2)), {}),
    "a limit that is a number": ((exp(-x), 3), {}),
    "a limit of four": ((exp(-x), (x, 0, 1, 2)), {}),
    "an empty limit": ((exp(-x), ()), {}),
    "a number as variable": ((exp(-x), (2, 0, 1)), {}),
    "an expression as variable": ((exp(-x), (x**2, 0, 1)), {}),
    "a function as variable": ((exp(-Function("f")(t)), (Function("f")(t), 0, oo)), {}),
    "bounds of the variable": ((x, (x, 0, x)), {}),
    "a relation as bound": ((exp(-x), (x, 0, x < 1)), {}),
    "a set as limit": ((exp(-x), (x, Interval(0, 1))), {}),
    "two limits": ((x * y, (x, 0, 1), (y, 0, 2)), {}),
    "a matrix": ((Matrix([[x, 1]]), (x, 0, 2)), {}),
    "a polynomial": ((Poly(x**2, x), (x, 0, 1)), {}),
    "non-commutative": ((M * x, (x, 0, 1)), {}),
    "a Piecewise": ((Piecewise((x, x < 1), (0, True)), (x, 0, 3)), {}),
    "conflicting hints": ((exp(-x), (x, 0, oo)), {"meijerg": True, "manual": True}),
    "conflicting hints, indefinite": ((exp(-x), x), {"risch": True, "heurisch": True}),
    "risch and definite": ((exp(-x), (x, 0, oo)), {"risch": True}),
    "unknown conds": ((exp(-x), (x, 0, oo)), {"conds": "all"}),
    "unknown hint": ((exp(-x), (x, 0, oo)), {"speed": 3}),
    "separate with two limits": ((exp(-x * y), (x, 0, oo), (y, 1, 2)), {"conds": "separate"}),
}


@pytest.mark.parametrize("name", STRANGE)
def test_as_sympy_does(name):
    args, hints = STRANGE[name]
    ours, stock = outcome(integrate, args, hints), outcome(sympy.integrate, args, hints)
    assert type(ours) is type(stock)
    assert ours == stock or name == "nothing"


ASKED = [
    ((exp(-a * x) * x, x), {}),
    ((x**2, (x, 0, 1), (y, 0, 1)), {"conds": "none"}),
    ((exp(-a * x), (x, 0, oo)), {"meijerg": True}),
    ((exp(-a * x), (x, 0, oo)), {"manual": True, "conds": "none"}),
    ((exp(-a * x), (x, 0, oo)), {"heurisch": True}),
    ((exp(-a * x), (x, 0, oo)), {"risch": True}),
    ((exp(-a * x), (x, 0, oo)), {"meijerg": False}),
    ((exp(-a * x), (x, 0, oo)), {"conds": "nothing"}),
    ((exp(-a * x), (x, 0, oo)), {"unheard_of": 1}),
    ((Function("f")(x), (x, 0, oo)), {"conds": "separate", "meijerg": False}),
    ((Function("f")(x), [x, 0, math.inf]), {}),
    (("x", ("x", 0, 1)), {}),
]


@pytest.mark.parametrize(("args", "hints"), ASKED)
def test_stock_is_called_once_with_the_arguments_as_they_came(args, hints):
    with mock.patch("sympy.integrate", return_value=mock.sentinel.stock) as stock:
        assert integrate(*args, given=a > b, **hints) is mock.sentinel.stock
    (call,) = stock.call_args_list
    assert all(got is sent for got, sent in zip(call.args, args, strict=True))
    assert call.kwargs == hints


def test_exceptions_of_stock_pass_through():
    error = ArithmeticError("theirs")
    with mock.patch("sympy.integrate", side_effect=error), pytest.raises(ArithmeticError) as caught:
        integrate(Function("f")(x), (x, 0, oo))
    assert caught.value is error


def test_stock_is_not_asked_where_we_answer():
    with mock.patch("sympy.integrate", side_effect=AssertionError):
        assert integrate(x * exp(-a * x), (x, 0, oo)) == 1 / a**2
        assert integrate(x * exp(-a * x), (x, 0, oo), meijerg=None, risch=False) == 1 / a**2


def test_an_expression_too_deep_for_us_goes_to_stock():
    with (
        mock.patch("sympy_mellin_ext.integrate._solve", side_effect=RecursionError),
        mock.patch("sympy.integrate", return_value=mock.sentinel.stock),
    ):
        assert integrate(exp(-x), (x, 0, oo)) is mock.sentinel.stock


# -- hints ----------------------------------------------------------------------------------------


def test_conds():
    f = x ** (s - 1) * exp(-x)
    value, region = gamma(s), sympy.re(s) > 0
    assert integrate(f, (x, 0, oo)) == Piecewise((value, region), (Integral(f, (x, 0, oo)), True))
    assert integrate(f, (x, 0, oo), conds="piecewise") == integrate(f, (x, 0, oo))
    assert integrate(f, (x, 0, oo), conds="separate") == (value, region)
    assert integrate(f, (x, 0, oo), conds="none") == value


def test_conds_of_an_unconditional_answer():
    for conds, expected in (("piecewise", 1 / a), ("separate", (1 / a, True)), ("none", 1 / a)):
        assert integrate(exp(-a * x), (x, 0, oo), conds=conds) == expected


def test_special_values_hold_inside_the_region_only():
    c, d = symbols("c d", real=True)
    answer = integrate((exp(-c * x) - exp(-d * x)) * x ** (s - 1), (x, 0, oo))
    assert abs((answer.subs({s: 0, c: 2, d: 3}) - log(1.5)).evalf()) < 1e-12
    assert answer.subs({s: 0, c: -2, d: 3}).has(Integral)


def test_given_decides_the_region():
    p, q = symbols("p q", real=True)
    f = exp(-(p - q) * x)
    assert isinstance(integrate(f, (x, 0, oo)), Piecewise)
    assert integrate(f, (x, 0, oo), given=p > q) == 1 / (p - q)
    assert integrate(f, (x, 0, oo), given=[p > 3, q < 2]) == 1 / (p - q)


# -- ways to write the same question --------------------------------------------------------------

BOUNDS = [(0, oo), (S(0), S.Infinity), (0, math.inf), (0, float("inf")), (False + 0, sympy.Float("inf"))]


@pytest.mark.parametrize("bounds", BOUNDS)
@pytest.mark.parametrize("make", [tuple, list, lambda limit: Tuple(*limit)], ids=["tuple", "list", "Tuple"])
def test_bounds(bounds, make):
    assert integrate(x * exp(-a * x), make((x, *bounds))) == 1 / a**2


def test_interval_and_reversed():
    assert integrate(x * exp(-a * x), (x, Interval(0, oo))) == 1 / a**2
    assert integrate(x * exp(-a * x), (x, Interval.open(0, oo))) == 1 / a**2
    assert integrate(x * exp(-a * x), (x, oo, 0)) == -1 / a**2
    for infinity in (oo, math.inf):
        assert integrate(exp(-(t**2)), (t, -infinity, infinity)) == sqrt(pi)


def test_float_bounds_and_parameters():
    assert abs(integrate(exp(-2.0 * x), (x, 0, oo)) - 0.5) < 1e-15
    assert abs(integrate(exp(-x), (x, 0.0, oo)) - 1) < 1e-15
    assert abs(integrate(exp(-x), (x, 0.5, oo)) - math.exp(-0.5)) < 1e-15


# value, and the assumptions under which it must come out bare
FORMS = [
    (lambda v, p: v**2 * exp(-p * v), lambda p: 2 / p**3),
    (lambda v, p: exp(-p * v**2) * cos(v), lambda p: sqrt(pi) * exp(-1 / (4 * p)) / (2 * sqrt(p))),
    (lambda v, p: besselk(1, p * v) * v**2, lambda p: 2 / p**3),
    (lambda v, p: 1 / (v**2 + p**2) ** 2, lambda p: pi / (4 * p**3)),
]


@pytest.mark.parametrize(("integrand", "value"), FORMS)
@pytest.mark.parametrize("variable", ["positive", "real", "commutative", "nonnegative", "complex"])
@pytest.mark.parametrize("kind", [{"positive": True}, {"integer": True, "positive": True}, {"prime": True}])
def test_assumptions_of_the_variable_do_not_matter(integrand, value, variable, kind):
    v, p = Symbol("v", **{variable: True}), Symbol("p", **kind)
    assert integrate(integrand(v, p), (v, 0, oo)) == value(p)


@pytest.mark.parametrize(("integrand", "value"), FORMS)
@pytest.mark.parametrize("kind", [{"real": True}, {}, {"complex": True}])
def test_weaker_assumptions_give_a_region(integrand, value, kind):
    v, p, positive = Symbol("v"), Symbol("p", **kind), Symbol("p", positive=True)
    answer = integrate(integrand(v, p), (v, 0, oo))
    assert isinstance(answer, Piecewise)
    assert abs((answer.subs(p, positive).subs(positive, 1.3) - value(1.3)).evalf()) < 1e-12


@pytest.mark.parametrize("names", ["x a s", "a x s", "s x a", "zeta beta1 A", "_x _a _s", "t0 lamda alpha"])
def test_names_do_not_matter(names):
    v, p, q = symbols(names, positive=True)
    assert integrate(v ** (q - 1) * exp(-p * v**2), (v, 0, oo)) == p ** (-q / 2) * gamma(q / 2) / 2
    assert integrate(v ** (q - 1) * besselj(p, v), (v, 0, oo), conds="none") == (
        2 ** (q - 1) * gamma((p + q) / 2) / gamma((p - q) / 2 + 1)
    )


def test_order_of_factors_does_not_matter():
    factors = [x ** (b - 1), exp(-a * x), cos(x), S(3)]
    expected = integrate(Mul(*factors), (x, 0, oo))
    assert not expected.has(Integral)
    for order in itertools.permutations(factors):
        assert integrate(Mul(*order, evaluate=False), (x, 0, oo)) == expected
    nested = Mul(3, Mul(exp(-a * x), cos(x), evaluate=False), x ** (b - 1), evaluate=False)
    assert integrate(nested, (x, 0, oo)) == expected


EXAMPLES = """
from sympy import *
import json, sys
from sympy_mellin_ext import integrate
x, y, a, b, c = symbols('x y a b c', positive=True)
s, p, q = symbols('s p q')
u, v, w = symbols('u v w', real=True)
found = [srepr(integrate(f, (x, 0, oo))) for f in (
    x**(s - 1)*exp(-p*x),
    x**(u - 1)*(a + b*x**2)**(-v),
    x**(s - 1)*besselj(u, a*x)*besselk(v, b*x),
    (exp(-a*x) - exp(-b*x))/x,
    x**(u - 1)*(cos(a*x) - cos(b*x)),
    exp(-a*x**2 - b*x),
    x**(s - 1)*log(x)**2/(1 + x)**w,
    x**2/((x**2 + a**2)*(x**2 + b**2)*(x**2 + c**2)),
    x**(s - 1)*erfc(a*x)*exp(-b*x**2),
    x**(s - 1)/(exp(x) - 1),
    sin(a*x)*besselj(0, b*x),
    Function('f')(x) + p,
)]
print(json.dumps(found))
"""


def test_hash_seed_does_not_matter():
    results = set()
    for seed in (0, 1, 2, 3, 42, 1234):
        env = {**os.environ, "PYTHONHASHSEED": str(seed)}
        command = [sys.executable, "-c", EXAMPLES]
        done = subprocess.run(command, capture_output=True, text=True, env=env, timeout=300)
        assert done.returncode == 0, done.stderr
        results.add(done.stdout)
    assert len(results) == 1
    assert len(json.loads(results.pop())) == 12


# -- what comes out can be kept -------------------------------------------------------------------

QUESTIONS = [
    x ** (s - 1) * exp(-t * x),
    (exp(-a * x) - exp(-b * x)) * x ** (s - 1),
    besselj(a, x) * besselk(b, x),
    1 / ((x**2 + a**2) * (x**2 + b**2)),
    log(x) ** 2 * exp(-a * x),
    sin(a * x) / x,
    x ** (s - 1) / (exp(x) - 1),
    exp(-a * x - b / x),
    1 / (x**4 + a * x**2 + b),
    exp(-a * x) * erfc(b * x),
]


@pytest.mark.parametrize("f", QUESTIONS)
def test_pickle_and_no_dummies(f):
    answer = closed_form(f, (x, 0, oo))
    result = integrate(f, (x, 0, oo))
    assert pickle.loads(pickle.dumps(result)) == result
    assert result.atoms(Dummy) == set()
    if answer is not None:
        again = pickle.loads(pickle.dumps(answer))
        assert isinstance(again, ClosedForm) and again == answer
        found = [answer.value, answer.condition, *(answer.strip or ()), *itertools.chain(*answer.special)]
        assert not set().union(*(e.atoms(Dummy) for e in found))
        assert not any(step.result.atoms(Dummy) for step in answer.steps if isinstance(step.result, Expr))


def test_a_dummy_of_the_caller_stays():
    d = Dummy("d", positive=True)
    assert integrate(x * exp(-d * x), (x, 0, oo)) == 1 / d**2
    assert integrate(d * exp(-a * d), (d, 0, oo)) == 1 / a**2


def test_refusal_pickles():
    with pytest.raises(Refusal) as caught:
        closed_form(Function("f")(x), (x, 0, oo), strict=True)
    refusal = caught.value
    again = pickle.loads(pickle.dumps(refusal))
    assert (again.reason, again.detail, str(again)) == (refusal.reason, refusal.detail, str(refusal))


def test_mellin_pickles():
    answer = mellin(besselk(0, x) * I, x, s)
    assert pickle.loads(pickle.dumps(answer)) == answer
