"""Quadrature rules on one piece: tanh-sinh where an end may be singular, Fejer's rule where nothing is.

Takahasi and Mori, Publ. RIMS 9 (1974), for the double exponential rule; Waldvogel, BIT 46 (2006), for
Fejer's.
"""
from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

from mpmath import mp

from .functions import Number

# beyond this the distance to the end is below 1e-9000: a slower decay counts as divergence or near it
_LARGEST_T = 9.5
# never stop before this, so that a piece whose mass sits at an end is not taken for nothing
_SMALLEST_T = 3
# from here on a missing decay shows
_CLEAR_T = 4.5


class OutOfTime(Exception):
    """The time budget of the quadrature is used up."""


@dataclass
class Piece:
    """Integral over one piece, its error estimate, and why it is not to be trusted (empty if it is)."""

    value: Number
    error: Number
    trouble: str = ""

    def __add__(self, other: Piece) -> Piece:
        return Piece(self.value + other.value, self.error + other.error, self.trouble or other.trouble)


class Diverges(Exception):
    """The integrand does not decay at an end: the integral has no finite value."""


class SlowEnd(Exception):
    """The integrand decays too slowly at an end for the rule."""


def tanh_sinh(near: tuple[Callable[[Number], Number], Callable[[Number], Number]], length: Number,
              tolerance: Number, levels: int = 5) -> Piece:
    """Integral over a piece of the given length.

    `near[0](d)` and `near[1](d)` are the integrand at distance `d` from the left and the right end, so that
    nothing is lost by subtraction. An end where the integrand times the distance does not vanish raises
    `Diverges`.
    """
    def term(t: Number) -> Number:
        q = mp.exp(-mp.pi * mp.sinh(abs(t)))
        value = near[0 if t < 0 else 1](length * q / (1 + q))
        return value * length * mp.pi * mp.cosh(t) * q / (1 + q) ** 2

    step = mp.mpf(1) / 2
    total = term(mp.zero)
    bounds = []
    for direction in (-1, 1):
        part, bound = _outwards(term, direction * step, tolerance)
        total += part
        bounds.append(bound)
    sums = [total * step]
    for _ in range(levels):
        step /= 2
        for direction, bound in zip((-1, 1), bounds, strict=True):
            k = 1
            while k * step <= bound:
                total += term(direction * k * step)
                k += 2
        sums.append(total * step)
        error = _error(sums)
        if error <= tolerance:
            return Piece(sums[-1], error)
    return Piece(sums[-1], abs(sums[-1] - sums[-2]), "slow convergence")


def _outwards(term: Callable[[Number], Number], step: Number, tolerance: Number) -> tuple[Number, Number]:
    """Sum of the terms at step, 2*step, ... until they are negligible, and where that happened."""
    total, small, growing, k = mp.zero, 0, 0, 1
    last: Number = None
    while small < 3 or abs(k * step) < _SMALLEST_T:
        t = k * step
        value = term(t)
        total += value
        small = small + 1 if abs(value) <= tolerance / 1000 else 0
        if abs(t) > _LARGEST_T:
            raise Diverges if abs(value) >= abs(last) else SlowEnd
        if abs(t) > _CLEAR_T:
            # without any decay the terms grow like cosh(t)
            steady = abs(value) >= abs(last) * mp.cosh(t) / mp.cosh(t - step) * mp.mpf("0.99")
            growing = growing + 1 if steady and value else 0
            if growing == 3:
                raise Diverges
        last, k = value, k + 1
    return total, abs(k * step)


def _error(sums: list[Number]) -> Number:
    """Error of the last sum from the last three, as the number of digits doubles with each level."""
    last = abs(sums[-1] - sums[-2])
    if len(sums) < 3 or last == 0:
        return last
    before = abs(sums[-2] - sums[-3])
    size = abs(sums[-1]) or mp.one
    if last >= before or before >= size:
        return last
    d1, d2 = mp.log(last / size), mp.log(before / size)
    # a cautious share of the doubling: exponent 1.6 instead of 2
    return size * mp.exp(max(d1 * d1 / d2, mp.mpf("1.6") * d1))


@lru_cache(maxsize=32)
def _fejer(count: int, precision: int) -> tuple[list[Number], list[Number], list[list[Number]]]:
    """Nodes on (-1, 1), weights, and the rows that give the last three Chebyshev coefficients."""
    with mp.workprec(precision):
        angles = [(2 * k + 1) * mp.pi / (2 * count) for k in range(count)]
        weights = []
        for angle in angles:
            series = mp.fsum(mp.cos(2 * j * angle) / (4 * j * j - 1) for j in range(1, (count - 1) // 2 + 1))
            weights.append(2 * (1 - 2 * series) / count)
        rows = [[2 * mp.cos(j * angle) / count for angle in angles] for j in range(count - 3, count)]
        return [mp.cos(angle) for angle in angles], weights, rows


def fejer(f: Callable[[Number], Number], a: Number, b: Number, tolerance: Number, count: int,
          depth: int = 14) -> Piece:
    """Integral over (a, b) of a function smooth on [a, b]; halved where the series does not settle."""
    nodes, weights, rows = _fejer(count, mp.prec)
    middle, half = (a + b) / 2, (b - a) / 2
    values = [f(middle + half * node) for node in nodes]
    tail = max(abs(mp.fdot(row, values)) for row in rows) * half
    if tail <= tolerance or depth == 0:
        return Piece(half * mp.fdot(weights, values), tail, "" if tail <= tolerance else "slow convergence")
    return (fejer(f, a, middle, tolerance, count, depth - 1)
            + fejer(f, middle, b, tolerance, count, depth - 1))
