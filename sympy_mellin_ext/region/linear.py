"""Exact linear algebra over the rationals: consistency of linear inequalities.

Everything is homogeneous: the constant term is one more coordinate, with the row ``constant > 0`` added.
Then a system is contradictory iff a non-negative combination of its rows, with a strict row among them,
vanishes (Motzkin's transposition theorem; Schrijver, *Theory of Linear and Integer Programming*, 7.8).
Whether one exists is decided by the simplex method with Bland's rule, in integers.
"""

from collections.abc import Collection, Hashable, Iterable, Mapping
from fractions import Fraction
from math import gcd, lcm
from typing import Generic, TypeVar

Rational = int | Fraction
Row = dict[int, int]
Key = TypeVar("Key", bound=Hashable)


def integral(row: Mapping[Key, Rational]) -> dict[Key, int]:
    """The positive multiple of a row that has coprime integer entries.

    Examples
    ========

    >>> from fractions import Fraction
    >>> integral({'x': Fraction(1, 2), 'y': Fraction(3, 4)})
    {'x': 2, 'y': 3}
    """
    values = list(row.values())
    common = 1
    for value in values:
        if type(value) is not int:
            common = lcm(common, value.denominator)
    scaled = [int(value * common) for value in values] if common > 1 else [int(value) for value in values]
    divisor = gcd(*scaled)
    if divisor > 1:
        scaled = [value // divisor for value in scaled]
    return dict(zip(row, scaled, strict=True))


def consistent(rows: Iterable[tuple[Row, bool]]) -> bool:
    """Whether some point satisfies every row > 0 (flag true) and row >= 0 (flag false).

    Examples
    ========

    >>> consistent([({0: 1, 1: -1}, True), ({1: 1, 0: -1}, True)])      # x > y and y > x
    False
    >>> consistent([({0: 1, 1: -1}, False), ({1: 1, 0: -1}, False)])    # x >= y and y >= x
    True
    """
    live = list(rows)
    while True:
        raised: set[int] = set()
        lowered: set[int] = set()
        for row, _ in live:
            for key, value in row.items():
                (raised if value > 0 else lowered).add(key)
        free = raised ^ lowered
        if not free:
            break
        # A coordinate with entries of one sign can be taken so large that its rows hold whatever the rest is.
        live = [pair for pair in live if free.isdisjoint(pair[0])]
    if not any(strict for _, strict in live):
        return True
    if any(strict and not row for row, strict in live):
        return False
    return not _vanishing_combination([row for row, _ in live], [strict for _, strict in live])


def _vanishing_combination(rows: list[Row], strict: list[bool]) -> bool:
    """Whether sum(m[j]*rows[j]) = 0 for some m >= 0 with sum(m[j] for the strict rows) = 1."""
    count = len(rows)
    keys = sorted({key for row in rows for key in row})
    table = [[row.get(key, 0) for row in rows] + [0] for key in keys]
    table.append([int(flag) for flag in strict] + [1])
    # First phase: minimise the sum of the artificial variables, one an equation, numbered -1, -2, ... Once
    # they have left they never come back, so that no columns are kept for them.
    basis = [-1 - i for i in range(len(table))]
    cost = [-sum(column) for column in zip(*table, strict=True)]
    scale = 1
    while cost[count]:
        entering = next((j for j in range(count) if cost[j] < 0), None)
        if entering is None:
            return False
        leaving = -1
        for i, line in enumerate(table):
            if line[entering] > 0:
                if leaving < 0:
                    leaving = i
                    continue
                best = table[leaving]
                order = line[count] * best[entering] - best[count] * line[entering]
                if order < 0 or (order == 0 and basis[i] < basis[leaving]):
                    leaving = i
        pivot_line = table[leaving]
        pivot = pivot_line[entering]
        for i, line in enumerate(table):
            if i != leaving:
                table[i] = _eliminated(line, pivot_line, entering, pivot, scale)
        cost = _eliminated(cost, pivot_line, entering, pivot, scale)
        basis[leaving] = entering
        scale = pivot
    return True


def _eliminated(line: list[int], pivot_line: list[int], column: int, pivot: int, scale: int) -> list[int]:
    """One row of an integer-preserving pivot: every entry is a minor, so that the division is exact."""
    factor = line[column]
    if not factor:
        return line if pivot == scale else [x * pivot // scale for x in line]
    return [(x * pivot - factor * y) // scale for x, y in zip(line, pivot_line, strict=True)]


class System(Generic[Key]):
    """A conjunction of rows ``form > 0`` (flag true) or ``form >= 0``, over any hashable coordinates.

    Parameters
    ==========

    rows : pairs (mapping from coordinate to rational coefficient, strict flag)
    constant : the coordinate that stands for the number 1
    derived : for the number of a row, the numbers of those that were derived from it

    Examples
    ========

    >>> system = System([({'s': 1, '': -1}, True)], '')         # s > 1
    >>> system.proves({'s': 1}, True), system.proves({'s': 1, '': -2}, True)
    (True, False)
    """

    __slots__ = ("_derived", "_index", "_rows")

    def __init__(
        self,
        rows: Iterable[tuple[Mapping[Key, Rational], bool]],
        constant: Key,
        derived: Mapping[int, Collection[int]] | None = None,
    ) -> None:
        self._index: dict[Key, int] = {constant: 0}
        self._rows: list[tuple[Row, bool]] = [(self._numbered(form), strict) for form, strict in rows]
        self._derived = derived or {}

    def _numbered(self, form: Mapping[Key, Rational], sign: int = 1) -> Row:
        index = self._index
        return {index.setdefault(key, len(index)): sign * value for key, value in integral(form).items()}

    def consistent(self) -> bool:
        """Whether the rows can hold together."""
        return consistent([*self._rows, ({0: 1}, True)])

    def proves(self, form: Mapping[Key, Rational], strict: bool, without: Collection[int] = ()) -> bool:
        """Whether the rows imply form > 0, or form >= 0 if not strict.

        The rows numbered ``without``, and what was derived from them, are left out.
        """
        rows = self._rows
        if without:
            left_out = {other for number in without for other in (number, *self._derived.get(number, ()))}
            rows = [row for number, row in enumerate(rows) if number not in left_out]
        return not consistent([*rows, ({0: 1}, True), (self._numbered(form, -1), not strict)])
