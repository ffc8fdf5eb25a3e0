"""Sums of closed forms written shorter: logarithms joined, common factors taken out."""
from __future__ import annotations

from sympy import (
    Add,
    Dummy,
    Expr,
    Function,
    I,
    Mul,
    NumberSymbol,
    Poly,
    Pow,
    S,
    count_ops,
    factor,
    factor_terms,
    fraction,
    log,
    preorder_traversal,
    sqrt,
    together,
)
from sympy.core.numbers import ImaginaryUnit

# Larger sums are left as they are: the gain would not pay for the search.
_MOST_TERMS = 12
_MOST_FRACTIONS = 4


def shortest_sum(total: Expr) -> Expr:
    """The shortest of a few equal forms of a sum.

    Examples
    --------
    >>> from sympy import log, symbols
    >>> from sympy_mellin_ext.gamma.sums import shortest_sum
    >>> a, b = symbols('a b', positive=True)
    >>> shortest_sum(-log(b)/(a - b) - log(a)/(b - a))
    log(a/b)/(a - b)
    """
    if total.is_Mul:
        return _opened(total)
    if not total.is_Add or len(total.args) > _MOST_TERMS:
        return total
    total = Add(*(_same_signs(t) for t in total.args))
    candidates = [total]
    if total.is_number:
        candidates.extend(_in_one_radical(total))
    joined = _join_logarithms(total)
    if joined is not total:
        candidates.append(joined)
    if total.is_Add:
        symbols = sorted(total.free_symbols, key=str)
        if symbols and total.is_rational_function(*symbols):
            candidates.append(total.expand())
            if len(total.args) <= _MOST_FRACTIONS:
                candidates.append(_conjugates_joined(factor(total)))
        else:
            candidates.append(factor_terms(joined, sign=True))
    return _evaluated(_shortest(candidates))


def _shortest(candidates: list[Expr]) -> Expr:
    """The first of the shortest; where all are equal, nothing need be measured."""
    different = list(dict.fromkeys(candidates))
    return different[0] if len(different) == 1 else min(different, key=count_ops)


def _evaluated(expr: Expr) -> Expr:
    """As SymPy's constructors have it: a number in front of a sum would not survive pickling."""
    if not expr.args or not (expr.is_Add or expr.is_Mul or expr.is_Pow):
        return expr
    return expr.func(*(_evaluated(a) for a in expr.args))


def _opened(product: Expr) -> Expr:
    """``front*(a + b)`` multiplied out where that is shorter: ``(2*a + 1/(2*a))/(2*a) = 1 + 1/(4*a**2)``."""
    sums = [f for f in product.args if f.is_Add]
    if len(sums) != 1 or len(sums[0].args) > _MOST_TERMS:
        return product
    front = Mul(*(f for f in product.args if f is not sums[0]))
    inner = shortest_sum(sums[0])
    if inner is not sums[0]:
        product = front * inner
    return _evaluated(min(product, Add(*(front * t for t in Add.make_args(inner))), key=count_ops))


def _in_one_radical(number: Expr) -> list[Expr]:
    """A number that is rational in one square root as ``p + q*sqrt(n)``, none where it is not."""
    radicals = {a for a in number.atoms(Pow) if a.exp.is_Rational and a.exp.q == 2 and a.base.is_Integer}
    bases = {a.base for a in radicals}
    if len(bases) != 1 or (number.atoms(Function, NumberSymbol, ImaginaryUnit)):
        return []
    (n,) = bases
    root = Dummy("r")
    rational = number.xreplace({a: root * n ** (a.exp - S.Half) for a in radicals})
    if not rational.is_rational_function(root):
        return []
    top, bottom = (Poly(part, root).rem(Poly(root**2 - n, root)) for part in fraction(together(rational)))
    inverse = Poly(bottom.nth(0) - bottom.nth(1) * root, root)
    norm = bottom.nth(0) ** 2 - n * bottom.nth(1) ** 2
    reduced = (top * inverse).rem(Poly(root**2 - n, root))
    return [(reduced.nth(0) + reduced.nth(1) * sqrt(n)) / norm] if norm != 0 else []


def _conjugates_joined(product: Expr) -> Expr:
    """``(a + I*b)*(a - I*b) = a**2 + b**2`` in a product, a and b any expressions, where that is shorter."""
    if not product.has(I):
        return product
    factors = list(Mul.make_args(product))
    candidates = [product]
    for i, first in enumerate(factors):
        f, e = first.as_base_exp()
        if not f.is_Add or not e.is_Integer:
            continue
        rest = [h for h in factors if h is not first]
        turned = (I * f).expand()
        candidates += [Mul(*rest, I**-e, Pow(turned, e)), Mul(*rest, (-I) ** -e, Pow(-turned, e))]
        for second in factors[:i]:
            g, n = second.as_base_exp()
            if e != n or not g.is_Add:
                continue
            others = [h for h in rest if h is not second]
            for sign in (1, -1):  # the factors may differ by a sign from conjugates
                middle, half = ((f + sign * g) / 2).expand(), ((f - sign * g) / 2).expand()
                for joined in (middle**2 - half**2, middle**2 + (I * half).expand() ** 2):
                    candidates.append(Mul(S(sign) ** e, *others, Pow(joined, e)))
    best = min(candidates, key=_length)
    return product if best is product else _conjugates_joined(best)


def _length(expr: Expr) -> int:
    return sum(1 for _ in preorder_traversal(expr))


def _same_signs(term: Expr) -> Expr:
    """Sums inside a product with their leading sign out: ``1/(b - a) -> -1/(a - b)``."""
    factors, flip = [], False
    for f in Mul.make_args(term):
        base, exponent = f.as_base_exp()
        if base.is_Add and exponent.is_Integer and base.could_extract_minus_sign():
            flip = flip != bool(exponent % 2)
            f = Pow(-base, exponent)
        factors.append(f)
    return Mul(S.NegativeOne, *factors) if flip else Mul(*factors)


def _join_logarithms(total: Expr) -> Expr:
    """``c*log(p) - c*log(q) = c*log(p/q)`` for positive p and q."""
    weights: dict[Expr, list[Expr]] = {}
    rest: list[Expr] = []
    for term in total.args:
        logs = [f for f in Mul.make_args(term) if isinstance(f, log) and f.args[0].is_positive]
        if len(logs) != 1:
            rest.append(term)
            continue
        weight = Mul(*(f for f in Mul.make_args(term) if f is not logs[0]))
        weights.setdefault(weight, []).append(logs[0].args[0])
    if len(weights) + len(rest) == len(total.args) and not any(-w in weights for w in weights):
        halves = _halved(weights)
        return Add(*rest, *halves) if halves is not None else total
    joined: list[Expr] = []
    done: set[Expr] = set()
    for weight, arguments in weights.items():
        if weight in done:
            continue
        below = weights.get(-weight, [])
        done.update((weight, -weight))
        if weight.could_extract_minus_sign() and below:
            weight, arguments, below = -weight, below, arguments
        joined.append(weight * log(Mul(*arguments, *(1 / p for p in below))))
    return Add(*rest, *joined)


def _halved(weights: dict[Expr, list[Expr]]) -> list[Expr] | None:
    """``c*log(p)/2 - c*log(q) = c/2*log(p/q**2)``, for two weights with ratio -2 or -1/2."""
    if len(weights) != 2:
        return None
    (v, (p, *more)), (w, (q, *others)) = weights.items()
    if more or others:
        return None
    if v == -2 * w:
        (v, p), (w, q) = (w, q), (v, p)
    if w != -2 * v:
        return None
    return [v * log((p / q**2).expand())]


__all__ = ["shortest_sum"]
