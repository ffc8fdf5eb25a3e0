"""Dirichlet series with periodic coefficients, ``sum c(n)*n**(-w)`` with ``c(n + N) = c(n)``.

Where c depends on gcd(n, N) only, the series is zeta(w) times a Dirichlet polynomial (Moebius inversion), and
dirichlet_eta(w) where the polynomial carries the factor 1 - 2**(1-w).

Sources: T. M. Apostol, Introduction to Analytic Number Theory (1976), ch. 12; DLMF 25.11.15, 27.5.3.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from math import gcd, lcm

from sympy import Expr, Integer, Rational, S

# Longer periods are left as single Hurwitz zeta functions.
_LONGEST_PERIOD = 240


@dataclass
class Periodic:
    """The series as ``sum zeta[d]*d**(-w)*zeta(w) + sum eta[d]*d**(-w)*eta(w)`` and Hurwitz parts.

    ``hurwitz`` maps (step, a) to c in ``c*step**(-w)*zeta(w, a)``.
    """

    zeta: dict[Rational, Expr] = field(default_factory=dict)
    eta: dict[Rational, Expr] = field(default_factory=dict)
    hurwitz: dict[tuple[Rational, Rational], Expr] = field(default_factory=dict)


Rows = Sequence[tuple[Expr, Rational, Rational, Expr]]


def periodic(rows: Rows) -> Periodic | None:
    """Rows (z, step, a, c): ``c*step**(-w)*Phi(z, w, a)`` with z = +1 or -1 and 0 < a <= 1.

    None if a common period is too long.
    """
    together = _periodic(rows)
    if together is not None and not together.hurwitz:
        return together
    steps = sorted({step for _, step, _, _ in rows})
    if len(steps) == 1:
        return together
    # no common form: one scale at a time, unless that takes more functions
    apart = Periodic()
    for step in steps:
        part = _periodic([row for row in rows if row[1] == step])
        if part is None:
            return together
        for name in ("zeta", "eta", "hurwitz"):
            target = getattr(apart, name)
            for key, c in getattr(part, name).items():
                target[key] = target.get(key, S.Zero) + c
    if together is None or len(apart.hurwitz) <= len(together.hurwitz):
        return apart
    return together


def _periodic(rows: Rows) -> Periodic | None:
    progressions: list[tuple[Rational, Rational, Expr]] = []  # first term, step, coefficient
    for z, step, a, c in rows:
        if z is S.One:
            progressions.append((step * a, step, c))
        else:
            progressions.append((step * a, 2 * step, c))
            progressions.append((step * (a + 1), 2 * step, -c))
    unit = _unit([v for first, step, _ in progressions for v in (first, step)])
    period = lcm(*(int(step / unit) for _, step, _ in progressions))
    if period > _LONGEST_PERIOD:
        return None
    columns: dict[int, list[Expr]] = {}
    for first, step, c in progressions:
        for n in range(int(first / unit), period + 1, int(step / unit)):
            columns.setdefault(n, []).append(c)
    coefficients = {
        n: total for n, column in sorted(columns.items()) if (total := _sum(column)) is not S.Zero
    }
    result = Periodic()
    if not coefficients:
        return result
    common = gcd(period, *coefficients)
    period, unit = period // common, unit * common
    coefficients = {n // common: c for n, c in coefficients.items()}
    weights = _gcd_weights(coefficients, period)
    if weights is not None:
        odd = _without_two(weights)
        target = result.zeta if odd is None else result.eta
        for d, c in (weights if odd is None else odd).items():
            target[unit * d] = c
        return result
    for n, c in coefficients.items():
        result.hurwitz[unit * period, Rational(n, period)] = c
    return result


def _unit(values: Sequence[Rational]) -> Rational:
    """The largest rational of which all are whole multiples."""
    return (
        Rational(gcd(*(int(v.p) for v in values)), lcm(*(int(v.q) for v in values)))
        if len(values) > 1
        else values[0]
    )


def _sum(column: Sequence[Expr]) -> Expr:
    total = sum(column, S.Zero)
    return total.expand() if total.is_Add else total


def _gcd_weights(coefficients: dict[int, Expr], period: int) -> dict[int, Expr] | None:
    """e(d) with ``c(n) = sum_{d | gcd(n, N)} e(d)``; None where c(n) is not a function of gcd(n, N)."""
    by_gcd: dict[int, Expr] = {}
    for n in range(1, period + 1):
        g, c = gcd(n, period), coefficients.get(n, S.Zero)
        if by_gcd.setdefault(g, c) != c:
            return None
    weights: dict[int, Expr] = {}
    for d in sorted(by_gcd):
        e = _sum([by_gcd[d], *(-w for m, w in weights.items() if d % m == 0)])
        if e is not S.Zero:
            weights[d] = e
    return weights


def _without_two(weights: dict[int, Expr]) -> dict[int, Expr] | None:
    """The Dirichlet polynomial over ``1 - 2*2**(-w)``, or None where the division leaves a rest."""
    quotient: dict[int, Expr] = {}
    rest = dict(weights)
    bound = max(weights)
    for d in range(1, bound + 1):
        c = rest.pop(d, S.Zero)
        if c is S.Zero:
            continue
        if 2 * d > bound:
            return None
        quotient[d] = c
        left = _sum([rest.get(2 * d, S.Zero), Integer(2) * c])
        rest[2 * d] = left
    return quotient


__all__ = ["Periodic", "periodic"]
