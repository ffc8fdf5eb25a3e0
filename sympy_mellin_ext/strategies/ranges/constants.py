"""Polygamma functions at rational numbers, in the constants that have names.

Sources: DLMF 5.4.19 (Gauss' digamma theorem), 5.15.6 (reflection), 5.15.5 (recurrence), 25.11.40-type (Catalan).
"""

from __future__ import annotations

from sympy import (
    Add,
    Catalan,
    Dummy,
    EulerGamma,
    Expr,
    Integer,
    Rational,
    S,
    cot,
    factorial,
    hyper,
    log,
    pi,
    polygamma,
    sqrt,
)

_T = Rational(3, 2)
_GAUSS = {
    Rational(1, 3): -EulerGamma - 3 * log(3) / 2 - sqrt(3) * pi / 6,
    Rational(2, 3): -EulerGamma - 3 * log(3) / 2 + sqrt(3) * pi / 6,
    Rational(1, 4): -EulerGamma - 3 * log(2) - pi / 2,
    Rational(3, 4): -EulerGamma - 3 * log(2) + pi / 2,
    Rational(1, 6): -EulerGamma - 2 * log(2) - 3 * log(3) / 2 - sqrt(3) * pi / 2,
    Rational(5, 6): -EulerGamma - 2 * log(2) - 3 * log(3) / 2 + sqrt(3) * pi / 2,
}
# sum (-1)**n/(2n+1)**2 is Catalan's constant, DLMF 25.11.40; the second is int_0^1 K(k) dk/pi*2,
# Gradshteyn-Ryzhik 6.141.1 (from memory)
_SERIES = {
    hyper([S.Half, S.Half, 1], [_T, _T], -1): Catalan,
    hyper([S.Half, S.Half, S.Half], [1, _T], 1): 4 * Catalan / pi,
}


def tidy(value: Expr) -> Expr:
    """``value`` with polygamma functions at rational numbers brought to the smallest ones, or to constants."""
    table = {
        node: _named(int(node.args[0]), node.args[1])
        for node in value.atoms(polygamma)
        if node.args[0].is_Integer and node.args[1].is_Rational
    }
    table.update({node: _SERIES[node] for node in value.atoms(hyper) if node in _SERIES})
    if not table:
        return value.expand() if value.is_number and value.is_Add else value
    value = value.xreplace(table)
    return value.expand() if value.is_number else value


def _named(m: int, z: Rational) -> Expr:
    whole = int(z.p // z.q)
    rest = z - whole
    if rest == 0 or whole < 0:
        return polygamma(m, z)
    if whole:
        # polygamma(m, z + 1) = polygamma(m, z) + (-1)**m*m!/z**(m+1)
        top = Integer(-1) ** m * factorial(m)
        return _named(m, rest) + Add(*(top / (rest + i) ** (m + 1) for i in range(whole)))
    if m == 0:
        return _GAUSS.get(rest, polygamma(0, rest))
    if m == 1 and rest.q == 4:
        return pi**2 + (8 if rest.p == 1 else -8) * Catalan
    if rest > S.Half:
        y = Dummy()
        turn = (pi * cot(pi * y)).diff(y, m).subs(y, 1 - rest)
        return Integer(-1) ** m * (polygamma(m, 1 - rest) + turn)
    return polygamma(m, rest)
