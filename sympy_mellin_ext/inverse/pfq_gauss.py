"""Named forms of 2F1 of argument ``sign*y`` with y > 0 (DLMF 15.4)."""

from __future__ import annotations

from typing import Any

from sympy import (
    Dummy,
    Expr,
    Integer,
    Rational,
    S,
    Symbol,
    acos,
    acosh,
    asin,
    asinh,
    atan,
    atanh,
    cos,
    cosh,
    elliptic_e,
    elliptic_k,
    factor,
    gamma,
    log,
    pi,
    sin,
    sinh,
    sqrt,
)

from .contiguous import contiguous, shifts
from .pfq_confluent import neighbour, polynomial
from .signature import as_int, is_nonpositive_int

HALF = S.Half
THREE_HALVES = Rational(3, 2)


def gauss(a: Expr, b: Expr, c: Expr, sign: int, y: Symbol) -> Expr | None:
    """2F1(a, b; c; sign*y) by name, or None."""
    z = sign * y
    for p, q in ((a, b), (b, a)):
        if as_int(c - p) == 0:
            return (1 - z) ** (-q)
    found = polynomial((a, b), (c,), z)
    if found is not None:
        return found
    found = polynomial((c - a, c - b), (c,), z)
    if found is not None:
        return (1 - z) ** (c - a - b) * found
    for p, q in ((a, b), (b, a)):
        found = _direct(p, q, c, sign, y)
        if found is not None:
            return found
    for p, q in ((a, b), (b, a)):
        for base in _bases(p, q, c):
            moves = shifts((p, q, c), base)
            numeric = all(v.is_Rational for v in base)
            if moves is None or sum(map(abs, moves)) > (8 if numeric else 4):
                continue
            found = _power_neighbour(base, moves, sign, y)
            if found is None:
                found = neighbour(((base[0], base[1]), base[2]), moves, sign, y, _direct(*base, sign, y))
            if found is not None:
                return found
    return None


def _bases(a: Any, b: Any, c: Any) -> list[tuple[Any, Any, Any]]:
    """Rows whose neighbour (a, b; c) may be."""
    kinds = tuple(int(p.q) if p.is_Rational and p.q <= 2 else 0 for p in (a, b, c))
    numeric = {
        (1, 1, 1): (S.One, S.One, Integer(2)),
        (2, 1, 2): (HALF, S.One, THREE_HALVES),
        (2, 2, 2): (HALF, HALF, THREE_HALVES),
        (2, 2, 1): (HALF, HALF, S.One),
        (1, 1, 2): (S.One, S.One, THREE_HALVES),
        (2, 1, 1): (HALF, S.One, Integer(2)),
    }
    if kinds in numeric:
        return [numeric[kinds]]
    rows: list[tuple[Any, Any, Any]] = []
    if kinds[1:] == (1, 1):
        rows.append((a, S.One, Integer(2)))
    if as_int(b - a - HALF) is not None:
        if kinds[2] == 2:
            rows.append((a, a + HALF, HALF))
        rows.append((a, a + HALF, 2 * a + 1))
    if as_int(a + b) is not None and kinds[2] == 2:
        rows.append((a, -a, HALF))
    return rows


def _direct(a: Any, b: Any, c: Any, sign: int, y: Symbol) -> Any:
    """One row of the table: a function of the exact parameters, else None."""
    z = sign * y
    if b - a == HALF:
        found = _half_step(a, c, sign, y)
        if found is not None:
            return found
    total = as_int(a + b)
    if c == HALF and total == 0:  # DLMF 15.4.11-12
        return cosh(2 * a * asinh(sqrt(y))) if sign < 0 else cos(2 * a * asin(sqrt(y)))
    if c == HALF and total == 1:  # DLMF 15.4.13-14
        w = 2 * a - 1
        return cosh(w * asinh(sqrt(y))) / sqrt(1 - z) if sign < 0 else cos(w * asin(sqrt(y))) / sqrt(1 - z)
    if c == THREE_HALVES and total == 1 and a != HALF:  # DLMF 15.4.15-16
        w = 2 * a - 1
        return (sinh(w * asinh(sqrt(y))) if sign < 0 else sin(w * asin(sqrt(y)))) / (w * sqrt(y))
    if c == THREE_HALVES and total == 2 and a != 1:  # DLMF 15.4.16
        w = 2 * a - 2
        top = sinh(w * asinh(sqrt(y))) if sign < 0 else sin(w * asin(sqrt(y)))
        return top / (w * sqrt(y) * sqrt(1 - z))
    if (a, b, c) == (HALF, HALF, THREE_HALVES):  # DLMF 15.4.4-5
        return (asinh(sqrt(y)) if sign < 0 else asin(sqrt(y))) / sqrt(y)
    if (a, b, c) == (1, 1, THREE_HALVES):
        return (asinh(sqrt(y)) if sign < 0 else asin(sqrt(y))) / (sqrt(y) * sqrt(1 - z))
    if (a, b, c) == (1, 1, 2):  # DLMF 15.4.1
        return -log(1 - z) / z
    if (a, b, c) == (HALF, HALF, 1):  # DLMF 19.5.1
        return 2 / pi * elliptic_k(z)
    if (a, b, c) in ((-HALF, HALF, 1), (HALF, -HALF, 1)):  # DLMF 19.5.2
        return 2 / pi * elliptic_e(z)
    if b == 1 and c == 2 and a != 1:
        return (1 - (1 - z) ** (1 - a)) / ((1 - a) * z)
    return None


def _half_step(a: Any, c: Any, sign: int, y: Symbol) -> Any:
    """2F1(a, a+1/2; c; sign*y): DLMF 15.4.2-3, 15.4.7-10, 15.4.17-18."""
    z, r = sign * y, sqrt(y)
    if c == HALF:
        if sign < 0:
            return (1 + y) ** (-a) * cos(2 * a * atan(r))
        return ((1 + r) ** (-2 * a) + (1 - r) ** (-2 * a)) / 2
    if c == THREE_HALVES:
        if a == HALF:
            return (atan(r) if sign < 0 else atanh(r)) / r
        w = 1 - 2 * a
        if sign < 0:
            return (1 + y) ** (w / 2) * sin(w * atan(r)) / (w * r)
        return ((1 + r) ** w - (1 - r) ** w) / (2 * w * r)
    shift = as_int(c - 2 * a)
    if shift == 0:
        return Integer(2) ** (2 * a - 1) * (1 + sqrt(1 - z)) ** (1 - 2 * a) / sqrt(1 - z)
    if shift == 1:
        return Integer(2) ** (2 * a) * (1 + sqrt(1 - z)) ** (-2 * a)
    return None


def _power_neighbour(base: tuple[Any, Any, Any], moves: tuple[int, ...], sign: int, y: Symbol) -> Any:
    """Neighbours of the rows that are sums of powers: their coefficients stay rational in one radical.

    The row is ``sum f_i*G_i`` and its theta is ``sum t_i*G_i``, f_i and t_i rational in the radical r.
    """
    a, b, c = base
    r = Dummy("r", positive=True)
    functions: tuple[Any, ...]
    f: tuple[Any, ...]
    t: tuple[Any, ...]
    if as_int(c - 2 * a) == 1 and b - a == HALF:
        root, argument = sqrt(1 - sign * y), sign * (1 - r**2)
        functions, f, t = (Integer(2) ** (2 * a) * (1 + root) ** (-2 * a),), (S.One,), (a * (1 - r) / r,)
    elif c == HALF and b - a == HALF:
        root, argument = sqrt(y), r**2
        if sign > 0:
            functions, f = ((1 + root) ** (-2 * a), (1 - root) ** (-2 * a)), (HALF, HALF)
            t = (-a * r / (2 * (1 + r)), a * r / (2 * (1 - r)))
        else:
            lead, phase = (1 + y) ** (-a), 2 * a * atan(root)
            functions, f = (lead * cos(phase), lead * sin(phase)), (S.One, S.Zero)
            t = (-a * r**2 / (1 + r**2), -a * r / (1 + r**2))
    elif b == 1 and c == 2 and a != 1:
        root, argument, z = y, r, sign * r
        functions = (S.One, (1 - sign * y) ** (-a))
        f = (1 / ((1 - a) * z), -(1 - z) / ((1 - a) * z))
        t = (-f[0], 1 - f[1])
    else:
        return None
    pair = contiguous((a, b), c, moves, sign, y)
    if pair is None:
        return None
    total: Any = S.Zero
    p, q = (e.xreplace({y: argument}) for e in pair)
    for g, fi, ti in zip(functions, f, t, strict=True):
        total += factor(p * fi + q * ti).xreplace({r: root}) * g
    return total


def at_one(a: Expr, b: Expr, c: Expr) -> Expr | None:
    """Gauss' sum (DLMF 15.4.20); None where it is known to diverge."""
    gap = c - a - b
    if gap.is_nonpositive or is_nonpositive_int(c):
        return None
    return gamma(c) * gamma(gap) / (gamma(c - a) * gamma(c - b))


def at_minus_one(a: Expr, b: Expr, c: Expr) -> Expr | None:
    """Kummer's sum, c = a - b + 1 (DLMF 15.4.26)."""
    for p, q in ((a, b), (b, a)):
        if as_int(c - p + q) == 1 and not is_nonpositive_int(c):
            return gamma(c) * gamma(p / 2 + 1) / (gamma(p + 1) * gamma(c - p / 2))
    return None


def around_one(a: Any, b: Any, c: Any, w: Symbol) -> Any:
    """2F1(a, b; c; 1 - w) for all w > 0, in forms without a cut on w > 1 where they exist."""
    if (a, b, c) == (1, 1, 2):
        return log(w) / (w - 1)
    if (a, b, c) == (HALF, HALF, THREE_HALVES):
        return acos(sqrt(w)) / sqrt(1 - w)
    if (a, b, c) == (1, 1, THREE_HALVES):
        return acos(sqrt(w)) / (sqrt(w) * sqrt(1 - w))
    if (a, b, c) in ((HALF, 1, THREE_HALVES), (1, HALF, THREE_HALVES)):
        return acosh(1 / sqrt(w)) / sqrt(1 - w)
    return None
