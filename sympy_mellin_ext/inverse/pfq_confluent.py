"""Named forms of 0F0, 1F0, 0F1 and 1F1 of argument ``sign*y`` with y > 0."""

from __future__ import annotations

from typing import Any

from sympy import (
    Expr,
    Integer,
    Rational,
    S,
    Symbol,
    besseli,
    besselj,
    cos,
    cosh,
    erf,
    erfi,
    exp,
    expand_mul,
    factor,
    gamma,
    lowergamma,
    pi,
    sin,
    sinh,
    sqrt,
)

from .contiguous import contiguous, shifts
from .signature import as_int, is_nonpositive_int, power, spread

HALF = S.Half


def polynomial(upper: tuple[Expr, ...], lower: tuple[Expr, ...], z: Expr) -> Expr | None:
    """A terminating series of degree at most 12, as a polynomial in z (DLMF 16.2.2)."""
    degrees = [-n for n in map(as_int, upper) if n is not None and n <= 0]
    if not degrees or min(degrees) > 12:
        return None
    stops = [-n for n in map(as_int, lower) if n is not None and n <= 0]
    if stops and min(stops) < min(degrees):
        return None
    total: Any = S.Zero
    term: Any = S.One
    for k in range(min(degrees) + 1):
        total += term
        for a in upper:
            term *= a + k
        for b in lower:
            term /= b + k
        term *= z / (k + 1)
    return total


def bessel_type(c: Expr, sign: int, y: Symbol) -> Expr:
    """0F1(; c; sign*y): DLMF 10.2.2, 10.25.2; half-integers by 10.16.1, 10.39.1-2."""
    root = 2 * sqrt(y)
    if c == HALF:
        return cos(root) if sign < 0 else cosh(root)
    if c == Rational(3, 2):
        return (sin(root) if sign < 0 else sinh(root)) / root
    if c.is_Rational and c.q == 2 and -4 <= c <= 6:
        return _half_integer_bessel(c, sign, y)
    bessel = besselj if sign < 0 else besseli
    nu = c - 1
    return gamma(c) * power(y, -nu / 2) * bessel(nu, root)


def _half_integer_bessel(c: Any, sign: int, y: Symbol) -> Expr:
    """Steps from c = 1/2 and 3/2 by z*F(c+1) = c*(c-1)*(F(c-1) - F(c)) (DLMF 10.29.1, 10.6.1)."""
    z = sign * y
    known: dict[Any, Any] = {b: bessel_type(b, sign, y) for b in (HALF, Rational(3, 2))}
    low, high = HALF, Rational(3, 2)
    while c > high:
        known[high + 1] = expand_mul(low * high / z * (known[low] - known[high]))
        low, high = high, high + 1
    while c < low:
        new = low - 1
        known[new] = expand_mul(known[low] + z / (new * (new + 1)) * known[new + 2])
        low = new
    return known[c]


def _dawson_pair(a: Expr, sign: int, y: Symbol) -> Expr | None:
    """1F1(a; a+1; sign*y): DLMF 8.5.1, 7.11.1; a = 1 elementary."""
    if a == 1:
        return (exp(y) - 1) / y if sign > 0 else (1 - exp(-y)) / y
    if a == HALF:
        return sqrt(pi) / (2 * sqrt(y)) * (erf(sqrt(y)) if sign < 0 else erfi(sqrt(y)))
    if sign < 0:
        return a * power(y, -a) * lowergamma(a, y)
    return None


def _unit_upper(b: Expr, sign: int, y: Symbol) -> Expr | None:
    """1F1(1; b; sign*y) = (b-1)*z**(1-b)*exp(z)*lowergamma(b-1, z): DLMF 13.6.5."""
    if b == Rational(3, 2):
        return sqrt(pi) / (2 * sqrt(y)) * exp(sign * y) * (erf(sqrt(y)) if sign > 0 else erfi(sqrt(y)))
    if sign > 0 and not is_nonpositive_int(b - 1):
        return (b - 1) * power(y, 1 - b) * exp(y) * lowergamma(b - 1, y)
    return None


def _even_type(a: Expr, sign: int, y: Symbol) -> Expr | None:
    """1F1(a; 2*a; sign*y): DLMF 13.6.9."""
    nu = a - HALF
    if is_nonpositive_int(nu + 1):
        return None
    return gamma(a + HALF) * exp(sign * y / 2) * power(y, -nu) * power(Integer(4), nu) * besseli(nu, y / 2)


def kummer(a: Expr, b: Expr, sign: int, y: Symbol) -> Expr | None:
    """1F1(a; b; sign*y) by name, or None."""
    z = sign * y
    if as_int(a - b) == 0:
        return exp(z)
    found = polynomial((a,), (b,), z)
    if found is not None:
        return found
    found = polynomial((b - a,), (b,), -z)
    if found is not None:
        return exp(z) * found
    found = _kummer_direct(a, b, sign, y)
    if found is not None:
        return found
    # neighbours of the rows above
    nu = as_int(a)
    bases: list[tuple[Any, Any]] = []
    if nu is not None and nu > 0:
        if as_int(b) is not None:
            bases.append((S.One, Integer(2)))
        elif as_int(b - HALF) is not None:
            bases.append((S.One, Rational(3, 2)))
        else:
            bases.append((S.One, b))
    elif a.is_Rational and a.q == 2 and b.is_Rational:
        if b.q == 2:
            bases.append((HALF, Rational(3, 2)))
        elif b.q == 1:
            bases.append((HALF, S.One))
    else:
        if as_int(b - a) is not None:
            bases.append((a, a + 1))
        if as_int(b - 2 * a) is not None:
            bases.append((a, 2 * a))
    for base in bases:
        moves = shifts((a, b), base)
        numeric = all(v.is_Rational for v in base)
        if moves is None or sum(map(abs, moves)) > (8 if numeric else 3 if base[0] == 1 else 1):
            continue
        found = neighbour(((base[0],), base[1]), moves, sign, y, _kummer_direct(*base, sign, y))
        if found is not None:
            return found
    return None


def _kummer_direct(a: Expr, b: Expr, sign: int, y: Symbol) -> Expr | None:
    if as_int(b - a) == 1:
        found = _dawson_pair(a, sign, y)
        if found is not None:
            return found
    if as_int(a) == 1:
        found = _unit_upper(b, sign, y)
        if found is not None:
            return found
    if as_int(b - 2 * a) == 0:
        return _even_type(a, sign, y)
    return None


def neighbour(
    base: tuple[tuple[Expr, ...], Expr], moves: tuple[int, ...], sign: int, y: Symbol, value: Expr | None
) -> Expr | None:
    """The contiguous function from the named value of the base."""
    if value is None:
        return None
    pair = contiguous(base[0], base[1], moves, sign, y)
    if pair is None:
        return None
    return spread(factor(pair[0]) * value + factor(pair[1]) * spread(y * value.diff(y)))


def falling_power(a: Expr, sign: int, y: Symbol) -> Expr:
    """1F0(a; ; sign*y) = (1 - z)**(-a): DLMF 15.4.6."""
    return (1 - sign * y) ** (-a)

