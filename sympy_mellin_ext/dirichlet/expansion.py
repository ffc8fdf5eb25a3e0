"""From products of binomials in exponentials to Dirichlet series, finite sums and Beta integrals.

``exp(-A*y)*(1 - z*q)**(-n)`` with ``q = exp(-d*y)`` is ``sum_k binomial(n+k-1, k)*z**k*exp(-d*(k + a)*y)``,
``a = A/d``; the binomial is a polynomial in ``t = k + a``, so that the transform is Gamma(u)*d**(-u) times
combinations of ``Phi(z, u - j, a)``.  ``log(1 - z*q)`` is ``-sum_k z**k/k*q**k``.

Sources: DLMF 4.6.1 and 4.6.7 (series), 25.5.1, 25.11.25 and 25.14.5 (transforms).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from sympy import Add, Expr, Integer, Pow, S, binomial, factorial, log
from sympy.logic.boolalg import And, Boolean

from ..matching.waves import Draft
from ..region import Facts, real_part
from .binomials import binomials, commensurable
from .fractions import MOST_TERMS, Unsupported, separated
from .reader import SeriesFactor, as_exponentials, times

_MOST_PEELED = 40


@dataclass(frozen=True)
class Ray:
    """``coefficient * sum_k z**k * (k + a)**shift * exp(-d*(k + a)*y)``."""

    d: Expr
    z: Expr
    shift: Integer
    a: Expr
    coefficient: Expr


@dataclass(frozen=True)
class BetaFactor:
    """``coefficient * exp(-rate*y)*(1 - z*q)**power*log(1 - q)**logs*(1 + q)**other``, ``q = exp(-d*y)``."""

    coefficient: Expr
    rate: Expr
    z: Expr
    d: Expr
    power: Expr
    logs: int = 0
    other: Expr = S.Zero


@dataclass(frozen=True)
class LogFactor:
    """``coefficient * exp(-rate*y) * log(1 - z*exp(-d*y))`` with a rate that is not zero."""

    coefficient: Expr
    rate: Expr
    z: Expr
    d: Expr


@dataclass
class Expansion:
    """What one draft amounts to, as multiples of ``x**power * log(x)**logs``, ``y = x**ratio``."""

    power: Expr
    logs: int
    ratio: Expr
    rays: list[Ray] = field(default_factory=list)
    plain: list[Draft] = field(default_factory=list)
    beta: list[BetaFactor] = field(default_factory=list)
    logarithms: list[LogFactor] = field(default_factory=list)
    condition: Boolean = S.true


def expand(draft: Draft, facts: Facts) -> Expansion:
    """Expand a draft that has factors of exponentials.

    Raises
    ------
    Unsupported
        Where no Dirichlet series of the table belongs to it.
    """
    ratio = draft.series[0].base.ratio
    if draft.kernels or any(f.base.ratio != ratio for f in draft.series):
        raise Unsupported("kernels besides exponentials")
    if any(r != ratio for r, _ in draft.exponents) or any(r != ratio for _, _, r in draft.trig):
        raise Unsupported("several powers of x in exponents")
    result = Expansion(draft.power, draft.logs, ratio)
    rate = Add(*(-c for _, c in draft.exponents))
    coefficient = draft.coefficient
    factors: dict[tuple[Expr, Expr], Expr] = {}
    logarithms = [f for f in draft.series if f.logarithm]
    for factor in draft.series:
        if factor.logarithm:
            continue
        front, rate, found = _take(factor, rate, facts, result)
        coefficient = coefficient * front
        for z, d, n in found:
            factors[z, d] = factors.get((z, d), S.Zero) + n
    factors = {key: n for key, n in factors.items() if n is not S.Zero}
    trig = Draft(trig=draft.trig)
    if not logarithms:
        _product(result, coefficient, rate, factors, trig, facts)
    elif len(logarithms) == 1 and not factors:
        _logarithm(result, coefficient, rate, logarithms[0], trig, facts)
    else:
        _beta_logarithms(result, coefficient, rate, factors, logarithms, trig, facts)
    return result


def _take(
    factor: SeriesFactor, rate: Expr, facts: Facts, result: Expansion
) -> tuple[Expr, Expr, list[tuple[Expr, Expr, Expr]]]:
    split = binomials(factor.base, facts)
    if split is None:
        raise Unsupported("roots of a sum of exponentials")
    # no root lies on the half line, so that the sign at oo is the sign throughout
    if factor.positive and facts.sign(split.front) != 1:
        raise Unsupported("a power of a base that may be negative")
    result.condition = And(result.condition, split.condition)
    n = factor.power
    found = [(z, d, m * n) for z, d, m in split.factors]
    return Pow(split.front, n), (rate - n * split.growth).expand(), found


# -- products ----------------------------------------------------------------------------------------


def _product(
    result: Expansion,
    coefficient: Expr,
    rate: Expr,
    factors: dict[tuple[Expr, Expr], Expr],
    trig: Draft,
    facts: Facts,
) -> None:
    if any(not n.is_Integer for n in factors.values()):
        _beta_power(result, coefficient, rate, factors, trig)
        return
    top: dict[Expr, Expr] = {rate: coefficient}
    below: dict[tuple[Expr, Expr], int] = {}
    for (z, d), n in factors.items():
        if n < 0:
            below[z, d] = -int(n)
        else:
            top = _multiplied(top, z, d, int(n))
    if len(below) > 1:
        distinct: list[Boolean] = []
        parts = separated(below, distinct)
        result.condition = And(result.condition, *distinct)
        for weight, numerator, (z, d), n in parts:
            both = {e + f: S.Zero for e in top for f in numerator}
            for e, c in top.items():
                for f, w in numerator.items():
                    both[e + f] += c * w * weight
            for e, c in both.items():
                _geometric(result, c, e.expand(), z, d, n, trig, facts)
        return
    for e, c in top.items():
        if not below:
            result.plain.append(_exponential(c, e, result.ratio).times(trig))
            continue
        (((z, d), n),) = below.items()
        _geometric(result, c, e, z, d, n, trig, facts)


def _multiplied(top: dict[Expr, Expr], z: Expr, d: Expr, n: int) -> dict[Expr, Expr]:
    for _ in range(n):
        top = times(top, {S.Zero: S.One, d: -z})
        if len(top) > MOST_TERMS:
            raise Unsupported("too many terms")
    return top


def _exponential(coefficient: Expr, rate: Expr, ratio: Expr) -> Draft:
    if rate is S.Zero:
        return Draft(coefficient=coefficient)
    return Draft(coefficient=coefficient, exponents=((ratio, -rate),))


def _geometric(
    result: Expansion, c: Expr, rate: Expr, z: Expr, d: Expr, n: int, trig: Draft, facts: Facts
) -> None:
    """``c*exp(-rate*y)*(1 - z*exp(-d*y))**(-n)``."""
    if c is S.Zero:
        return
    peeled = _peel(rate, d, facts)
    for k in range(peeled):
        weight = c * z**k * binomial(n + k - 1, n - 1)
        result.plain.append(_exponential(weight, (rate + k * d).expand(), result.ratio).times(trig))
    a = _over(rate, d)
    coefficients = [S.One]
    for i in range(1, n):
        # times (t - a + i)
        following = [S.Zero] * (len(coefficients) + 1)
        for j, v in enumerate(coefficients):
            following[j] += v * (i - a)
            following[j + 1] += v
        coefficients = [v.expand() for v in following]
    front = c * z**peeled / factorial(n - 1)
    for waves in as_exponentials(trig):
        turned = Add(*(-e for _, e in waves.exponents))
        _decays(result, (rate + peeled * d + turned), facts)
        if turned is S.Zero:
            rows = coefficients
        else:
            # t = k + a + turned/d: shift the polynomial
            rows = _moved(coefficients, -_over(turned, d))
        for j, v in enumerate(rows):
            if v is not S.Zero:
                start = (a + peeled + _over(turned, d)).expand()
                result.rays.append(Ray(d, z, Integer(j), start, front * v * waves.coefficient))


def _moved(coefficients: Sequence[Expr], by: Expr) -> list[Expr]:
    """The polynomial at ``t + by``."""
    result: list[Expr] = [S.Zero]
    for c in reversed(coefficients):
        following = [S.Zero] * (len(result) + 1)
        for j, v in enumerate(result):
            following[j] += v * by
            following[j + 1] += v
        following[0] += c
        result = [v.expand() for v in following]
    return result[: len(coefficients)]


def _over(rate: Expr, d: Expr) -> Expr:
    ratio = rate / d
    if ratio.is_Add or not ratio.is_Rational:
        common = commensurable(rate, d)
        if common is not None:
            return common
        ratio = ratio.expand()
    return ratio


def _peel(rate: Expr, d: Expr, facts: Facts) -> int:
    """How many first terms do not decay."""
    a = commensurable(real_part(rate, facts), d)
    if a is None:
        return 0
    count = 0 if a > 0 else int(-a // 1) + 1
    if count > _MOST_PEELED:
        raise Unsupported("too many growing terms")
    return count


def _decays(result: Expansion, rate: Expr, facts: Facts) -> None:
    """Ask for ``Re rate > 0``."""
    real = real_part(rate, facts)
    sign = facts.sign(real)
    if sign in (0, -1):
        raise Unsupported("a term grows")
    if sign is None:
        result.condition = And(result.condition, real > 0)


# -- logarithms --------------------------------------------------------------------------------------


def _logarithm(
    result: Expansion, coefficient: Expr, rate: Expr, factor: SeriesFactor, trig: Draft, facts: Facts
) -> None:
    front, growth, found = _take(factor, S.Zero, facts, result)
    shape = _exponential(coefficient, rate, result.ratio).times(trig)
    if front is not S.One:
        result.plain.append(shape.scaled(log(front)))
    if growth is not S.Zero:
        result.plain.append(shape.scaled(-growth).times(Draft(power=result.ratio)))
    if not found:
        return
    if rate is S.Zero and not trig.trig:
        for z, d, n in found:
            result.rays.append(Ray(d, z, S.NegativeOne, S.One, -coefficient * n * z))
        return
    whole = not trig.trig and all(z is S.One for z, _, _ in found)
    for waves in as_exponentials(trig):
        turned = (rate + Add(*(-e for _, e in waves.exponents))).expand()
        for z, d, n in found:
            if whole:
                result.beta.append(BetaFactor(coefficient * n, rate, z, d, S.Zero, 1))
            else:
                result.logarithms.append(LogFactor(coefficient * n * waves.coefficient, turned, z, d))


def _beta_logarithms(
    result: Expansion,
    coefficient: Expr,
    rate: Expr,
    factors: dict[tuple[Expr, Expr], Expr],
    logarithms: Sequence[SeriesFactor],
    trig: Draft,
    facts: Facts,
) -> None:
    """``log(1 - q)**j`` times powers of ``1 - q``, of one q."""
    if trig.trig:
        raise Unsupported("a logarithm with another factor")
    d = None
    for factor in logarithms:
        front, growth, found = _take(factor, S.Zero, facts, result)
        if front is not S.One or growth is not S.Zero or len(found) != 1:
            raise Unsupported("a logarithm with another factor")
        ((z, other, n),) = found
        if z is not S.One or (d is not None and other != d):
            raise Unsupported("logarithms of different binomials")
        d, coefficient = other, coefficient * n
    if any(key != (S.One, d) for key in factors):
        raise Unsupported("a logarithm with another factor")
    assert d is not None
    power = factors.get((S.One, d), S.Zero)
    result.beta.append(BetaFactor(coefficient, rate, S.One, d, power, len(logarithms)))


# -- other powers ------------------------------------------------------------------------------------


def _beta_power(
    result: Expansion, coefficient: Expr, rate: Expr, factors: dict[tuple[Expr, Expr], Expr], trig: Draft
) -> None:
    """One binomial with a power that is no whole number, or two that are powers of sinh and cosh."""
    factors = _joined(factors)
    if len(factors) == 2:
        ((z, d), n), ((z2, d2), n2) = factors.items()
        if z is S.NegativeOne:
            (z, n), (z2, n2) = (z2, n2), (z, n)
        if trig.trig or d != d2 or (z, z2) != (S.One, S.NegativeOne):
            raise Unsupported("two symbolic powers")
        result.beta.append(BetaFactor(coefficient, rate, z, d, n, 0, n2))
        return
    if len(factors) != 1:
        raise Unsupported("two symbolic powers")
    (((z, d), n),) = factors.items()
    if z not in (S.One, S.NegativeOne):
        raise Unsupported("a symbolic power of a general binomial")
    for waves in as_exponentials(trig):
        turned = Add(*(-e for _, e in waves.exponents))
        result.beta.append(BetaFactor(coefficient * waves.coefficient, (rate + turned).expand(), z, d, n))


def _joined(factors: dict[tuple[Expr, Expr], Expr]) -> dict[tuple[Expr, Expr], Expr]:
    """``(1-q)**n*(1+q)**n = (1-q**2)**n``."""
    if len(factors) == 2:
        ((z1, d1), n1), ((z2, d2), n2) = factors.items()
        if d1 == d2 and z1 == -z2 and n1 == n2 and S.One in (z1, z2):
            return {(S.One, 2 * d1): n1}
    return factors


__all__ = ["BetaFactor", "Expansion", "LogFactor", "Ray", "Unsupported", "expand"]
