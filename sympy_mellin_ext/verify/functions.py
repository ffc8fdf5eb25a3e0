"""SymPy's functions as mpmath computes them.

``lambdify`` knows most names already; the table below holds those whose arguments differ between the two
packages, whose definition differs, or which mpmath lacks but can be composed.
"""
from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from typing import Any

from mpmath import mp

Number = Any  # mpf or mpc: mpmath has no annotations


def _polylog(s: Number, z: Number) -> Number:
    """Polylogarithm; mpmath's series in log(z) diverges for large abs(z), so z is inverted there."""
    if mp.isint(s) or abs(z) < 2:
        return mp.polylog(s, z)
    # Jonquiere's inversion formula (DLMF 25.13.2, with the Hurwitz zeta function for the periodic one)
    turn = mp.mpc(0, 1) if mp.im(z) > 0 or (mp.im(z) == 0 and mp.re(z) < 1) else mp.mpc(0, -1)
    hurwitz = mp.zeta(1 - s, mp.mpf(1) / 2 + mp.log(-z) / (2 * mp.pi * turn))
    value = (2 * mp.pi * turn) ** s * mp.rgamma(s) * hurwitz - mp.exp(turn * mp.pi * s) * mp.polylog(s, 1 / z)
    return mp.re(value) if mp.im(z) == 0 and mp.re(z) < 1 and mp.im(s) == 0 else value


def _dirichlet_eta(s: Number, a: Number = 1) -> Number:
    if a == 1:
        return mp.altzeta(s)
    if s == 1:
        return (mp.digamma((a + 1) / mp.mpf(2)) - mp.digamma(a / mp.mpf(2))) / 2
    return (mp.zeta(s, a / mp.mpf(2)) - mp.zeta(s, (a + 1) / mp.mpf(2))) / mp.mpf(2) ** s


def _zeta(s: Number, a: Number = 1) -> Number:
    return mp.zeta(s, a)


def _harmonic(n: Number, m: Number = 1) -> Number:
    return mp.harmonic(n) if m == 1 else mp.zeta(m) - mp.zeta(m, n + 1)


def _heaviside(x: Number, at_zero: Number = None) -> Number:
    if x == 0:
        return mp.mpf(1) / 2 if at_zero is None else at_zero
    return mp.mpf(1 if x > 0 else 0)


def _hyper(upper: tuple, lower: tuple, z: Number) -> Number:
    # a parameter that stands above and below cancels; mpmath treats the two as unrelated
    top, bottom = list(upper), list(lower)
    for a in list(top):
        if a in bottom:
            top.remove(a)
            bottom.remove(a)
    return mp.hyper(top, bottom, z)


def _meijerg(upper: tuple, lower: tuple, z: Number) -> Number:
    return mp.meijerg([list(p) for p in upper], [list(p) for p in lower], z)


def _spherical(kind: str) -> Callable[[Number, Number], Number]:
    def value(n: Number, z: Number) -> Number:
        return mp.sqrt(mp.pi / (2 * mp.mpmathify(z))) * getattr(mp, kind)(n + mp.mpf(1) / 2, z)
    return value


_LARGE = 60


@lru_cache(maxsize=256)
def _k_nodes(nu: Number, precision: int) -> tuple[Number, list[tuple[Number, Number]]]:
    """Step, and (cosh(t), cosh(nu*t)) at its multiples, for the trapezoidal rule on DLMF 10.32.9."""
    with mp.workprec(precision):
        need = precision * mp.ln2 + 4
        # the integrand is analytic for abs(Im t) < pi/2 and below exp(-z*cos(Im t)) there
        step = 2 * mp.pi * mp.mpf("1.25") / (need + mp.mpf("0.7") * _LARGE)
        count = int(mp.acosh(1 + need + 6 * nu) / step) + 2
        return step, [(mp.cosh(k * step), mp.cosh(nu * k * step)) for k in range(count)]


def _besselk(nu: Number, z: Number) -> Number:
    """K of real order and positive argument without the cancellation between I(-nu) and I(nu)."""
    nu, z = mp.mpmathify(nu), mp.mpmathify(z)
    if mp.im(z) == 0 and _far(nu, z):
        return mp.sqrt(mp.pi / (2 * z)) * mp.exp(-z) * _expansion(nu, z, 1)
    if mp.im(nu) or mp.im(z) or not 0 < z < _LARGE or abs(nu) > 12:
        return mp.besselk(nu, z)
    nu, z = abs(mp.re(nu)), mp.re(z)
    if z > 1:
        step, nodes = _k_nodes(nu, mp.prec)
        total = mp.exp(-z) / 2
        for c, weight in nodes[1:]:
            term = weight * mp.exp(-z * c)
            total += term
            if term <= total * mp.eps / 16:
                break
        return total * step
    return _k_series(int(nu), z) if mp.isint(nu) else mp.besselk(nu, z)


def _k_series(n: int, z: Number) -> Number:
    """K of integer order for small z (DLMF 10.31.1)."""
    square, half = z * z / 4, z / 2
    finite, series = _integer_order(n, square, mp.log(half), -1)
    return finite / half**n / 2 - (-1) ** n * half**n * series


def _y_series(n: int, z: Number) -> Number:
    """Y of integer order for small z (DLMF 10.8.1)."""
    square, half = z * z / 4, z / 2
    finite, series = _integer_order(n, square, mp.log(half), 1)
    return (2 * half**n * series - finite / half**n) / mp.pi


def _integer_order(n: int, square: Number, logarithm: Number, sign: int) -> tuple[Number, Number]:
    """The finite sum of the singular part, and sum (logarithm - digammas/2)*(-sign*square)**k/(k!(n+k)!)."""
    finite = mp.fsum(mp.factorial(n - k - 1) / mp.factorial(k) * (sign * square) ** k for k in range(n))
    term, digammas = 1 / mp.factorial(n), mp.fsum(mp.one / k for k in range(1, n + 1)) - 2 * mp.euler
    total, k = mp.zero, 0
    while True:
        change = term * (logarithm - digammas / 2)
        total += change
        if abs(change) <= abs(total) * mp.eps / 16:
            return finite, total
        k += 1
        term *= -sign * square / (k * (n + k))
        digammas += mp.one / k + mp.one / (n + k)


def asymptotic_from(nu: Number) -> Number:
    """Where Hankel's expansion has the working precision: its least term is about exp(-2*abs(z))."""
    return mp.mpf("1.25") * (mp.dps + 4) + abs(nu) ** 2 / 2


@lru_cache(maxsize=64)
def _hankel_coefficients(nu: Number, precision: int) -> tuple[list[Number], list[int]]:
    """The first of a_k(nu) of DLMF 10.17.1 and their binary magnitudes; `_expansion` adds to them."""
    return [mp.one], [1]


def _expansion(nu: Number, z: Number, unit: Number) -> Number:
    """sum a_k(nu)*(unit/z)**k, which serves H (DLMF 10.17.5), K and I (DLMF 10.40.1-2)."""
    coefficients, sizes = _hankel_coefficients(nu, mp.prec)
    size, count = mp.mag(z) - 1, 1
    while sizes[count - 1] - (count - 1) * size > -mp.prec - 4 and count < 20 + mp.prec // 2:
        if count == len(sizes):
            a = coefficients[-1] * (4 * nu * nu - (2 * count - 1) ** 2) / (8 * count)
            coefficients.append(a)
            sizes.append(mp.mag(a) if a else -10**9)
        count += 1
    total, t = mp.zero, unit / z
    for a in reversed(coefficients[:count]):
        total = total * t + a
    return total


def _hankel_expansion(nu: Number, z: Number, sign: int) -> Number:
    turn = mp.mpc(0, sign)
    wave = mp.exp(turn * (z - nu * mp.pi / 2 - mp.pi / 4))
    return mp.sqrt(2 / (mp.pi * z)) * wave * _expansion(nu, z, turn)


def _besseli(nu: Number, z: Number) -> Number:
    nu, z = mp.mpmathify(nu), mp.mpmathify(z)
    if mp.im(z) == 0 and _far(nu, z):
        # the other exponential, exp(-z), is below the working precision there
        return mp.exp(z) / mp.sqrt(2 * mp.pi * z) * _expansion(nu, z, -1)
    return mp.besseli(nu, z)


def _far(nu: Number, z: Number) -> bool:
    return mp.im(nu) == 0 and mp.re(z) > 0 and abs(z) > asymptotic_from(nu)


def _besselj(nu: Number, z: Number) -> Number:
    nu, z = mp.mpmathify(nu), mp.mpmathify(z)
    return mp.re(_hankel_expansion(nu, z, 1)) if mp.im(z) == 0 and _far(nu, z) else mp.besselj(nu, z)


def _bessely(nu: Number, z: Number) -> Number:
    nu, z = mp.mpmathify(nu), mp.mpmathify(z)
    if mp.im(z) == 0 and _far(nu, z):
        return mp.im(_hankel_expansion(nu, z, 1))
    if mp.im(z) == 0 and 0 < z <= 1 and mp.isint(nu) and nu >= 0:
        return _y_series(int(nu), mp.re(z))
    return mp.bessely(nu, z)


def _hankel(nu: Number, z: Number, sign: int) -> Number:
    """Through K (DLMF 10.27.8), where J and Y would cancel: the half-plane in which the function decays."""
    nu, z = mp.mpmathify(nu), mp.mpmathify(z)
    if _far(nu, z):
        return _hankel_expansion(nu, z, sign)
    turn = mp.mpc(0, sign)
    if mp.im(z) * sign >= 0 and mp.re(z) > 0:
        return 2 / (mp.pi * turn) * mp.exp(-turn * nu * mp.pi / 2) * mp.besselk(nu, -turn * z)
    return mp.besselj(nu, z) + turn * mp.bessely(nu, z)


def _laguerre(n: Number, x: Number) -> Number:
    return mp.laguerre(n, 0, x)


def _sinc(x: Number) -> Number:
    return mp.sinc(x)


def _sign(x: Number) -> Number:
    return mp.sign(x)


def _binomial(n: Number, k: Number) -> Number:
    return mp.binomial(n, k)


def _assoc_legendre(n: Number, m: Number, x: Number) -> Number:
    return mp.legenp(n, m, x, type=2 if abs(mp.re(x)) <= 1 else 3)


def _max(*args: Number) -> Number:
    return max(args)


def _min(*args: Number) -> Number:
    return min(args)


# SymPy's name -> callable at mpmath's working precision
TABLE: dict[str, Callable[..., Number]] = {
    "expint": lambda n, z: mp.expint(n, z),
    "Ei": lambda z: mp.ei(z),
    "Ci": lambda z: mp.ci(z),
    "Si": lambda z: mp.si(z),
    "Chi": lambda z: mp.chi(z),
    "Shi": lambda z: mp.shi(z),
    "li": lambda z: mp.li(z),
    "Li": lambda z: mp.li(z, offset=True),
    "uppergamma": lambda a, z: mp.gammainc(a, z),
    "lowergamma": lambda a, z: mp.gammainc(a, 0, z),
    "polylog": _polylog,
    "dirichlet_eta": _dirichlet_eta,
    "zeta": _zeta,
    "riemann_xi": lambda s: s * (s - 1) * mp.gamma(s / 2) * mp.zeta(s) / (2 * mp.pi ** (s / 2)),
    "lerchphi": lambda z, s, a: mp.lerchphi(z, s, a),
    "stieltjes": lambda n, a=1: mp.stieltjes(int(n), a),
    "meijerg": _meijerg,
    "hyper": _hyper,
    "appellf1": lambda a, b1, b2, c, x, y: mp.appellf1(a, b1, b2, c, x, y),
    "elliptic_k": lambda m: mp.ellipk(m),
    "elliptic_e": lambda *args: mp.ellipe(*args),
    "elliptic_f": lambda z, m: mp.ellipf(z, m),
    "elliptic_pi": lambda *args: mp.ellippi(*args),
    "polygamma": lambda n, z: mp.psi(int(n), z) if mp.isint(n) and n >= 0 else mp.nan,
    "digamma": lambda z: mp.digamma(z),
    "trigamma": lambda z: mp.psi(1, z),
    "loggamma": lambda z: mp.loggamma(z),
    "harmonic": _harmonic,
    "beta": lambda a, b=None: mp.beta(a, a if b is None else b),
    "betainc": lambda a, b, x, y: mp.betainc(a, b, x, y),
    "betainc_regularized": lambda a, b, x, y: mp.betainc(a, b, x, y, regularized=True),
    "factorial": lambda n: mp.factorial(n),
    "factorial2": lambda n: mp.fac2(n),
    "subfactorial": lambda n: mp.gammainc(n + 1, -1) / mp.e,
    "binomial": _binomial,
    "RisingFactorial": lambda x, n: mp.rf(x, n),
    "FallingFactorial": lambda x, n: mp.ff(x, n),
    "Heaviside": _heaviside,
    "besselj": _besselj,
    "bessely": _bessely,
    "besselk": _besselk,
    "besseli": _besseli,
    "hankel1": lambda nu, z: _hankel(nu, z, 1),
    "hankel2": lambda nu, z: _hankel(nu, z, -1),
    "airyaiprime": lambda z: mp.airyai(z, derivative=1),
    "airybiprime": lambda z: mp.airybi(z, derivative=1),
    "jn": _spherical("besselj"),
    "yn": _spherical("bessely"),
    "hn1": _spherical("hankel1"),
    "hn2": _spherical("hankel2"),
    "erf2": lambda a, b: mp.erf(b) - mp.erf(a),
    "erfcinv": lambda z: mp.erfinv(1 - z),
    "erf2inv": lambda a, z: mp.erfinv(z + mp.erf(a)),
    "laguerre": _laguerre,
    "assoc_laguerre": lambda n, a, x: mp.laguerre(n, a, x),
    "assoc_legendre": _assoc_legendre,
    "bernoulli": lambda n, x=1: mp.bernpoly(n, x),
    "LambertW": lambda z, k=0: mp.lambertw(z, int(k)),
    "sinc": _sinc,
    "sign": _sign,
    "Abs": lambda z: abs(mp.mpmathify(z)),
    "Max": _max,
    "Min": _min,
    "re": lambda z: mp.re(z),
    "im": lambda z: mp.im(z),
    "arg": lambda z: mp.arg(z),
    "conjugate": lambda z: mp.conj(z),
    "acot": lambda z: mp.pi / 2 if z == 0 else mp.atan(1 / mp.mpmathify(z)),
    # a polar number is used only through its value on the principal sheet
    "exp_polar": lambda z: mp.exp(z),
    "polar_lift": lambda z: z,
    "unpolarify": lambda z: z,
}
