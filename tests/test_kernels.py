"""Every row of the kernel table, and every pair, against numerical quadrature in the middle of its strip."""
from __future__ import annotations

import pytest
from mpmath import airyai, almosteq, mpc, mpf, pi, sqrt, workdps
from mpmath import erfc as erfc_number
from mpmath import exp as exp_number
from sympy import (
    Expr,
    Mul,
    Rational,
    Symbol,
    besseli,
    besselj,
    besselk,
    bessely,
    cos,
    erfc,
    exp,
    expint,
    hyper,
    lambdify,
    oo,
    re,
    sin,
    uppergamma,
)

from sympy_mellin_ext import closed_form
from sympy_mellin_ext.kernels import pair_rows, rows
from sympy_mellin_ext.matching import read_terms
from sympy_mellin_ext.region import Facts
from sympy_mellin_ext.verify import quad

x = Symbol("x", positive=True)
ORDERS = {
    "uppergamma": (Rational(7, 5),),
    "lowergamma": (Rational(7, 5),),
    "expint": (Rational(8, 5),),
    "polylog": (2,),
    "besselj": (Rational(3, 7),),
    "bessely": (Rational(2, 7),),
    "besselk": (Rational(2, 7),),
    "hankel1": (Rational(2, 7),),
    "hankel2": (Rational(2, 7),),
}
GROWING = {"besseli"}  # serves in products only
SPECIAL = {"turned 1F1": hyper([Rational(3, 5)], [Rational(12, 5)], x)}
CLASSES = {
    c.__name__: c for c in (exp, besseli, besselj, besselk, bessely, cos, erfc, expint, sin, uppergamma)
}


def middle(lower: list, upper: list) -> Rational:
    """A point inside the strip, away from its edges."""
    low = max((Rational(re(v)) for v in lower), default=None)
    high = min((Rational(re(v)) for v in upper), default=None)
    if low is None:
        assert high is not None
        return high - Rational(3, 7)
    return low + Rational(3, 7) if high is None else (2 * low + high) / 3


def far_erfc(y: mpf) -> mpf:
    """erfc with relative accuracy far out, DLMF 7.11.2 and 13.7.3; mpmath's own loses it near 1e10."""
    return erfc_number(y) if y < 100 else exp_number(-(y**2)) / (y * sqrt(pi)) * (1 - 1 / (2 * y**2) + 3 / (4 * y**4))


def trapezoid(f: Expr) -> mpf:
    """``int_0^oo f dx`` by the trapezoidal rule in log(x): exponentially accurate for analytic f inside a strip."""
    # digits enough for exp(x**2)*erfc(x) where x**2 is 1e40
    with workdps(70):
        return +_trapezoid(f)


def _trapezoid(f: Expr) -> mpf:
    step = mpf(1) / 8
    g = lambdify(x, f * x, ["mpmath", {"airyaiprime": lambda y: airyai(y, derivative=1), "erfc": far_erfc}])
    total = mpf(0)
    for sign in (1, -1):
        for n in range(0 if sign > 0 else 1, 2000):
            value = g(exp_number(sign * n * step))
            total += value
            if n > 40 and abs(value) < mpf("1e-14") * abs(total):
                break
    return total * step


def check(function: Expr, s: Rational, oscillating: bool) -> None:
    answer = closed_form(x ** (s - 1) * function, (x, 0, oo))
    assert answer is not None, f"{function} is not read at s = {s}"
    if oscillating:
        number, _, reliable, note = quad(x ** (s - 1) * function, (x, 0, oo), {}, digits=10, seconds=30)
        assert reliable, note
    else:
        number = trapezoid(x ** (s - 1) * function)
    assert almosteq(mpc(answer.value.evalf(20)), number, rel_eps=mpf("1e-8"), abs_eps=mpf("1e-12")), (answer, number)


@pytest.mark.parametrize("name", sorted(row.name for row in rows().values() if row.name not in GROWING))
def test_row(name: str) -> None:
    row = next(r for r in rows().values() if r.name == name)
    arguments = list(ORDERS.get(name, ()))
    position = row.argument if row.argument >= 0 else len(arguments)
    arguments.insert(position, row.sign * x)
    function = row.function(*arguments)
    (term,) = read_terms(function, x, Facts())
    lower, upper = term.kernels[0].product.strip()
    oscillating = term.kernels[0].product.lam == 0 or term.kernels[0].wave is not None
    s = middle(lower, upper if not oscillating else [*upper, Rational(1)])
    check(function, s, oscillating)
    assert row.source


PAIRS = [(names, i) for names, found in sorted(pair_rows().items()) for i in range(len(found))]


@pytest.mark.parametrize(("names", "number"), PAIRS)
def test_pair(names: tuple[str, str], number: int) -> None:
    pair = pair_rows()[names][number]
    orders = {"besselj": Rational(2, 3), "besseli": Rational(2, 3), "besselk": Rational(1, 5)}
    orders |= {"bessely": Rational(1, 5)}
    orders |= {"uppergamma": Rational(2, 5), "expint": Rational(8, 5)}
    factors = []
    for place, name in enumerate(names):
        argument = x**pair.square if place == 0 else x
        if name == "exp":
            factors.append(exp(argument if pair.turned else -argument))
        elif name in orders:
            order = orders[name] + (Rational(1, 6) if place == 0 else 0)
            factors.append(CLASSES[name](order, argument))
        else:
            factors.append(SPECIAL[name] if name in SPECIAL else CLASSES[name](argument))
    function = Mul(*factors)
    (term,) = read_terms(function, x, Facts())
    assert len(term.kernels) == 1, "the pair was not recognised"
    product = term.kernels[0].product
    check(function, middle(*product.strip()), bool(product.lam == 0))
    assert pair.source
