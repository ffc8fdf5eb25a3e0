"""A hypergeometric series by its elementary or named function."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from sympy import (
    Chi,
    Ci,
    Dummy,
    Ei,
    EulerGamma,
    Expr,
    Integer,
    Rational,
    S,
    Shi,
    Si,
    Symbol,
    besseli,
    besselj,
    cos,
    cosh,
    expand,
    expand_mul,
    expint,
    factorial,
    fresnelc,
    fresnels,
    gamma,
    log,
    pi,
    polygamma,
    polylog,
    sin,
    sinh,
    sqrt,
)

from . import pfq_sums
from .pfq_confluent import bessel_type, falling_power, kummer, polynomial
from .pfq_gauss import at_minus_one, at_one, gauss
from .signature import as_int, is_nonpositive_int, power

HALF = S.Half
Params = tuple[Any, ...]


def named_pfq(ap: Sequence[Expr], bq: Sequence[Expr], z: Expr, facts: object = None) -> Expr | None:
    """The series pFq(ap; bq; z) as an elementary or named function.

    Parameters
    ----------
    ap, bq : sequences of Expr
        Upper and lower parameters, linear in the symbols.
    z : Expr
        The argument.  Its leading sign decides between, say, cos and cosh.
    facts : object, optional
        What is known of the symbols; the table needs nothing beyond their assumptions.

    Returns
    -------
    Expr or None
        None when the table has no such row; `hyper` is then the answer.

    Examples
    --------
    >>> from sympy import S, symbols
    >>> from sympy_mellin_ext.inverse import named_pfq
    >>> x = symbols("x", positive=True)
    >>> named_pfq([], [S.Half], -x**2/4)
    cos(x)
    >>> named_pfq([1, 1], [2], -x)
    log(x + 1)/x

    Notes
    -----
    Rows: DLMF 7.11, 8.5, 10.16, 10.39, 13.6, 15.4, 16.2; each is named beside its formula.
    """
    upper, lower = _cancelled([S(a) for a in ap], [S(b) for b in bq])
    z = S(z)
    if z.is_zero:
        return S.One
    if any(is_nonpositive_int(b) for b in lower) and not any(is_nonpositive_int(a) for a in upper):
        return None
    if z in (1, -1):
        found = _at_unit(upper, lower, z)
        if found is not None:
            return found
        if len(upper) == len(lower) + 1:
            return None
    sign = -1 if z.could_extract_minus_sign() and not z.is_Add else 1
    y = Dummy("y", positive=True)
    found = _named(upper, lower, sign, y)
    return None if found is None else put(found, y, S.One, sign * z, S.One)


def put(expr: Any, y: Symbol, scale: Any, z: Any, k: Any) -> Any:
    """`expr` at ``y = scale*z**k``, with every power of y taken as one power of z.

    Joining the exponents first keeps the branch right when z is not positive.
    """
    moves: dict[Any, Any] = {}
    for node in sorted(expr.atoms(type(y**2)), key=str):
        if node.base == y:
            moves[node] = power(scale, node.exp) * power(z, k * node.exp)
    if expr.has(log(y)):
        moves[log(y)] = log(scale) + k * log(z)
    moves[y] = scale * power(z, k)
    return expr.xreplace(moves)


def _cancelled(upper: list[Any], lower: list[Any]) -> tuple[Params, Params]:
    for a in list(upper):
        for b in lower:
            if as_int(a - b) == 0:
                upper.remove(a)
                lower.remove(b)
                break
    return tuple(upper), tuple(lower)


def _named(upper: Params, lower: Params, sign: int, y: Symbol) -> Any:
    upper, lower = _cancelled(list(upper), list(lower))
    p, q = len(upper), len(lower)
    z = sign * y
    if q >= p and (p, q) != (1, 1):
        found = polynomial(upper, lower, z)
        if found is not None:
            return found
    if (p, q) == (0, 0):
        from sympy import exp

        return exp(z)
    if (p, q) == (1, 0):
        return falling_power(upper[0], sign, y)
    if (p, q) == (0, 1):
        return bessel_type(lower[0], sign, y)
    if (p, q) == (1, 1):
        return kummer(upper[0], lower[0], sign, y)
    if (p, q) == (2, 1):
        return gauss(upper[0], upper[1], lower[0], sign, y)
    for row in _HIGHER.get((p, q), ()):
        for u, v in pfq_sums.orders(upper, lower):
            found = row(u, v, sign, y)
            if found is not None:
                return found
    found = polynomial(upper, lower, z)
    if found is not None:
        return found
    for step in (_raised, _lowered_two, _split):
        found = step(upper, lower, sign, y)
        if found is not None:
            return found
    return None


def _raised(upper: Params, lower: Params, sign: int, y: Symbol) -> Any:
    """An upper parameter b+n above a lower b: a differential operator (DLMF 16.3.1-4)."""
    for i, a in enumerate(upper):
        for j, b in enumerate(lower):
            n = as_int(a - b)
            if n is not None and 1 <= n <= 4:
                found = _named(upper[:i] + upper[i + 1 :], lower[:j] + lower[j + 1 :], sign, y)
                for k in range(n):
                    if found is None:
                        return None
                    found = expand_mul(found + y * found.diff(y) / (b + k))
                return found
    return None


def _lowered_two(upper: Params, lower: Params, sign: int, y: Symbol) -> Any:
    """1 above 2: the series without its first term, one index lower (DLMF 16.3.3)."""
    if not any(as_int(a) == 1 for a in upper) or not any(as_int(b) == 2 for b in lower):
        return None
    a_rest, b_rest = list(upper), list(lower)
    a_rest.remove(1)
    b_rest.remove(2)
    if any(as_int(c) == 1 for c in (*a_rest, *b_rest)):
        return None
    found = _named(tuple(a - 1 for a in a_rest), tuple(b - 1 for b in b_rest), sign, y)
    if found is None:
        return None
    ratio: Any = S.One
    for b in b_rest:
        ratio *= b - 1
    for a in a_rest:
        ratio /= a - 1
    return expand_mul(ratio * (found - 1) / (sign * y))


def _split(upper: Params, lower: Params, sign: int, y: Symbol) -> Any:
    """Two quotients a/(a+k), b/(b+k) by partial fractions."""
    pairs = [(i, j) for i, a in enumerate(upper) for j, b in enumerate(lower) if as_int(b - a) == 1]
    for m, (i, j) in enumerate(pairs):
        for k, l in pairs[m + 1 :]:
            a, b = upper[i], upper[k]
            if i == k or j == l or as_int(a - b) == 0:
                continue
            parts = [
                _named(
                    tuple(c for n, c in enumerate(upper) if n != out_a),
                    tuple(c for n, c in enumerate(lower) if n != out_b),
                    sign,
                    y,
                )
                for out_a, out_b in ((k, l), (i, j))
            ]
            if parts[0] is not None and parts[1] is not None:
                return (b * parts[0] - a * parts[1]) / (b - a)
    return None


# --- rows with three or more parameters: exact parameters -> function, else None ---


def _sine_integral(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    if u == (HALF,) and v == (Rational(3, 2), Rational(3, 2)):  # DLMF 6.6.5
        x = 2 * sqrt(y)
        return (Si(x) if sign < 0 else Shi(x)) / x
    return None


def _bessel_square(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    """DLMF 10.8.3 with equal, opposite and neighbouring orders."""
    a = u[0]
    f = besselj if sign < 0 else besseli
    x = sqrt(y)
    if as_int(v[0] - a - HALF) == 0 and as_int(v[1] - 2 * a) == 0:
        nu = a - HALF
        return gamma(nu + 1) ** 2 * power(Integer(4), nu) * power(y, -nu) * f(nu, x) ** 2
    if as_int(v[0] - a - HALF) == 0 and as_int(v[1] - 2 * a) == -1:
        mu = a - Rational(3, 2)
        scale = gamma(mu + 1) * gamma(mu + 2) * power(Integer(2), 2 * mu + 1)
        return scale * power(y, -mu - HALF) * f(mu, x) * f(mu + 1, x)
    if a == HALF and as_int(v[0] + v[1]) == 2:
        nu = v[0] - 1
        return gamma(1 + nu) * gamma(1 - nu) * f(nu, x) * f(-nu, x)
    return None


def _fresnel(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    if sign > 0:
        return None
    x = 2 * y ** Rational(1, 4) / sqrt(pi)
    if u == (Rational(1, 4),) and v == (HALF, Rational(5, 4)):  # DLMF 7.11.6
        return fresnelc(x) / x
    if u == (Rational(3, 4),) and v == (Rational(3, 2), Rational(7, 4)):
        return 6 * fresnels(x) / (pi * x**3)
    return None


def _trigonometric_tail(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    """1F2(1; b, b+1/2) with 2*b an integer: cos or sin without its first terms."""
    if u != (1,) or v[1] - v[0] != HALF:
        return None
    n = as_int(2 * v[0])
    if n is None or not 1 <= n <= 9:
        return None
    x = 2 * sqrt(y)
    total: Any
    if n % 2:
        total, start = (cos(x) if sign < 0 else cosh(x)), 0
    else:
        total, start = (sin(x) if sign < 0 else sinh(x)), 1
    for k in range(start, n - 1, 2):
        total -= Integer(sign) ** (k // 2) * x**k / factorial(k)
    return expand_mul(Integer(sign) ** ((n - 1) // 2) * factorial(n - 1) * x ** (1 - n) * total)


def _exponential_integral(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    if u == (1, 1) and v == (2, 2):  # DLMF 6.6.2-4
        if sign < 0:
            return (EulerGamma + log(y) + expint(1, y)) / y
        return (Ei(y) - EulerGamma - log(y)) / y
    return None


def _cosine_integral(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    if u == (1, 1) and v == (Rational(3, 2), 2, 2):  # DLMF 6.6.6
        x = 2 * sqrt(y)
        if sign < 0:
            return (EulerGamma + log(x) - Ci(x)) / y
        return (Chi(x) - EulerGamma - log(x)) / y
    return None


def _bessel_product(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    """Two Bessel functions of one argument: DLMF 10.8.3."""
    a = u[0]
    if as_int(u[1] - a - HALF) == 0 and as_int(v[0] - 2 * a) == 0 and as_int(v[1] + v[2] - 2 * a) == 1:
        mu, nu = v[1] - 1, v[2] - 1
        f = besselj if sign < 0 else besseli
        half = (mu + nu) / 2
        scale = gamma(mu + 1) * gamma(nu + 1) * power(Integer(4), half) * power(y, -half)
        return scale * f(mu, sqrt(y)) * f(nu, sqrt(y))
    return None


def _polylogarithm(u: Params, v: Params, sign: int, y: Symbol) -> Any:
    if set(u) == {S.One} and set(v) == {Integer(2)} and len(u) == len(v) + 1:  # DLMF 25.12.1
        return polylog(len(v), sign * y) / (sign * y)
    return None


_Row = Callable[[Params, Params, int, Symbol], Any]
_HIGHER: dict[tuple[int, int], tuple[_Row, ...]] = {
    (1, 2): (_trigonometric_tail, _sine_integral, _bessel_square, _fresnel),
    (2, 2): (_exponential_integral,),
    (2, 3): (_cosine_integral, _bessel_product),
    (3, 2): (_polylogarithm,),
    (4, 3): (_polylogarithm,),
}


def _at_unit(upper: Params, lower: Params, z: Any) -> Any:
    """Summation theorems at 1 and -1."""
    if len(upper) != len(lower) + 1:
        return None
    found = polynomial(upper, lower, z)
    if found is not None:
        return expand(found)
    if len(upper) == 1:
        return falling_power(upper[0], -1, S.One) if z == -1 else None
    if len(upper) == 2:
        if z == 1:
            return at_one(upper[0], upper[1], lower[0])
        found = at_minus_one(upper[0], upper[1], lower[0])
        if found is not None:
            return found
        y = Dummy("y", positive=True)
        found = gauss(upper[0], upper[1], lower[0], -1, y)
        return None if found is None else found.subs(y, 1)
    if len(upper) == 3 and z == 1:
        for u, v in pfq_sums.orders(upper, lower):
            if u[:2] == (1, 1) and v[0] == 2 and as_int(u[2] - 1) != 0:  # DLMF 5.7.6 summed by parts
                a, b = u[2], v[1]
                if not is_nonpositive_int(b - a):
                    return (b - 1) / (a - 1) * (polygamma(0, b - 1) - polygamma(0, b - a))
        for theorem in (pfq_sums.dixon, pfq_sums.watson, pfq_sums.whipple):
            for u, v in pfq_sums.orders(upper, lower):
                found = theorem(u, v)
                if found is not None:
                    return found
    return None
