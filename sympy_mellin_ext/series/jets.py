"""A quick look for the shape of a two-term equation: arithmetic modulo a prime at a random point.

Elements of the coefficient field are replaced by their Taylor polynomials at a random point, parameters by
random numbers, all modulo a prime.  What is found here is solved exactly afterwards; what is not found does
not exist, up to a chance of about 1e-8.

Source: common practice (probabilistic zero test by evaluation modulo a prime).
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from sympy import Expr, Symbol

from .tower import Element, Tower

HIGHEST_ORDER = 4
_LONGEST_STEP = 6
_MOST_MONOMIALS = 14
# A prime below 2**31.
PRIME = 2147483629
_POINT = 179424673
_PARAMETERS = (104729, 1299709, 15485863, 32452843, 86028121)
# Coefficients per monomial: more than the unknowns, and one is lost with each derivative.
_LENGTH = 2 * (HIGHEST_ORDER + 1) + 1 + HIGHEST_ORDER


class Jet:
    """A Taylor polynomial modulo the prime; as precise as the less precise operand."""

    __slots__ = ("c",)

    def __init__(self, c: tuple[int, ...]) -> None:
        self.c = c

    def __bool__(self) -> bool:
        return any(self.c)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Jet) and self.c == other.c

    def __hash__(self) -> int:
        return hash(self.c)

    def __add__(self, other: Jet) -> Jet:
        return Jet(tuple((a + b) % PRIME for a, b in zip(self.c, other.c, strict=False)))

    def __neg__(self) -> Jet:
        return Jet(tuple(-a % PRIME for a in self.c))

    def __mul__(self, other: Jet) -> Jet:
        a, b = self.c, other.c
        return Jet(
            tuple(sum(a[i] * b[n - i] for i in range(n + 1)) % PRIME for n in range(min(len(a), len(b))))
        )

    def __rmul__(self, number: int) -> Jet:
        return Jet(tuple(number * a % PRIME for a in self.c))

    def __rtruediv__(self, number: int) -> Jet:
        lead = pow(self.c[0], -1, PRIME)
        result: list[int] = []
        for n in range(len(self.c)):
            total = -sum(self.c[i] * result[n - i] for i in range(1, n + 1)) + (number if n == 0 else 0)
            result.append(total * lead % PRIME)
        return Jet(tuple(result))

    def __truediv__(self, other: Jet) -> Jet:
        return self * (1 / other)

    def diff(self, _: Jet) -> Jet:
        return Jet(tuple(n * a % PRIME for n, a in enumerate(self.c))[1:])


class JetField:
    """Stands in for the rational functions of a tower."""

    def __init__(self, parameters: int) -> None:
        rest = (0,) * (_LENGTH - 1)
        self.zero, self.one = Jet((0, *rest)), Jet((1, *rest))
        variable = Jet((_POINT, 1, *rest[1:]))
        self.gens = (variable, *(Jet((p, *rest)) for p in _PARAMETERS[:parameters]))

    def __call__(self, number: Any) -> Jet:
        if isinstance(number, Jet):
            return number
        if isinstance(number, int):
            return number * self.one
        return int(number.numerator) * pow(int(number.denominator), -1, PRIME) * self.one


def shape_of(f: Expr, x: Symbol, constants: list[Expr]) -> tuple[int, int] | None:
    """Order and step of the two-term equation of lowest order, then of smallest step; None if there is none.

    Raises
    ------
    Unknown
        Where the tower does not hold ``f``.
    """
    tower = Tower(x, constants, JetField(len(constants)))
    try:
        derivatives = [tower.element(f)]
        for order in range(1, HIGHEST_ORDER + 1):
            derivative = tower.derive(derivatives[-1])
            derivatives.append({m: tower.X * c for m, c in derivative.items()})
            monomials = sorted({m for v in derivatives for m in v})
            if len(monomials) > _MOST_MONOMIALS:
                return None
            step = _step(derivatives, monomials)
            if step is not None:
                return order, step
    except ValueError:
        # a denominator that vanishes modulo the prime has no inverse
        return None
    return None


def _step(derivatives: Sequence[Element], monomials: list) -> int | None:
    """The smallest step of an equation of this order."""
    plain, moved = [], []
    size = _LENGTH - len(derivatives) + 1
    for monomial in monomials:
        columns = [v[monomial].c[:size] if monomial in v else (0,) * size for v in derivatives]
        plain.append(list(zip(*columns, strict=True)))
        moved.append(columns)
    for step in range(1, _LONGEST_STEP + 1):
        moved = [[_times_x(c) for c in columns] for columns in moved]
        rows = [
            [*a, *b]
            for first, second in zip(plain, moved, strict=True)
            for a, b in zip(first, zip(*second, strict=True), strict=True)
        ]
        if independent_rows(rows) is not None:
            return step
    return None


def _times_x(c: tuple[int, ...]) -> tuple[int, ...]:
    return tuple((_POINT * a + b) % PRIME for a, b in zip(c, (0, *c), strict=False))


def independent_rows(matrix: Sequence[list[int]]) -> list[int] | None:
    """Row numbers of a maximal independent set if the null space is one line, else None."""
    size = len(matrix[0])
    echelon: list[tuple[int, list[int]]] = []
    chosen = []
    for number, source in enumerate(matrix):
        row = source
        for column, pivot in echelon:
            factor = row[column]
            if factor:
                row = [(a - factor * b) % PRIME for a, b in zip(row, pivot, strict=True)]
        lead = next((j for j, a in enumerate(row) if a), None)
        if lead is None:
            continue
        scale = pow(row[lead], -1, PRIME)
        echelon.append((lead, [a * scale % PRIME for a in row]))
        chosen.append(number)
        if len(chosen) == size:
            return None
    return chosen if len(chosen) == size - 1 else None


def modulo(numerator: int, denominator: int, exponents: Sequence[int]) -> int:
    """A monomial in the parameters at their random values."""
    value = numerator * pow(denominator, -1, PRIME)
    for base, e in zip(_PARAMETERS, exponents, strict=False):
        value = value * pow(base, e, PRIME) % PRIME
    return value % PRIME
