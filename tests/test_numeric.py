"""Closed forms as numerical functions and as source text; exact values by mpmath at 50 digits."""
from __future__ import annotations

import subprocess
import sys

import numpy as np
import pytest
from mpmath import mp, mpf, mpmathify
from sympy import (
    Expr,
    Rational,
    besselj,
    besselk,
    cos,
    exp,
    gamma,
    hyper,
    log,
    meijerg,
    oo,
    polylog,
    sin,
    sqrt,
    symbols,
)

from sympy_mellin_ext import ClosedForm, closed_form, mellin
from sympy_mellin_ext.numeric import Unsupported

x, a, b = symbols("x a b", positive=True)
s, t, nu = symbols("s t nu", real=True)


def exact(f: Expr, **values: float) -> mpf:
    """The value of an expression at doubles, to 50 digits."""
    from sympy_mellin_ext.verify.numeric import evaluate

    with mp.workdps(70):
        return evaluate(f, {v: mpf(values[v.name]) for v in f.free_symbols}, 50)


def error(found: float, value: mpf) -> float:
    with mp.workdps(60):
        return float(abs(mpmathify(complex(found)) - value) / abs(value))


LARGE = (1e3, 4321.75, 31250.125, 98765.4321, 1e6)


@pytest.mark.parametrize(
    "f",
    [
        gamma(s + Rational(1, 3)) / gamma(s),
        gamma(s + Rational(5, 2)) ** 2 / (gamma(s) * gamma(s + 5)),
        gamma(2 * s) / (gamma(s) * gamma(s + Rational(1, 2))) * 4**-s,
        gamma(s / 3 + Rational(1, 7)) / gamma(s / 3 - Rational(2, 7)) * a**3,
        gamma(s) * gamma(s + Rational(1, 4)) / gamma(2 * s) * 4**s * sqrt(s),
        gamma(s) * exp(s) * s**-s,
        gamma(Rational(1, 3) - s) / gamma(Rational(4, 5) - s),  # by reflection
        gamma(3 * s) / (gamma(s) * gamma(s + Rational(1, 3)) * gamma(s + Rational(2, 3))) * 27**-s * sqrt(s),
    ],
)
def test_ratios_of_large_gammas(f: Expr) -> None:
    """No overflow, and 1e-12 at arguments from 1e3 to 1e6 (reached: about 2e-14)."""
    answer = ClosedForm(f)
    function = answer.callable("numpy")
    points = np.array(LARGE) if "a" not in {v.name for v in f.free_symbols} else None
    for v in LARGE:
        values = {"s": v} | ({"a": 1.25} if points is None else {})
        found = function(*(values[k] for k in sorted(values)))
        assert error(found, exact(f, **values)) < 1e-13
    if points is not None:
        assert function(points).shape == points.shape


def test_two_large_parameters() -> None:
    answer = closed_form(x ** (s - 1) / (1 + x) ** t, (x, 0, oo))
    function = answer.callable("numpy")
    for p, q in [(1e6 + 0.25, 1e6 + 1.5), (7.125, 1e5), (1e-3, 1e3), (150.5, 1000.75), (5e5, 5e5 + 3)]:
        assert error(function(p, q), exact(answer.value, s=p, t=q)) < 1e-13


def test_a_power_against_a_large_gamma() -> None:
    answer = closed_form(x ** (s - 1) * exp(-a * x), (x, 0, oo))
    function = answer.callable("numpy")
    for p, q in [(350.0, 1000.5), (36788.0, 1e5), (367.0, 1000.0), (0.01, 50.5)]:
        assert error(function(p, q), exact(answer.value, a=p, s=q)) < 1e-13


@pytest.mark.parametrize("backend", ["mpmath", "numpy"])
def test_nan_outside_the_region(backend: str) -> None:
    answer = closed_form(x ** (s - 1) / (1 + a * x) ** t, (x, 0, oo))
    function = answer.callable(backend)
    values = function(2.0, [0.5, -0.5, 3.0, 1.0], 2.0)
    assert [bool(np.isnan(float(v))) for v in values] == [False, True, True, False]
    assert np.isnan(float(function(-1.0, 0.5, 2.0)))  # a is declared positive
    assert np.isnan(float(function(float("nan"), 0.5, 2.0)))


REMOVABLE = [
    (x ** (s - 1) / ((x + a) * (x + b)), {"a": 2.0, "b": 3.0, "s": 1.0}),
    (x ** (s - 1) / ((x + a) * (x + b)), {"a": 2.0, "b": 2.0, "s": 0.5}),
    (x ** (s - 1) / ((x + a) * (x + b)), {"a": 2.0, "b": 2.0, "s": 1.0}),
    (x ** (s - 1) / ((x + a) * (x + b)), {"a": 2.0, "b": 2.0, "s": 1.9999}),
    (x ** (s - 1) * (exp(-a * x) - exp(-b * x)), {"a": 2.0, "b": 3.0, "s": 0.0}),
    (x ** (s - 1) * sin(a * x), {"a": 2.0, "s": 0.0}),
    (x ** (s - 1) * (cos(x) - 1), {"s": -1.0}),
    (x ** (s - 1) * (exp(-x) - 1 + x), {"s": -1.5}),
]


@pytest.mark.parametrize(("f", "values"), REMOVABLE)
def test_at_and_near_removable_singularities(f: Expr, values: dict) -> None:
    answer = closed_form(f, (x, 0, oo))
    names = sorted(values)
    numpy, mpmath = answer.callable("numpy"), answer.callable()
    for shift in (0.0, 1e-15, 1e-12, -1e-9, 1e-6, -1e-4, 3e-3, -6.9e-3, 7.1e-3, 0.02):
        for name in names:
            point = values | {name: values[name] + shift}
            if name == "s" and answer.condition.subs(s, point["s"]) != True:  # noqa: E712
                continue
            with mp.workdps(30):
                reference = mpmath(*(point[n] for n in names))
            assert mp.isfinite(reference)
            assert error(numpy(*(point[n] for n in names)), reference) < 2e-12, (name, shift)
    # mpmath itself against the exact value
    special = answer.at(**{n: Rational(v) for n, v in values.items()})
    with mp.workdps(30):
        assert error(mpmath(*(values[n] for n in names)), mpmathify(special.evalf(40))) < 1e-15


def test_true_poles_at_the_edge_are_left_alone() -> None:
    answer = closed_form(x ** (s - 1) * exp(-a * x), (x, 0, oo))
    function = answer.callable("numpy")
    for v in (1e-3, 1e-6, 1e-12):
        assert error(function(2.0, v), exact(answer.value, a=2.0, s=v)) < 1e-14


def test_mpmath_at_any_precision() -> None:
    answer = closed_form(x ** (s - 1) * besselk(nu, a * x), (x, 0, oo))
    function = answer.callable(args=("a", nu, "s"))
    with mp.workdps(40):
        found = function(mpf(3) / 2, mpf(1) / 3, mpf(1000))
    with mp.workdps(60):
        value = 2 ** mpf(998) * mpf(1.5) ** -1000 * mp.gamma(500 - mpf(1) / 6) * mp.gamma(500 + mpf(1) / 6)
        assert abs(found / value - 1) < mpf(10) ** -36  # 1/3 is rounded to 40 digits
    assert isinstance(function([1, 2], 0.25, 2), list)


def test_complex_arguments() -> None:
    z = symbols("z")
    answer = mellin(exp(-a * x), x, z)
    numpy, mpmath = answer.callable("numpy"), answer.callable()
    for v in (0.5 + 2j, 3 - 10j):
        assert error(numpy(2.0, v), mpmath(2.0, v)) < 1e-13
    assert np.isnan(numpy(2.0, -0.5 + 1j))


SAMPLES = [
    (x ** (s - 1) * log(1 + x), {"s": -0.4}),
    (x ** (s - 1) * besselj(nu, x), {"nu": 0.7, "s": 0.6}),
    (exp(-a * x) * besselj(0, b * x), {"a": 1.5, "b": 0.7}),
    (x ** (s - 1) / (exp(x) - 1), {"s": 2.7}),
    (x ** (s - 1) / (exp(x) + 1), {"s": 1.0}),
    (exp(-a * x**2) * cos(b * x), {"a": 1.5, "b": 2.7}),
    (exp(-a * x) / (x + b), {"a": 1.5, "b": 2.7}),
    (x ** (s - 1) * exp(-x) * log(x), {"s": 2.25}),
]


@pytest.mark.parametrize(("f", "values"), SAMPLES)
@pytest.mark.parametrize("backend", ["mpmath", "numpy"])
def test_source_stands_alone(f: Expr, values: dict, backend: str) -> None:
    answer = closed_form(f, (x, 0, oo))
    text = answer.source(backend, name="moment")
    assert "sympy" not in text
    namespace: dict = {"__name__": "pasted"}
    exec(compile(text, "pasted", "exec"), namespace)
    found = namespace["moment"](*(values[n] for n in sorted(values)))
    assert error(found, exact(answer.value, **values)) < 2e-13


def test_source_needs_no_sympy() -> None:
    answer = closed_form(x ** (s - 1) / ((x + a) * (x + b)), (x, 0, oo))
    for backend in ("mpmath", "numpy"):
        text = "import sys\nsys.modules['sympy'] = None\n" + answer.source(backend)
        text += "\nprint(closed_form(2.0, 3.0, 1.0))\n"
        run = subprocess.run([sys.executable, "-"], input=text, capture_output=True, text=True, timeout=60, check=False)
        assert run.returncode == 0, run.stderr
        assert abs(float(run.stdout) - np.log(1.5)) < 1e-12


def test_a_function_that_is_lacking_names_itself() -> None:
    for value, name in [
        (polylog(s, -a), "polylog"),
        (meijerg([[1], [a]], [[s], [2]], b), "meijerg"),
        (hyper([1, a, 2], [b, 3], s), "hyper"),
    ]:
        with pytest.raises(Unsupported, match=name):
            ClosedForm(value).callable("numpy")
        assert ClosedForm(value).callable("mpmath") is not None
    with pytest.raises(ValueError, match="backend must be"):
        ClosedForm(s).callable("cupy")
    with pytest.raises(ValueError, match="args lacks the parameters a"):
        ClosedForm(s * a).callable(args=[s])
    with pytest.raises(ValueError, match="q is not one"):
        ClosedForm(s * a).callable(args=["s", "a", "q"])


def test_names_that_python_does_not_accept() -> None:
    lam, hat, digit = symbols("lambda s^ 1a", real=True)
    answer = ClosedForm(lam * hat**2 + digit)
    for backend in ("mpmath", "numpy"):
        assert float(answer.callable(backend, args=(lam, hat, digit))(2.0, 3.0, 1.0)) == 19
