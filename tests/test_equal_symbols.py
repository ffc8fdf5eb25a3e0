"""Symbols are compared by value: after a cleared cache two equal ones are different objects."""
from __future__ import annotations

import pytest
from sympy import EulerGamma, Expr, Symbol, airyai, asinh, digamma, exp, factorial, oo, sin
from sympy.core.cache import clear_cache

from sympy_mellin_ext import closed_form, master_theorem
from sympy_mellin_ext.series import taylor_transform, zeta_transform


def twins(name: str) -> tuple[Symbol, Symbol]:
    clear_cache()
    first = Symbol(name, positive=True)
    clear_cache()
    second = Symbol(name, positive=True)
    assert first == second
    assert first is not second
    return first, second


def integrands(x: Symbol) -> list[Expr]:
    return [exp(-x) * sin(x), airyai(x) ** 2, exp(-2 * asinh(x)), 1 / (x**2 + x + 1), exp(-x) / (1 + x)]


@pytest.mark.parametrize("number", range(5))
def test_closed_form(number: int) -> None:
    first, second = twins("x")
    f = integrands(first)[number]
    clear_cache()
    assert closed_form(f, (second, 0, oo)) is not None


def test_series() -> None:
    first, second = twins("x")
    f, g = exp(-first) * sin(first), digamma(1 + first) + EulerGamma
    clear_cache()
    assert taylor_transform(f, second) is not None
    assert zeta_transform(g, second) is not None
    n, same = twins("n")
    phi = 1 / (n + factorial(2))
    clear_cache()
    assert master_theorem(phi, same, Symbol("s")) is not None
