"""What the fuzz run found, by seed."""
import pytest
from mpmath import mp
from sympy import (
    Rational,
    Symbol,
    besselk,
    erf,
    exp,
    expint,
    log,
    oo,
    sin,
    symbols,
)

from sympy_mellin_ext import closed_form
from sympy_mellin_ext.strategies.tidy_functions import joined_logarithms
from sympy_mellin_ext.verify import quad, verify
from sympy_mellin_ext.verify.numeric import evaluate

x, a, b = symbols("x a b", positive=True)
s = Symbol("s", real=True)
nu = Symbol("nu", real=True)
n = Symbol("n", integer=True, positive=True)
R = Rational


def test_logarithms_of_large_numbers():
    """Seed 142: a number beyond the ones that are factored is its own base."""
    closed_form(x**2 * log(x) * besselk(nu, 3 * x**2) * expint(1, 2 * x ** R(3, 2)), (x, 0, oo))
    total = log(a) + log(10**7 + 19) - log(b * (10**9 + 7))
    assert abs(evaluate(joined_logarithms(total) - total, {a: 2, b: 3})) < 1e-12


@pytest.mark.parametrize("power", [R(1, 25), R(-1, 8)])
def test_powers_of_the_logarithm_at_an_edge(power):
    """Seed 1316: x**s*log(x)**2 grows towards 0 over many octaves before it falls."""
    value, _, reliable, note = quad(x ** (s - 1) * exp(-x / 2) * log(x) ** 2, (x, 0, oo), {s: power}, 7)
    assert reliable, note
    assert bool(mp.isinf(value)) is bool(power < 0)


@pytest.mark.parametrize(("power", "diverges"), [(R(23, 12), False), (R(17, 8), True)])
def test_the_growth_of_an_oscillation_is_measured_at_its_maxima(power, diverges):
    """Seed 20019: x**s*sin(a*x**2) just below s = 2, and above it."""
    value, _, reliable, note = quad(2 * x ** (s - 1) * sin(R(331, 121) * x**2), (x, 0, oo), {s: power}, 7)
    assert reliable, note
    assert bool(mp.isinf(value)) is diverges


def test_residues_that_coincide_for_some_integers():
    """Seeds 30070 and 70025: with an integer n in both, poles coincide for every second or fourth n."""
    answer = closed_form(x**2 * erf(a * x) / (b * x ** R(3, 2) + 1) ** n, (x, 0, oo))
    if answer is not None:
        record = answer.verify(7, points=[{a: 1, b: R(2, 3), n: k} for k in (4, 5, 6)])
        assert record.ok is True, str(record)
    answer = closed_form(x**2 * exp(-a * x) / (x + 1) ** n, (x, 0, oo))
    assert answer is not None and answer.verify(digits=8).ok is True


def test_symbols_of_one_name():
    """Seed 70050: two symbols that differ in their assumptions only."""
    other = Symbol("nu", positive=True)
    record = verify(exp(-(nu**2 + other) * x), (x, 0, oo), 1 / (nu**2 + other), digits=8)
    assert record.ok is True, str(record)


def test_an_odd_integrand_over_the_whole_line():
    """Seed 70299: both halves are large, their total is zero."""
    t = Symbol("t", real=True)
    assert verify(t**3 * exp(2 * t) / (exp(t) + 1) ** 4, (t, -oo, oo), 0, digits=6).ok is True
