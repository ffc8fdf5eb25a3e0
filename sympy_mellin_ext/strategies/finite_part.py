"""Sums of pieces: the finite part of the total transform, and the exact place where the total converges.

Each piece's transform, continued analytically, is its transform in the regularised sense (a pure power has
transform 0).  The total converges iff no term of the total expansions at 0 and at oo spoils it; then the
integral is the sum of the finite parts, since the poles cancel.

Source: D. Zagier, The Mellin transform and related analytic techniques (2006), section 1.
"""
from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

from sympy import Add, Expr, S, bernoulli, factorial, log

from ..gamma.laurent import Series, exponential, linear_series, multiply
from ..gamma.shortest import collect_powers, positive_power
from ..gamma.sums import shortest_sum
from ..pieces import Piece
from ..region import Facts, Region, real_part

# So many rungs may cancel at one end before we give up looking for a survivor.
_MOST_CANCELLED = 40


@dataclass
class Edge:
    """What survives of the total expansion at one end, and the exponents at which everything cancels."""

    survivors: list[Expr] = field(default_factory=list)
    cancelled: list[Expr] = field(default_factory=list)


@dataclass
class _Pointer:
    piece: int
    ladder: Iterator[Expr]
    exponent: Expr | None

    def advance(self) -> None:
        self.exponent = next(self.ladder, None)


def edge(pieces: Sequence[Piece], end: int, facts: Facts) -> Edge | None:
    """Expand the total at 0 (``end=+1``) or oo (``end=-1``) to its first surviving terms.

    None if the number of cancelled terms exceeds all bounds.
    """
    pointers: list[_Pointer] = []
    for i, piece in enumerate(pieces):
        for ladder in piece.rungs(end):
            pointer = _Pointer(i, ladder, None)
            pointer.advance()
            pointers.append(pointer)
    result = Edge()
    settled: dict[Expr, frozenset[int]] = {}
    for _ in range(_MOST_CANCELLED * max(1, len(pieces))):
        groups: dict[Expr, list[_Pointer]] = {}
        for pointer in pointers:
            if pointer.exponent is not None:
                groups.setdefault(pointer.exponent, []).append(pointer)
        moved = False
        for exponent, group in groups.items():
            members = frozenset(p.piece for p in group)
            if settled.get(exponent) == members:
                continue
            if _survives(exponent, [pieces[i] for i in sorted(members)], end):
                settled[exponent] = members
                continue
            settled.pop(exponent, None)
            result.cancelled.append(exponent)
            for pointer in group:
                pointer.advance()
            moved = True
        if not moved:
            result.survivors = list(groups)
            return result
    return None


def _survives(exponent: Expr, pieces: list[Piece], end: int) -> bool:
    if len(pieces) == 1 and pieces[0].plain:
        return pieces[0].has_pole(exponent)
    totals: list[list[Expr]] = []
    for piece in pieces:
        for j, c in enumerate(piece.coefficients(exponent, end)):
            while len(totals) <= j:
                totals.append([])
            totals[j].append(c)
    return any(not vanishes(Add(*column)) for column in totals)


def vanishes(total: Expr) -> bool:
    """Exact zero test for the small expressions that coefficients are; False when it cannot be shown."""
    if total is S.Zero:
        return True
    expanded = total.expand(func=True)
    if expanded is S.Zero:
        return True
    if expanded.is_number:
        return bool(expanded.equals(0))
    if not expanded.is_Add:
        return False
    return expanded.together().as_numer_denom()[0].expand() is S.Zero


class Divergence(NamedTuple):
    """Why a sum has no integral: ``reason`` as in a refusal, and oo or -oo where it diverges to that."""

    reason: str
    proved: bool = False
    infinity: Expr | None = None


def converge(
    pieces: Sequence[Piece], facts: Facts, principal: bool = False
) -> tuple[Region, Edge, Edge] | Divergence:
    """The region where the integral over (0, oo) of the sum converges, or the reason why there is none."""
    if any(piece.pole_order_inside for piece in pieces) and not poles_cancel(pieces, principal):
        return Divergence("diverges", True)
    region = Region(facts)
    sharp = True  # a sector leaves out its boundary, where the integral may converge all the same
    conditional: dict[int, list[Expr]] = {1: [], -1: []}
    for piece in pieces:
        growth = piece.growth()
        if growth is None:
            return Divergence("growth")
        if growth.condition is not S.true:
            region, sharp = region.holds(growth.condition), False
        if growth.positive is not None:
            region = region.positive(growth.positive)
        if growth.conditional is not None:
            end, exponent = growth.conditional
            conditional[end].append(exponent)
    edges = []
    for end in (1, -1):
        found = edge(pieces, end, facts)
        if found is None:
            return Divergence("diverges")
        found.survivors += conditional[end]
        for exponent in found.survivors:
            region = region.positive(end * (real_part(exponent) + 1))
        edges.append(found)
    if region.empty and not sharp:
        return Divergence("empty region")
    if region.empty:
        return Divergence("diverges", True, _infinity(pieces, edges, conditional))
    return region, edges[0], edges[1]


def _infinity(pieces: Sequence[Piece], edges: list[Edge], conditional: dict[int, list[Expr]]) -> Expr | None:
    """The signed infinity that the total goes to, where the leading terms at the divergent ends agree on it."""
    signs = set()
    for end, found in zip((1, -1), edges, strict=True):
        exponents = found.survivors
        if not all(e.is_number and e.is_real for e in exponents):
            return None
        spoiling = [e for e in exponents if end * (e + 1) <= 0]
        if not spoiling:
            continue
        if conditional[end]:
            return None
        leading = min(spoiling) if end > 0 else max(spoiling)
        columns: dict[int, list[Expr]] = {}
        for piece in pieces:
            for j, c in enumerate(piece.coefficients(leading, end)):
                columns.setdefault(j, []).append(c)
        totals = {j: Add(*column) for j, column in columns.items()}
        top = max((j for j, total in totals.items() if not vanishes(total)), default=None)
        if top is None:
            return None
        sign = totals[top] * (end * -1) ** top  # log(x) is negative near 0
        signs.add(1 if sign.is_positive else -1 if sign.is_negative else 0)
    return {1: S.Infinity, -1: S.NegativeInfinity}.get(signs.pop()) if len(signs) == 1 else None


def poles_cancel(pieces: Sequence[Piece], principal: bool) -> bool:
    """Whether the poles on the half line cancel in the total (or are simple, for a principal value).

    With x = a*exp(y), every piece is ``C*a**p*exp(p*y)*(log(a) + y)**k*(1 - exp(r*y))**(-n)`` near its pole a;
    the principal parts in y of the pieces with one a must add up to nothing.
    """
    parts: dict[Expr, dict[int, list[Expr]]] = {}
    for piece in pieces:
        n = piece.pole_order_inside
        if not n:
            continue
        assert piece.product is not None
        r = piece.ratio
        a = positive_power(piece.product.scale, -1 / r)
        series = linear_series(log(a), S.One, 1, n)
        total = Series(0, exponential([piece.power] + [S.Zero] * n, n))
        for _ in range(piece.logs):
            total = multiply(total, series, n)
        # (1 - exp(r*y))**(-1) = -1/(r*y) * (1 + r*y/2 + ...)**(-1), Bernoulli numbers (DLMF 24.2.1)
        numbers = [S.One, -S.Half, *(bernoulli(j) for j in range(2, n))][:n]
        bernoullis = tuple(b * r**j / factorial(j) for j, b in enumerate(numbers))
        for _ in range(n):
            total = multiply(total, Series(-1, bernoullis, -1 / r), n)
        total = total.times(piece.constant * a**piece.power)
        for order in range(total.valuation, 0):
            parts.setdefault(a, {}).setdefault(order, []).append(total.coefficient(order))
    for orders in parts.values():
        for order, column in orders.items():
            if not (principal and order == -1) and not vanishes(Add(*column)):
                return False
    return True


def total_value(pieces: Sequence[Piece]) -> Expr:
    """The sum of the finite parts."""
    if len(pieces) == 1:
        return collect_powers(pieces[0].value())
    total = Add(*(piece.value() for piece in pieces))
    if any(piece.logs or piece.product is None or piece.pole_order(piece.u) for piece in pieces):
        total = total.expand(log=False, power_base=False, power_exp=False, trig=False)
    return shortest_sum(collect_powers(total))
