"""Summation theorems for 3F2 at one (DLMF 16.4)."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import permutations
from typing import Any

from sympy import Integer, S, gamma, pi

from .signature import as_int, is_nonpositive_int, power

Params = tuple[Any, ...]


def orders(upper: Params, lower: Params) -> Iterator[tuple[Params, Params]]:
    """All distinct orders of both parameter lists."""
    ups = list(dict.fromkeys(permutations(upper)))
    lows = list(dict.fromkeys(permutations(lower)))
    for u in ups:
        for v in lows:
            yield u, v


def _quotient(top: Params, bottom: Params) -> Any:
    if any(is_nonpositive_int(t) for t in top):
        return None
    result: Any = S.One
    for t in top:
        result *= gamma(t)
    for b in bottom:
        if is_nonpositive_int(b):
            return S.Zero
        result /= gamma(b)
    return result


def dixon(u: Params, v: Params) -> Any:
    """3F2(a, b, c; 1+a-b, 1+a-c; 1): DLMF 16.4.4."""
    a, b, c = u
    if as_int(v[0] - a + b) != 1 or as_int(v[1] - a + c) != 1 or (a / 2 - b - c).is_extended_real is None:
        return None
    gap = 1 + a / 2 - b - c
    if gap.is_nonpositive:
        return None
    return _quotient((1 + a / 2, gap, v[0], v[1]), (1 + a, 1 + a - b - c, 1 + a / 2 - b, 1 + a / 2 - c))


def watson(u: Params, v: Params) -> Any:
    """3F2(a, b, c; (a+b+1)/2, 2*c; 1): DLMF 16.4.6."""
    a, b, c = u
    if as_int(2 * v[0] - a - b) != 1 or as_int(v[1] - 2 * c) != 0:
        return None
    half = S.Half
    gap = c + (1 - a - b) / 2
    if gap.is_nonpositive:
        return None
    found = _quotient(
        (half, c + half, v[0], gap), ((a + 1) / 2, (b + 1) / 2, c + (1 - a) / 2, c + (1 - b) / 2)
    )
    return found


def whipple(u: Params, v: Params) -> Any:
    """3F2(a, 1-a, c; d, 1+2*c-d; 1): DLMF 16.4.7."""
    a, b, c = u
    d = v[0]
    if as_int(a + b) != 1 or as_int(v[0] + v[1] - 2 * c) != 1:
        return None
    if c.is_nonpositive:
        return None
    found = _quotient(
        (d, 1 + 2 * c - d), ((a + d) / 2, (a + 1 + 2 * c - d) / 2, (1 - a + d) / 2, 1 + c - (a + d) / 2)
    )
    return None if found is None else pi * power(Integer(2), 1 - 2 * c) * found
