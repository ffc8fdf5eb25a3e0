"""Sums of exponentials as products of binomials: ``c0*exp(e0*y) * prod (1 - z*exp(-d*y))**n`` with d > 0."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from sympy import Abs, Expr, I, Integer, Poly, Rational, S, cancel, cos, divisors, exp, pi, sqrt, symbols
from sympy.functions.combinatorial.numbers import mobius, totient
from sympy.logic.boolalg import And, Boolean

from ..region import Facts
from .reader import Exponentials

# Polynomials in exp(-y) of higher degree are not factored.
_HIGHEST_DEGREE = 60


class Binomials(NamedTuple):
    """The product above; ``factors`` holds (z, d, n), ``condition`` what must hold for z."""

    front: Expr
    growth: Expr
    factors: tuple[tuple[Expr, Expr, int], ...]
    condition: Boolean = S.true


def binomials(base: Exponentials, facts: Facts) -> Binomials | None:
    """Factor a sum of exponentials; None where the leading term or the roots are not known."""
    terms = list(base.terms)
    leading = _leading(terms, facts)
    if leading is None:
        return None
    growth, front = terms.pop(leading)
    if not terms:
        return Binomials(front, growth, ())
    rates = [((growth - e).expand(), c / front) for e, c in terms]
    if len(rates) == 1:
        ((d, c),) = rates
        roots: tuple[tuple[Expr, Expr, int], ...] | None = ((-c, d, 1),)
    else:
        roots = _factored(rates)
    if roots is None:
        return None
    condition: Boolean = S.true
    for z, _, _ in roots:
        off = off_the_cut(z, facts)
        if off is None:
            return None
        condition = And(condition, off)
    return Binomials(front, growth, roots, condition)


def _leading(terms: Sequence[tuple[Expr, Expr]], facts: Facts) -> int | None:
    """The term that is largest at oo, if the order of the exponents is known."""
    best = 0
    for i in range(1, len(terms)):
        sign = facts.sign((terms[i][0] - terms[best][0]).expand())
        if sign == 1:
            best = i
    for i, (e, _) in enumerate(terms):
        if i != best and facts.sign((terms[best][0] - e).expand()) != 1:
            return None
    return best


def commensurable(d: Expr, unit: Expr) -> Rational | None:
    """``d/unit`` if it is rational."""
    ratio = d / unit
    if not ratio.is_Rational and ratio.free_symbols:
        ratio = cancel(ratio)
    return ratio if ratio.is_Rational else None


def off_the_cut(z: Expr, facts: Facts) -> Boolean | None:
    """What keeps ``1 - z*q`` from vanishing for 0 < q < 1; None where that is impossible or not known."""
    if z is S.One or z is S.NegativeOne:
        return S.true
    if z.is_extended_real:
        sign = facts.sign(1 - z)
        if sign is not None:
            return S.true if sign == 1 else None
        if isinstance(z, exp):
            return z.args[0] < 0
        return z < 1
    if z.is_number:
        return S.true if z.is_real is False and z.is_finite else None
    for sign in (1, -1):
        if isinstance(sign * z, exp):
            angle = (sign * z).args[0] / I
            if not angle.is_extended_real:
                continue
            known = facts.sign(angle)
            magnitude = angle if known == 1 else -angle if known == -1 else Abs(angle)
            return magnitude < pi if sign == -1 else And(magnitude > 0, magnitude < 2 * pi)
    return None


def _factored(rates: Sequence[tuple[Expr, Expr]]) -> tuple[tuple[Expr, Expr, int], ...] | None:
    """Factors of ``1 + sum c*exp(-d*y)`` as (z, d, n), by its roots in ``q = exp(-unit*y)``."""
    first = rates[0][0]
    ratios = [commensurable(d, first) for d, _ in rates]
    if any(r is None for r in ratios):
        return None
    values = [r for r in ratios if r is not None]
    unit_ratio = values[0]
    for r in values[1:]:
        unit_ratio = _common_measure(unit_ratio, r)
    unit = first * unit_ratio
    degrees = [int(r / unit_ratio) for r in values]
    degree = max(degrees)
    if degree > _HIGHEST_DEGREE:
        return None
    coefficients = [S.Zero] * (degree + 1)
    coefficients[0] = S.One
    for k, (_, c) in zip(degrees, rates, strict=True):
        coefficients[k] += c
    if all(c.is_Rational for c in coefficients):
        return _rational_roots(coefficients, unit)
    if degree == 2:
        return _quadratic_roots(coefficients[1], coefficients[2], unit)
    return None


def _common_measure(a: Rational, b: Rational) -> Rational:
    while b:
        a, b = b, a % b
    return a


def _rational_roots(coefficients: Sequence[Expr], unit: Expr) -> tuple[tuple[Expr, Expr, int], ...] | None:
    """Linear, cyclotomic and quadratic factors over the rationals."""
    q = symbols("q")
    powers: dict[tuple[Expr, Expr], int] = {}
    for factor, n in Poly(list(reversed(coefficients)), q).factor_list()[1]:
        order = _cyclotomic_order(factor)
        if order is not None:
            # Phi_n(q) = prod_{d | n} (1 - q**d)**mu(n/d) for n > 1
            found = [(S.One, d, int(mobius(Integer(order) / d)) * n) for d in divisors(order)]
        elif factor.degree() == 1:
            lead, constant = factor.all_coeffs()
            found = [(-lead / constant, 1, n)]
        elif factor.degree() == 2:
            lead, middle, constant = factor.all_coeffs()
            pair = _quadratic_roots(middle / constant, lead / constant, unit)
            if pair is None:
                return None
            found = [(z, 1, m * n) for z, _, m in pair]
        else:
            return None
        for z, d, m in found:
            if m:
                powers[z, unit * d] = powers.get((z, unit * d), 0) + m
    return tuple((z, d, m) for (z, d), m in powers.items() if m)


def _cyclotomic_order(factor: Poly) -> int | None:
    if factor.degree() < 2 or not factor.is_cyclotomic:
        return None
    from sympy import cyclotomic_poly

    degree, coefficients = factor.degree(), factor.all_coeffs()
    # phi(n) >= sqrt(n/2) bounds the order
    for n in range(3, 2 * degree**2 + 1):
        if totient(n) == degree and cyclotomic_poly(n, factor.gen, polys=True).all_coeffs() == coefficients:
            return n
    return None


def _quadratic_roots(c1: Expr, c2: Expr, unit: Expr) -> tuple[tuple[Expr, Expr, int], ...] | None:
    """``1 + c1*q + c2*q**2 = (1 - z1*q)*(1 - z2*q)``; 1 + 2*cos(t)*q + q**2 has z = -exp(+-I*t)."""
    half = c1 / 2
    for sign in (1, -1):
        if c2 is S.One and isinstance(sign * half, cos) and not half.is_number:
            t = (sign * half).args[0]
            return ((-sign * exp(I * t), unit, 1), (-sign * exp(-I * t), unit, 1))
    discriminant = (half**2 - c2).expand()
    if discriminant is S.Zero:
        return ((-half, unit, 2),)
    if c1 is S.Zero and not c2.is_Rational:
        return ((-c2, 2 * unit, 1),)
    if discriminant.is_number:
        if c2 is S.One and half.is_number and discriminant.is_negative:
            from sympy import acos

            t = acos(half)
            if not t.has(acos):
                return ((-exp(I * t, evaluate=False), unit, 1), (-exp(-I * t, evaluate=False), unit, 1))
        root = sqrt(discriminant)
        return ((-half + root, unit, 1), (-half - root, unit, 1))
    return None


__all__ = ["Binomials", "binomials", "commensurable", "off_the_cut"]
