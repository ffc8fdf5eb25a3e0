"""Dirichlet series at whole arguments: pairs that the reflection formulas turn into elementary functions.

Sources: DLMF 4.22.3 and 4.22.5 (partial fractions of cot and csc), 25.11.9 (Hurwitz), 25.13.3 (Bernoulli).
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from sympy import (
    Add,
    Catalan,
    Expr,
    I,
    Integer,
    Mul,
    Rational,
    S,
    bernoulli,
    cos,
    cot,
    exp,
    factorial,
    log,
    pi,
    sin,
    zeta,
)

from . import functions


class Row(NamedTuple):
    """``coefficient * step**(-w) * Phi(z, w, a)`` at ``w = u - shift``."""

    z: Expr
    shift: Integer
    step: Rational
    a: Expr
    coefficient: Expr


def two_sided(w: int, a: Expr) -> Expr:
    """``zeta(w, a) + (-1)**w*zeta(w, 1 - a)``, summed over all whole numbers: DLMF 4.22.3, differentiated."""
    argument = (pi * a).expand()
    # in t = 1/sin(pi*a)**2: an even derivative of the cotangent is cot*p(t), an odd one p(t)
    p, with_cotangent = [S.One], True
    for _ in range(w - 1):
        p, with_cotangent = _differentiated(p, with_cotangent), not with_cotangent
    sine = sin(argument)
    total = sum((c * sine ** (-2 * k) for k, c in enumerate(p)), S.Zero)
    if with_cotangent:
        total = total * cot(argument)
    return pi**w * S.NegativeOne ** (w - 1) / factorial(w - 1) * total


def _differentiated(p: list[Expr], with_cotangent: bool) -> list[Expr]:
    """Derivative of ``p(t)`` (over cot) or of ``cot*p(t)``, t = 1/sin**2: t' = -2*t*cot, cot' = -t."""
    if not with_cotangent:
        return [-2 * k * c for k, c in enumerate(p)]
    result = [S.Zero] * (len(p) + 1)
    for k, c in enumerate(p):
        result[k + 1] += -c - 2 * k * c
        result[k] += 2 * k * c
    return result


def two_sided_alternating(w: int, a: Expr) -> Expr:
    """``Phi(-1, w, a) - (-1)**w*Phi(-1, w, 1 - a)``, over all whole numbers: DLMF 4.22.5, differentiated."""
    argument = (pi * a).expand()
    p, with_cotangent = [S.One], False  # p(t)/sin, or cot*p(t)/sin
    for _ in range(w - 1):
        result = [S.Zero] * (len(p) + 1)
        for k, c in enumerate(p):
            if with_cotangent:
                # (cot*p/sin)' = (-(t - 1)*p - t*p - 2*t*(t - 1)*p')/sin
                result[k + 1] += -2 * c - 2 * k * c
                result[k] += c + 2 * k * c
            else:
                # (p/sin)' = cot*(-p - 2*t*p')/sin
                result[k] += -c - 2 * k * c
        p, with_cotangent = result, not with_cotangent
    sine = sin(argument)
    total = sum((c * sine ** (-2 * k - 1) for k, c in enumerate(p)), S.Zero)
    if with_cotangent:
        total = total * cot(argument)
    return pi**w * S.NegativeOne ** (w - 1) / factorial(w - 1) * total


def inversion(w: int, z: Expr, logarithm: Expr) -> Expr:
    """``polylog(w, z) + (-1)**w*polylog(w, 1/z)``, ``logarithm = log(-z)``: Jonquiere (from memory)."""
    x = Rational(1, 2) + logarithm / (2 * pi * I)
    return (-((2 * pi * I) ** w) / factorial(w) * bernoulli(w, x)).expand()


def derivative_at_zero(coefficients: dict[int, Expr], period: int, m: int) -> Expr | None:
    """Derivative at ``w = -m`` of ``sum c(r)*zeta(w, r/N)`` where parity makes the value vanish, m > 0.

    From Hurwitz' formula, DLMF 25.11.9, with ``sum_n sin(2*pi*n*r/N)/n**k`` as Hurwitz zeta functions at k.
    None where c is neither odd (m odd) nor even (m even) under r -> N - r.
    """
    parity = S.NegativeOne**m
    for r, c in coefficients.items():
        mirror = coefficients.get(period - r, S.Zero) if r != period else c
        if (mirror - parity * c).expand() is not S.Zero or (r == period and m % 2):
            return None
    wave = sin if m % 2 else cos
    k = Integer(m + 1)
    items = [
        (
            Integer(period),
            Rational(j, period),
            Add(*(c * wave(2 * pi * j * r / period) for r, c in coefficients.items())),
        )
        for j in range(1, period + 1)
    ]
    total = Add(*reflected(S.One, int(k), [(step, a, c) for step, a, c in items if c is not S.Zero]))
    return factorial(m) * S.NegativeOne ** (m // 2) * total / (2 * (2 * pi) ** m)


def reflected(z: Expr, w: int, items: Sequence[tuple[Rational, Expr, Expr]]) -> list[Expr]:
    """``sum c*step**(-w)*Phi(z, w, a)`` for z = +1 or -1, pairs with whole ``a + a'`` by reflection.

    At z = w = 1 the finite part ``-psi(a)`` stands for Phi.
    """
    terms: list[Expr] = []
    rest = list(items)
    parity = S.NegativeOne**w * (1 if z is S.One else -1)
    while rest:
        step, a, c = rest.pop(0)
        for other in rest:
            if other[0] != step:
                continue
            n = (a + other[1]).expand()
            if not n.is_Integer:
                continue
            factor, shift = functions.shifted(z, Integer(w), (1 - a).expand(), int(n) - 1)
            if (other[2] * factor - parity * c).expand() is not S.Zero or a == other[1]:
                continue
            whole = two_sided if z is S.One else two_sided_alternating
            rest.remove(other)
            terms.append(step ** Integer(-w) * (c * whole(w, a) + other[2] * shift))
            break
        else:
            terms.append(c * step ** Integer(-w) * _single(z, w, a))
    return terms


def _single(z: Expr, w: int, a: Expr) -> Expr:
    if z is S.NegativeOne:
        return functions.alternating(Integer(w), a)
    if w == 1:
        return functions.minus_digamma(a)
    if w == 2 and a.is_Rational and a.q == 4 and 0 < a < 1:
        # DLMF 25.11.40-type: Catalan's constant is (zeta(2, 1/4) - zeta(2, 3/4))/16
        return pi**2 + (8 if a.p == 1 else -8) * Catalan
    return zeta(Integer(w), a)


def inverted(w: int, rows: Sequence[Row]) -> list[Expr]:
    """General z; pairs of polylogarithms at z and 1/z by Jonquiere's inversion."""
    terms: list[Expr] = []
    rest = list(rows)
    while rest:
        row = rest.pop(0)
        logarithm = _log_of_minus(row.z)
        if row.a is S.One and logarithm is not None:
            for other in rest:
                if other.a is not S.One or other.step != row.step or (other.z * row.z).expand() != 1:
                    continue
                weights = (row.coefficient / row.z, other.coefficient / other.z)
                if (weights[1] - S.NegativeOne**w * weights[0]).expand() is not S.Zero:
                    continue
                rest.remove(other)
                terms.append(weights[0] * row.step ** Integer(-w) * inversion(w, row.z, logarithm))
                break
            else:
                terms.append(_plain(row, w))
            continue
        terms.append(_plain(row, w))
    return terms


def _plain(row: Row, w: int) -> Expr:
    return Mul(row.coefficient, row.step ** Integer(-w), functions.value(row.z, Integer(w), row.a))


def _log_of_minus(z: Expr) -> Expr | None:
    """``log(-z)`` for ``z = -exp(v)`` with v real or imaginary, or ``z = exp(I*t)``.

    The phases are below pi and between 0 and 2*pi: nothing else passes as a root off the half line.
    """
    other = -z
    if isinstance(other, exp):
        v = other.args[0]
        if v.is_extended_real or (v / I).is_extended_real:
            return v
    elif isinstance(z, exp):
        t = z.args[0] / I
        if t.is_extended_real:
            return I * (t + pi if t.could_extract_minus_sign() else t - pi)
    elif other.is_positive:
        return log(other)
    return None


__all__ = [
    "Row",
    "derivative_at_zero",
    "inversion",
    "inverted",
    "reflected",
    "two_sided",
    "two_sided_alternating",
]
