"""Rays of one power of x become one factor of a transform, with arguments brought to common ones."""

from __future__ import annotations

from collections.abc import Sequence

from sympy import Add, Expr, Rational, S
from sympy.logic.boolalg import Boolean

from ..kernels.elementary import EXP
from ..matching.waves import Draft
from ..pieces import Piece
from .binomials import commensurable
from .combination import Combination, Row
from .expansion import Expansion, Ray

_MOST_SHIFTED = 40


def gather(expansions: Sequence[Expansion]) -> tuple[list[Piece], list[Draft]]:
    """Pieces Gamma(u)*d**(-u)*(Dirichlet series), and the finite sums of exponentials left over."""
    plain: list[Draft] = []
    groups: dict[tuple[Expr, int, Expr], list[Ray]] = {}
    conditions: dict[tuple[Expr, int, Expr], Boolean] = {}
    for e in expansions:
        if e.rays:
            key = (e.power, e.logs, e.ratio)
            groups.setdefault(key, []).extend(e.rays)
            conditions[key] = conditions.get(key, S.true) & e.condition
    pieces: list[Piece] = []
    for (power, logs, ratio), rays in groups.items():
        families: list[tuple[Expr, list[tuple[Ray, Rational]]]] = []
        for ray in rays:
            for unit, members in families:
                step = commensurable(ray.d, unit)
                if step is not None:
                    members.append((ray, step))
                    break
            else:
                families.append((ray.d, [(ray, S.One)]))
        for unit, members in families:
            smallest = min(step for _, step in members)
            unit = unit * smallest
            rows: dict[tuple[Expr, Expr, Rational, Expr], list[Expr]] = {}
            for ray, step in members:
                rows.setdefault((ray.z, ray.shift, step / smallest, ray.a), []).append(ray.coefficient)
            kept, rest = _aligned(rows, unit, ratio)
            plain.extend(d.times(Draft(power=power, logs=logs)) for d in rest)
            if not kept:
                continue
            constant, kept = _common_front(kept)
            pieces.append(
                Piece(
                    constant,
                    power,
                    logs,
                    EXP.with_scale(unit),
                    ratio,
                    None,
                    (Combination(tuple(kept)),),
                    conditions[power, logs, ratio],
                    True,
                )
            )
    return pieces, plain


def _total(column: Sequence[Expr]) -> Expr:
    if len(column) == 1:
        return column[0]
    return Add(*column).expand()


def _aligned(
    rows: dict[tuple[Expr, Expr, Rational, Expr], list[Expr]], unit: Expr, ratio: Expr
) -> tuple[list[Row], list[Draft]]:
    """Arguments that differ by whole numbers brought to the smallest, rational ones into (0, 1].

    Coefficients come in for weights ``(k + a)**shift``; a row keeps ``(step*(k + a))**shift``.
    """
    plain: list[Draft] = []
    merged: dict[tuple[Expr, Expr, Rational, Expr], list[Expr]] = {}
    heads: dict[tuple[Expr, Expr, Rational], list[Expr]] = {}
    for z, shift, step, a in rows:
        if not a.is_Rational:
            heads.setdefault((z, shift, step), []).append(a)
    for (z, shift, step, a), column in rows.items():
        c = _total(column)
        if c is S.Zero:
            continue
        if a.is_Rational:
            down = int(-((-a) // 1)) - 1
        else:
            down = max(
                (int(n) for other in heads[z, shift, step] if (n := (a - other).expand()).is_Integer),
                default=0,
            )
        if not 0 <= down <= _MOST_SHIFTED:
            down = 0
        start = (a - down).expand() if down else a
        front = c * z ** (-down)
        for k in range(down):
            place = (start + k).expand()
            weight = -front * z**k * place**shift
            plain.append(Draft(coefficient=weight, exponents=((ratio, (-unit * step * place).expand()),)))
        merged.setdefault((z, shift, step, start), []).append(front * step ** (-shift))
    kept = [Row(*key, _total(column)) for key, column in merged.items()]
    return [r for r in kept if r.coefficient is not S.Zero], plain


def _common_front(rows: Sequence[Row]) -> tuple[Expr, list[Row]]:
    """A coefficient that all rows share up to sign comes out."""
    front = rows[0].coefficient
    if front.is_Rational and front.is_negative and len(rows) > 1:
        front = -front
    quotients = [
        S.One if r.coefficient == front else -S.One if r.coefficient == -front else None for r in rows
    ]
    if any(q is None for q in quotients):
        return S.One, list(rows)
    return front, [r._replace(coefficient=q) for r, q in zip(rows, quotients, strict=True) if q is not None]


__all__ = ["gather"]
