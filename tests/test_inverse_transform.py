"""From a transform and a strip back to the function."""
from __future__ import annotations

import pytest
from mpmath import almosteq, mpc
from sympy import (
    EulerGamma,
    Expr,
    Piecewise,
    Rational,
    S,
    airyaiprime,
    besselk,
    beta,
    cos,
    cot,
    exp,
    gamma,
    hyper,
    log,
    meijerg,
    oo,
    pi,
    sin,
    sqrt,
    symbols,
    zeta,
)

from sympy_mellin_ext import inverse_transform, mellin
from sympy_mellin_ext.gamma import GammaProduct
from sympy_mellin_ext.kernels import pair_rows, rows
from sympy_mellin_ext.verify.numeric import evaluate

x, a, b = symbols("x a b", positive=True)
s = symbols("s")
ORDERS = {
    "uppergamma": (Rational(7, 5),),
    "lowergamma": (Rational(7, 5),),
    "expint": (Rational(8, 5),),
    "polylog": (2,),
}
POINTS = (Rational(2, 7), Rational(17, 10), Rational(31, 5))


def same(f: Expr, g: Expr, points: tuple = POINTS) -> bool:
    return all(almosteq(mpc(evaluate(f, {x: p}, 12)), mpc(evaluate(g, {x: p}, 12)), rel_eps=1e-10) for p in points)


@pytest.mark.parametrize("name", sorted(row.name for row in rows().values()))
def test_round_trip_of_every_row(name: str) -> None:
    row = next(r for r in rows().values() if r.name == name)
    arguments = list(ORDERS.get(name, () if name in ELEMENTARY else (Rational(2, 7),)))
    arguments.insert(row.argument if row.argument >= 0 else len(arguments), row.sign * x)
    function = row.function(*arguments)
    if name == "besseli":
        # it grows; its row serves in products, as this one
        function = exp(-x) * function
    answer = mellin(function, x, s)
    assert answer is not None
    back = inverse_transform(answer.value, s, x, answer.strip)
    assert back is not None, (answer.value, answer.strip)
    assert same(back, function), (back, function)


ELEMENTARY = {
    "exp", "atan", "acot", "asinh", "erf", "erfc", "Ei", "Si", "Ci", "fresnels", "fresnelc", "airyai", "airyaiprime",
}  # fmt: skip
PAIRS = [
    (names, i)
    for names, found in sorted(pair_rows().items())
    for i in range(len(found))
    if "turned 1F1" not in names  # a row of hyper, which has none of its own
]


@pytest.mark.parametrize(("names", "number"), PAIRS)
def test_round_trip_of_every_pair(names: tuple[str, str], number: int) -> None:
    pair = pair_rows()[names][number]
    orders = {"besselj": Rational(2, 3), "besseli": Rational(2, 3), "besselk": Rational(1, 5)}
    orders |= {"bessely": Rational(1, 5), "uppergamma": Rational(2, 5), "expint": Rational(8, 5)}
    classes = {"cos": cos, "sin": sin} | {c.__name__: c for c in rows()}
    values, function = [], S.One
    for place, name in enumerate(names):
        argument = x**pair.square if place == 0 else x
        if name == "exp":
            argument = argument if pair.turned else -argument
        order = [orders[name] + (Rational(1, 6) if place == 0 else 0)] if name in orders else []
        values += order
        function *= classes[name](*order, argument)
    product = pair.transform(*values)
    left, right = product.strip()
    back = inverse_transform(product, s, x, (max(left), min(right) if right else oo))
    assert back is not None
    assert same(back, function), (back, function)


@pytest.mark.parametrize(
    ("G", "strip", "function"),
    [
        (gamma(s), (0, oo), exp(-x)),  # DLMF 5.9.1
        (gamma(s), (-1, 0), exp(-x) - 1),  # DLMF 5.9.5
        (gamma(s), (-2, -1), exp(-x) - 1 + x),
        (gamma(s), (-3, -2), exp(-x) - 1 + x - x**2 / 2),
        (pi / sin(pi * s), (0, 1), 1 / (1 + x)),
        (pi / sin(pi * s), (-1, 0), 1 / (1 + x) - 1),
        (pi / sin(pi * s), (1, 2), 1 / (1 + x) - 1 / x),
        (gamma(s) * cos(pi * s / 2), (0, 1), cos(x)),  # DLMF 5.9.6
        (gamma(s) * cos(pi * s / 2), (-2, 0), cos(x) - 1),
        (gamma(s) * sin(pi * s / 2), (-1, 1), sin(x)),
        (gamma(s) ** 2, (0, oo), 2 * besselk(0, 2 * sqrt(x))),  # DLMF 10.43.19
        (gamma(s) ** 2, (-1, 0), 2 * besselk(0, 2 * sqrt(x)) + log(x) + 2 * EulerGamma),
        (1 / s, (0, oo), Piecewise((1, x < 1), (0, True))),
        (1 / s, (-oo, 0), Piecewise((0, x < 1), (-1, True))),
        (1 / (s * (s + 1)), (0, oo), Piecewise((1 - x, x < 1), (0, True))),
        (1 / (s * (s + 1)), (-1, 0), Piecewise((-x, x < 1), (-1, True))),
        (pi / (s * sin(pi * s)), (-1, 0), log(1 + x)),
        (2**-s * gamma(s) + 3**-s * gamma(s + 1), (0, oo), exp(-2 * x) + 3 * x * exp(-3 * x)),
        (beta(s, Rational(5, 2)), (0, oo), Piecewise(((1 - x) ** Rational(3, 2), x < 1), (0, True))),
    ],
)
def test_the_strip_chooses_the_function(G: Expr, strip: tuple, function: Expr) -> None:
    found = inverse_transform(G, s, x, strip)
    assert found is not None
    assert not found.has(meijerg, hyper)
    assert same(found, function), found


def test_neighbouring_strips_give_different_functions() -> None:
    assert inverse_transform(gamma(s), s, x, (0, oo)) == exp(-x)
    assert inverse_transform(gamma(s), s, x, (-1, 0)) == exp(-x) - 1
    product = GammaProduct.of(up=[(0, 1)], scale=a)
    assert inverse_transform(product, s, x, (0, oo)) == exp(-a * x)
    assert inverse_transform(product, s, x, (-1, 0)) == exp(-a * x) - 1


def test_symbolic_strip() -> None:
    G = gamma(s) * gamma(a - s) / gamma(a) * b**-s
    assert inverse_transform(G, s, x, (0, a)) == (1 + b * x) ** (-a)
    nu = symbols("nu", real=True)
    G = gamma(s + nu) * gamma(s - nu)
    assert inverse_transform(G, s, x, (nu, oo), given=nu > 0) == 2 * besselk(2 * nu, 2 * sqrt(x))
    assert inverse_transform(gamma(s - nu), s, x, (0, 1)) is None  # on which side is nu?


def test_what_is_no_transform() -> None:
    assert inverse_transform(S.One, s, x, (0, 1)) is None
    assert inverse_transform(1 / gamma(s), s, x, (0, 1)) is None
    assert inverse_transform(sin(pi * s), s, x, (0, 1)) is None
    assert inverse_transform(gamma(s) * exp(2 * s * sqrt(-1 * S.One)), s, x, (0, 1)) is None  # beyond the sector
    assert inverse_transform(gamma(s) * zeta(s), s, x, (1, oo)) is None
    assert inverse_transform(gamma(s) * sin(pi * s / 2), s, x, (2, 3)) is None  # kappa >= 1/2
    assert inverse_transform(cot(pi * s), s, x, (0, 1)) is None


def test_bad_arguments() -> None:
    with pytest.raises(ValueError, match="pole at 0 lies inside"):
        inverse_transform(gamma(s), s, x, (-1, 1))
    with pytest.raises(ValueError, match="is empty"):
        inverse_transform(gamma(s), s, x, (1, 0))
    with pytest.raises(ValueError, match="free of x"):
        inverse_transform(gamma(s) * x, s, x, (0, 1))
    with pytest.raises(TypeError, match="s must be a Symbol"):
        inverse_transform(gamma(s), 3, x, (0, 1))
    assert airyaiprime in rows()
