"""Products of binomials below the line: one binomial at a time.

Sources: partial fractions (common practice); ``1/(1 - p) = (1 + p + ... + p**(k-1))/(1 - p**k)``.
"""

from __future__ import annotations

from sympy import Expr, I, Integer, Ne, S, exp, ilcm, sin
from sympy.logic.boolalg import Boolean

from .binomials import commensurable

MOST_TERMS = 400


class Unsupported(Exception):
    """The product has no single Dirichlet series in the table."""


def separated(
    below: dict[tuple[Expr, Expr], int], distinct: list[Boolean]
) -> list[tuple[Expr, dict[Expr, Expr], tuple[Expr, Expr], int]]:
    """Several binomials below the line as (weight, numerator, binomial, power) with one binomial each."""
    if all(z in (S.One, S.NegativeOne) for z, _ in below):
        return [(S.One, *_over_one_binomial(below))]
    (first, *others) = below
    if any(d != first[1] for _, d in others):
        raise Unsupported("incommensurable roots")
    parts: list[tuple[Expr, dict[Expr, Expr], tuple[Expr, Expr], int]] = []
    pending: list[tuple[Expr, dict[Expr, int]]] = [(S.One, {z: n for (z, _), n in below.items()})]
    while pending:
        weight, powers = pending.pop()
        if len(powers) == 1:
            ((z, n),) = powers.items()
            parts.append((weight, {S.Zero: S.One}, (z, first[1]), n))
            continue
        if len(pending) + len(parts) > MOST_TERMS:
            raise Unsupported("too many partial fractions")
        # 1/((1-u*q)*(1-v*q)) = (u/(1-u*q) - v/(1-v*q))/(u - v)
        u, v = list(powers)[:2]
        gap, conjugate = _gap(u, v)
        # conjugate phases meet at z = -1 only, where the value is continuous
        if not conjugate and not gap.is_nonzero and not (gap.is_number and not gap.equals(0)):
            distinct.append(Ne(u, v))
        for keep, drop, sign in ((u, v, 1), (v, u, -1)):
            left = dict(powers)
            left[drop] -= 1
            if not left[drop]:
                del left[drop]
            pending.append((weight * sign * keep / gap, left))
    return parts


def _gap(u: Expr, v: Expr) -> tuple[Expr, bool]:
    """``u - v``; a difference of conjugate phases as a sine, and whether it is one."""
    for sign in (1, -1):
        if isinstance(sign * u, exp) and isinstance(sign * v, exp):
            angle = (sign * u).args[0] / I
            if (sign * v).args[0] == -(sign * u).args[0] and angle.is_extended_real:
                return sign * 2 * I * sin(angle), True
    return u - v, False


def _over_one_binomial(
    below: dict[tuple[Expr, Expr], int],
) -> tuple[dict[Expr, Expr], tuple[Expr, Expr], int]:
    """Factors ``1 +- q**m`` over one ``(1 - q**M)**n``: ``1/(1 - p) = (1 + p + ...)/(1 - p**k)``."""
    unit = next(iter(below))[1]
    ratios = []
    for _, d in below:
        r = commensurable(d, unit)
        if r is None:
            raise Unsupported("incommensurable exponentials")
        ratios.append(r)
    whole = ilcm(*(r.q for r in ratios))
    degrees = [int(r * whole) for r in ratios]
    step = unit / whole
    big = ilcm(*(m * (1 if z is S.One else 2) for (z, _), m in zip(below, degrees, strict=True)))
    numerator: dict[int, int] = {0: 1}
    total = 0
    for ((z, _), n), m in zip(below.items(), degrees, strict=True):
        total += n
        # 1/(1 - z*p) = sum_{k < K} (z*p)**k / (1 - (z*p)**K)
        series = {m * k: (1 if z is S.One else (-1) ** k) for k in range(int(big) // m)}
        for _ in range(n):
            product: dict[int, int] = {}
            for e, c in numerator.items():
                for f, w in series.items():
                    product[e + f] = product.get(e + f, 0) + c * w
            numerator = {e: c for e, c in product.items() if c}
            if len(numerator) > MOST_TERMS:
                raise Unsupported("too many terms")
    # cancel what numerator and denominator share
    while total > 1 and (reduced := _divided(numerator, int(big))) is not None:
        numerator, total = reduced, total - 1
    return {step * e: Integer(c) for e, c in sorted(numerator.items())}, (S.One, step * big), total


def _divided(numerator: dict[int, int], m: int) -> dict[int, int] | None:
    """The numerator over ``1 - p**m``, if the division leaves no rest."""
    rest, quotient = dict(numerator), {}
    top = max(rest)
    for e in range(top + 1):
        c = rest.pop(e, 0)
        if not c:
            continue
        if e + m > top:
            return None
        quotient[e] = c
        rest[e + m] = rest.get(e + m, 0) + c
        if not rest[e + m]:
            del rest[e + m]
    return quotient


__all__ = ["MOST_TERMS", "Unsupported", "separated"]
