"""Powers of trinomials ``a + b*x**k + c*x**(2*k)`` on the half line, for every b where they stay positive.

Source: from memory: Gradshteyn and Ryzhik 3.252.10, with DLMF 14.3.1 for the Ferrers function in it:
``int_0^oo v**(s-1)*(1 + 2*c*v + v**2)**(-q) dv = B(s, 2*q - s)*2F1(s, 2*q - s; q + 1/2; (1 - c)/2)``, c > -1.
"""
from __future__ import annotations

from sympy import Expr, Pow, S, gamma, hyper, sqrt
from sympy.logic.boolalg import Boolean

from ..closed_form import Step
from ..inverse import named_pfq
from ..region import Facts, Region, real_part
from .integrand import Product
from .outcome import Outcome
from .polynomial import Polynomial

SOURCE = "from memory: Gradshteyn and Ryzhik 3.252.10"


def positive_trinomial(poly: Polynomial, facts: Facts) -> Boolean | None:
    """When a sum of three monomials with equally spaced exponents is positive: ``b > -2*sqrt(a*c)``."""
    if len(poly) != 3:
        return None
    (a, ea), (b, eb), (c, ec) = sorted(poly, key=lambda m: tuple(str(e) for e in m.exponents))
    for _ in range(2):
        if all((x + z - 2 * y).expand() is S.Zero for x, y, z in zip(ea, eb, ec, strict=True)):
            break
        (a, ea), (b, eb), (c, ec) = (b, eb), (c, ec), (a, ea)
    else:
        if any((x + z - 2 * y).expand() is not S.Zero for x, y, z in zip(ea, eb, ec, strict=True)):
            return None
    if facts.sign(a) != 1 or facts.sign(c) != 1 or not b.is_extended_real:
        return None
    return S.true if facts.sign(b) in (0, 1) else b > -2 * sqrt(a * c)


def trinomial(product: Product, facts: Facts) -> Outcome | None:
    """The integral of one power of a trinomial times a power of the variable, or None."""
    if len(product.powers) != 1 or product.exponent or product.specials or len(product.sums) != 1:
        return None
    ((base, q),) = product.sums
    if len(base) != 3 or not product.rational():
        return None
    low, middle, high = sorted(base, key=lambda m: m.exponents[0])
    k = middle.exponents[0] - low.exponents[0]
    if high.exponents[0] - middle.exponents[0] != k:
        return None
    condition = positive_trinomial((low, middle, high), facts)
    if condition is None or condition is S.false:
        return None
    a, b, c = (m.coefficient for m in (low, middle, high))
    s = ((product.powers[0] + 1 - low.exponents[0] * q) / k).expand()
    rest = (2 * q - s).expand()
    z = (1 - b / (2 * sqrt(a * c))) / 2
    front = product.coefficient * Pow(a, -q + s / 2) * Pow(c, -s / 2) / k
    value = front * gamma(s) * gamma(rest) / gamma(2 * q) * _gauss(s, rest, q + S.Half, z)
    step = Step("power of a trinomial", SOURCE, value)
    return Outcome(value, (real_part(s), real_part(rest)), (condition,), (step,), (SOURCE,))


def _gauss(a: Expr, b: Expr, c: Expr, z: Expr) -> Expr:
    found = named_pfq((a, b), (c,), z)
    return hyper((a, b), (c,), z) if found is None else found


def narrower(condition: Boolean, outcome: Outcome, facts: Facts) -> bool:
    """Whether a condition asks for more than the outcome's own."""
    region = Region(facts).positive(*outcome.positive).holds(*outcome.booleans)
    return region.implies(condition) is not True
