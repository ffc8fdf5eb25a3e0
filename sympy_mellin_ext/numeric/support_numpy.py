"""What a generated function needs besides numpy and scipy; its text goes into the stand-alone source.

Logarithms of Gammas are added up in pairs of doubles (some 31 digits), so that large ones cancel without
loss: T. J. Dekker, A floating-point technique for extending the available precision, Numer. Math. 18 (1971);
Stirling's series DLMF 5.11.1, reflection 5.5.3.
"""
from typing import Any

import numpy as np
from scipy import special as sp


class _Pair:
    """An unevaluated sum hi + lo of two doubles."""

    __array_ufunc__ = None  # numpy leaves mixed operations to this class

    def __init__(self, hi: Any, lo: Any = 0.0) -> None:
        self.hi, self.lo = hi, lo

    def __add__(self, other: Any) -> Any:
        other = _pair(other)
        if not isinstance(other, _Pair):
            return self.hi + other
        s = self.hi + other.hi
        b = s - self.hi
        return _normal(s, (self.hi - (s - b)) + (other.hi - b) + self.lo + other.lo)

    def __mul__(self, other: Any) -> Any:
        other = _pair(other)
        if not isinstance(other, _Pair):
            return self.hi * other
        p, e = _product_of_doubles(self.hi, other.hi)
        return _normal(p, e + (self.hi * other.lo + self.lo * other.hi))

    def __neg__(self) -> "_Pair":
        return _Pair(-self.hi, -self.lo)

    def __sub__(self, other: Any) -> Any:
        return self + (-_pair(other))

    def __rsub__(self, other: Any) -> Any:
        return -self + other

    def __truediv__(self, other: Any) -> Any:
        other = _pair(other)
        if not isinstance(other, _Pair):
            return self.hi / other
        q = self.hi / other.hi
        rest = self - other * q
        return _normal(q, (rest.hi + rest.lo) / other.hi)

    def __rtruediv__(self, other: Any) -> Any:
        other = _pair(other)
        return other / self if isinstance(other, _Pair) else other / self.hi

    __radd__ = __add__
    __rmul__ = __mul__


def _pair(v: Any) -> Any:
    return v if isinstance(v, _Pair) or np.iscomplexobj(v) else _Pair(np.asarray(v, dtype=float), 0.0)


def _normal(hi: Any, lo: Any) -> _Pair:
    s = hi + lo
    return _Pair(s, lo - (s - hi))


def _product_of_doubles(a: Any, b: Any) -> Any:
    p = a * b
    c, d = 134217729.0 * a, 134217729.0 * b
    a1, b1 = c - (c - a), d - (d - b)
    a2, b2 = a - a1, b - b1
    return p, ((a1 * b1 - p) + a1 * b2 + a2 * b1) + a2 * b2


_LOG2 = _Pair(0.6931471805599453, 2.3190468138462996e-17)
_HALF_LOG_2PI = _Pair(0.9189385332046728, -3.878294158067242e-17)


def _log(z: Any) -> Any:
    """Logarithm of a positive pair: 2*artanh((m - 1)/(m + 1)) + n*log(2), z = m*2**n."""
    m, n = np.frexp(z.hi)
    small = m < np.sqrt(0.5)
    n = n - small
    m = _Pair(np.where(small, 2 * m, m), np.ldexp(z.lo, -n))
    t = (m - 1.0) / (m + 1.0)
    square = t * t
    total = _pair(1.0) / 35.0
    for k in range(33, 0, -2):
        total = total * square + _pair(1.0) / float(k)
    return t * total * 2.0 + _LOG2 * n.astype(float)


def _log_gamma(z: _Pair) -> Any:
    """Sign of Gamma(z), its logarithm as a pair, and whether z is a pole (the others are 1 and 0 then)."""
    nearest = np.round(z.hi)
    distance = (z.hi - nearest) + z.lo
    low = z.hi < 0.5
    pole = low & (nearest <= 0) & (distance == 0)
    mirror = 1.0 - z
    w = _Pair(np.where(low, mirror.hi, z.hi), np.where(low, mirror.lo, z.lo))
    w = _Pair(np.where(pole, 1.0, w.hi), np.where(pole, 0.0, w.lo))
    # up to where Stirling's series has all digits
    product = np.ones_like(w.hi)
    for _ in range(16):
        up = w.hi < 16
        product = np.where(up, product * w.hi * (1 + w.lo / w.hi), product)
        w = w + np.where(up, 1.0, 0.0)
    x = 1 / w.hi
    y = x * x
    tail = 0.0
    for c in (1 / 156, -691 / 360360, 1 / 1188, -1 / 1680, 1 / 1260, -1 / 360, 1 / 12):
        tail = tail * y + c
    tail = tail * x
    value = (w - 0.5) * _log(w) - w + _HALF_LOG_2PI + (tail - np.log(product))
    sine = np.sin(np.pi * distance)
    sine = np.where(nearest % 2 == 1, -sine, sine)
    turned = np.log(np.pi / np.where(low & ~pole, np.abs(sine), np.pi)) - value
    sign = np.where(low & ~pole, np.sign(sine), 1.0)
    hi = np.where(pole, 0.0, np.where(low, turned.hi, value.hi))
    return sign, _Pair(hi, np.where(pole, 0.0, np.where(low, turned.lo, value.lo))), pole


def _product(gammas: Any, powers: Any, exponents: Any, rest: Any) -> Any:
    """``rest * prod Gamma(z)**n * prod base**e * exp(sum exponents)`` by the sum of the logarithms."""
    parts = [z for z, _ in gammas] + [v for p in powers for v in p] + list(exponents)
    if not all(isinstance(v, _Pair) for v in parts) or any(np.any(b.hi < 0) for b, _ in powers):
        parts = [n * sp.loggamma(_plain(z) + 0j) for z, n in gammas]
        parts += [_plain(e) * np.log(_plain(b) + 0j) for b, e in powers] + [_plain(e) for e in exponents]
        return rest * np.exp(sum(parts))
    total, sign, order, poles = _pair(0.0), np.float64(1.0), 0, False
    for z, n in gammas:
        s, value, pole = _log_gamma(z)
        total = total + value * float(n)
        sign = sign * s**n
        order, poles = order + n * pole, poles | pole
    for base, e in powers:
        total = total + e * _log(base)
    for e in exponents:
        total = total + e
    result = sign * np.exp(total.hi) * (1 + total.lo) * rest
    # poles above and below: a value at a removable singularity is not found here
    return np.where(poles, np.where(order < 0, 0.0, np.nan), result)


def _plain(v: Any) -> Any:
    return v.hi if isinstance(v, _Pair) else v


def _sinpi(v: Any) -> Any:
    """sin(pi*v), for large v too."""
    if not isinstance(v, _Pair):
        return np.sin(np.pi * v)
    nearest = np.round(v.hi)
    sine = np.sin(np.pi * ((v.hi - nearest) + v.lo))
    return np.where(nearest % 2 == 1, -sine, sine)


def _eta(s: Any) -> Any:
    """Dirichlet's eta function, DLMF 25.2.3."""
    return np.where(s == 1, np.log(2), -np.expm1((1 - s) * np.log(2)) * sp.zeta(np.where(s == 1, 2, s)))


_STEP, _NEAR, _PAIRS = 0.02, 0.007, 6


def _gap(form: Any, kind: str) -> Any:
    """The way from a form to the next value where the formula may be singular."""
    if kind == "zero":
        return -form
    nearest = np.round(np.real(form))
    return (np.minimum(nearest, 0) if kind == "nonpositive" else nearest) - form


def _evaluated(value: Any, inside: Any, arguments: Any, hazards: Any, rates: Any, relative: Any) -> Any:
    """The value; nan outside the region; by interpolation next to removable singularities.

    ``hazards(*arguments)`` gives forms, the kind of their singular values, and how fast each moves with each
    argument.  The lines of the interpolation move one argument, or all of them at their rates.
    """
    point: Any = np.broadcast_arrays(
        *(np.asarray(v, dtype=complex if np.iscomplexobj(v) else float) for v in arguments)
    )
    with np.errstate(all="ignore"):
        within = inside(*point) & ~np.any([np.isnan(v) for v in point], axis=0)
        point = [np.where(within, v, np.nan) for v in point]
        result = np.where(within, value(*point), np.nan)
        near = np.zeros(np.shape(within), dtype=bool)
        for form, kind, speeds in hazards(*point):
            near = near | np.any([np.abs(_gap(form, kind)) < _NEAR * np.abs(v) for v in speeds if np.any(v)], axis=0)
        if np.any(near):
            here = [v[near] for v in point]
            found, known = _interpolated(value, inside, here, hazards(*here), rates, relative)
            result = result.astype(np.result_type(result, found))
            result[near] = np.where(known, found, result[near])
    return result[()]


def _interpolated(value: Any, inside: Any, here: Any, hazards: Any, rates: Any, relative: Any) -> Any:
    """Lagrange's interpolation at the points from nodes at both sides of the singularity, and where it is needed."""
    size, count = np.shape(here[0]), len(rates)
    lines = [tuple(float(i == j) for j in range(count)) for i in range(count)]
    lines += [rates] if count > 1 else []

    def moved(line: Any, t: Any, chosen: Any = slice(None)) -> Any:
        pairs = zip(here, line, relative, strict=True)
        return [v[chosen] * np.exp(r * t) if m else v[chosen] + r * t for v, r, m in pairs]

    states: Any = []
    for line in lines:
        states.append([])
        for form, kind, speeds in hazards:
            speed = sum((r * np.asarray(v) for r, v in zip(line, speeds, strict=True)), np.zeros(size))
            t = np.where(speed == 0, np.inf, _gap(form, kind) / np.where(speed == 0, 1, speed))
            crossing = np.where(np.abs(t) < 1, np.real(t), 0)
            # a singularity at the edge of the region is a true one
            removable = inside(*moved(line, crossing + 1e-6)) & inside(*moved(line, crossing - 1e-6))
            states[-1].append((np.abs(t), removable))
    removable = [np.any([(s[h][0] < _NEAR) & s[h][1] for s in states], axis=0) for h in range(len(hazards))]
    todo = np.any(removable, axis=0)
    found, known = np.full(size, np.nan), np.zeros(size, dtype=bool)
    for line, state in zip(lines, states, strict=True):
        # the way to the next true pole on this line
        reach = np.min([np.where(inner, np.inf, t) for t, inner in state], axis=0)
        # and to the farthest of the singularities to be stepped over
        ways = [np.where(r, np.where(inner, t, np.inf), 0) for r, (t, inner) in zip(removable, state, strict=True)]
        step = np.maximum(_STEP * np.clip(reach / 0.8, 0.05, 1), 2.5 * np.max(ways, axis=0))
        chosen = todo & ~known & (step < 3 * _STEP) & (reach > 8 * step)
        if np.any(chosen):
            total, weight, h = 0.0, 1.0, step[chosen]
            for k in range(1, _PAIRS + 1):
                weight = weight * (_PAIRS - k + 1) / (_PAIRS + k)
                pair = value(*moved(line, k * h, chosen)) + value(*moved(line, -k * h, chosen))
                total = total + (-1) ** (k + 1) * weight * pair
            found = found.astype(np.result_type(found, total))
            found[chosen] = total
            known = known | chosen
    return found, known
