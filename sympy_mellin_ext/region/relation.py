"""Rows, form > 0 or form >= 0, as SymPy relations that read well."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import TYPE_CHECKING

from sympy import Abs, Expr, Ge, Gt, Integer, Le, Lt, re
from sympy.core.relational import Relational

from .form import (
    Form,
    Known,
    Monomial,
    Rational,
    add_to,
    constant,
    expression,
    monomial,
    monomial_expression,
    monomial_key,
    primitive,
    scaled,
)
from .signs import NEGATIVE, NOT_REAL, POSITIVE

if TYPE_CHECKING:
    from .facts import Facts


def row_key(row: Known) -> tuple[object, ...]:
    """A key that sorts rows the same way in every run, the simplest first."""
    form, strict = row
    keys = sorted(form, key=monomial_key)
    return (len(keys), [monomial_key(key) for key in keys], [-form[key] for key in keys], strict)


def relation_of(row: Known, facts: Facts) -> Relational:
    """The row as a SymPy relation."""
    form, strict = row
    left, right, larger = sides(form, facts)
    kind = (Gt if strict else Ge) if larger else (Lt if strict else Le)
    return kind(left, right, evaluate=False)


def sides(form: Form, facts: Facts) -> tuple[Expr, Expr, bool]:
    """Left side, right side, and whether form > 0 means left > right.

    The one quantity of unknown sign stands alone on the left; if there is none, positive and negative terms
    stand on different sides. Constants go to the right.
    """
    keys = sorted(form, key=monomial_key)
    symbolic = [key for key in keys if not constant(key)]
    alone = _alone(symbolic, facts)
    if alone is not None:
        value = form[alone]
        rest = scaled({key: v for key, v in form.items() if key != alone}, -1 / Fraction(value))
        return monomial_expression(alone), _sum(rest), value > 0
    plus = primitive({key: form[key] for key in symbolic})
    form = scaled(form, Fraction(plus[symbolic[0]]) / form[symbolic[0]]) if symbolic else form
    plus = {key: form[key] for key in symbolic if form[key] > 0}
    minus = {key: -form[key] for key in symbolic if form[key] < 0}
    numbers = {key: form[key] for key in keys if key not in symbolic}
    larger = bool(plus) and (not minus or _place(plus, symbolic[0]) < _place(minus, symbolic[0]))
    left, right = (plus, minus) if larger else (minus, plus)
    add_to(right, numbers, -1 if larger else 1)
    return _sum(left), _sum(right), larger


def _place(side: Form, first: Monomial) -> tuple[bool, bool, bool]:
    """Which side goes to the left, the smaller: one term, without a coefficient, the first one."""
    return (len(side) > 1, 1 not in side.values(), first not in side)


def _sum(form: Mapping[Monomial, Rational]) -> Expr:
    return expression(form) if form else Integer(0)


def _alone(symbolic: Sequence[Monomial], facts: Facts) -> Monomial | None:
    if len(symbolic) == 1:
        return symbolic[0]
    unknown = [
        key for key in symbolic if facts.monomial_mask(key) & (POSITIVE | NEGATIVE) == POSITIVE | NEGATIVE
    ]
    if len(unknown) == 1 and len(unknown[0]) == 1 and unknown[0][0][1] == 1:
        return unknown[0]
    return None


def merged(rows: list[Known], facts: Facts) -> list[Known]:
    """Pairs p + q > 0, p - q > 0 with one term q as p > Abs(q).

    Where p is a number and q a symbol, -1 < q < 1 reads better and the pair stays.
    """
    rows = list(rows)
    for i, (first, strict) in enumerate(rows):
        for j in range(i + 1, len(rows)):
            second, other_strict = rows[j]
            if strict != other_strict or first.keys() != second.keys():
                continue
            odd = [key for key, value in first.items() if second[key] == -value]
            if (
                len(odd) != 1
                or facts.monomial_mask(odd[0]) & NOT_REAL
                or any(second[key] != first[key] for key in first if key != odd[0])
            ):
                continue
            others = [key for key in first if key != odd[0]]
            if all(constant(key) for key in others) and any(_plain(atom) for atom, _ in odd[0]):
                continue
            positive: dict[Expr, Rational] = {}
            rest: dict[Expr, Rational] = {}
            for atom, exponent in odd[0]:
                (positive if facts.mask(atom) == POSITIVE else rest)[atom] = exponent
            atom = Abs(monomial_expression(monomial(rest)[1]), evaluate=False)
            form = {key: first[key] for key in others}
            form[monomial({**positive, atom: 1})[1]] = -abs(Fraction(first[odd[0]]))
            remaining = [row for k, row in enumerate(rows) if k not in (i, j)]
            return merged([*remaining, (primitive(form), strict)], facts)
    return rows


def _plain(atom: Expr) -> bool:
    """A symbol, or the real part of one."""
    return atom.is_Symbol or isinstance(atom, re)
