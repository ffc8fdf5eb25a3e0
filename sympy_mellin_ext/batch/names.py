"""What text may name: the functions and constants that lists and arguments are allowed to use.

SymPy writes some functions out as soon as they are built (a Laguerre polynomial of order 10**6, the zeta
function at 10**6).  `bound` keeps whole numbers among their arguments small enough for that to take no time.
"""
from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

import sympy
from sympy import Expr, S

# Bounds on the size of a number that stands as an argument: of elementary functions and Gamma functions, of special
# functions in general, and of those that SymPy expands into that many terms.
LARGE, MEDIUM, SMALL, TINY = 1000, 100, 20, 8


class Allowed(NamedTuple):
    """A function that text may call: how to build it, how many arguments, how large a number among them."""

    build: Callable[..., Any]
    least: int
    most: int
    bound: int = MEDIUM


def _cube_root(z: Expr) -> Expr:
    return z ** sympy.Rational(1, 3)


def _rational(p: Expr, q: Expr = S.One) -> Expr:
    if not (p.is_Rational and q.is_Rational):
        raise ValueError("Rational takes numbers")
    return p / q


def _rows() -> dict[str, Allowed]:
    table: dict[str, Allowed] = {}

    def add(names: str, least: int, most: int, bound: int = MEDIUM) -> None:
        for name in names.split():
            table[name] = Allowed(getattr(sympy, name), least, most, bound)

    add("exp sqrt sign re im conjugate arg sin cos tan cot sec csc sinc asin acos atan acot asec acsc sinh cosh "
        "tanh coth sech csch asinh acosh atanh acoth asech acsch Abs gamma loggamma factorial", 1, 1, LARGE)
    add("log", 1, 2, LARGE)
    add("atan2", 2, 2, LARGE)
    add("Heaviside", 1, 2, LARGE)
    add("Min Max", 1, 10, LARGE)
    add("digamma trigamma erf erfc erfi erfinv erfcinv Ei li Li Si Ci Shi Chi fresnels fresnelc airyai airybi "
        "airyaiprime airybiprime dirichlet_eta elliptic_k E1 exp_polar factorial2 subfactorial", 1, 1)
    add("zeta harmonic elliptic_e LambertW stieltjes", 1, 2)
    add("binomial", 2, 2, 2 * SMALL)
    add("polygamma erf2 besselj bessely besseli besselk hankel1 hankel2 jn yn hn1 hn2 polylog "
        "elliptic_f", 2, 2)
    add("beta", 1, 2)
    add("lerchphi", 3, 3)
    add("elliptic_pi", 2, 3)
    add("RisingFactorial FallingFactorial rf ff expint lowergamma uppergamma legendre hermite laguerre chebyshevt "
        "chebyshevu", 2, 2, SMALL)
    add("assoc_legendre assoc_laguerre gegenbauer", 3, 3, TINY)
    add("jacobi", 4, 4, TINY)
    add("bernoulli euler", 1, 2, SMALL)
    table["abs"], table["ln"], table["psi"] = table["Abs"], table["log"], table["polygamma"]
    table["cbrt"] = Allowed(_cube_root, 1, 1, LARGE)
    table["Rational"] = Allowed(_rational, 1, 2, 10**60)
    return table


FUNCTIONS = _rows()

# arguments with brackets of their own
STRUCTURED = ("hyper", "meijerg", "Piecewise", "Sum")

# Built quickly whatever stands inside; functions of functions of others can take the host exponentially long.
LIGHT = frozenset((
    "exp", "log", "ln", "sqrt", "cbrt", "abs", "Abs", "sin", "cos", "tan", "asin", "acos", "atan", "gamma",
    "loggamma", "erf", "erfc", "Min", "Max", "Rational", "factorial",
))  # fmt: skip

RELATIONS: dict[str, Callable[..., Any]] = {
    "Eq": sympy.Eq, "Ne": sympy.Ne, "Gt": sympy.Gt, "Ge": sympy.Ge, "Lt": sympy.Lt, "Le": sympy.Le,
}  # fmt: skip
LOGIC: dict[str, Callable[..., Any]] = {"And": sympy.And, "Or": sympy.Or, "Not": sympy.Not}

CONSTANTS: dict[str, Expr] = {
    "pi": S.Pi,
    "E": S.Exp1,
    "I": S.ImaginaryUnit,
    "oo": S.Infinity,
    "inf": S.Infinity,
    "EulerGamma": S.EulerGamma,
    "Catalan": S.Catalan,
    "GoldenRatio": S.GoldenRatio,
}

# Functions at moderate numbers whose own size is cheap to find.
SIZED = (
    sympy.exp, sympy.log, sympy.sin, sympy.cos, sympy.tan, sympy.cot, sympy.sinh, sympy.cosh, sympy.tanh,
    sympy.asin, sympy.acos, sympy.atan, sympy.asinh, sympy.acosh, sympy.atanh, sympy.gamma, sympy.loggamma,
    sympy.zeta, sympy.polygamma, sympy.factorial, sympy.erf, sympy.erfc, sympy.Abs,
)  # fmt: skip

# What is assumed of a symbol, by the word that declares it.
ASSUMPTIONS: dict[str, dict[str, bool]] = {
    "positive": {"positive": True},
    "negative": {"negative": True},
    "nonnegative": {"nonnegative": True},
    "nonzero": {"real": True, "nonzero": True},
    "real": {"real": True},
    "integer": {"integer": True},
    "positive integer": {"positive": True, "integer": True},
    "nonnegative integer": {"nonnegative": True, "integer": True},
    "complex": {},
}
