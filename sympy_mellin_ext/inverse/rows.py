"""Table of signatures: one row a function, its published source beside it.

A row receives the four parameter lists, in one of their orders, and returns the function of ``w > 0``
or None.  Signatures with one class of left poles need no row: their residue series has one term.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from itertools import permutations, product
from typing import Any, NamedTuple

from sympy import (
    Ci,
    Ei,
    Expr,
    Rational,
    S,
    Si,
    Symbol,
    besseli,
    besselj,
    bessely,
    cos,
    erfi,
    exp,
    expint,
    fresnelc,
    fresnels,
    gamma,
    hyper,
    pi,
    sin,
    sqrt,
)

from .pfq import named_pfq
from .pfq_gauss import around_one
from .signature import Params, Signature, as_int, power, spread
from .tricomi import bessel_k, tricomi

HALF = S.Half
QUARTER = Rational(1, 4)


def _same(*differences: Any) -> bool:
    return all(as_int(d) == 0 for d in differences)


def _bessel_k(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """DLMF 10.32.13."""
    return 2 * power(w, (a[0] + a[1]) / 2) * bessel_k(a[0] - a[1], 2 * sqrt(w))


def _bessel_y(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """DLMF 10.22.44 with 5.5.3."""
    p, nu = (a[0] + a[1]) / 2, a[0] - a[1]
    if _same(c[0] - HALF - a[1], d[0] - HALF + a[1]):
        return -power(w, p) * bessely(nu, 2 * sqrt(w))
    return None


def _damped_tricomi(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """exp(-w)*U: DLMF 13.4.18."""
    u = tricomi(c[0] - a[1], 1 + a[0] - a[1], w)
    return None if u is None else spread(power(w, a[0]) * exp(-w) * u)


def _tricomi(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """DLMF 13.4.17."""
    u = tricomi(a[0] + b[0], 1 + a[0] - a[1], w)
    return None if u is None else spread(gamma(a[0] + b[0]) * gamma(a[1] + b[0]) * power(w, a[0]) * u)


def barnes_first(a: Params, b: Params) -> Any:
    """DLMF 5.13.3."""
    return (
        gamma(a[0] + b[0]) * gamma(a[0] + b[1]) * gamma(a[1] + b[0]) * gamma(a[1] + b[1])
        / gamma(a[0] + a[1] + b[0] + b[1])
    )


def _two_by_two(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """2F1 of 1 - w: DLMF 15.6.7."""
    f = around_one(a[0] + b[0], a[0] + b[1], sum((*a, *b)), w)
    if f is None:
        f = named_pfq((a[0] + b[0], a[0] + b[1]), (sum((*a, *b)),), 1 - w)
    return None if f is None else barnes_first(a, b) * power(w, a[0]) * f


def _two_by_two_hyper(a: Params, b: Params, w: Any) -> Any:
    f = hyper((a[0] + b[0], a[0] + b[1]), (sum((*a, *b)),), 1 - w)
    return barnes_first(a, b) * power(w, a[0]) * f


def _bessel_jk(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """J_nu*K_nu of one argument: from memory, tested against the contour integral."""
    p, nu = a[0], 2 * (a[2] - a[0])
    if _same(a[1] - p - HALF, d[0] - 1 - nu / 2 + p):
        x = 2 * sqrt(2) * w**QUARTER
        return 4 * sqrt(pi) * power(w, p) * besselj(nu, x) * bessel_k(nu, x)
    return None


def _bessel_ik(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """I_nu*K_nu of one argument: from memory, tested against the contour integral."""
    p, nu = a[0], a[1] - a[0]
    if _same(b[0] - HALF + p, d[0] - 1 - nu + p):
        return 2 * sqrt(pi) * power(w, p) * besseli(nu, sqrt(w)) * bessel_k(nu, sqrt(w))
    return None


def _bessel_k_square(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """Koelbig, J. Comput. Appl. Math. 62 (1995) 41, eq. (1), with equal orders."""
    p, nu = a[0], a[1] - a[0]
    if _same(a[2] - p + nu, c[0] - p - HALF):
        return 2 / sqrt(pi) * power(w, p) * bessel_k(nu, sqrt(w)) ** 2
    return None


def _bessel_kk(a: Params, b: Params, c: Params, d: Params, w: Symbol) -> Any:
    """Koelbig, J. Comput. Appl. Math. 62 (1995) 41, eq. (1)."""
    p = (a[0] + a[1]) / 2
    if _same(a[2] + a[3] - 2 * p, c[0] - p, c[1] - p - HALF):
        x, s, t = sqrt(w), a[0] - p, a[2] - p
        return 2 / sqrt(pi) * power(w, p) * bessel_k(s + t, x) * bessel_k(s - t, x)
    return None


_Row = Callable[[Params, Params, Params, Params, Symbol], Any]
ROWS: dict[tuple[int, int, int, int], tuple[_Row, ...]] = {
    (2, 0, 0, 0): (_bessel_k,),
    (2, 0, 1, 1): (_bessel_y,),
    (2, 0, 1, 0): (_damped_tricomi,),
    (2, 1, 0, 0): (_tricomi,),
    (2, 2, 0, 0): (_two_by_two,),
    (3, 0, 0, 1): (_bessel_jk,),
    (2, 1, 0, 1): (_bessel_ik,),
    (3, 0, 1, 0): (_bessel_k_square,),
    (4, 0, 2, 0): (_bessel_kk,),
}


def arrangements(sig: Signature) -> Iterator[tuple[Params, Params, Params, Params]]:
    """All distinct orders of the four parameter lists."""
    parts = [list(dict.fromkeys(permutations(p))) for p in sig]
    yield from product(*parts)


def look_up(sig: Signature, w: Symbol) -> Any:
    """The first row that fits, as a function of w > 0."""
    for row in ROWS.get(sig.counts, ()):
        for a, b, c, d in arrangements(sig):
            found = row(a, b, c, d, w)
            if found is not None:
                return found
    return None


# --- rows with fixed parameters up to a shift of u; their integer neighbours follow by differentiation ---


class Fixed(NamedTuple):
    """A function of w whose signature has no free parameter."""

    signature: Signature
    function: Callable[[Symbol], Expr]
    source: str


def _sine_auxiliary(w: Any) -> Any:
    x = 2 * sqrt(w)
    return 2 * sqrt(pi) * (Ci(x) * sin(x) + (pi / 2 - Si(x)) * cos(x))


def _cosine_auxiliary(w: Any) -> Any:
    x = 2 * sqrt(w)
    return 2 * sqrt(pi) * ((pi / 2 - Si(x)) * sin(x) - Ci(x) * cos(x))


def _fresnel_f(w: Any) -> Any:
    x = 2 * sqrt(w)
    t = sqrt(2 * x / pi)
    return 2 * pi * sqrt(2 * pi) * ((HALF - fresnels(t)) * cos(x) - (HALF - fresnelc(t)) * sin(x))


def _fresnel_g(w: Any) -> Any:
    x = 2 * sqrt(w)
    t = sqrt(2 * x / pi)
    return 2 * pi * sqrt(2 * pi) * ((HALF - fresnelc(t)) * cos(x) + (HALF - fresnels(t)) * sin(x))


def _goodwin_staton(w: Any) -> Any:
    return pi * exp(-w) * (pi * erfi(sqrt(w)) - Ei(w))


def _goodwin_staton_moment(w: Any) -> Any:
    return pi * sqrt(pi) - sqrt(w) * _goodwin_staton(w)


def _sine_stieltjes(w: Any) -> Any:
    x = 2 * sqrt(w)
    return (exp(-x) * Ei(x) + exp(x) * expint(1, x)) / sqrt(pi)


FIXED: tuple[Fixed, ...] = (
    Fixed(Signature((S.Zero, HALF, HALF), (HALF,), (), ()), _sine_auxiliary, "DLMF 6.7.13, 6.2.17"),
    Fixed(Signature((S.Zero, S.Zero, HALF), (S.One,), (), ()), _cosine_auxiliary, "DLMF 6.7.14, 6.2.18"),
    Fixed(Signature((S.Zero, HALF, 3 * QUARTER), (QUARTER,), (), ()), _fresnel_f, "DLMF 7.7.10, 7.2.10"),
    Fixed(Signature((S.Zero, HALF, QUARTER), (3 * QUARTER,), (), ()), _fresnel_g, "DLMF 7.7.11, 7.2.11"),
    Fixed(Signature((S.Zero, S.Zero, HALF), (HALF, S.One), (), ()), _goodwin_staton, "DLMF 7.2.12, 7.5.13"),
    Fixed(
        Signature((S.Zero, HALF, HALF), (HALF, S.One), (), ()), _goodwin_staton_moment, "from the row before"
    ),
    Fixed(Signature((HALF, HALF), (HALF,), (), (S.One,)), _sine_stieltjes, "DLMF 6.7.1-3"),
)


def _steps(base: Params, given: Params, shift: Any, up: bool) -> list[tuple[Any, int]] | None:
    """Integer steps from a shifted base list to the given one, all in the direction that differentiates."""
    best: list[tuple[Any, int]] | None = None
    for order in dict.fromkeys(permutations(given)):
        found: list[tuple[Any, int]] = []
        for b, g in zip(base, order, strict=True):
            n = as_int(g - b - shift) if up else as_int(b + shift - g)
            if n is None or not 0 <= n <= 4:
                break
            found.append((b + shift if up else g, n))
        else:
            if best is None or sum(n for _, n in found) < sum(n for _, n in best):
                best = found
    return best


def look_up_fixed(sig: Signature, w: Symbol) -> Any:
    """A row with fixed parameters, or what differentiation makes of it."""
    for row in FIXED:
        if row.signature.counts != sig.counts:
            continue
        # a right Gamma stands at base - shift, raised n times
        for n, base_right in product(range(5), row.signature.right):
            p = base_right + n - sig.right[0]
            parts = [
                _steps(base, given, shift, up)
                for base, given, shift, up in zip(
                    row.signature, sig, (p, -p, p, -p), (True, True, False, False), strict=True
                )
            ]
            if any(part is None for part in parts):
                continue
            value = power(w, p) * row.function(w)
            for part, side in zip(parts, (1, -1, 1, -1), strict=True):
                for start, count in part or []:
                    for k in range(count):
                        value = spread((start + k) * value - side * w * value.diff(w))
            return spread(value)
    return None


__all__ = ["FIXED", "ROWS", "arrangements", "barnes_first", "look_up", "look_up_fixed"]
