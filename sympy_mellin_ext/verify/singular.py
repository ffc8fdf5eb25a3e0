"""Points inside the range where the integrand jumps, has a pole or a branch point."""
from __future__ import annotations

from collections.abc import Iterator, Mapping
from itertools import combinations, pairwise
from typing import Any

from mpmath import mp
from sympy import (
    Abs,
    Expr,
    Heaviside,
    Max,
    Min,
    Piecewise,
    Pow,
    Symbol,
    acos,
    acosh,
    asin,
    atanh,
    cos,
    cot,
    csc,
    elliptic_k,
    hyper,
    log,
    meijerg,
    polylog,
    preorder_traversal,
    sec,
    sign,
    sin,
    tan,
)
from sympy.core.relational import Relational

from .functions import Number
from .numeric import NUMERIC_ERRORS, as_number, compiled

# a singular point must be known far beyond the distances at which the rules sample
MARK_DIGITS = 400


def _suspects(expr: Expr, x: Symbol) -> Iterator[Expr]:
    """Expressions whose zeros are the candidates."""
    for node in preorder_traversal(expr):
        if not getattr(node, "args", ()) or not node.has(x):
            continue
        if isinstance(node, (Heaviside, Abs, sign, log)):
            yield node.args[0]
        elif isinstance(node, Pow):
            if not (node.exp.is_integer and node.exp.is_nonnegative):
                yield node.base
        elif isinstance(node, (Max, Min)):
            yield from (p - q for p, q in combinations(node.args, 2))
        elif isinstance(node, Piecewise):
            for _, condition in node.args:
                yield from (r.lhs - r.rhs for r in sorted(condition.atoms(Relational), key=str))
        elif isinstance(node, (acos, acosh, asin, atanh)):
            yield from (1 - node.args[0], 1 + node.args[0])
        elif isinstance(node, (tan, sec)):
            yield cos(node.args[0])
        elif isinstance(node, (cot, csc)):
            yield sin(node.args[0])
        elif isinstance(node, elliptic_k):
            yield 1 - node.args[0]
        elif isinstance(node, polylog):
            yield 1 - node.args[1]
        elif isinstance(node, hyper) and len(node.args[0]) == len(node.args[1]) + 1:
            yield 1 - node.args[2]
        elif isinstance(node, meijerg) and len(node.ap) == len(node.bq):
            yield from (1 - node.argument, 1 + node.argument)


def marks(expr: Expr, x: Symbol, point: Mapping[Symbol, Any], low: Number, high: Number) -> list[Number]:
    """Singular points strictly between `low` and `high`, ascending, to `MARK_DIGITS` digits."""
    found: list[Number] = []
    seen = set()
    for suspect in _suspects(expr, x):
        if suspect in seen or suspect == x or suspect.is_positive or not suspect.has(x):
            continue
        seen.add(suspect)
        for zero in _zeros(suspect, x, point, low, high):
            if all(abs(zero - other) > 1e-30 * abs(zero) for other in found):
                found.append(zero)
    return sorted(found)


def _zeros(suspect: Expr, x: Symbol, point: Mapping[Symbol, Any], low: Number, high: Number) -> list[Number]:
    names = sorted(suspect.free_symbols - {x}, key=str)
    f = compiled(suspect, [x, *names])

    def value(t: Number) -> Number:
        result = mp.mpmathify(f(t, *[as_number(point[n]) for n in names]))
        return mp.re(result) if abs(mp.im(result)) <= 1e-12 * abs(result) else mp.nan

    result = []
    with mp.workdps(20):
        grid = [t for t in _grid(low, high) if low < t < high]
        signs: list[tuple[Number, Number]] = []
        for t in grid:
            try:
                signs.append((t, value(t)))
            except NUMERIC_ERRORS:
                continue
    for (t, ft), (u, fu) in pairwise(signs):
        if ft == 0 or ft * fu < 0:
            with mp.workdps(MARK_DIGITS):
                try:
                    zero = t if ft == 0 and value(t) == 0 else mp.findroot(value, (t, u), solver="anderson",
                                                                           tol=mp.mpf(10) ** (-MARK_DIGITS))
                except NUMERIC_ERRORS:
                    continue
                if low < zero < high:
                    result.append(zero)
    return result


def _grid(low: Number, high: Number) -> list[Number]:
    """Sample points, dense near the ends and on a logarithmic scale towards infinity."""
    if mp.isinf(high):
        return [low + mp.mpf("1.0137") * mp.mpf(2) ** (mp.mpf(k) / 4) for k in range(-100, 101)]
    width = high - low
    middle = [low + width * (k + mp.mpf("0.4137")) / 60 for k in range(60)]
    ends = [width * mp.mpf(2) ** (-k) for k in range(6, 40)]
    return sorted({*middle, *(low + e for e in ends), *(high - e for e in ends)})
