"""Signatures of inverse Mellin integrals: Gamma products brought to unit slopes.

The integral is ``F(z) = 1/(2*pi*I) * Integral(G(u)*z**(-u), u)`` along a contour that has the poles
of the numerator factors ``Gamma(a + u)`` on its left and those of ``Gamma(b - u)`` on its right
(DLMF 16.17.1, up to the sign of the variable).
"""

from __future__ import annotations

from collections.abc import Iterable
from math import gcd, lcm
from typing import Any, NamedTuple

from sympy import Add, Expr, Integer, Mul, Pow, Rational, S, expand, perfect_power, pi, sqrt

Params = tuple[Expr, ...]


class Signature(NamedTuple):
    """``prod Gamma(left+u) Gamma(right-u) / (Gamma(left_den+u) Gamma(right_den-u))``."""

    left: Params
    right: Params
    left_den: Params
    right_den: Params

    @property
    def counts(self) -> tuple[int, int, int, int]:
        return len(self.left), len(self.right), len(self.left_den), len(self.right_den)

    @property
    def lam(self) -> int:
        """Half-width of the sector of validity in units of ``pi/2``."""
        m, n, p, q = self.counts
        return m + n - p - q

    @property
    def delta(self) -> int:
        """Positive: the left series converges everywhere; zero: it does inside the unit circle."""
        m, n, p, q = self.counts
        return m + q - n - p

    def inverted(self) -> Signature:
        """The signature after ``u -> -u``, whose argument is ``1/z``."""
        return Signature(self.right, self.left, self.right_den, self.left_den)


class Normalised(NamedTuple):
    """``F(z) = constant * F_signature(scale * z**power)``."""

    constant: Expr
    scale: Expr
    power: Expr
    signature: Signature


class Zero(NamedTuple):
    """A factor ``shift + side*u`` of the integrand; on F it acts as ``shift - side*z*d/dz``."""

    shift: Expr
    side: int


def as_int(expr: Any) -> int | None:
    """The integer that `expr` is, or None when it is not an explicit integer."""
    if not expr.is_Integer:
        expr = expand(expr)
    return int(expr) if expr.is_Integer else None


def is_nonpositive_int(expr: Any) -> bool:
    n = as_int(expr)
    return n is not None and n <= 0


def power(base: Any, exponent: Any) -> Any:
    """``base**exponent``, split over positive factors and nested powers.

    The split is what keeps ``(b**2/a**2)**(nu/2)`` from surviving in an answer.
    """
    if base.is_Mul and all(f.is_positive for f in base.args):
        result = S.One
        for f in base.args:
            result *= power(f, exponent)
        return result
    if base.is_Pow and base.base.is_positive and base.exp.is_real:
        return power(base.base, base.exp * exponent)
    if base.is_Rational and base.is_positive and not exponent.is_Rational:
        return _integer_power(base.p, exponent) * _integer_power(base.q, -exponent)
    return Pow(base, exponent)


def _integer_power(n: int, exponent: Any) -> Any:
    found: Any = perfect_power(n) if n > 1 else False
    if found:
        return Integer(found[0]) ** (found[1] * exponent)
    return Integer(n) ** exponent


def spread(expr: Any) -> Any:
    """Multiply out only those sums that hold functions or symbolic powers.

    Rational coefficients keep their factors, so that nothing has to be factored again.
    """
    if expr.is_Add:
        return Add(*(spread(t) for t in expr.args))
    if not expr.is_Mul:
        return expr
    for i, f in enumerate(expr.args):
        if f.is_Add and not _algebraic(f):
            rest = Mul(*expr.args[:i], *expr.args[i + 1 :])
            return Add(*(spread(rest * t) for t in f.args))
    return expr


def _algebraic(expr: Any) -> bool:
    """Whether only numbers, symbols and rational powers occur."""
    if expr.is_Symbol or expr.is_number:
        return True
    if expr.is_Pow:
        return bool(expr.exp.is_Rational) and _algebraic(expr.base)
    return bool(expr.is_Add or expr.is_Mul) and all(_algebraic(a) for a in expr.args)


def normalise(factors: Iterable[tuple[Expr, Rational, int]]) -> Normalised:
    """Bring all slopes to +1 and -1 by ``u -> u/h`` and Gauss' multiplication theorem (DLMF 5.5.6)."""
    rows = [(S(a), Rational(k), int(e)) for a, k, e in factors]
    den = lcm(*(int(k.q) for _, k, _ in rows))
    num = gcd(*(abs(int(k * den)) for _, k, _ in rows))
    h = Rational(num, den)
    constant: Any = 1 / h
    scale: Any = S.One
    lists: dict[tuple[int, int], list[Any]] = {(1, 1): [], (-1, 1): [], (1, -1): [], (-1, -1): []}
    for a, k, e in rows:
        n = int(abs(k) / h)
        side = 1 if k > 0 else -1
        if n > 1:
            constant *= ((2 * pi) ** Rational(1 - n, 2) * power(Integer(n), a - S.Half)) ** e
            scale *= Integer(n) ** (-side * e * n)
        lists[side, e].extend(expand((a + j) / n) for j in range(n))
    sig = Signature(*(tuple(lists[key]) for key in ((1, 1), (-1, 1), (1, -1), (-1, -1))))
    return Normalised(constant, scale, 1 / h, sig)


def _cancel_side(num: Params, den: Params, side: int) -> tuple[Params, Params, list[Zero]]:
    """Cancel Gammas of one side whose shifts differ by n >= 0: what is left is ``(c + side*u)_n``."""
    top, bottom = list(num), list(den)
    zeros: list[Zero] = []
    while True:
        best: tuple[int, int, int] | None = None
        for i, a in enumerate(top):
            for j, c in enumerate(bottom):
                n = as_int(a - c)
                if n is not None and 0 <= n <= 8 and (best is None or n < best[0]):
                    best = (n, i, j)
        if best is None:
            return tuple(top), tuple(bottom), zeros
        n, i, j = best
        zeros += [Zero(bottom[j] + k, side) for k in range(n)]
        del top[i], bottom[j]


def cancel(sig: Signature) -> tuple[Signature, list[Zero]]:
    """Cancel equal Gammas and turn integer differences into polynomial factors."""
    left, left_den, zeros = _cancel_side(sig.left, sig.left_den, 1)
    right, right_den, more = _cancel_side(sig.right, sig.right_den, -1)
    return Signature(left, right, left_den, right_den), zeros + more


def _halve(params: Params) -> tuple[list[Any], Any, Any] | None:
    """Pairs ``(a, a + 1/2)`` joined to ``2*a`` (DLMF 5.5.5), with the constant; None if one is alone."""
    rest, joined = list(params), []
    constant: Any = S.One
    while rest:
        a = rest.pop(0)
        for j, b in enumerate(rest):
            d = expand(b - a)
            if d in (S.Half, -S.Half):
                low = a if d == S.Half else b
                joined.append(expand(2 * low))
                constant *= 2 * sqrt(pi) * power(Integer(2), -2 * low)
                del rest[j]
                break
        else:
            return None
    return joined, constant, len(joined)


def compress(sig: Signature) -> Normalised | None:
    """Undo a duplication: every Gamma has its partner half a unit away, so ``u -> u/2`` halves the count.

    Pairs ``Gamma(a+u)/Gamma(a+1+u) = 1/(a+u)`` are no obstacle: they become ``2/(2*a+v)``.
    """
    lists: list[list[Any]] = [list(p) for p in sig]
    poles: list[tuple[int, Any]] = []
    for top, bottom in ((0, 2), (1, 3)):
        for a in list(lists[top]):
            for c in lists[bottom]:
                if as_int(c - a) == 1:
                    lists[top].remove(a)
                    lists[bottom].remove(c)
                    poles.append((top, a))
                    break
    if not any(lists):
        return None
    constant: Any = S.Half
    scale: Any = S.One
    out: list[list[Any]] = []
    for params, side, e in zip(lists, (1, -1, 1, -1), (1, 1, -1, -1), strict=True):
        halved = _halve(tuple(params))
        if halved is None:
            return None
        out.append(halved[0])
        constant *= halved[1] ** e
        scale *= Integer(2) ** (2 * side * e * halved[2])
    for top, a in poles:
        constant *= 2
        out[top].append(expand(2 * a))
        out[top + 2].append(expand(2 * a) + 1)
    # scale**u with u = v/2, and z**(-u) = sqrt(z)**(-v)
    return Normalised(constant, sqrt(scale), S.Half, Signature(*(tuple(p) for p in out)))
