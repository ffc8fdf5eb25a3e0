"""Contiguous relations of 1F1 and 2F1 by steps on the pair (F, theta F), theta = y*d/dy.

Every neighbour is ``r0*F + r1*theta F`` with rational r0, r1 (DLMF 13.3.15-22, 15.5.1-10, 15.5.20-21).
The arithmetic runs in a field of rational functions, so that no simplifier is needed.
"""

from __future__ import annotations

from typing import Any

from sympy import QQ, Expr, Symbol

from .signature import as_int


class _Walker:
    """The current function of the walk, as a row vector over the base pair."""

    def __init__(self, upper: tuple[Expr, ...], lower: Expr, sign: int, y: Symbol) -> None:
        symbols = set().union(*(p.free_symbols for p in (*upper, lower)))
        gens = [y, *sorted(symbols, key=str)]
        self.field: Any = QQ.frac_field(*gens)
        self.y: Any = self.field.from_sympy(y)
        self.z = sign * self.y
        self.a = [self.field.from_sympy(p) for p in upper]
        self.c: Any = self.field.from_sympy(lower)
        # theta**2 F = m0*F + m1*theta F, from theta*(theta+c-1)F = z*prod(theta+a)F
        if len(upper) == 2:
            den = 1 - self.z
            self.m0: Any = self.z * self.a[0] * self.a[1] / den
            self.m1: Any = (self.z * (self.a[0] + self.a[1]) - (self.c - 1)) / den
        else:
            self.m0 = self.z * self.a[0]
            self.m1 = self.z - (self.c - 1)
        self.row: tuple[Any, Any] = (self.field.one, self.field.zero)

    def theta(self) -> tuple[Any, Any]:
        f, g = self.row
        y = self.y
        return y * f.diff(y) + g * self.m0, y * g.diff(y) + f + g * self.m1

    def combine(self, alpha: Any, beta: Any) -> None:
        """Replace the current F by ``alpha*F + beta*theta F``."""
        t = self.theta()
        self.row = (alpha * self.row[0] + beta * t[0], alpha * self.row[1] + beta * t[1])

    def raise_upper(self, i: int) -> None:
        self.combine(self.field.one, 1 / self.a[i])
        self.a[i] += 1

    def lower_upper(self, i: int) -> None:
        a = self.a[i]
        if len(self.a) == 2:
            b = self.a[1 - i]
            self.combine((self.c - a - b * self.z) / (self.c - a), (1 - self.z) / (self.c - a))
        else:
            self.combine((self.c - a - self.z) / (self.c - a), 1 / (self.c - a))
        self.a[i] -= 1

    def lower_lower(self) -> None:
        self.combine(self.field.one, 1 / (self.c - 1))
        self.c -= 1

    def raise_lower(self) -> None:
        c = self.c
        if len(self.a) == 2:
            a, b = self.a
            den = (c - a) * (c - b)
            self.combine(c * (c - a - b) / den, c * (1 - self.z) / (self.z * den))
        else:
            den = c - self.a[0]
            self.combine(c / den, -c / (self.z * den))
        self.c += 1


def shifts(target: tuple[Expr, ...], base: tuple[Expr, ...]) -> tuple[int, ...] | None:
    """Integer differences target - base, or None."""
    out = []
    for t, b in zip(target, base, strict=True):
        n = as_int(t - b)
        if n is None:
            return None
        out.append(n)
    return tuple(out)


def contiguous(
    upper: tuple[Expr, ...], lower: Expr, moves: tuple[int, ...], sign: int, y: Symbol
) -> tuple[Expr, Expr] | None:
    """Coefficients (r0, r1) of the function whose parameters are those of the base plus `moves`.

    `moves` has one integer for each upper parameter, then one for the lower one; the argument
    is ``sign*y``.  None when every order of steps meets a vanishing coefficient.
    """
    up = [("up", i, n) for i, n in enumerate(moves[:-1])]
    low = ("low", 0, moves[-1])
    orders = ([*up, low], [low, *up], [*up[::-1], low], [low, *up[::-1]])
    for order in orders:
        walker = _Walker(upper, lower, sign, y)
        try:
            for kind, i, n in order:
                for _ in range(abs(n)):
                    if kind == "up":
                        walker.raise_upper(i) if n > 0 else walker.lower_upper(i)
                    elif n > 0:
                        walker.raise_lower()
                    else:
                        walker.lower_lower()
        except ZeroDivisionError:
            continue
        to_sympy = walker.field.to_sympy
        return to_sympy(walker.row[0]), to_sympy(walker.row[1])
    return None
