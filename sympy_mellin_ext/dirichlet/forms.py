"""Short forms of values of exponential series."""
from __future__ import annotations

from sympy import Add, Expr, I, count_ops, expand_mul

from ..gamma.shortest import collect_powers

# Sums of more terms are left alone.
_MOST_TERMS = 30


def shortest(value: Expr) -> Expr:
    """Imaginary units multiplied out where that removes them, powers of one base collected.

    Examples
    --------
    >>> from sympy import I, coth, pi, symbols
    >>> from sympy_mellin_ext.dirichlet.forms import shortest
    >>> b = symbols('b', positive=True)
    >>> shortest(-I*(I*pi*coth(pi*b) - I/b)/2)
    pi*coth(pi*b)/2 - 1/(2*b)
    """
    if value.has(I):
        expanded = expand_mul(value)
        if len(Add.make_args(expanded)) <= _MOST_TERMS and (not expanded.has(I) or count_ops(expanded) < count_ops(value)):
            value = expanded
    return collect_powers(value)


__all__ = ["shortest"]
