"""Tricomi's U and the modified Bessel K by name.

SymPy has no function U; the cases with a name are incomplete Gamma functions, error and exponential
integrals, Bessel K and polynomials (DLMF 13.6), and the neighbours of these (DLMF 13.3.7-12, 13.3.22).
"""

from __future__ import annotations

from typing import Any

from sympy import (
    Expr,
    Rational,
    S,
    Symbol,
    besselk,
    binomial,
    erfc,
    exp,
    expint,
    factor,
    factorial,
    pi,
    rf,
    sqrt,
    uppergamma,
)

from .contiguous import _Walker
from .signature import as_int, power, spread

HALF = S.Half


def bessel_k(nu: Any, x: Any) -> Any:
    """K of order nu; half-integers are elementary (DLMF 10.47.9, 10.49.12)."""
    if nu.could_extract_minus_sign():
        nu = -nu
    if nu.is_Rational and nu.q == 2 and nu <= Rational(13, 2):
        n = int(nu - HALF)
        total = S.Zero
        for k in range(n + 1):
            total += factorial(n + k) / (factorial(k) * factorial(n - k)) / (2 * x) ** k
        return sqrt(pi) / sqrt(2 * x) * exp(-x) * total
    return besselk(nu, x)


def upper_gamma(a: Any, x: Any) -> Any:
    """Gamma(a, x), with the names of its integer and half-integer cases (DLMF 8.4)."""
    n = as_int(a)
    if n is not None and n <= 0:
        return x**n * expint(1 - n, x) if n else expint(1, x)
    if a == HALF:
        return sqrt(pi) * erfc(sqrt(x))
    return uppergamma(a, x)


class _TricomiWalker(_Walker):
    """The steps of U: same differential equation as 1F1, other factors (DLMF 13.3.22-28)."""

    def raise_upper(self, i: int) -> None:
        a, b = self.a[i], self.c
        den = a * (a - b + 1)
        self.combine(a / den, 1 / den)
        self.a[i] += 1

    def lower_upper(self, i: int) -> None:
        a, b = self.a[i], self.c
        self.combine(-(b - a - self.z), -self.field.one)
        self.a[i] -= 1

    def lower_lower(self) -> None:
        den = -(self.a[0] - self.c + 1)
        self.combine((self.c - 1) / den, 1 / den)
        self.c -= 1

    def raise_lower(self) -> None:
        self.combine(self.field.one, -1 / self.z)
        self.c += 1


def _polynomial(n: int, b: Any, z: Any) -> Any:
    """U(-n, b, z): DLMF 13.2.7."""
    return (-1) ** n * sum(
        (binomial(n, k) * rf(b + k, n - k).expand(func=True) * (-z) ** k for k in range(n + 1)), S.Zero
    )


def _direct(a: Any, b: Any, z: Symbol) -> Any:
    n = as_int(a)
    if n is not None and -8 <= n <= 0:
        return _polynomial(-n, b, z)
    if as_int(a - b) == 0:  # DLMF 13.6.6
        return exp(z) * upper_gamma(1 - a, z)
    if as_int(b - 2 * a) == 0:  # DLMF 13.6.10
        return exp(z / 2) * power(z, HALF - a) / sqrt(pi) * bessel_k(a - HALF, z / 2)
    return None


def _either(a: Any, b: Any, z: Symbol) -> Any:
    """A row, also after the Kummer transformation 13.2.40."""
    found = _direct(a, b, z)
    if found is None:
        found = _direct(a - b + 1, 2 - b, z)
        if found is not None:
            found = power(z, 1 - b) * found
    return found


def tricomi(a: Expr, b: Expr, z: Symbol) -> Expr | None:
    """U(a, b, z) by name, or None."""
    found = _either(a, b, z)
    if found is not None:
        return spread(found)
    for base in _bases(a, b):
        moves = (as_int(a - base[0]), as_int(b - base[1]))
        if moves[0] is None or moves[1] is None or abs(moves[0]) + abs(moves[1]) > 8:
            continue
        value = _either(*base, z)
        if value is None:
            continue
        value = spread(value)
        pair = _walk(base, moves[0], moves[1], z)
        if pair is not None:
            theta = spread(z * value.diff(z))
            return spread(factor(pair[0]) * value + factor(pair[1]) * theta)
    return None


def _bases(a: Any, b: Any) -> list[tuple[Any, Any]]:
    n = as_int(a)
    rows: list[tuple[Any, Any]] = []
    if n is not None and n > 0:
        if as_int(b) is not None:
            rows.append((S.One, S.One))
        elif as_int(b - HALF) is not None:
            rows.append((S.One, Rational(3, 2)))
        else:
            rows.append((S.One, b))
    elif as_int(b - a) is not None:
        rows.append((HALF, HALF) if as_int(a - HALF) is not None else (a, a))
    if as_int(a - HALF) is not None and as_int(b) is not None:
        rows.append((HALF, S.One))
    elif as_int(b - 2 * a) is not None:
        rows.append((a, 2 * a))
    m = as_int(a - b + 1)
    if m is not None and m > 0:
        rows.append((b, b))
    return rows


def _walk(base: tuple[Any, Any], da: int, db: int, z: Symbol) -> tuple[Any, Any] | None:
    for first_upper in (True, False):
        walker = _TricomiWalker((base[0],), base[1], 1, z)
        try:
            for upper in (first_upper, not first_upper):
                n = da if upper else db
                for _ in range(abs(n)):
                    if upper:
                        walker.raise_upper(0) if n > 0 else walker.lower_upper(0)
                    elif n > 0:
                        walker.raise_lower()
                    else:
                        walker.lower_lower()
        except ZeroDivisionError:
            continue
        to_sympy = walker.field.to_sympy
        return to_sympy(walker.row[0]), to_sympy(walker.row[1])
    return None


__all__ = ["bessel_k", "tricomi", "upper_gamma"]
