"""Inequalities between forms, brought to the simplest form that says the same."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from math import gcd, lcm
from typing import TYPE_CHECKING

from sympy import Abs, Expr, Integer, Max, Min, exp, integer_nthroot, log

from .form import ONE, Form, Monomial, Rational, add_to, constant, monomial, primitive, product, scaled, times
from .signs import NEGATIVE, NOT_REAL, POSITIVE, ZERO

if TYPE_CHECKING:
    from .facts import Facts


def split(form: Form, facts: Facts) -> list[Form]:
    """Forms that are all > 0 (or >= 0) iff the given one is: x - Abs(y) gives x - y and x + y.

    Max and Min likewise. An extremum that stands with the other sign would need Or; it stays.
    """
    for key, value in form.items():
        for atom, exponent in key:
            kind = type(atom)
            if exponent != 1 or kind not in (Abs, Max, Min):
                continue
            if not all(facts.real(part) for part in atom.args):
                continue
            rest = monomial({a: e for a, e in key if a != atom})[1]
            mask = facts.monomial_mask(rest)
            wrong = (
                (NEGATIVE if value > 0 else POSITIVE)
                if kind is Min
                else (POSITIVE if value > 0 else NEGATIVE)
            )
            if mask & (wrong | NOT_REAL):
                continue
            inside = [facts.form(part) for part in atom.args]
            if kind is Abs:
                inside.append(scaled(inside[0], -1))
            pieces: list[Form] = []
            for part in inside:
                piece = {k: v for k, v in form.items() if k != key}
                add_to(piece, product({rest: value}, part))
                pieces.extend(split(piece, facts))
            return pieces
    return [form]


def divided(form: Form, facts: Facts) -> Form:
    """A simpler form of the same sign: no common factors or denominators of known sign, powers undone."""
    for _ in range(4):
        simpler = _step(form, facts)
        if simpler is None:
            return form
        form = simpler
    return form


def _step(form: Form, facts: Facts) -> Form | None:
    if any(_opens(atom, exponent, key, form) for key in form for atom, exponent in key):
        return _multiplied_out(form, {}, 1, facts)
    common = _common_factors(form)
    factors: dict[Expr, Rational] = {}
    sign = 1
    for atom, exponent in common.items():
        mask = facts.mask(atom)
        if mask == POSITIVE or (mask == NEGATIVE and exponent.denominator == 1):
            factors[atom] = -exponent
            if mask == NEGATIVE and exponent.numerator % 2:
                sign = -sign
    if factors:
        return _multiplied_out(form, factors, sign, facts)
    if len(form) == 1:
        ((key, value),) = form.items()
        # x**3 has the sign of x; and so has 1/x.
        pairs = {a: 1 if e.denominator == 1 and e.numerator % 2 else e for a, e in key}
        if len(key) == 1 and type(key[0][0]) is log and pairs[key[0][0]] == 1:
            inside = key[0][0].args[0]
            return facts.form(inside - 1 if value > 0 else 1 - inside) if facts.positive(inside) else None
        simpler = monomial(pairs)[1]
        return {simpler: value} if simpler != key else None
    if len(form) == 2:
        return _two_terms(form, facts)
    return None


def _common_factors(form: Form) -> dict[Expr, Rational]:
    """The smallest exponent of each atom in the terms, where it is not 0."""
    exponents = [dict(key) for key in form]
    atoms: dict[Expr, None] = {}
    for powers in exponents:
        atoms.update(dict.fromkeys(powers))
    smallest = {atom: min(powers.get(atom, 0) for powers in exponents) for atom in atoms}
    return {atom: exponent for atom, exponent in smallest.items() if exponent}


def _opens(atom: Expr, exponent: Rational, key: Monomial, form: Form) -> bool:
    """Whether a sum in a term is multiplied out; a product of sums that is the only term stays."""
    return bool(atom.is_Add) and exponent in (1, 2) and (len(form) > 1 or len(key) == 1)


def _multiplied_out(form: Form, factors: Mapping[Expr, Rational], sign: int, facts: Facts) -> Form:
    """sign*form*product of powers; a sum that was a denominator is multiplied out."""
    total: Form = {}
    factor = monomial(factors)[1]
    for key, value in form.items():
        coefficient, together = times(key, factor)
        part: Form = {ONE: sign * value * coefficient}
        plain: dict[Expr, Rational] = {}
        for atom, exponent in together:
            if _opens(atom, exponent, together, form):
                for _ in range(int(exponent)):
                    part = product(part, facts.form(atom))
            else:
                plain[atom] = exponent
        add_to(total, product(part, {monomial(plain)[1]: 1}))
    return total


def _two_terms(form: Form, facts: Facts) -> Form | None:
    """c*M - d*N with positive terms as (c*M)**r - (d*N)**r, with small integer exponents.

    So sqrt(a) - sqrt(b), a**2 - b**2, log(a) - log(b) and exp(a) - exp(b) become a - b.
    """
    (first, plus), (second, minus) = form.items()
    if (plus > 0) == (minus > 0):
        return None
    if plus == -minus:
        arguments = _arguments_of_increasing(first, second, facts)
        if arguments is not None:
            return facts.form((arguments[0] - arguments[1]) * (1 if plus > 0 else -1))
    exponents = [pair[1] for key in (first, second) for pair in key if not constant((pair,))]
    numerator = gcd(*(e.numerator for e in exponents))
    denominator = lcm(*(e.denominator for e in exponents))
    if (
        not exponents
        or numerator == denominator
        or any(facts.mask(atom) != POSITIVE for key in (first, second) for atom, _ in key)
    ):
        return None
    weight = _root(abs(Fraction(plus) / Fraction(minus)), numerator)
    if weight is None:
        weight, numerator = abs(Fraction(plus) / Fraction(minus)), 1
        if denominator == 1:
            return None
    power = Fraction(denominator, numerator)
    sign = 1 if plus > 0 else -1
    left = monomial({atom: exponent * power for atom, exponent in first})
    right = monomial({atom: exponent * power for atom, exponent in second})
    result: Form = {}
    add_to(result, {left[1]: sign * left[0] * weight**denominator})
    add_to(result, {right[1]: -sign * right[0]})
    return result


def _arguments_of_increasing(first: Monomial, second: Monomial, facts: Facts) -> tuple[Expr, Expr] | None:
    """x, y where the two monomials are log(x) and log(y), or exp(x) and exp(y) (one of which may be 1)."""
    kind: type[Expr] | None = None
    arguments: list[Expr] = []
    for key in (first, second):
        if not key:
            arguments.append(Integer(0))
        elif (
            len(key) == 1
            and key[0][1] == 1
            and type(key[0][0]) in (exp, log)
            and kind in (None, type(key[0][0]))
        ):
            kind = type(key[0][0])
            arguments.append(key[0][0].args[0])
        else:
            return None
    if kind is exp:
        return (arguments[0], arguments[1]) if all(facts.real(argument) for argument in arguments) else None
    if ONE in (first, second) or not all(facts.positive(argument) for argument in arguments):
        return None
    return arguments[0], arguments[1]


def _root(value: Fraction, degree: int) -> Fraction | None:
    """The rational root of a positive number, if it has one."""
    if degree == 1:
        return value
    parts = []
    for integer in (value.numerator, value.denominator):
        root, exact = integer_nthroot(integer, degree)
        if not exact:
            return None
        parts.append(int(root))
    return Fraction(*parts)


def strict(form: Form, facts: Facts) -> tuple[Form, list[Expr]]:
    """The inequality form > 0, as a simpler form > 0 and the list of what must not vanish besides."""
    form = divided(form, facts)
    nonzero: list[Expr] = []
    factors: dict[Expr, Rational] = {}
    for atom, exponent in _common_factors(form).items():
        if exponent.denominator != 1 or facts.mask(atom) & NOT_REAL:
            continue
        even = exponent.numerator - exponent.numerator % 2
        if even:
            factors[atom] = -even
            if exponent.numerator % 2 == 0 and facts.mask(atom) & ZERO:
                nonzero.append(atom)
    if factors:
        form = divided(_multiplied_out(form, factors, 1, facts), facts)
    if len(form) == 1:
        ((key, value),) = form.items()
        pairs = {a: 1 if e.denominator > 1 and len(key) == 1 else e for a, e in key}
        form = {monomial(pairs)[1]: value}
    return primitive(form), nonzero
