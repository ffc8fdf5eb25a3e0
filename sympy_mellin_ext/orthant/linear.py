"""Small exact systems of linear equations."""
from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

from sympy import Expr, Rational


def fraction(q: Expr) -> Fraction:
    return Fraction(int(q.p), int(q.q))


def rational(q: Fraction) -> Rational:
    return Rational(q.numerator, q.denominator)


def particular(rows: Sequence[Sequence[Fraction]], right: Sequence[Fraction]) -> list[Fraction] | None:
    """One solution of ``rows * w = right`` with as many zeros as elimination leaves; None without solution."""
    width = len(rows[0]) if rows else 0
    table = [[*row, r] for row, r in zip(rows, right, strict=True)]
    pivots: list[int] = []
    for column in range(width):
        place = next((i for i in range(len(pivots), len(table)) if table[i][column]), None)
        if place is None:
            continue
        at = len(pivots)
        table[at], table[place] = table[place], table[at]
        _clear(table, at, column)
        pivots.append(column)
    if any(row[width] for row in table[len(pivots) :]):
        return None
    solution = [Fraction(0)] * width
    for row, column in zip(table, pivots, strict=False):
        solution[column] = row[width]
    return solution


def _clear(table: list[list[Fraction]], at: int, column: int) -> None:
    pivot = table[at][column]
    table[at] = [v / pivot for v in table[at]]
    for i, row in enumerate(table):
        if i != at and row[column]:
            factor = row[column]
            table[i] = [v - factor * u for v, u in zip(row, table[at], strict=True)]


def reduced(
    matrix: Sequence[Sequence[Fraction]], columns: Sequence[int]
) -> tuple[list[list[Fraction]], Fraction] | None:
    """``(M, det)``: the inverse M of the square part in these columns, and its determinant; None if singular."""
    n = len(matrix)
    table = [
        [matrix[i][c] for c in columns] + [Fraction(int(i == j)) for j in range(n)] for i in range(n)
    ]
    determinant = Fraction(1)
    for column in range(n):
        place = next((i for i in range(column, n) if table[i][column]), None)
        if place is None:
            return None
        if place != column:
            table[column], table[place] = table[place], table[column]
            determinant = -determinant
        determinant *= table[column][column]
        _clear(table, column, column)
    return [row[n:] for row in table], determinant
