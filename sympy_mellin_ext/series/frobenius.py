"""Leading coefficients of a function at 0+, exactly, as sums of ``x**rho * (power series)``.

Sources: DLMF 4.6, 4.19, 4.24, 4.38 (elementary series), 7.6.1 (error function), 9.4 (Airy), 10.2.2, 10.25.2,
10.27.4, 10.2.3 (Bessel functions of non-integer order).
"""

from __future__ import annotations

from collections.abc import Callable

from sympy import (
    Add,
    Expr,
    Integer,
    Pow,
    S,
    Symbol,
    acos,
    acot,
    airyai,
    airyaiprime,
    airybi,
    airybiprime,
    asin,
    asinh,
    atan,
    atanh,
    besseli,
    besselj,
    besselk,
    bessely,
    cos,
    cosh,
    erf,
    erfc,
    exp,
    factorial,
    gamma,
    log,
    rf,
    sin,
    sinh,
    sqrt,
)

# A power series: coefficients of x**0, x**1, ... ; a function: exponent -> power series.
Coefficients = list[Expr]
Pieces = dict[Expr, Coefficients]


class NoSeries(Exception):
    """The function has a logarithm, an essential singularity or an unknown node at 0."""


def _tidy(c: Expr) -> Expr:
    return c.expand() if c.is_Add or c.is_Mul or c.is_Pow else c


def _times(a: Coefficients, b: Coefficients) -> Coefficients:
    size = min(len(a), len(b))
    return [
        _tidy(Add(*(a[i] * b[n - i] for i in range(n + 1) if a[i] is not S.Zero and b[n - i] is not S.Zero)))
        for n in range(size)
    ]


def _plus(a: Pieces, b: Pieces) -> Pieces:
    result = dict(a)
    for exponent, series in b.items():
        for other in result:
            shift = exponent - other if exponent.is_Number and other.is_Number else _tidy(exponent - other)
            if shift.is_Integer:
                break
        else:
            result[exponent] = series
            continue
        old = result.pop(other)
        low, high, first, second = (
            (other, shift, old, series) if shift >= 0 else (exponent, -shift, series, old)
        )
        size = min(len(first), int(high) + len(second))
        moved = [S.Zero] * int(high) + second
        result[low] = [_tidy(first[i] + moved[i]) if i < len(moved) else first[i] for i in range(size)]
    return result


def _product(a: Pieces, b: Pieces) -> Pieces:
    result: Pieces = {}
    for e1, s1 in a.items():
        for e2, s2 in b.items():
            result = _plus(result, {_tidy(e1 + e2): _times(s1, s2)})
    return result


def _scaled(a: Pieces, c: Expr) -> Pieces:
    return {e: [_tidy(c * k) for k in s] for e, s in a.items()}


def _leading(a: Pieces) -> tuple[Expr, Coefficients]:
    """One piece with its leading zeros taken off; its first coefficient is not zero."""
    if len(a) != 1:
        raise NoSeries
    ((exponent, series),) = a.items()
    for k, c in enumerate(series):
        if c is not S.Zero:
            if c.is_Add and _hides_zero(c):
                raise NoSeries
            return exponent + k, series[k:]
    raise NoSeries


def _hides_zero(c: Expr) -> bool:
    """Whether a sum vanishes identically although it is not written as 0."""
    return abs(c.evalf(30)) < 1e-20 if c.is_number else c.cancel() is S.Zero


def _regular(a: Pieces) -> Coefficients:
    """A power series with integer exponents from 0 on."""
    if len(a) != 1:
        raise NoSeries
    ((exponent, series),) = a.items()
    while exponent.is_Integer and exponent < 0 and series and series[0] is S.Zero:
        exponent, series = exponent + 1, series[1:]
    if not exponent.is_Integer or exponent < 0 or not series:
        raise NoSeries
    return [S.Zero] * int(exponent) + series


def _power(a: Pieces, e: Expr) -> Pieces:
    """J. C. P. Miller's recurrence for the powers of a series."""
    exponent, series = _leading(a)
    head = series[0]
    result = [S.One]
    for n in range(1, len(series)):
        total = Add(*((e * k - n + k) * (series[k] / head) * result[n - k] for k in range(1, n + 1)))
        result.append(_tidy(total / n))
    front = Pow(head, e)
    return {_tidy(exponent * e): [_tidy(front * c) for c in result]}


def _derivative(u: Coefficients) -> Coefficients:
    return [k * c for k, c in enumerate(u)][1:]


def _integral(v: Coefficients, start: Expr) -> Coefficients:
    return [start] + [c / k for k, c in enumerate(v, 1)]


def _linear_system(u: Coefficients, start: list[Expr], signs: list[int]) -> list[Coefficients]:
    """Solutions of ``F_i' = signs[i]*u'*F_(i+1)`` (cyclic): exp, sine and cosine, and their like."""
    du = _derivative(u)
    result = [[c] for c in start]
    for n in range(len(du)):
        new = []
        for i, sign in enumerate(signs):
            other = result[(i + 1) % len(signs)]
            new.append(_tidy(Add(*(sign * du[k] * other[n - k] for k in range(n + 1))) / (n + 1)))
        for series, c in zip(result, new, strict=True):
            series.append(c)
    return result


def _by_slope(build: Callable[[Pieces], Pieces], start: Callable[[Expr], Expr]) -> Callable[[Pieces], Pieces]:
    """A function of ``u`` whose derivative with respect to ``u`` is ``build(u)``."""

    def function(a: Pieces) -> Pieces:
        u = _regular(a)
        slope = _regular(build({S.Zero: u}))
        return {S.Zero: _integral(_times(slope, _derivative(u)), start(u[0]))}

    return function


def _one_plus(a: Pieces, sign: int) -> Pieces:
    return _plus({S.Zero: [S.One] + [S.Zero] * (_width(a) - 1)}, _scaled(_product(a, a), Integer(sign)))


def _width(a: Pieces) -> int:
    return max(len(s) for s in a.values())


def _log(a: Pieces) -> Pieces:
    exponent, series = _leading(a)
    if exponent is not S.Zero:
        raise NoSeries
    slope = _times(_derivative(series), _power({S.Zero: series}, S.NegativeOne)[S.Zero])
    return {S.Zero: _integral(slope, log(series[0]))}


def _gauss(a: Pieces) -> Pieces:
    u = _regular(_product(a, a))
    return {S.Zero: [2 / sqrt(S.Pi) * c for c in _exp([-c for c in u])]}


def _exp(u: Coefficients) -> Coefficients:
    return _linear_system(u, [exp(u[0])], [1])[0]


def _waves(a: Pieces, functions: tuple[type, type], sign: int, which: int) -> Pieces:
    u = _regular(a)
    return {S.Zero: _linear_system(u, [functions[0](u[0]), functions[1](u[0])], [1, sign])[which]}


_SLOPE_RULES: dict[type, tuple[Callable[[Pieces], Pieces], int]] = {
    asinh: (lambda a: _power(_one_plus(a, 1), -S.Half), 1),
    asin: (lambda a: _power(_one_plus(a, -1), -S.Half), 1),
    acos: (lambda a: _power(_one_plus(a, -1), -S.Half), -1),
    atan: (lambda a: _power(_one_plus(a, 1), S.NegativeOne), 1),
    acot: (lambda a: _power(_one_plus(a, 1), S.NegativeOne), -1),
    atanh: (lambda a: _power(_one_plus(a, -1), S.NegativeOne), 1),
    erf: (_gauss, 1),
    erfc: (_gauss, -1),
}
_WAVES: dict[type, tuple[tuple[type, type], int, int]] = {
    sin: ((sin, cos), -1, 0),
    cos: ((sin, cos), -1, 1),
    sinh: ((sinh, cosh), 1, 0),
    cosh: ((sinh, cosh), 1, 1),
}


def _bessel(kind: type, order: Expr, a: Pieces) -> Pieces:
    """The ascending series; K and Y through the two solutions of opposite order."""
    if kind is besselk or kind is bessely:
        if order.is_integer or (order.is_number and order.is_integer is not False):
            raise NoSeries
        base = besseli if kind is besselk else besselj
        plus, minus = _bessel(base, order, a), _bessel(base, -order, a)
        sine = sin(S.Pi * order)
        if kind is besselk:
            half = S.Pi / (2 * sine)
            return _plus(_scaled(minus, half), _scaled(plus, -half))
        return _plus(_scaled(plus, cos(S.Pi * order) / sine), _scaled(minus, -1 / sine))
    exponent, series = _leading(a)
    if not (exponent.is_Rational and exponent.is_positive):
        raise NoSeries
    half = {exponent: [c / 2 for c in series]}
    square = _product(half, half)
    sign = -1 if kind is besselj else 1
    total: Pieces = {}
    term: Pieces = {S.Zero: [S.One] + [S.Zero] * (len(series) - 1)}
    for k in range(int(len(series) / (2 * exponent)) + 1):
        c = Integer(sign) ** k / (factorial(k) * rf(order + 1, k))
        total = _plus(total, _scaled(term, c))
        term = _product(term, square)
    return _scaled(_product(_power(half, order), total), 1 / gamma(order + 1))


def _airy(kind: type, a: Pieces) -> Pieces:
    """Two hypergeometric series, here by the recurrence ``(n+2)(n+3) c(n+3) = c(n)``."""
    u = _regular(a)
    if u[0] is not S.Zero:
        raise NoSeries
    prime = kind in (airyaiprime, airybiprime)
    base, slope = (airyai, airyaiprime) if kind in (airyai, airyaiprime) else (airybi, airybiprime)
    c = [base(0), slope(0), S.Zero]
    for n in range(len(u) + 1):
        c.append(c[n] / ((n + 2) * (n + 3)))
    if prime:
        c = [k * b for k, b in enumerate(c)][1:]
    total = [S.Zero] * len(u)
    for b in reversed(c[: len(u)]):
        total = _times(total, u)
        total[0] = total[0] + b
    return {S.Zero: total}


def pieces(f: Expr, x: Symbol, size: int) -> Pieces:
    """``f`` at 0+ as pieces ``x**rho*(c0 + c1*x + ...)``, about ``size`` coefficients each.

    Raises
    ------
    NoSeries
        Where ``f`` has no such expansion, or none that is known here.
    """
    if f == x:
        return {S.One: [S.One] + [S.Zero] * (size - 1)}
    if not f.has_free(x):
        return {S.Zero: [f] + [S.Zero] * (size - 1)}
    if f.is_Add:
        total: Pieces = {}
        for a in f.args:
            total = _plus(total, pieces(a, x, size))
        return total
    if f.is_Mul:
        product = pieces(f.args[0], x, size)
        for a in f.args[1:]:
            product = _product(product, pieces(a, x, size))
        return product
    if isinstance(f, exp):
        return {S.Zero: _exp(_regular(pieces(f.exp, x, size)))}
    if f.is_Pow and not f.exp.has_free(x):
        base = pieces(f.base, x, size)
        if f.exp.is_Integer and 0 < f.exp < 12:
            power = base
            for _ in range(int(f.exp) - 1):
                power = _product(power, base)
            return power
        return _power(base, f.exp)
    return _function(f, pieces(f.args[-1], x, size), x) if f.is_Function else _refused()


def _refused() -> Pieces:
    raise NoSeries


def _function(f: Expr, inner: Pieces, x: Symbol) -> Pieces:
    kind = type(f)
    if kind in _SLOPE_RULES:
        build, sign = _SLOPE_RULES[kind]
        return _by_slope(lambda a: _scaled(build(a), Integer(sign)), kind)(inner)
    if kind in _WAVES:
        return _waves(inner, *_WAVES[kind])
    if kind is log:
        return _log(inner)
    if kind in (besselj, bessely, besseli, besselk) and not f.args[0].has_free(x):
        return _bessel(kind, f.args[0], inner)
    if kind in (airyai, airybi, airyaiprime, airybiprime):
        return _airy(kind, inner)
    raise NoSeries


def coefficient(a: Pieces, exponent: Expr) -> Expr | None:
    """The coefficient of ``x**exponent``; None beyond the truncation."""
    for base, series in a.items():
        k = _tidy(exponent - base)
        if k.is_Integer:
            if k < 0:
                return S.Zero
            return series[int(k)] if k < len(series) else None
    return S.Zero
