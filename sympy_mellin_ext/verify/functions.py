"""SymPy's functions as mpmath computes them.

``lambdify`` knows most names already; the table below holds those whose arguments differ between the two
packages, whose definition differs, or which mpmath lacks but can be composed.
"""
from __future__ import annotations

from collections.abc import Callable
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


def _hankel(nu: Number, z: Number, sign: int) -> Number:
    """Through K (DLMF 10.27.8), where J and Y would cancel: the half-plane in which the function decays."""
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
