"""Shorter ways to write a value once its front factor has joined it: exact rewritings only, no search."""
from __future__ import annotations

from sympy import Add, Expr, Gt, Integer, Lt, Mul, Piecewise, Pow, Rational, S, gamma, igcd, log
from sympy.logic.boolalg import Boolean

from ..gamma.shortest import shortest_quotient
from .tidy_functions import half_integer_bessel, joined_logarithms, joined_roots, over_common_denominator


def tidy(expr: Expr) -> Expr:
    """Powers of one base joined, Gammas shortened, denominators under powers taken out, logarithms added.

    Examples
    --------
    >>> from sympy import sqrt, symbols
    >>> from sympy_mellin_ext.strategies.tidy import tidy
    >>> a, b = symbols('a b', positive=True)
    >>> tidy(1/(a*sqrt(1 + b**2/a**2)))
    1/sqrt(a**2 + b**2)
    """
    if not expr.args or not expr.has(Pow, gamma):
        return expr
    if isinstance(expr, Piecewise):
        return _piecewise(S.One, expr)
    if expr.is_Add:
        return _sum([tidy(a) for a in expr.args])
    return _product(expr)


def _sum(terms: list[Expr]) -> Expr:
    flat: list[Expr] = []
    for term in terms:
        number, rest = term.as_coeff_Mul()
        flat.extend(number * a for a in rest.args) if rest.is_Add else flat.append(term)
    total = Add(*flat)
    if total.is_Add and total.has(log):
        total = joined_logarithms(total)
    if total.is_Add:
        total = joined_roots(total)
    return common_factor(total)


def _piecewise(front: Expr, pieces: Piecewise) -> Expr:
    branches = [(tidy(front * e), _side_of_one(c)) for e, c in pieces.args]
    if len(branches) == 2 and branches[0][0] == branches[1][0]:
        return branches[0][0]
    return Piecewise(*branches)


def _inside(expr: Expr) -> Expr:
    """The argument of a function or the base of a power: quotients of sums only."""
    if expr.is_Atom or not expr.has(Pow):
        return expr
    args = [_inside(a) if isinstance(a, Expr) else a for a in expr.args]
    return _power(*args) if expr.is_Pow else expr.func(*args)


def _product(expr: Expr) -> Expr:
    args = half_integer_bessel(list(Mul.make_args(expr)))
    sums = [a for a in args if a.is_Add]
    if len(sums) == 1:
        front = Mul(*(a for a in args if a is not sums[0]))
        return _sum([_product(Mul(front, t)) for t in sums[0].args])
    branches = [a for a in args if isinstance(a, Piecewise)]
    if len(branches) == 1:
        front = Mul(*(a for a in args if a is not branches[0]))
        return _piecewise(front, branches[0])
    flat: list[Expr] = []
    for a in args:
        if a.is_Pow:
            flat.extend(Mul.make_args(_power(_inside(a.base), a.exp)))
        else:
            flat.append(a if isinstance(a, gamma) or a.is_Atom else _inside(a))
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
    for base, exponents in list(powers.items()):
        # gamma(b + 1)/b
        if exponents == [S.NegativeOne] and base + 1 in up:
            up[up.index(base + 1)] = base
            del powers[base]
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


def _side_of_one(condition: Boolean) -> Boolean:
    """``a**2/b**2 < 1`` as ``a < b`` for positive a and b."""
    if not isinstance(condition, (Lt, Gt)) or condition.rhs is not S.One or not condition.lhs.is_positive:
        return condition
    powers = [factor.as_base_exp() for factor in Mul.make_args(condition.lhs)]
    if not all(e.is_Rational and b.is_positive for b, e in powers):
        return condition
    unit = abs(powers[0][1])
    for base, e in powers:
        if not base.is_Rational:
            unit = abs(e)
    above = Mul(*(Pow(b, e / unit) for b, e in powers if e > 0))
    below = Mul(*(Pow(b, -e / unit) for b, e in powers if e < 0))
    return condition.func(above, below)


def common_factor(total: Expr) -> Expr:
    """What all the terms of a sum have in common, taken in front."""
    if not total.is_Add:
        return total
    numbers = []
    terms: list[dict[Expr, Expr]] = []
    for term in total.args:
        c, rest = term.as_coeff_Mul()
        if not c.is_Rational:
            return total
        numbers.append(c)
        found: dict[Expr, Expr] = {}
        for factor in Mul.make_args(rest):
            base, exponent = (factor.base, factor.exp) if factor.is_Pow else (factor, S.One)
            found[base] = found.get(base, S.Zero) + exponent
        terms.append(found)
    shared: dict[Expr, Expr] = {}
    for base, exponent in terms[0].items():
        lowest = exponent
        for other in terms[1:]:
            gap = lowest - other.get(base, S.Zero)
            if not gap.is_Number and gap.is_Add:
                gap = gap.expand()
            if base not in other or not gap.is_Rational:
                break
            lowest = other[base] if gap > 0 else lowest
        else:
            shared[base] = lowest
    content = Rational(igcd(*(n.p for n in numbers)), igcd(*(n.q for n in numbers)))
    if all(n.is_negative for n in numbers):
        content = -content
    if not shared and content is S.One:
        return total
    inner = []
    for number, found in zip(numbers, terms, strict=True):
        for base, lowest in shared.items():
            found[base] = (found[base] - lowest).expand()
        inner.append(Mul(number / content, *(Pow(b, e) for b, e in found.items())))
    front = Mul(*(Pow(b, e) for b, e in shared.items()))
    rest = Add(*inner)
    if front is S.One and rest.is_Add and content is not S.One:
        return total  # SymPy multiplies a number into a sum: the result would not survive pickling
    return Mul(content, front, rest)


__all__ = ["common_factor", "tidy"]
