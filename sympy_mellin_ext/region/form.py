"""Linear forms with monomials for coordinates: ``{monomial: rational coefficient}``.

A monomial is a tuple of pairs (atom, exponent), sorted; the empty tuple is the number 1. An atom is a symbol,
``re(s)``, a function, an irrational number: whatever is not taken apart. Exponents are rational. Dictionaries
of Python numbers are an order of magnitude faster than expressions that are built only to be compared.
"""

from collections.abc import Callable, Mapping
from fractions import Fraction
from functools import lru_cache

from sympy import Add, Expr, Float, Integer, Mul, Pow
from sympy import Rational as SymPyRational

from .linear import Rational, integral

Monomial = tuple[tuple[Expr, Rational], ...]
Form = dict[Monomial, Rational]
Known = tuple[Form, bool]  # form > 0 if the flag is true, else form >= 0
Rewrite = Callable[[Expr], Expr | None]

ONE: Monomial = ()
_MOST_TERMS = 120
_LARGEST_POWER = 4


def ratio(p: int, q: int) -> Rational:
    """p/q, as an int where it is one: ints are several times faster than fractions."""
    value = Fraction(p, q)
    return value.numerator if value.denominator == 1 else value


def to_sympy(value: Rational) -> SymPyRational:
    """The SymPy number."""
    return Integer(value) if type(value) is int else SymPyRational(value.numerator, value.denominator)


@lru_cache(maxsize=512)
def atom_key(atom: Expr) -> tuple[int, str, int]:
    """A key that sorts atoms the same way in every run: symbols and their real parts by name first."""
    if atom.is_Symbol:
        return (0, atom.name, getattr(atom, "dummy_index", 0))
    if len(atom.args) == 1 and atom.args[0].is_Symbol:
        return (1, atom.args[0].name, getattr(atom.args[0], "dummy_index", 0))
    return (2, str(atom), 0)


def monomial_key(monomial: Monomial) -> tuple[object, ...]:
    """A key that sorts monomials the same way in every run, the number 1 last."""
    return (not monomial, len(monomial), [(atom_key(atom), exponent) for atom, exponent in monomial])


def constant(key: Monomial) -> bool:
    """Whether the monomial is a number."""
    return all(not atom.is_Symbol and atom.is_number for atom, _ in key)


def monomial(factors: Mapping[Expr, Rational]) -> tuple[Rational, Monomial]:
    """A product of powers as (coefficient, monomial); integer powers of numbers go into the coefficient."""
    coefficient: Rational = 1
    pairs: list[tuple[Expr, Rational]] = []
    for atom, exponent in factors.items():
        if atom.is_Rational:
            whole = exponent.numerator // exponent.denominator
            coefficient *= Fraction(atom.p, atom.q) ** whole
            exponent -= whole
        if exponent:
            pairs.append((atom, _plain(exponent)))
    if len(pairs) > 1:
        pairs.sort(key=lambda pair: atom_key(pair[0]))
    return _plain(coefficient), tuple(pairs)


def _plain(value: Rational) -> Rational:
    return value.numerator if value.denominator == 1 else value


def add_to(total: Form, form: Mapping[Monomial, Rational], factor: Rational = 1) -> None:
    """total += factor*form, in place, without zero coefficients."""
    for key, value in form.items():
        new = total.get(key, 0) + factor * value
        if new:
            total[key] = _plain(new)
        else:
            total.pop(key, None)


def scaled(form: Mapping[Monomial, Rational], factor: Rational) -> Form:
    """factor*form for a number factor != 0."""
    return {key: _plain(factor * value) for key, value in form.items()}


def times(left: Monomial, right: Monomial) -> tuple[Rational, Monomial]:
    """The product of two monomials, as (coefficient, monomial)."""
    if not left or not right:
        return 1, left or right
    factors = dict(left)
    for atom, exponent in right:
        factors[atom] = factors.get(atom, 0) + exponent
    return monomial(factors)


def primitive(form: Mapping[Monomial, Rational]) -> Form:
    """The positive multiple with coprime integer coefficients."""
    return {**integral(form)}


def product(left: Mapping[Monomial, Rational], right: Mapping[Monomial, Rational]) -> Form:
    """The product of two forms."""
    total: Form = {}
    for key, value in left.items():
        for other, factor in right.items():
            coefficient, together = times(key, other)
            add_to(total, {together: coefficient * value * factor})
    return total


def form_of(expr: Expr, rewrite: Rewrite) -> Form:
    """The expression as a form, products and small powers of sums multiplied out.

    ``rewrite`` may give another expression for an atom (``re(s)`` where s is known to be real), or None.
    """
    if expr.is_Rational:
        value = ratio(expr.p, expr.q)
        return {ONE: value} if value else {}
    if expr.is_Symbol:
        return {((expr, 1),): 1}
    if expr.is_Add:
        total: Form = {}
        for term in expr.args:
            add_to(total, form_of(term, rewrite))
        return total
    if expr.is_Mul:
        result: Form = {ONE: 1}
        for factor in expr.args:
            part = form_of(factor, rewrite)
            if len(result) * len(part) > _MOST_TERMS:
                return {((expr, 1),): 1}
            result = product(result, part)
        return result
    if expr.is_Pow and expr.exp.is_Rational:
        return _power(expr, rewrite)
    if isinstance(expr, Float):
        value = Fraction(str(expr))
        return {ONE: _plain(value)} if value else {}
    other = rewrite(expr)
    return {((expr, 1),): 1} if other is None else form_of(other, rewrite)


def _power(expr: Pow, rewrite: Rewrite) -> Form:
    base = form_of(expr.base, rewrite)
    exponent = ratio(expr.exp.p, expr.exp.q)
    if len(base) == 1:
        ((key, value),) = base.items()
        if isinstance(exponent, int):
            coefficient, power = monomial({atom: e * exponent for atom, e in key})
            return {power: _plain(coefficient * Fraction(value) ** exponent)}
        if value == 1 and len(key) == 1 and key[0][1] == 1:
            return {((key[0][0], exponent),): 1}
        if not key and value > 0:
            coefficient, power = monomial({to_sympy(value): exponent})
            return {power: coefficient}
    elif isinstance(exponent, int) and 0 < exponent <= _LARGEST_POWER:
        result = base
        for _ in range(exponent - 1):
            if len(result) * len(base) > _MOST_TERMS:
                return {((expr.base, exponent),): 1}
            result = product(result, base)
        return result
    return {((expr.base, exponent),): 1}


def monomial_expression(key: Monomial, value: Rational = 1) -> Expr:
    """value*monomial as an expression."""
    powers = [atom if exponent == 1 else Pow(atom, to_sympy(exponent)) for atom, exponent in key]
    if value == 1 and len(powers) == 1:
        return powers[0]
    return Mul(to_sympy(value), *powers)


def expression(form: Mapping[Monomial, Rational]) -> Expr:
    """The form as an expression."""
    terms = [monomial_expression(key, value) for key, value in form.items()]
    return terms[0] if len(terms) == 1 else Add(*terms)
