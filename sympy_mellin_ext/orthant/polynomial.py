"""Sums of monomials in several positive variables, with any exponents."""
from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import NamedTuple

from sympy import Abs, Add, Expr, Mul, Pow, S, Symbol, sqrt

Exponents = tuple[Expr, ...]


class Monomial(NamedTuple):
    """``coefficient * prod x_i**exponents[i]``."""

    coefficient: Expr
    exponents: Exponents

    def times(self, other: Monomial) -> Monomial:
        return Monomial(
            self.coefficient * other.coefficient,
            tuple(a + b for a, b in zip(self.exponents, other.exponents, strict=True)),
        )

    def power(self, e: Expr) -> Monomial:
        return Monomial(Pow(self.coefficient, e), tuple((a * e).expand() for a in self.exponents))

    @property
    def constant(self) -> bool:
        return not any(self.exponents)


Polynomial = tuple[Monomial, ...]  # equal exponents merged, sorted by them, no zero coefficients
_MOST_MONOMIALS = 60


def collected(monomials: Iterable[Monomial]) -> Polynomial:
    """Merge equal exponents and sort."""
    merged: dict[Exponents, list[Expr]] = {}
    for c, e in monomials:
        merged.setdefault(e, []).append(c)
    found = []
    for e, cs in merged.items():
        total = cs[0] if len(cs) == 1 else Add(*cs)
        if total.is_Add and len(cs) > 1:
            total = total.expand()
        if total is not S.Zero:
            found.append(Monomial(total, e))
    return tuple(sorted(found, key=order))


def order(m: Monomial) -> tuple[tuple[bool, object], ...]:
    return tuple((not a.is_Rational, (a, "") if a.is_Rational else (0, str(a))) for a in m.exponents)


def product(left: Polynomial, right: Polynomial) -> Polynomial:
    return collected(a.times(b) for a in left for b in right)


def read_monomial(expr: Expr, variables: Sequence[Symbol]) -> Monomial | None:
    """``c*prod x_i**e_i`` with c and e_i free of the variables, which are positive; None for anything else."""
    n = len(variables)
    if not expr.has_free(*variables):
        return Monomial(expr, (S.Zero,) * n)
    if expr.is_Symbol:
        return Monomial(S.One, tuple(S.One if x == expr else S.Zero for x in variables))
    if expr.is_Mul:
        result = Monomial(S.One, (S.Zero,) * n)
        for a in expr.args:
            part = read_monomial(a, variables)
            if part is None:
                return None
            result = result.times(part)
        return result
    if expr.is_Pow:
        base, e = expr.args
        if e.has_free(*variables):
            return None
        part = read_monomial(base, variables)
        return None if part is None else part.power(e)
    if type(expr) is Abs:
        part = read_monomial(expr.args[0], variables)
        return None if part is None else Monomial(Abs(part.coefficient), part.exponents)
    return None


def read_polynomial(expr: Expr, variables: Sequence[Symbol]) -> Polynomial | None:
    """A sum of monomials; products and whole powers of sums are multiplied out."""
    if expr.is_Add:
        parts = [read_polynomial(a, variables) for a in expr.args]
        if any(p is None for p in parts):
            return None
        return collected(m for p in parts for m in p)  # type: ignore[union-attr]
    single = read_monomial(expr, variables)
    if single is not None:
        return collected([single])
    if expr.is_Mul:
        result: Polynomial | None = None
        for a in expr.args:
            part = read_polynomial(a, variables)
            if part is None:
                return None
            if result is not None and len(result) * len(part) > _MOST_MONOMIALS:
                return None
            result = part if result is None else product(result, part)
        return result
    if expr.is_Pow and expr.exp.is_Integer and 1 < expr.exp <= 8:
        part = read_polynomial(expr.base, variables)
        return None if part is None else whole_power(part, int(expr.exp))
    return None


def whole_power(poly: Polynomial, n: int) -> Polynomial | None:
    """``poly**n`` multiplied out, n >= 1; None where that would be long."""
    result = poly
    for _ in range(n - 1):
        if len(result) * len(poly) > _MOST_MONOMIALS:
            return None
        result = product(result, poly)
    return result


def as_expr(poly: Polynomial, variables: Sequence[Symbol]) -> Expr:
    return Add(*(Mul(c, *(x**e for x, e in zip(variables, es, strict=True))) for c, es in poly))


def normalised(poly: Polynomial) -> tuple[Monomial, Polynomial]:
    """``(m, p)`` with poly = m*p where p begins with the monomial 1."""
    first = poly[0]
    inverse = first.power(S.NegativeOne)
    return first, tuple(Monomial(c / first.coefficient, m.times(inverse).exponents) for m in poly for c in m[:1])


def root(poly: Polynomial, k: int) -> Polynomial | None:
    """The polynomial with positive leading term whose k-th power is ``poly`` (long division), or None."""
    if len(poly) < 3 or not all(a.is_Rational for _, e in poly for a in e):
        return None
    lead = poly[-1]
    if not lead.coefficient.is_positive:
        return None
    first = lead.power(S.One / k) if k != 2 else Monomial(sqrt(lead.coefficient), lead.power(S.Half).exponents)
    found: Polynomial = (first,)
    divisor = Monomial(k * first.coefficient ** (k - 1), first.power(S(k - 1)).exponents).power(S.NegativeOne)
    for _ in range(len(poly)):
        power = whole_power(found, k)
        if power is None:
            return None
        rest = collected((*poly, *(Monomial(-c, e) for c, e in power)))
        if not rest:
            return found
        if len(rest) >= len(poly) + len(found):
            return None
        found = collected((*found, rest[-1].times(divisor)))
    return None


def base_and_power(poly: Polynomial) -> tuple[Polynomial, int]:
    """``(p, k)`` with poly = p**k, the largest k that is found among 4, 3, 2, 1."""
    for k in (4, 3, 2):
        if len(poly) > k:
            found = root(poly, k)
            if found is not None:
                return found, k
    return poly, 1
