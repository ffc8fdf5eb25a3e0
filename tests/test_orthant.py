"""Integrals in several variables: published values, and quadrature in two and three dimensions.

The published values are those of tests/data/several.jsonl, each with its source.
"""

from __future__ import annotations

import math
import subprocess
import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import mpmath
import pytest
import sympy
from sympy import (
    Add,
    DiracDelta,
    Expr,
    Integral,
    Piecewise,
    Rational,
    Symbol,
    besselj,
    besselk,
    cos,
    exp,
    gamma,
    hyper,
    lambdify,
    log,
    oo,
    pi,
    sin,
    sqrt,
    symbols,
)

from benchmarks.entries import Entry, load
from sympy_mellin_ext import closed_form, integrate
from sympy_mellin_ext.verify.numeric import Undefined, Unevaluated, evaluate

ENTRIES = list(load(Path(__file__).parent / "data" / "several.jsonl"))
x, y, z = symbols("x y z", positive=True)
a, b, c, d = symbols("a b c d", positive=True)
s, t, p, q = symbols("s t p q", real=True)
ORTHANT2 = ((x, 0, oo), (y, 0, oo))
ORTHANT3 = (*ORTHANT2, (z, 0, oo))


# -- quadrature -------------------------------------------------------------------------------------------


def _nodes(step: float, reach: float) -> list[float]:
    n = int(reach / step)
    return [k * step for k in range(-n, n + 1)]


def _unit(step: float, reach: float) -> list[tuple[float, float, float]]:
    """Nodes v, their complements 1 - v, and weights of the double-exponential rule on (0, 1)."""
    found = []
    for u in _nodes(step, reach):
        w = math.pi * math.sinh(u)
        v, rest = 1 / (1 + math.exp(-w)), 1 / (1 + math.exp(w))
        found.append((v, rest, step * math.pi * math.cosh(u) * v * rest))
    return found


def _safe(f: Callable[..., float]) -> Callable[..., float]:
    def value(*args: float) -> float:
        try:
            return float(f(*args))
        except (OverflowError, ZeroDivisionError):
            return 0.0

    return value


def _besselk(nu: float, v: float) -> float:
    """DLMF 10.32.9 by the trapezoidal rule."""
    total, step, k = math.exp(-v) / 2, 0.25, 0
    while v * math.cosh(step * k) < 50 + nu * step * k:
        k += 1
        total += math.exp(-v * math.cosh(step * k)) * math.cosh(nu * step * k)
    return step * total


MODULES: list[Any] = [{"besselk": _besselk}, "math"]


def over_orthant(f: Expr, variables: Sequence[Symbol]) -> float:
    """The trapezoidal rule in the logarithms of the variables, over the cells that count.

    It converges geometrically there.  The cells are found from the largest one outwards.
    """
    n = len(variables)
    step, cut = {1: (0.05, 1e-10), 2: (0.2, 1e-9), 3: (0.45, 1e-6)}[n]
    g = _safe(lambdify(list(variables), f * sympy.Mul(*variables), modules=MODULES))

    def at(cell: tuple[int, ...]) -> float:
        return g(*(math.exp(step * (k + offset)) for k, offset in zip(cell, (0.1, 0.3, 0.6), strict=False)))

    def neighbours(cell: tuple[int, ...]) -> list[tuple[int, ...]]:
        return [(*cell[:i], cell[i] + e, *cell[i + 1 :]) for i in range(n) for e in (1, -1)]

    top = (0,) * n
    while (better := max(neighbours(top), key=lambda k: abs(at(k)))) and abs(at(better)) > abs(at(top)):
        top = better
    least = cut * abs(at(top))
    seen, front, values = {top}, [top], []
    while front:
        cell = front.pop()
        value = at(cell)
        values.append(value)
        if abs(value) > least:
            new = [k for k in neighbours(cell) if k not in seen]
            seen.update(new)
            front.extend(new)
    return step**n * math.fsum(values)


def over_simplex(f: Expr, variables: Sequence[Symbol]) -> float:
    """Over sum(variables) < 1, with the rest 1 - sum as a variable of its own, so that nothing cancels."""
    rest = Symbol("rest", positive=True)
    f = f.subs(1 - Add(*variables), rest)
    rule = _unit(0.05 if len(variables) < 3 else 0.12, 3.6)
    g = _safe(lambdify([*variables, rest], f, modules=MODULES))
    if len(variables) == 1:
        return math.fsum(w * g(u, r) for u, r, w in rule)
    if len(variables) == 2:
        return math.fsum(
            wu * wv * ru * g(u, ru * v, ru * rv) for u, ru, wu in rule for v, rv, wv in rule
        )
    total = []
    for u, ru, wu in rule:
        for v, rv, wv in rule:
            side = ru * rv
            total.append(
                wu * wv * ru * side * math.fsum(w * g(u, ru * v, side * k, side * rk) for k, rk, w in rule)
            )
    return math.fsum(total)


def numeric(entry: Entry, point: dict[Symbol, Expr]) -> float:
    """The integral of an entry at a point by quadrature."""
    f = entry.integrand.subs(point)
    variables = [v for v, _, _ in entry.limits]
    deltas = [g for g in f.atoms(DiracDelta)]
    if deltas:
        inner = f.subs(deltas[0], 1)
        own = sorted(deltas[0].args[0].free_symbols, key=str)
        others = [v for v in variables if v not in own]
        if len(own) == 1:
            return over_orthant(inner.subs(own[0], 1), others)
        last = own[-1]
        if others:  # the variable outside the delta function scaled away
            (v,) = others
            return _mixed(inner.subs(last, 1 - own[0]), own[0], v)
        return over_simplex(inner.subs(last, 1 - Add(*own[:-1])), own[:-1])
    uppers = [upper.subs(point) for _, _, upper in entry.limits]
    if all(u is oo for u in uppers):
        return over_orthant(f, variables)
    if uppers[0] == 1 - Add(*variables[1:]):
        return over_simplex(f, variables[::-1])
    (inner, outer), (curve, end) = variables, uppers  # the first one runs up to a curve
    g = _safe(lambdify([outer, inner], f, modules=MODULES))
    height = lambdify([outer], curve, modules="math")
    size, rule, total = float(end), _unit(0.09, 3.6), []
    for u, _, wu in rule:
        top = max(height(size * u), 0.0)
        total.append(size * wu * top * math.fsum(wv * g(size * u, top * v) for v, _, wv in rule))
    return math.fsum(total)


def _mixed(f: Expr, inside: Symbol, free: Symbol) -> float:
    """Over 0 < inside < 1 and 0 < free."""
    ratio = Symbol("ratio", positive=True)
    moved = f.subs(1 - inside, 1 / (1 + ratio)).subs(inside, ratio / (1 + ratio)) / (1 + ratio) ** 2
    return over_orthant(moved, [ratio, free])


@pytest.mark.parametrize("entry", ENTRIES, ids=lambda e: e.name)
def test_published_values_against_quadrature(entry: Entry) -> None:
    answer = integrate(entry.integrand, *entry.limits)
    assert not isinstance(answer, Integral)
    for point in entry.points:
        published = complex(evaluate(entry.value, point))
        ours = complex(evaluate(answer, point))
        assert abs(ours - published) <= 1e-9 * abs(published)
        tolerance = 1e-6 if len(entry.limits) == 2 else 1e-3  # in three dimensions the rule is coarse
        assert abs(ours - numeric(entry, point)) <= tolerance * abs(published)
    for point in entry.outside:
        with pytest.raises((Unevaluated, Undefined)):
            evaluate(answer, point)


def test_enough_published_cases() -> None:
    assert len(ENTRIES) >= 52
    assert all(e.raw["source"] for e in ENTRIES)


# -- order of the limits, conditions ----------------------------------------------------------------------


@pytest.mark.parametrize("entry", ENTRIES[::4], ids=lambda e: e.name)
def test_value_does_not_depend_on_the_order(entry: Entry) -> None:
    if not all(upper is oo for _, _, upper in entry.limits):
        return
    first = closed_form(entry.integrand, *entry.limits)
    second = closed_form(entry.integrand, *entry.limits[::-1])
    for point in entry.points:
        one, other = (complex(evaluate(f.as_piecewise(), point)) for f in (first, second))
        assert abs(one - other) <= 1e-10 * abs(one)


def test_wider_region_in_the_order_given() -> None:
    f = x ** (s - 1) * y ** (t - 1) * exp(-x) * besselj(0, x * y)
    over_x_first = closed_form(f, (x, 0, oo), (y, 0, oo))
    over_y_first = closed_form(f, (y, 0, oo), (x, 0, oo))
    assert over_x_first.condition == ((s > t) & (t > 0))
    assert over_y_first.condition == ((s > t) & (t > 0) & (t < Rational(3, 2)))
    # the inner integral is DLMF 10.22.49, Gamma(s)*2F1(s/2, (s+1)/2; 1; -y**2)
    at = {s: Rational(5, 2), t: Rational(9, 5)}
    inner = gamma(s) * hyper((s / 2, (s + 1) / 2), (1,), -(y**2)) * y ** (t - 1)
    expected = mpmath.quad(lambdify(y, inner.subs(at), "mpmath"), [0, 1, 10, 100, 10**4, 10**7, 10**12])
    assert abs(complex(over_x_first.value.subs(at)) - expected) < 1e-6 * abs(expected)


def test_conditional_convergence_is_not_claimed_beyond_proof() -> None:
    # two oscillating kernels: absolute convergence only
    answer = closed_form(x ** (s - 1) * y ** (t - 1) * besselj(0, x) * besselj(0, x * y), *ORTHANT2)
    assert answer is None or not answer.condition.subs({s: 2, t: Rational(3, 5)})


def test_fewest_inequalities() -> None:
    answer = closed_form(x ** (s - 1) * y ** (t - 1) * exp(-(x**2) * y - x * y**3), *ORTHANT2)
    assert answer.condition == ((s < 2 * t) & (t < 3 * s))
    f = x ** (s - 1) * y ** (t - 1) * exp(-x * y) * exp(-x)
    assert closed_form(f, *ORTHANT2, given=s > t + 1).condition == (t > 0)


def test_sum_to_a_positive_power_has_its_exact_region() -> None:
    # sqrt(1+x+y) grows: each monomial counts, and with exp(-x-y) all of them have the same region
    f = x ** (s - 1) * y ** (t - 1) * sqrt(1 + x + y) * exp(-x - y)
    assert closed_form(f, *ORTHANT2).condition == ((s > 0) & (t > 0))
    # against a power law the growth matters: DLMF 5.12.3 with the exponent 3 - 1/2
    f = x ** (s - 1) * y ** (t - 1) * sqrt(1 + x + y) * (1 + x + y) ** -3
    assert closed_form(f, *ORTHANT2).condition == ((s > 0) & (t > 0) & (s + t < Rational(5, 2)))


# -- refusals -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "f",
    [
        exp(-x * y),  # singular: one monomial in two variables
        exp(-x),
        1 / (1 + x + y),
        exp(x * y - x - y),
        (1 + x * y) ** -3 * x * y,
        exp(-(x**2) + 2 * x * y - y**2),  # constant along x = y
        x ** Rational(-3, 2) * exp(-x - y),
        sin(x**2 + y**2) / log(2 + x),
    ],
    ids=str,
)
def test_refused(f: Expr) -> None:
    assert closed_form(f, *ORTHANT2) is None


def test_singular_system_is_refused() -> None:
    # kernels of one product of the variables: index 0 and determinant 0
    assert closed_form(x ** (s - 1) * y ** (t - 1) * exp(-x * y) * besselk(0, x * y), *ORTHANT2) is None


def test_what_is_not_ours_goes_to_sympy_once(monkeypatch: pytest.MonkeyPatch) -> None:
    calls = []

    def spy(*args: Any, **hints: Any) -> str:
        calls.append((args, hints))
        return "SymPy's"

    monkeypatch.setattr(sympy, "integrate", spy)
    f = sin(x * y + cos(x))
    assert integrate(f, (x, 0, 1), (y, 0, 2), conds="none") == "SymPy's"
    assert calls == [((f, (x, 0, 1), (y, 0, 2)), {"conds": "none"})]


def test_separate_conditions_stay_as_in_sympy() -> None:
    with pytest.raises(ValueError):
        sympy.integrate(exp(-x - y), *ORTHANT2, conds="separate")
    with pytest.raises(ValueError):
        integrate(exp(-x - y), *ORTHANT2, conds="separate")


def test_conds_none_and_piecewise() -> None:
    f = x ** (s - 1) * y ** (t - 1) * exp(-x - y)
    assert integrate(f, *ORTHANT2, conds="none") == gamma(s) * gamma(t)
    answer = integrate(f, *ORTHANT2)
    assert isinstance(answer, Piecewise)
    assert answer.args[-1] == (Integral(f, *ORTHANT2), True)


def test_variables_without_assumptions() -> None:
    u, v = symbols("u v")
    assert integrate(exp(-u - v) / (u + v), (u, 0, oo), (v, 0, oo)) == 1
    assert integrate(exp(-sqrt(u**2 + v**2)), (u, 0, oo), (v, 0, oo)) == pi / 2


# -- further values -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("f", "point"),
    [
        (exp(-x - y - z - x * y * z), {}),
        (x ** (a - 1) * y ** (b - 1) * (1 + x) ** -c * (1 + y) ** -d * (x + y) ** -1, {a: 1.3, b: 1.2, c: 2.1, d: 1.7}),
        (x ** (a - 1) * y ** (b - 1) * (1 + x + y) ** -c * exp(-x), {a: 1.3, b: 1.1, c: 2.7}),
        (x ** (a - 1) * y ** (b - 1) * (1 + x + y) ** -2 * (x + y + x * y) ** -2, {a: 2.3, b: 1.6}),
        (besselk(0, x) * besselk(0, y) * exp(-x * y), {}),
        (log(1 + x * y) * exp(-x - y), {}),
        ((x + y) ** 3 * exp(-x - y - x * y), {}),
        (x ** (s - 1) * y ** (t - 1) * exp(-(x**2) - 2 * q * x * y - y**2), {s: 1.4, t: 2.2, q: -0.6}),
        (x ** (s - 1) * y ** (t - 1) * exp(-(x**2) - 2 * q * x * y - y**2), {s: 1.4, t: 2.2, q: 3.5}),
        (x ** (s - 1) * y ** (t - 1) * (x**2 + 2 * q * x * y + y**2) ** -2 * exp(-y), {s: 1.4, t: 3.2, q: -0.3}),
        (x ** (a - 1) * y ** (b - 1) * exp(-x - y) * besselk(0, x + y), {a: 1.4, b: 0.8}),
        (x ** (a - 1) * y ** (b - 1) * exp(-x / (1 + y) - y * c), {a: 1.4, b: 0.8, c: 1.7}),
        (x ** (a - 1) * y ** (b - 1) * (1 + x**2 * y) ** -p * exp(-x * y**2), {a: 1.2, b: 1.1, p: 2.5}),
        (exp(-x - y) * log(x) * log(x + y), {}),
    ],
    ids=lambda v: str(v) if isinstance(v, Expr) else "",
)
def test_values_against_quadrature(f: Expr, point: dict[Symbol, float]) -> None:
    variables = [v for v in (x, y, z) if f.has(v)]
    answer = closed_form(f, *((v, 0, oo) for v in variables))
    assert answer is not None
    exact = {k: Rational(str(v)) for k, v in point.items()}
    assert answer.condition.subs(exact) == True  # noqa: E712 - SymPy Boolean
    expected = over_orthant(f.subs(point), variables)
    tolerance = 1e-6 if len(variables) == 2 else 1e-3
    assert abs(complex(evaluate(answer.value, exact)) - expected) < tolerance * abs(expected)


def test_steps_tell_the_derivation() -> None:
    answer = closed_form(x ** (s - 1) * y ** (t - 1) * exp(-(x**2) * y - x), *ORTHANT2)
    told = "\n".join(str(step) for step in answer.steps)
    for part in ("exponent matrix", "solution s1", "abs(det) = 1", "strips of the kernels"):
        assert part in told
    split = closed_form(exp(-x) * (1 + x + y) ** -3, *ORTHANT2)
    assert "integrated along the direction" in "\n".join(str(step) for step in split.steps)
    lemma = closed_form(besselk(0, x) * besselk(0, y) * exp(-x * y), *ORTHANT2)
    assert "eliminated" in "\n".join(str(step) for step in lemma.steps)


def test_same_output_for_every_hash_seed() -> None:
    code = (
        "from sympy import *; from sympy_mellin_ext import closed_form;"
        "x,y,z=symbols('x y z',positive=True); a,b,c=symbols('a b c',real=True);"
        "print(closed_form(x**(a-1)*y**(b-1)*z**(c-1)*exp(-x*y-y*z-z*x), (x,0,oo),(y,0,oo),(z,0,oo)));"
        "print(closed_form(x**(a-1)*y**(b-1)*(1+x)**-c*exp(-x-y-x*y), (x,0,oo),(y,0,oo)))"
    )
    outputs = {
        subprocess.run(
            [sys.executable, "-c", code], env={"PYTHONHASHSEED": seed}, capture_output=True, text=True, check=True
        ).stdout
        for seed in ("0", "7")
    }
    assert len(outputs) == 1 and "nan" not in outputs.pop()


@pytest.mark.parametrize(
    ("f", "infinity"),
    [
        (exp(-x * y), oo),
        (-1 / (1 + x + y), -oo),
        (x ** Rational(-3, 2) * exp(-x - y), oo),
        (exp(-x - y) / (x + y) ** 2, oo),
        (sqrt(1 + x + y) * exp(-x), oo),
        (besselk(0, x * y), oo),
        (exp(-x - y) * x ** (-a - 1), oo),
    ],
    ids=str,
)
def test_integrands_of_one_sign_that_diverge(f: Expr, infinity: Expr) -> None:
    # growth along a ray; SymPy itself gives oo or nan for most of these
    assert integrate(f, *ORTHANT2) == infinity


def test_nested_ranges_by_tonelli() -> None:
    # McKay's bivariate gamma density, from memory: Kotz, Balakrishnan and Johnson (2000), 48.3.1
    f = x ** (a - 1) * (y - x) ** (b - 1) * exp(-y)
    assert closed_form(f, (x, 0, y), (y, 0, oo)).value == gamma(a) * gamma(b)
    # DLMF 25.2.1 at s = 2: int int 1/(1 - x*y) over the unit square
    assert closed_form(1 / (1 - x * y), (x, 0, 1), (y, 0, 1)).value == pi**2 / 6
    # not of one sign, and no exact order is shown
    assert closed_form(sin(x * y), (x, 0, 1), (y, 0, 2)) is None


def test_liouville_needs_absolute_convergence() -> None:
    assert closed_form(cos(x + y) * (x + y) ** Rational(-3, 2), *ORTHANT2) is None
