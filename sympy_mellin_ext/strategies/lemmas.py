"""Products of three kernels that a lemma reduces.

Weber's second exponential integral: with f, g Bessel functions J or I of one order,

    int_0^oo y*exp(-p*y**2)*f_nu(a*y)*g_nu(b*y) dy = exp(-(A + B)/(4*p))/(2*p) * h_nu(a*b/(2*p)),

A = a**2 for J and -a**2 for I (B likewise), h = I for two equal functions, J for J with I.

Sources: DLMF 10.22.67; G. N. Watson, A Treatise on the Theory of Bessel Functions (1944), section 13.31.
"""
from __future__ import annotations

from sympy import Expr, S, besseli, besselj, exp

from ..matching import Term
from ..region import Facts


def weber(term: Term, facts: Facts) -> Expr | None:
    """The value of a term with an exponential and two Bessel functions of half its ratio, or None."""
    if len(term.kernels) != 3 or term.logs:
        return None
    decaying = [k for k in term.kernels if k.name == "exp" and k.wave is None]
    bessel = [k for k in term.kernels if k.name in ("besselj", "besseli")]
    if len(decaying) != 1 or len(bessel) != 2:
        return None
    first, second = bessel
    r = first.ratio
    if second.ratio != r or decaying[0].ratio != 2 * r or first.arguments != second.arguments:
        return None
    # y = x**r turns x**(power) dx into y*dy/r
    if (term.power + 1 - 2 * r).expand() is not S.Zero or facts.sign(r) != 1:
        return None
    p = decaying[0].product.scale
    # the rows keep 1/2 in the scale
    a, b = 2 * first.product.scale, 2 * second.product.scale
    squares = sum((k**2 if f.name == "besselj" else -(k**2)) for f, k in ((first, a), (second, b)))
    function = besseli if first.name == second.name else besselj
    value = exp(-squares / (4 * p)) * function(first.arguments[0], a * b / (2 * p))
    return term.coefficient * value / (2 * p * r)


__all__ = ["weber"]
