"""Integrals over (0, 1) of sums of ``x**(s-1) * (1-x)**(b-1) * log(x)**k * log(1-x)**j``.

With ``x**eps * (1-x)**delta`` as a factor each term is a derivative of Euler's Beta function.  Its Laurent
expansion in eps and delta gives the finite part of a term; where the total converges the poles cancel and the
finite parts add up to the integral (analytic continuation in eps and delta).

Sources: DLMF 5.12.1 (Beta integral), 5.2.1 and 5.7.3 (Gamma at and near its poles), 5.15 (polygamma functions).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sympy import (
    Add,
    Expr,
    Integer,
    Mul,
    S,
    binomial,
    expand_mul,
    factorial,
    gamma,
    harmonic,
    polygamma,
    zeta,
)

from ...gamma import shortest_quotient
from ...region import Facts, Region, real_part
from .constants import tidy

_MOST_CANCELLED = 40
_LONGEST_POLYNOMIAL = 6


@dataclass(frozen=True)
class BetaTerm:
    """``coefficient * x**(s-1) * (1-x)**(b-1) * log(x)**k * log(1-x)**j``."""

    coefficient: Expr
    s: Expr
    b: Expr
    k: int = 0
    j: int = 0

    def mirrored(self) -> BetaTerm:
        """The same under x -> 1 - x."""
        return BetaTerm(self.coefficient, self.b, self.s, self.j, self.k)


# -- convergence -------------------------------------------------------------------------------------------


class _Ladder:
    """The exponents of x in the expansion of one term at x = 0, with their coefficients."""

    def __init__(self, term: BetaTerm) -> None:
        self.term = term
        self.n = 0
        self.ends = int(term.b) if term.j == 0 and term.b.is_Integer and term.b.is_positive else None

    @property
    def exponent(self) -> Expr:
        """That of ``x**(exponent - 1)``."""
        return (self.term.s + self.term.j + self.n).expand()

    @property
    def over(self) -> bool:
        return self.ends is not None and self.n >= self.ends

    def coefficient(self) -> Expr:
        """The coefficient of ``x**(n+j)`` in ``(1-x)**(b-1) * log(1-x)**j``."""
        n, j, b = self.n, self.term.j, self.term.b
        powers = [_binomial(b - 1, m) * (-1) ** m for m in range(n + 1)]
        logs = [S.One] + [S.Zero] * n  # of (log(1-x)/x)**i
        step = [-S.One / (m + 1) for m in range(n + 1)]
        for _ in range(j):
            logs = [Add(*(logs[i] * step[m - i] for i in range(m + 1))) for m in range(n + 1)]
        return self.term.coefficient * Add(*(powers[m] * logs[n - m] for m in range(n + 1)))


def _binomial(a: Expr, m: int) -> Expr:
    return Mul(*((a - i) for i in range(m))) / factorial(m)


def _surviving(terms: Sequence[BetaTerm], facts: Facts) -> list[Expr] | None:
    """Exponents e of the terms ``x**(e-1)`` of the total at x = 0 that may spoil convergence there."""
    ladders = [ladder for term in terms if not (ladder := _Ladder(term)).over]
    settled: dict[Expr, frozenset[int]] = {}
    for _ in range(_MOST_CANCELLED * max(1, len(terms))):
        groups: dict[Expr, list[_Ladder]] = {}
        for ladder in ladders:
            if not ladder.over:
                groups.setdefault(ladder.exponent, []).append(ladder)
        moved = False
        for exponent, group in groups.items():
            members = frozenset(id(l) for l in group)
            if settled.get(exponent) == members:
                continue
            if facts.sign(real_part(exponent)) == 1 or not _cancels(group):
                settled[exponent] = members
                continue
            for ladder in group:
                ladder.n += 1
            moved = True
        if not moved:
            return list(groups)
    return None


def _cancels(group: list[_Ladder]) -> bool:
    totals: dict[int, list[Expr]] = {}
    for ladder in group:
        totals.setdefault(ladder.term.k, []).append(ladder.coefficient())
    for column in totals.values():
        total = Add(*column).expand()
        if total is S.Zero:
            continue
        if total.is_number:
            if not total.equals(0):
                return False
            continue
        if not total.is_Add:
            return False
        if total.together().as_numer_denom()[0].expand() is not S.Zero:
            return False
    return True


def convergence(terms: Sequence[BetaTerm], facts: Facts) -> Region | None:
    """Where the total converges; None where the terms cancel beyond all bounds."""
    region = Region(facts)
    for side in (list(terms), [t.mirrored() for t in terms]):
        exponents = _surviving(side, facts)
        if exponents is None:
            return None
        for exponent in exponents:
            region = region.positive(real_part(exponent))
    return region


# -- value -------------------------------------------------------------------------------------------------


def total_value(terms: Sequence[BetaTerm]) -> Expr:
    """The sum of the finite parts."""
    values = [_value(t) for t in terms]
    total = Add(*values)
    if len(values) > 1 and total.has(polygamma):
        total = expand_mul(total)
    return tidy(total)


def _value(term: BetaTerm) -> Expr:
    s, b, k, j = term.s, term.b, term.k, term.j
    for first, second, order in ((b, s, (j, k)), (s, b, (k, j))):
        # a whole exponent multiplies out: int x**(s+i-1)*log(x)**k = (-1)**k*k!/(s+i)**(k+1)
        if first.is_Integer and 0 < first <= _LONGEST_POLYNOMIAL and order[0] == 0 and (order[1] or first == 1):
            n = order[1]
            return term.coefficient * Add(
                *(
                    binomial(first - 1, i) * (-1) ** (i + n) * factorial(n) / ((second + i).expand()) ** (n + 1)
                    for i in range(int(first))
                    if not (second + i).expand().is_zero
                )
            )
    total = (s + b).expand()
    if k == j == 0 and not any(_is_pole(v) for v in (s, b)):
        return term.coefficient * shortest_quotient([s, b], [total])
    return term.coefficient * factorial(k) * factorial(j) * _coefficient(s.expand(), b.expand(), total, k, j)


def _is_pole(argument: Expr) -> bool:
    if not argument.is_Integer:
        argument = argument.expand()
    return bool(argument.is_Integer and argument.is_nonpositive)


def _coefficient(s: Expr, b: Expr, total: Expr, k: int, j: int) -> Expr:
    """Of ``eps**k * delta**j`` in ``Gamma(s+eps)*Gamma(b+delta)/Gamma(s+b+eps+delta)``."""
    poles = [int(_is_pole(v)) for v in (s, b, total)]
    k, j = k + poles[0], j + poles[1]
    degree = k + j
    logs: list[dict[tuple[int, int], Expr]] = [{}]
    for m in range(1, degree + 1):
        part: dict[tuple[int, int], Expr] = {}
        down = _log_derivative(total, m)
        for i in range(m + 1):
            if i > k or m - i > j:
                continue
            if i == m:
                c = _difference(s, total, m)
            elif i == 0:
                c = _difference(b, total, m)
            else:
                c = -binomial(m, i) * down
            if c is not S.Zero:
                part[i, m - i] = c
        logs.append(part)
    series = _exponential(logs, k, j)
    if poles[2]:
        wanted = Add(series.get((k - 1, j), S.Zero), series.get((k, j - 1), S.Zero))
    else:
        wanted = series.get((k, j), S.Zero)
    heads = [_head(v) for v in (s, b, total)]
    if any(poles):
        return heads[0] * heads[1] / heads[2] * wanted
    return shortest_quotient([s, b], [total]) * wanted


def _exponential(logs: list[dict[tuple[int, int], Expr]], k: int, j: int) -> dict[tuple[int, int], Expr]:
    """exp of a series in two variables, by homogeneous parts: ``N*E_N = sum M*L_M*E_(N-M)``."""
    parts: list[dict[tuple[int, int], Expr]] = [{(0, 0): S.One}]
    for n in range(1, k + j + 1):
        sums: dict[tuple[int, int], list[Expr]] = {}
        for m in range(1, n + 1):
            for (a, c), v in logs[m].items():
                for (p, q), w in parts[n - m].items():
                    if a + p <= k and c + q <= j:
                        sums.setdefault((a + p, c + q), []).append(Integer(m) * v * w)
        parts.append({key: expand_mul(Add(*v) / n) for key, v in sums.items()})
    return {key: value for part in parts for key, value in part.items()}


def _head(x: Expr) -> Expr:
    if _is_pole(x):
        return S.NegativeOne ** (-x) / factorial(-x)
    return gamma(x)


def _log_derivative(x: Expr, m: int) -> Expr:
    """The coefficient of ``e**m`` in ``log(e*Gamma(x+e))`` at a pole, of ``log Gamma(x+e)`` elsewhere."""
    if _is_pole(x):
        n = -x
        if m == 1:
            return harmonic(n) - S.EulerGamma
        return (S.NegativeOne**m * zeta(m) + harmonic(n, m)) / m
    return polygamma(m - 1, x) / factorial(m)


def _difference(x: Expr, y: Expr, m: int) -> Expr:
    """The difference of two such coefficients; rational where x and y differ by a small integer."""
    gap = (y - x).expand()
    if gap.is_Integer and 0 <= gap <= _LONGEST_POLYNOMIAL and not x.is_Number:
        # log Gamma(x+n) - log Gamma(x) = sum log(x+i)
        return Add(*(S.NegativeOne**m / (m * (x + i) ** m) for i in range(int(gap))))
    return _log_derivative(x, m) - _log_derivative(y, m)
