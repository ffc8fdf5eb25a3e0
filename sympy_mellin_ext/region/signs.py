"""Arithmetic of what is known about the sign of an expression: which of the four cases below are possible."""

from collections.abc import Callable

from sympy import Expr

from .linear import Rational

NEGATIVE, ZERO, POSITIVE, NOT_REAL = 1, 2, 4, 8
REAL = NEGATIVE | ZERO | POSITIVE
ANY = REAL | NOT_REAL
NON_NEGATIVE = ZERO | POSITIVE
NON_POSITIVE = ZERO | NEGATIVE

_CASES = (NEGATIVE, ZERO, POSITIVE, NOT_REAL)
_SUMS = {
    (NEGATIVE, NEGATIVE): NEGATIVE,
    (POSITIVE, POSITIVE): POSITIVE,
    (NEGATIVE, POSITIVE): REAL,
    (NOT_REAL, NOT_REAL): ANY,
}
_PRODUCTS = {
    (NEGATIVE, NEGATIVE): POSITIVE,
    (POSITIVE, POSITIVE): POSITIVE,
    (NEGATIVE, POSITIVE): NEGATIVE,
    (NOT_REAL, NOT_REAL): NEGATIVE | POSITIVE | NOT_REAL,
}


def _sum_of_cases(x: int, y: int) -> int:
    if x == ZERO or y == ZERO:
        return x if y == ZERO else y
    return _SUMS.get((x, y) if x <= y else (y, x), NOT_REAL)


def _product_of_cases(x: int, y: int) -> int:
    if x == ZERO or y == ZERO:
        return ZERO
    return _PRODUCTS.get((x, y) if x <= y else (y, x), NOT_REAL)


def _table(rule: Callable[[int, int], int]) -> list[list[int]]:
    table = [[0] * 16 for _ in range(16)]
    for left in range(16):
        for right in range(16):
            for x in _CASES:
                for y in _CASES:
                    if x & left and y & right:
                        table[left][right] |= rule(x, y)
    return table


SUM = _table(_sum_of_cases)
PRODUCT = _table(_product_of_cases)


def negated(mask: int) -> int:
    """The mask of -x."""
    return PRODUCT[NEGATIVE][mask]


def power(base: int, exponent: Rational) -> int:
    """The mask of x**exponent for a rational exponent (not SymPy's) and real or unknown x."""
    numerator, denominator = exponent.numerator, exponent.denominator
    result = 0
    if base & POSITIVE:
        result |= POSITIVE
    if base & ZERO and numerator > 0:
        result |= ZERO
    if base & NEGATIVE:
        result |= NOT_REAL if denominator > 1 else POSITIVE if numerator % 2 == 0 else NEGATIVE
    if base & NOT_REAL:
        result |= ANY - ZERO
    return result


def of_symbol(symbol: Expr) -> int:
    """What the assumptions of a symbol say; all their consequences were drawn when it was made."""
    known = symbol.assumptions0
    mask = ANY
    for name, case in (
        ("extended_negative", NEGATIVE),
        ("zero", ZERO),
        ("extended_positive", POSITIVE),
    ):
        value = known.get(name)
        if value:
            return case
        if value is False:
            mask &= ~case
    real = known.get("extended_real")
    if real:
        mask &= REAL
    elif real is False:
        mask &= NOT_REAL
    return mask


def of_assumptions(expr: Expr) -> int:
    """What SymPy's own assumptions say about any other expression."""
    real = expr.is_extended_real
    if real is False:
        return NOT_REAL
    if not real:
        return ANY if expr.is_zero is not False else ANY - ZERO
    if expr.is_extended_positive:
        return POSITIVE
    if expr.is_extended_negative:
        return NEGATIVE
    if expr.is_extended_nonnegative:
        return NON_NEGATIVE
    if expr.is_extended_nonpositive:
        return NON_POSITIVE
    return REAL if expr.is_zero is not False else REAL - ZERO
