"""Two-term recurrences of an element of a differential tower: ``A(theta) f + x**m B(theta) f = 0``.

With ``theta = x*d/dx`` such an equation says ``A(n+m)*c(n+m) = -B(n)*c(n)`` for a power series and
``A(-s)*F(s) + B(-s-m)*F(s+m) = 0`` for a Mellin transform.  Equations of higher order than the minimal one
count too: ``exp(-x)*sin(x)`` has order 2, its two-term equation order 4.

Source: W. Koepf, Power series in computer algebra, J. Symb. Comp. 13 (1992), sections 2-4 (equations of
hypergeometric type); the search by undetermined coefficients is common practice.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sympy import Expr, Poly, S, Symbol, sqrt
from sympy.polys.matrices import DomainMatrix
from sympy.polys.rings import PolyElement

from .jets import PRIME, independent_rows, modulo
from .tower import Element, Tower

_HIGHEST_DEGREE = 24


@dataclass(frozen=True)
class Recurrence:
    """``A(theta) f + x**step * B(theta) f = 0`` with the roots of A and B (with multiplicity).

    ``ratio`` is the quotient of the leading coefficients of A and B.
    """

    step: int
    left: tuple[Expr, ...]
    right: tuple[Expr, ...]
    ratio: Expr
    equation: Expr


def two_term(tower: Tower, f: Element, theta: Symbol, order: int, step: int) -> Recurrence | None:
    """The two-term equation of this order and step (see `shape_of`), proved exactly, or None."""
    derivatives = [f]
    for _ in range(order):
        derivative = tower.derive(derivatives[-1])
        derivatives.append({m: tower.X * c for m, c in derivative.items()})
    rows = _rows(derivatives)
    if rows is None:
        return None
    numeric = [[_modular(c) for c in row] for row in rows]
    pivots = independent_rows(_matrix(rows, numeric, step))
    return None if pivots is None else _solved(tower, rows, step, pivots, theta)


def _rows(derivatives: Sequence[Element]) -> list[list[dict[int, PolyElement]]] | None:
    """For each monomial: numerators over a common denominator, by powers of ``x``, one a derivative."""
    rows = []
    for monomial in sorted({m for v in derivatives for m in v}):
        entries = [v.get(monomial) for v in derivatives]
        denominators = [c.denom for c in entries if c is not None]
        common = denominators[0]
        for denominator in denominators[1:]:
            common = common.lcm(denominator)
        row = []
        for c in entries:
            split: dict[int, PolyElement] = {}
            if c is not None:
                numerator = c.numer * common.exquo(c.denom)
                for exponents, coefficient in numerator.terms():
                    if exponents[0] > _HIGHEST_DEGREE:
                        return None
                    rest = numerator.ring({(0, *exponents[1:]): coefficient})
                    split[exponents[0]] = split.get(exponents[0], numerator.ring.zero) + rest
            row.append(split)
        rows.append(row)
    return rows


def _modular(split: dict[int, PolyElement]) -> dict[int, int]:
    return {
        power: sum(modulo(int(c.numerator), int(c.denominator), e[1:]) for e, c in polynomial.terms()) % PRIME
        for power, polynomial in split.items()
    }


def _positions(rows: list, step: int) -> list[tuple[int, int]]:
    """The equations: a monomial and a power of ``x`` each."""
    return [
        (i, power)
        for i, row in enumerate(rows)
        for power in sorted({p for split in row for p in split} | {p + step for split in row for p in split})
    ]


def _matrix(rows: list, numeric: list, step: int) -> list[list[int]]:
    matrix = []
    for i, power in _positions(rows, step):
        row = numeric[i]
        matrix.append([s.get(power, 0) for s in row] + [s.get(power - step, 0) for s in row])
    return matrix


def _solved(tower: Tower, rows: list, step: int, pivots: list[int], theta: Symbol) -> Recurrence | None:
    """The null vector over Q(parameters) from the independent rows, checked on all the others."""
    ring = tower.K.ring
    domain = tower.K.to_domain()

    def exact(position: tuple[int, int]) -> list[PolyElement]:
        i, power = position
        row = rows[i]
        zero = ring.zero
        return [s.get(power, zero) for s in row] + [s.get(power - step, zero) for s in row]

    positions = _positions(rows, step)
    chosen = [[tower.K(c) for c in exact(positions[p])] for p in pivots]
    size = len(chosen[0])
    null = DomainMatrix(chosen, (len(chosen), size), domain).nullspace().to_list()
    if len(null) != 1:
        return None
    vector = [tower.K(v) for v in null[0]]
    for number, position in enumerate(positions):
        if number not in pivots:
            total = tower.K.zero
            for v, c in zip(vector, exact(position), strict=True):
                if v and c:
                    total += v * c
            if total:
                return None
    half = size // 2
    a = sum((tower.to_expr(c) * theta**i for i, c in enumerate(vector[:half]) if c), S.Zero)
    b = sum((tower.to_expr(c) * theta**i for i, c in enumerate(vector[half:]) if c), S.Zero)
    if a is S.Zero or b is S.Zero:
        return None
    left, right = linear_roots(a, theta), linear_roots(b, theta)
    if left is None or right is None:
        return None
    ratio = left[0] / right[0]
    if not ratio.is_Number:
        ratio = ratio.cancel()
    return Recurrence(step, left[1], right[1], ratio, a + Symbol(tower.x.name) ** step * b)


def linear_roots(a: Expr, theta: Symbol) -> tuple[Expr, tuple[Expr, ...]] | None:
    """Leading coefficient and roots of a polynomial that splits into linear and quadratic factors."""
    content, parts = Poly(a, theta).factor_list()
    lead, roots = content, []
    for part, multiplicity in parts:
        coefficients = part.all_coeffs()
        lead = lead * coefficients[0] ** multiplicity
        if part.degree() == 1:
            roots += [_tidy(-coefficients[1] / coefficients[0])] * multiplicity
        elif part.degree() == 2:
            p, q, r = coefficients
            middle, gap = -q / (2 * p), sqrt(_tidy((q**2 - 4 * p * r) / (4 * p**2)))
            roots += [_tidy(middle + gap), _tidy(middle - gap)] * multiplicity
        else:
            return None
    return lead, tuple(sorted(roots, key=str))


def _tidy(value: Expr) -> Expr:
    return value if value.is_Number or value.is_Symbol else value.expand()
