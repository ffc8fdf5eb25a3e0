"""Shorter ways to write what the inverse transform returns: exact rewritings only, no search."""
from __future__ import annotations

from sympy import Add, Expr, Integer, Mul, Piecewise, Pow, Rational, S, gamma, igcd

from ..gamma.shortest import shortest_quotient


def tidy(expr: Expr) -> Expr:
    """Powers of one base joined, Gammas shortened, ``(1 + b**2/a**2)**p`` written ``(a**2 + b**2)**p/a**(2*p)``.

    Examples
    --------
    >>> from sympy import sqrt, symbols
    >>> from sympy_mellin_ext.strategies.tidy import tidy
    >>> a, b = symbols('a b', positive=True)
    >>> tidy(1/(a*sqrt(1 + b**2/a**2)))
    1/sqrt(a**2 + b**2)
    """
    if not expr.args:
        return expr
    if isinstance(expr, Piecewise):
        return expr.func(*((tidy(e), c) for e, c in expr.args))
    if expr.is_Add:
        return common_factor(Add(*(tidy(a) for a in expr.args)))
    if expr.is_Mul:
        return _product(expr)
    args = [tidy(a) if isinstance(a, Expr) else a for a in expr.args]
    return _power(*args) if expr.is_Pow else expr.func(*args)


def _product(expr: Expr) -> Expr:
    args = Mul.make_args(expr)
    sums = [a for a in args if a.is_Add]
    if len(sums) == 1:
        front = Mul(*(a for a in args if a is not sums[0]))
        return common_factor(Add(*(_product(Mul(front, t)) for t in sums[0].args)))
    branches = [a for a in args if isinstance(a, Piecewise)]
    if len(branches) == 1:
        front = Mul(*(a for a in args if a is not branches[0]))
        return Piecewise(*((tidy(front * e), c) for e, c in branches[0].args))
    flat: list[Expr] = []
    for a in args:
        flat.extend(Mul.make_args(tidy(a)))
    return _joined(flat)


def _joined(factors: list[Expr]) -> Expr:
    """A product with the exponents of equal bases added and the Gammas shortened."""
    number: Expr = S.One
    up: list[Expr] = []
    down: list[Expr] = []
    powers: dict[Expr, list[Expr]] = {}
    for f in factors:
        if f.is_Rational:
            number = number * f
            continue
        base, exponent = (f.base, f.exp) if f.is_Pow else (f, S.One)
        if isinstance(base, gamma) and exponent.is_Integer:
            (up if exponent > 0 else down).extend([base.args[0]] * abs(int(exponent)))
        else:
            powers.setdefault(base, []).append(exponent)
    if len(up) + len(down) > 1:
        for f in Mul.make_args(shortest_quotient(up, down)):
            if f.is_Rational:
                number = number * f
            else:
                base, exponent = (f.base, f.exp) if f.is_Pow else (f, S.One)
                powers.setdefault(base, []).append(exponent)
    else:
        powers.update({gamma(a): [S.One] for a in up} | {gamma(a): [S.NegativeOne] for a in down})
    result = []
    for base, exponents in powers.items():
        if base.is_Integer and base > 1 and any(not e.is_Rational for e in exponents):
            number, extra = _taken_out(number, base)
            exponents = [*exponents, extra]
        if len(exponents) > 1 and (base.is_positive or all(e.is_Integer for e in exponents)):
            result.append(Pow(base, Add(*exponents).expand()))
        else:
            result.extend(Pow(base, e) for e in exponents)
    return Mul(number, *result)


def _taken_out(number: Rational, base: Integer) -> tuple[Rational, Integer]:
    """``number = rest * base**n`` with the largest possible abs(n)."""
    p, q, n = int(number.p), int(number.q), 0
    b = int(base)
    while p and p % b == 0:
        p, n = p // b, n + 1
    while q % b == 0:
        q, n = q // b, n - 1
    return Rational(p, q), Integer(n)


def _power(base: Expr, exponent: Expr) -> Expr:
    if base.is_Add:
        base = over_common_denominator(base)
    if not base.is_Mul:
        return Pow(base, exponent)
    if exponent.is_Integer:
        return Mul(*(Pow(a, exponent) for a in base.args))
    parts: list[Expr] = []
    rest: list[Expr] = []
    for a in base.args:
        if not a.is_positive:
            rest.append(a)
        elif a.is_Pow and a.exp.is_real and a.base.is_positive:
            parts.append(Pow(a.base, a.exp * exponent))
        elif a.is_Rational and a.q > 1:
            parts.extend((Pow(a.p, exponent), Pow(a.q, -exponent)))
        else:
            parts.append(Pow(a, exponent))
    return Mul(*parts, Pow(Mul(*rest), exponent))


def over_common_denominator(total: Expr) -> Expr:
    """A sum as its numerator times powers of positive atoms, where the terms have such denominators."""
    lowest: dict[Expr, Expr] = {}
    number = 1
    for term in total.args:
        c, rest = term.as_coeff_Mul()
        if c.is_Rational:
            number = number * c.q // int(igcd(number, c.q))
        for factor in Mul.make_args(rest):
            base, exponent = factor.as_base_exp()
            if exponent.is_Rational and exponent.is_negative and base.is_positive and not base.is_Rational:
                lowest[base] = min(lowest.get(base, S.Zero), exponent)
    if not lowest and number == 1:
        return total
    common = Mul(number, *(Pow(b, -e) for b, e in lowest.items()))
    return Mul(Add(*(t * common for t in total.args)), 1 / common, evaluate=True)


def common_factor(total: Expr) -> Expr:
    """What all the terms of a sum have in common, taken in front."""
    if not total.is_Add:
        return total
    numbers = []
    shared: dict[Expr, Expr] | None = None
    for term in total.args:
        c, rest = term.as_coeff_Mul()
        if not c.is_Rational:
            return total
        numbers.append(c)
        found: dict[Expr, Expr] = {}
        for factor in Mul.make_args(rest):
            base, exponent = (factor.base, factor.exp) if factor.is_Pow else (factor, S.One)
            found[base] = found.get(base, S.Zero) + exponent
        if shared is None:
            shared = found
            continue
        lower: dict[Expr, Expr] = {}
        for base, exponent in shared.items():
            if base in found:
                gap = exponent - found[base]
                if gap.is_Rational:
                    lower[base] = exponent if gap <= 0 else found[base]
        shared = lower
    assert shared is not None
    shared = {b: e for b, e in shared.items() if e is not S.Zero}
    content = Rational(igcd(*(n.p for n in numbers)), _lcm([int(n.q) for n in numbers]))
    if all(n.is_negative for n in numbers):
        content = -content
    if not shared and content is S.One:
        return total
    front = Mul(*(Pow(b, e) for b, e in shared.items()))
    inner = Add(*(t / front / content for t in total.args))
    if not inner.is_Add:
        return content * front * inner
    return Mul(content, front, inner) if front is not S.One else Mul(content, inner, evaluate=False)


def _lcm(numbers: list[int]) -> int:
    result = 1
    for n in numbers:
        result = result * n // int(igcd(result, n))
    return result


__all__ = ["common_factor", "over_common_denominator", "tidy"]
