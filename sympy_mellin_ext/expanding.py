"""Expansion that looks first: most exponents and arguments of Gammas are sums of monomials already."""
from __future__ import annotations

from sympy import Add, Expr, Mul, Pow


def expanded(expr: Expr) -> Expr:
    """``expr.expand()``, at no cost where there is nothing to expand.

    Examples
    --------
    >>> from sympy import symbols
    >>> from sympy_mellin_ext.expanding import expanded
    >>> a, s = symbols('a s')
    >>> expanded(a*(s + 1)), expanded(a*s + 1)
    (a*s + a, a*s + 1)
    """
    return expr if _is_sum_of_monomials(expr) else expr.expand()


def _is_sum_of_monomials(expr: Expr) -> bool:
    if type(expr) is Add:
        return all(_is_monomial(term) for term in expr.args)
    return _is_monomial(expr)


def _is_monomial(term: Expr) -> bool:
    if type(term) is Mul:
        return all(_is_power(factor) for factor in term.args)
    return _is_power(term)


def _is_power(factor: Expr) -> bool:
    """An atom, or an atom to the power of one."""
    if factor.is_Atom:
        return True
    return type(factor) is Pow and bool(factor.args[0].is_Atom and factor.args[1].is_Atom)
