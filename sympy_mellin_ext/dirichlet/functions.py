"""One Dirichlet series: ``Phi(z, w, a) = sum_k z**k*(k + a)**(-w)``, its values and its Laurent series in w.

Sources: DLMF 25.11.1, 25.11.9 and 25.11.14-18 (Hurwitz), 25.14.1 (Lerch), 25.12.10 (polylogarithm),
25.2.4 and 25.6.11-15 (Laurent series and derivatives of zeta).
"""

from __future__ import annotations

from sympy import (
    Derivative,
    Expr,
    Integer,
    Pow,
    S,
    Symbol,
    digamma,
    dirichlet_eta,
    factorial,
    lerchphi,
    log,
    loggamma,
    pi,
    polylog,
    stieltjes,
    zeta,
)

from ..gamma.laurent import Series, multiply, power_series


class NoClosedForm(Exception):
    """A coefficient of a Laurent series that has no closed form in named functions."""


def value(z: Expr, w: Expr, a: Expr) -> Expr:
    """``Phi(z, w, a)`` at a regular point."""
    if z is S.One:
        return zeta(w) if a is S.One else zeta(w, a)
    if z is S.NegativeOne:
        return alternating(w, a)
    if w.is_Integer and w.is_nonpositive:
        return _rational(z, -int(w), a)
    if a is S.One:
        return -log(1 - z) / z if w is S.One else _polylog(w, z) / z
    return lerchphi(z, w, a)


def _polylog(w: Expr, z: Expr) -> Expr:
    # SymPy's own evaluation asks whether z equals 1, which may take a second
    return polylog(w, z, evaluate=not z.free_symbols)


def alternating(w: Expr, a: Expr) -> Expr:
    """``sum (-1)**k*(k + a)**(-w)``."""
    if a is S.One:
        return dirichlet_eta(w)
    low, high = (a / 2).expand(), ((a + 1) / 2).expand()
    if w is S.One:
        return (digamma(high) - digamma(low)) / 2
    total = Pow(2, -w) * (zeta(w, low) - zeta(w, high))
    return total.expand() if w.is_Integer and w.is_nonpositive else total


def _rational(z: Expr, n: int, a: Expr) -> Expr:
    """``sum z**k*(k + a)**n = (z d/dz + a)**n 1/(1 - z)``, as a polynomial in t = 1/(1 - z)."""
    # z*dt/dz = t**2 - t
    coefficients = [S.Zero, S.One]
    for _ in range(n):
        following = [S.Zero] * (len(coefficients) + 1)
        for power, c in enumerate(coefficients):
            following[power] += c * (a - power)
            following[power + 1] += c * power
        coefficients = following
    t = 1 / (1 - z)
    return sum((c.expand() * t**power for power, c in enumerate(coefficients)), S.Zero)


# -- Laurent series ------------------------------------------------------------------------------------------


def hurwitz_series(w: Expr, rate: Expr, a: Expr, terms: int) -> Series:
    """``zeta(w + rate*eps, a)``; at the pole w = 1 it starts with ``1/(rate*eps)``."""
    if w is S.One:
        rest = [
            S.NegativeOne**n * _stieltjes(n, a) * rate ** (n + 1) / factorial(n) for n in range(terms - 1)
        ]
        return Series(-1, (S.One, *rest)[:terms], 1 / rate)
    return Series(0, tuple(_derivative(n, w, a) * rate**n / factorial(n) for n in range(terms)))


def _stieltjes(n: int, a: Expr) -> Expr:
    if n == 0:
        return minus_digamma(a)
    return stieltjes(n) if a is S.One else stieltjes(n, a)


def minus_digamma(a: Expr) -> Expr:
    """``-psi(a)``, by Gauss' theorem (DLMF 5.4.19) for rational a of small denominator."""
    return -digamma(a).expand(func=True) if a.is_Rational and a.q <= 12 else -digamma(a)


def _derivative(n: int, w: Expr, a: Expr) -> Expr:
    """The n-th derivative of ``zeta(w, a)`` in w, away from its pole."""
    if n == 0:
        return zeta(w) if a is S.One else zeta(w, a)
    if w.is_Symbol:
        return Derivative(zeta(w) if a is S.One else zeta(w, a), (w, n))
    if w.free_symbols:
        return _symbolic(lambda s: zeta(s) if a is S.One else zeta(s, a), n, w)
    if n == 1 and w is S.Zero:
        return -log(2 * pi) / 2 if a is S.One else loggamma(a) - log(2 * pi) / 2
    if a is S.One and n == 1 and w.is_Integer and w.is_negative and w.is_even:
        # DLMF 25.6.12 in the form zeta'(-2m) = (-1)**m*(2m)!*zeta(2m+1)/(2*(2*pi)**(2m))
        m = -w / 2
        return S.NegativeOne**m * factorial(2 * m) * zeta(2 * m + 1) / (2 * (2 * pi) ** (2 * m))
    if a is S.One and n == 2 and w is S.Zero:
        return S.EulerGamma**2 / 2 - pi**2 / 24 - log(2 * pi) ** 2 / 2 + stieltjes(1)
    if a is S.Half:
        # zeta(w, 1/2) = (2**w - 1)*zeta(w)
        power = power_series(Integer(2), w, S.One, n + 1)
        factor = Series(0, (power.coefficient(0) - 1, *(power.coefficient(k) for k in range(1, n + 1))))
        series = multiply(factor, hurwitz_series(w, S.One, S.One, n + 1), n + 1)
        return series.coefficient(n) * factorial(n)
    raise NoClosedForm(f"derivative {n} of zeta({w}, {a})")


def _symbolic(function: object, n: int, w: Expr) -> Expr:
    """The derivative at ``shift + slope*s``, as a derivative in the symbol s."""
    symbols = sorted(w.free_symbols, key=str)
    for s in symbols:
        slope = w.diff(s)
        if isinstance(s, Symbol) and slope.is_Rational and slope != 0:
            return Derivative(function(w), (s, n)) / slope**n  # type: ignore[operator]
    raise NoClosedForm(f"derivative at {w}")


def eta_series(w: Expr, rate: Expr, terms: int) -> Series:
    """``dirichlet_eta(w + rate*eps) = (1 - 2**(1 - w))*zeta(w)``, entire."""
    if terms == 1:
        return Series(0, (dirichlet_eta(w),))
    if w.free_symbols:
        rest = [_symbolic(dirichlet_eta, n, w) * rate**n / factorial(n) for n in range(1, terms)]
        return Series(0, (dirichlet_eta(w), *rest))
    more = terms + 1
    power = power_series(Integer(2), 1 - w, -rate, more)
    factor = [1 - power.coefficient(0), *(-power.coefficient(k) for k in range(1, more))]
    zetas = hurwitz_series(w, rate, S.One, terms)
    if w is S.One:
        # the zero of the factor meets the pole
        return multiply(Series(0, tuple(factor[1:])), zetas._replace(valuation=0), terms)
    return multiply(Series(0, tuple(factor[:terms])), zetas, terms)


def series(z: Expr, w: Expr, rate: Expr, a: Expr, terms: int) -> Series:
    """``Phi(z, w + rate*eps, a)`` with `terms` coefficients."""
    if z is S.One:
        return hurwitz_series(w, rate, a, terms)
    if terms == 1:
        return Series(0, (value(z, w, a),))
    if z is S.NegativeOne:
        if a is S.One:
            return eta_series(w, rate, terms)
        more = terms + 1 if w is S.One else terms
        halves = power_series(Integer(2), -w, -rate, more)
        low = hurwitz_series(w, rate, (a / 2).expand(), more)
        high = hurwitz_series(w, rate, ((a + 1) / 2).expand(), more)
        first = low.valuation
        difference = tuple(low.coefficient(k) - high.coefficient(k) for k in range(first, first + more))
        product = multiply(Series(first, difference), halves, more)
        return Series(0, tuple(product.coefficient(k) for k in range(terms)))
    if not w.free_symbols:
        raise NoClosedForm(f"derivative of Phi({z}, {w}, {a}) in its second argument")
    head = value(z, w, a)
    rest = [_symbolic(lambda s: value(z, s, a), n, w) * rate**n / factorial(n) for n in range(1, terms)]
    return Series(0, (head, *rest))


def shifted(z: Expr, w: Expr, a: Expr, n: int) -> tuple[Expr, Expr]:
    """``Phi(z, w, a + n) = factor*Phi(z, w, a) + rest`` for whole n, as (factor, rest)."""
    factor = z ** (-n)
    if n >= 0:
        rest = -sum((z ** (k - n) * (a + k) ** (-w) for k in range(n)), S.Zero)
    else:
        rest = sum((z ** (k - n) * (a + k) ** (-w) for k in range(n, 0)), S.Zero)
    return factor, rest


__all__ = [
    "NoClosedForm",
    "alternating",
    "eta_series",
    "hurwitz_series",
    "minus_digamma",
    "series",
    "shifted",
    "value",
]
