"""Linear combinations of Dirichlet series as one factor of a Mellin transform."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property

from sympy import (
    Add,
    Expr,
    Integer,
    Mul,
    Pow,
    Rational,
    S,
    dirichlet_eta,
    euler,
    factorial,
    ilcm,
    log,
    pi,
    zeta,
)

from ..gamma.laurent import Series, multiply, power_series
from . import functions
from .periodic import Periodic, periodic
from .reflection import Row, derivative_at_zero, inverted, reflected

# A closed form with more zeta functions than this helps nobody; a series of two terms may hold half as many.
_MOST_FUNCTIONS = 24


@dataclass(frozen=True)
class Combination:
    """``sum_i c_i * M_i**(-w_i) * Phi(z_i, w_i, a_i)``, ``w_i = u - j_i``: a factor of a transform in u.

    Examples
    --------
    >>> from sympy import S, symbols
    >>> u = symbols('u')
    >>> Combination((Row(S.One, S.Zero, S(2), S.Half, S.One),)).at(u)
    (1 - 1/2**u)*zeta(u)
    """

    rows: tuple[Row, ...]

    @cached_property
    def _levels(self) -> tuple[tuple[Integer, _Level], ...]:
        shifts = sorted({row.shift for row in self.rows})
        levels = ((j, _Level.of([r for r in self.rows if r.shift == j])) for j in shifts)
        return tuple((j, level) for j, level in levels if not level.empty)

    def at(self, u: Expr) -> Expr:
        """The value at ``u``, which must not be a pole."""
        return Add(*(level.at((u - j).expand() if j else u) for j, level in self._levels))

    def laurent(self, u: Expr, rate: Expr, terms: int) -> Series:
        """Laurent series at ``u + rate*eps``; raises NoClosedForm where a coefficient has no name."""
        parts = [level.laurent((u - j).expand() if j else u, rate, terms) for j, level in self._levels]
        return _added(parts, terms)

    def poles(self) -> tuple[Expr, ...]:
        """The poles in u that do not cancel among the series."""
        return tuple(1 + j for j, level in self._levels if level.residue is not S.Zero)

    def removable(self) -> tuple[Expr, ...]:
        """Points where ``at`` with a symbolic argument, specialised, would read oo - oo."""
        return tuple(1 + j for j, level in self._levels if level.residue is S.Zero and level.singular)


class _Level:
    """The rows of one shift, brought to as few functions as possible."""

    def __init__(
        self, unit: Periodic, hurwitz: Sequence[Row], alternating: Sequence[Row], lerch: Sequence[Row]
    ) -> None:
        self.unit, self.hurwitz, self.alternating, self.lerch = (
            unit,
            tuple(hurwitz),
            tuple(alternating),
            tuple(lerch),
        )

    @classmethod
    def of(cls, rows: Sequence[Row]) -> _Level:
        rational = [r for r in rows if r.z in (S.One, S.NegativeOne) and r.a.is_Rational and 0 < r.a <= 1]
        unit = periodic([(r.z, r.step, r.a, r.coefficient) for r in rational]) if rational else Periodic()
        if unit is None:
            unit, rational = Periodic(), []
        rest = _halved(_merged(r for r in rows if r not in rational))
        return cls(
            unit,
            [r for r in rest if r.z is S.One],
            [r for r in rest if r.z is S.NegativeOne],
            [r for r in rest if r.z not in (S.One, S.NegativeOne)],
        )

    @property
    def empty(self) -> bool:
        unit = self.unit
        return not (unit.zeta or unit.eta or unit.hurwitz or self.hurwitz or self.alternating or self.lerch)

    @cached_property
    def _at_steps(self) -> list[tuple[Rational, Expr, Expr]]:
        """(step, a, c) of every Hurwitz zeta function, a = 1 for Riemann's."""
        found = [(d, S.One, c) for d, c in self.unit.zeta.items()]
        found += [(step, a, c) for (step, a), c in self.unit.hurwitz.items()]
        return found + [(r.step, r.a, r.coefficient) for r in self.hurwitz]

    @cached_property
    def residue(self) -> Expr:
        """At w = 1."""
        total = Add(*(c / step for step, _, c in self._at_steps)).expand()
        if total is S.Zero or total.is_number:
            return S.Zero if total.is_number and total.equals(0) else total
        return S.Zero if total.is_Add and total.together().as_numer_denom()[0].expand() is S.Zero else total

    @property
    def singular(self) -> bool:
        """Whether single terms have a pole at w = 1."""
        return bool(self._at_steps) or any(r.a is not S.One for r in self.alternating)

    def _check(self, most: int) -> None:
        if len(self._at_steps) + len(self.alternating) + len(self.lerch) > most:
            raise functions.NoClosedForm("too many zeta functions")

    # -- values --------------------------------------------------------------------------------------------

    def at(self, w: Expr) -> Expr:
        self._check(_MOST_FUNCTIONS)
        if w is S.One:
            return self._finite_part_at_one()
        if w.is_Integer and w.is_positive:
            return self._at_integer(int(w))
        terms = self._euler_numbers(w) or [
            (step, c, functions.value(S.One, w, a)) for step, a, c in self._at_steps[len(self.unit.zeta) :]
        ]
        terms += [
            (r.step, r.coefficient, functions.value(r.z, w, r.a)) for r in self.alternating + self.lerch
        ]
        total = _common_step(terms, w)
        unit = [
            _weighted(weights, w, function)
            for weights, function in ((self.unit.zeta, zeta(w)), (self.unit.eta, dirichlet_eta(w)))
            if weights
        ]
        return Add(*unit, total)

    def _euler_numbers(self, w: Expr) -> list[tuple[Rational, Expr, Expr]]:
        """``zeta(w, 1/4) - zeta(w, 3/4)`` at an odd symbolic w, DLMF 25.11.40-type and 24.6-type."""
        if not w.is_odd or not w.is_positive or len(self._at_steps) != 2 + len(self.unit.zeta):
            return []
        places = {a: (step, c) for (step, a), c in self.unit.hurwitz.items()}
        quarter, other = places.get(Rational(1, 4)), places.get(Rational(3, 4))
        if quarter is None or other is None or quarter[0] != other[0] or quarter[1] != -other[1]:
            return []
        value = S.NegativeOne ** ((w - 1) / 2) * euler(w - 1) * Pow(2, w - 1) * pi**w / factorial(w - 1)
        return [(*quarter, value)]

    def _at_integer(self, w: int) -> Expr:
        """At a whole w > 1: reflection where it applies."""
        n = Integer(w)
        terms = [c * step ** (-n) * zeta(n) for step, c in self.unit.zeta.items()]
        terms += [c * d ** (-n) * dirichlet_eta(n) for d, c in self.unit.eta.items()]
        pairs = [(step, a, c) for (step, a), c in self.unit.hurwitz.items()]
        pairs += [(r.step, r.a, r.coefficient) for r in self.hurwitz]
        terms += reflected(S.One, w, pairs)
        terms += reflected(S.NegativeOne, w, [(r.step, r.a, r.coefficient) for r in self.alternating])
        terms += inverted(w, self.lerch)
        return Add(*terms)

    def _finite_part_at_one(self) -> Expr:
        """At w = 1, less the pole ``residue/(w - 1)``: zeta(w, a) = 1/(w-1) - psi(a) + ..., DLMF 25.2.4."""
        terms = [-c / step * log(step) for step, _, c in self._at_steps]
        terms += [c / d * dirichlet_eta(S.One) for d, c in self.unit.eta.items()]
        terms += reflected(S.One, 1, self._at_steps)
        terms += reflected(S.NegativeOne, 1, [(r.step, r.a, r.coefficient) for r in self.alternating])
        terms += inverted(1, self.lerch)
        return Add(*terms)

    def _vanishing_part(self, w: Expr, rate: Expr, terms: int) -> Series | None:
        """Two coefficients of the periodic part at a negative whole w where parity makes it vanish."""
        if terms != 2 or not (w.is_Integer and w.is_negative) or not self.unit.hurwitz:
            return None
        total: Expr = S.Zero
        for step in sorted({step for step, _ in self.unit.hurwitz}):
            part = {a: c for (d, a), c in self.unit.hurwitz.items() if d == step}
            period = ilcm(*(a.q for a in part)) if len(part) > 1 else next(iter(part)).q
            slope = derivative_at_zero({int(a * period): c for a, c in part.items()}, int(period), -int(w))
            if slope is None:
                return None
            total += step ** (-w) * slope
        return Series(0, (S.Zero, rate * total))

    # -- series --------------------------------------------------------------------------------------------

    def laurent(self, w: Expr, rate: Expr, terms: int) -> Series:
        self._check(_MOST_FUNCTIONS if terms == 1 else _MOST_FUNCTIONS // 2)
        at_pole = w is S.One
        first = -1 if at_pole and self.residue is not S.Zero else 0
        count = terms + 1 if at_pole and first == 0 else terms
        if first == 0 and terms == 1:
            return Series(0, (self.at(w),))
        vanishing = self._vanishing_part(w, rate, terms)
        parts = [
            _stepped(functions.hurwitz_series(w, rate, a, count), step, w, rate, count).times(c)
            for step, a, c in self._at_steps
            if vanishing is None or (step, a) not in self.unit.hurwitz
        ]
        if vanishing is not None:
            parts.append(vanishing)
        # with the pole cancelled the single ones start one place early
        total = _added(parts, count) if parts else Series(0, (S.Zero,) * terms)
        if at_pole and first == 0 and parts:
            total = Series(0, tuple(total.coefficient(k) for k in range(terms)))
        others = [
            _stepped(functions.eta_series(w, rate, terms), d, w, rate, terms).times(c)
            for d, c in self.unit.eta.items()
        ]
        others += [
            _stepped(functions.series(r.z, w, rate, r.a, terms), r.step, w, rate, terms).times(r.coefficient)
            for r in self.alternating + self.lerch
        ]
        result = _added([total, *others], terms) if parts else _added(others, terms)
        if at_pole and terms + first > 0:
            # the same coefficient, with reflection applied
            place = -first
            coefficients = list(result.coefficients)
            coefficients[place] = self._finite_part_at_one()
            result = Series(first, tuple(coefficients))
        return result


def _weighted(weights: dict[Rational, Expr], w: Expr, function: Expr) -> Expr:
    """The Dirichlet polynomial times a function, its first coefficient and a common power taken out."""
    (first, front) = next(iter(weights.items()))
    ratios = [(c / front).expand() for c in weights.values()]
    polynomial = Add(*(c * _power(d / first, w) for d, c in zip(weights, ratios, strict=True)))
    return Mul(front, _power(first, w), polynomial, function)


def _common_step(terms: Sequence[tuple[Expr, Expr, Expr]], w: Expr) -> Expr:
    """``sum c*step**(-w)*value`` with a power that all terms share in front."""
    if not terms:
        return S.Zero
    step = terms[0][0]
    if any(other != step for other, _, _ in terms):
        return Add(*(c * _power(d, w) * v for d, c, v in terms))
    return Mul(_power(step, w), Add(*(c * v for _, c, v in terms)))


def _power(step: Expr, w: Expr) -> Expr:
    if step.is_Rational and step.q != 1:
        return Pow(step.q, w) * Pow(step.p, -w)
    return Pow(step, -w)


def _stepped(series: Series, step: Expr, w: Expr, rate: Expr, terms: int) -> Series:
    return series if step is S.One else multiply(series, power_series(step, -w, -rate, terms), terms)


def _added(parts: Sequence[Series], terms: int) -> Series:
    if not parts:
        return Series(0, (S.Zero,) * terms)
    first = min(p.valuation for p in parts)
    return Series(
        first,
        tuple(
            Add(*(p.coefficient(k) for p in parts if k - p.valuation < len(p.coefficients)))
            for k in range(first, first + terms)
        ),
    )


def _merged(rows: Iterable[Row]) -> list[Row]:
    columns: dict[tuple[Expr, Integer, Rational, Expr], list[Expr]] = {}
    for r in rows:
        columns.setdefault((r.z, r.shift, r.step, r.a), []).append(r.coefficient)
    merged = [Row(*key, Add(*column)) for key, column in columns.items()]
    merged = [r._replace(coefficient=r.coefficient.expand()) if r.coefficient.is_Add else r for r in merged]
    return [r for r in merged if r.coefficient is not S.Zero]


def _halved(rows: list[Row]) -> list[Row]:
    """``Phi(1, w, a) + Phi(-1, w, a)`` is twice its even half, a zeta function at a/2; likewise the odd."""
    by_place = {(r.z, r.step, r.a): r for r in rows if r.z in (S.One, S.NegativeOne)}
    result: list[Row] = []
    used: set[Row] = set()
    for r in rows:
        if r in used:
            continue
        other = by_place.get((-r.z, r.step, r.a))
        sign = None if other is None else S.One if other.coefficient == r.coefficient else S.NegativeOne
        if other is None or other.coefficient not in (r.coefficient, -r.coefficient):
            result.append(r)
            continue
        used.add(other)
        plain = r if r.z is S.One else other
        start = r.a / 2 if sign is S.One else (r.a + 1) / 2
        # the row keeps (2*step)**(-w): its coefficient is for w = u - shift already
        result.append(Row(S.One, r.shift, 2 * r.step, start.expand(), 2 * plain.coefficient))
    return result


__all__ = ["Combination", "Row"]
