"""What is known about one quantity by its nature: signs of functions, bounds of constants and functions."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache
from typing import TYPE_CHECKING

from sympy import (
    Abs,
    Expr,
    Max,
    Min,
    arg,
    asinh,
    atan,
    besseli,
    besselk,
    cos,
    cosh,
    erf,
    erfc,
    erfi,
    exp,
    factorial,
    gamma,
    im,
    log,
    re,
    sech,
    sin,
    sinh,
    tanh,
    zeta,
)

from . import signs
from .form import ONE, Form, Known, Monomial, add_to, expression, scaled
from .signs import ANY, NEGATIVE, NON_NEGATIVE, NOT_REAL, POSITIVE, REAL, ZERO

if TYPE_CHECKING:
    from .facts import Facts

_DIGITS = 30
_RELATIVE = Fraction(1, 10**25)

_Rule = Callable[[Sequence[Expr], Sequence[int], "Facts"], int | None]


def _extremum(masks: Sequence[int], order: Sequence[int]) -> int:
    mask = 0
    for case in order:
        mask |= case if any(m & case for m in masks) else 0
        if any(not m & ~mask for m in masks):
            # One argument is sure to reach what has been found, so that the extremum goes no further.
            break
    return mask


def _positive(arguments: Sequence[Expr], masks: Sequence[int], facts: Facts) -> int:
    return POSITIVE


def _odd(arguments: Sequence[Expr], masks: Sequence[int], facts: Facts) -> int:
    return masks[0]


def _real(arguments: Sequence[Expr], masks: Sequence[int], facts: Facts) -> int:
    return REAL


def _positive_right_of_zero(arguments: Sequence[Expr], masks: Sequence[int], facts: Facts) -> int | None:
    return POSITIVE if masks[0] == POSITIVE else None


# For real arguments; None: ask SymPy. Elementary, but for gamma (DLMF 5.2.1), the error functions
# (DLMF 7.2.1, 7.2.2), modified Bessel functions of real order (DLMF 10.25.2, 10.32.9), zeta (DLMF 25.2.1).
_RULES: dict[type[Expr], _Rule] = {
    **dict.fromkeys((exp, cosh, sech, erfc), _positive),
    **dict.fromkeys((sinh, tanh, asinh, atan, erf, erfi), _odd),
    **dict.fromkeys((sin, cos), _real),
    **dict.fromkeys((gamma, factorial), _positive_right_of_zero),
    log: lambda arguments, masks, facts: facts.mask(arguments[0] - 1) if masks[0] == POSITIVE else None,
    Max: lambda arguments, masks, facts: _extremum(masks, (POSITIVE, ZERO, NEGATIVE)),
    Min: lambda arguments, masks, facts: _extremum(masks, (NEGATIVE, ZERO, POSITIVE)),
    besselk: lambda arguments, masks, facts: POSITIVE if masks[1] == POSITIVE else None,
    besseli: lambda arguments, masks, facts: (
        POSITIVE if masks[1] == POSITIVE and not masks[0] & NEGATIVE else None
    ),
    zeta: lambda arguments, masks, facts: (
        POSITIVE if len(masks) == 1 and facts.mask(arguments[0] - 1) == POSITIVE else None
    ),
}


def mask_of_function(expr: Expr, facts: Facts) -> int:
    """Which signs can have the value of a function."""
    kind = type(expr)
    if kind in (re, im, arg):
        return REAL
    if kind is Abs:
        return POSITIVE if facts.nonzero(expr.args[0]) else NON_NEGATIVE
    rule = _RULES.get(kind)
    if rule is not None:
        masks = [facts.mask(argument) for argument in expr.args]
        if not any(mask & NOT_REAL for mask in masks):
            mask = rule(expr.args, masks, facts)
            if mask is not None:
                return mask
    return signs.of_assumptions(expr)


def mask_of_power(base: Expr, exponent: Expr, facts: Facts) -> int:
    """Which signs can have base**exponent."""
    mask = facts.mask(base)
    if exponent.is_Rational:
        return signs.power(mask, Fraction(exponent.p, exponent.q))
    if not facts.real(exponent):
        return ANY if mask & ZERO else ANY - ZERO
    if mask in (POSITIVE, NON_NEGATIVE):
        return mask
    if not mask & NOT_REAL and exponent.is_integer:
        return (POSITIVE if exponent.is_even else POSITIVE | NEGATIVE) | (mask & ZERO)
    return ANY


@lru_cache(maxsize=256)
def mask_of_number(expr: Expr) -> int:
    """The sign of a constant, by its numerical value where that is far enough from zero."""
    real, imaginary = expr.evalf(_DIGITS).as_real_imag()
    if not all(part.is_Float or part.is_Rational for part in (real, imaginary)):
        return signs.of_assumptions(expr)
    if abs(imaginary) > 1e-20:
        return NOT_REAL
    if imaginary != 0 and expr.is_extended_real is not True:
        return ANY
    return POSITIVE if real > 1e-20 else NEGATIVE if real < -1e-20 else signs.of_assumptions(expr)


@lru_cache(maxsize=256)
def enclosure(key: Monomial) -> list[Known]:
    """Rational bounds of a constant such as pi."""
    value = expression({key: 1}).evalf(_DIGITS)
    if not value.is_Float:
        return []
    centre = Fraction(str(value))
    radius = abs(centre) * _RELATIVE
    return [({key: 1, ONE: radius - centre}, True), ({key: -1, ONE: centre + radius}, True)]


def bounds(atom: Expr, facts: Facts) -> list[Known]:
    """Inequalities that hold for an atom by its nature, besides its sign."""
    one: Monomial = ((atom, 1),)
    if atom.is_Symbol:
        if not is_integer(atom):
            return []
        sign = {POSITIVE: 1, NEGATIVE: -1}.get(facts.mask(atom))
        return [({one: sign, ONE: -1}, False)] if sign else []
    kind = type(atom)
    if kind in (Max, Min, Abs) and all(facts.real(part) for part in atom.args):
        parts = [facts.form(part) for part in atom.args]
        if kind is Abs:
            parts.append(scaled(parts[0], -1))
        rows: list[Known] = []
        for part in parts:
            row: Form = {one: 1}
            add_to(row, part, -1)
            rows.append((scaled(row, -1) if kind is Min else row, False))
        return rows
    if kind in (cos, sin, tanh) and facts.real(atom.args[0]):
        return [({one: 1, ONE: 1}, kind is tanh), ({one: -1, ONE: 1}, kind is tanh)]
    if kind is cosh and facts.real(atom.args[0]):
        return [({one: 1, ONE: -1}, False)]
    if kind is exp:
        sign = facts.sign(atom.args[0])
        return [({one: sign, ONE: -sign}, True)] if sign else []
    return []


def is_integer(atom: Expr) -> bool:
    """Whether it is a symbol for an integer."""
    return bool(atom.is_Symbol and atom.assumptions0.get("integer"))


def tightened(atom: Expr, form: Form, strict: bool) -> Known:
    """The row slope*atom + constant > 0, sharpened for an integer: n > 3/2 is n >= 2."""
    one: Monomial = ((atom, 1),)
    slope = form[one]
    if not is_integer(atom):
        return form, strict
    bound = Fraction(form.get(ONE, 0)) / (slope if slope > 0 else -slope)
    whole = bound.numerator // bound.denominator
    if strict and whole == bound:
        whole -= 1
    step = 1 if slope > 0 else -1
    return ({one: step, ONE: whole} if whole else {one: step}), False
