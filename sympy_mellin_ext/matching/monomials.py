"""Powers of the variable of integration, which is positive throughout."""
from __future__ import annotations

from sympy import Abs, Add, Expr, Mul, Pow, S, Symbol

Monomial = tuple[Expr, Expr]  # coefficient, exponent


def monomial(expr: Expr, x: Symbol) -> Monomial | None:
    """Read ``c*x**p`` with ``c`` and ``p`` free of ``x > 0``; None for anything else."""
    if expr is x or expr == x:
        return S.One, S.One
    if not expr.has_free(x):
        return expr, S.Zero
    kind = type(expr)
    if kind is Mul:
        coefficients, power = [], S.Zero
        for arg in expr.args:
            part = monomial(arg, x)
            if part is None:
                return None
            coefficients.append(part[0])
            power += part[1]
        return Mul(*coefficients), power
    if kind is Pow:
        base, exponent = expr.args
        if exponent.has_free(x):
            return None
        part = monomial(base, x)
        if part is None:
            return None
        c, p = part
        # (c*y)**e = c**e*y**e for y > 0, whatever c and e are
        return c if c is S.One else Pow(c, exponent), exponent if p is S.One else p * exponent
    if kind is Abs:
        part = monomial(expr.args[0], x)
        return None if part is None else (Abs(part[0]), part[1])
    return None


def monomials(expr: Expr, x: Symbol) -> list[Monomial] | None:
    """Read a sum of monomials, equal exponents merged; expands products and powers of sums if need be."""
    if type(expr) is not Add:
        single = monomial(expr, x)
        if single is not None:
            return [single]
        expr = expr.expand(log=False, power_base=False, trig=False, func=False, complex=False)
        if type(expr) is not Add:
            single = monomial(expr, x)
            return None if single is None else [single]
    merged: dict[Expr, list[Expr]] = {}
    for arg in expr.args:
        part = monomial(arg, x)
        if part is None:
            expanded = arg.expand(log=False, power_base=False, trig=False, func=False, complex=False)
            if expanded == arg:
                return None
            parts = monomials(expanded, x)
            if parts is None:
                return None
        else:
            parts = [part]
        for c, p in parts:
            merged.setdefault(p, []).append(c)
    result = [(Add(*c), p) for p, c in merged.items()]
    return [(c, p) for c, p in result if c is not S.Zero] or [(S.Zero, S.Zero)]
