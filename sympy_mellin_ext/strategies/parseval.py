"""The value of an integral of two kernels, as a function of the quotient of their scales."""
from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from sympy import (
    Add,
    Derivative,
    Dummy,
    Expr,
    I,
    Integer,
    Mul,
    Piecewise,
    Pow,
    S,
    Subs,
    Symbol,
    exp,
    hyper,
    log,
    meijerg,
    pi,
    re,
)

from ..behaviour import polar_scale
from ..gamma import Factor
from ..gamma.product import cancel
from ..gamma.shortest import positive_power
from ..inverse import inverse_mellin, named_pfq
from ..inverse.residues import left_series
from ..inverse.signature import normalise
from ..kernels.bessel import ROWS as BESSEL_ROWS
from ..kernels.elementary import COS, SIN
from ..matching import Kernel, Term, Wave
from ..region import Facts, Region
from .tidy import tidy

_BAD = (S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity)


def parseval(term: Term, facts: Facts, region: Region) -> Expr | None:
    """The value of ``int_0^oo`` of a term with two kernels in its region of convergence.

    Parameters
    ----------
    term : Term
    facts : Facts
    region : Region
        Where the integral converges; what it says of the scales may be used.

    Returns
    -------
    Expr or None
    """
    if term.logs:
        return _with_logs(term, facts, region)
    parts = []
    for coefficient, kernels in _standing(term.kernels):
        value = _pair(replace(term, kernels=kernels), facts, region)
        if value is None:
            return None
        parts.append(coefficient * value)
    total = parts[0] if len(parts) == 1 else Add(*parts)
    return None if total.has(*_BAD) else total


def _with_logs(term: Term, facts: Facts, region: Region) -> Expr | None:
    """Powers of log(x) as derivatives in the exponent, where the formula can be differentiated."""
    p = Dummy("p", real=True)
    value = parseval(replace(term, power=term.power + p, logs=0), facts, region)
    if value is None or value.has(Piecewise):
        return None
    for _ in range(term.logs):
        value = value.diff(p)
        if value.has(Derivative, Subs):
            return None
    value = value.subs(p, 0)
    return None if value.has(*_BAD, meijerg) else value


# -- kernels on the edge of their sector -------------------------------------------------------------------


def _standing(kernels: tuple[Kernel, ...]) -> Iterator[tuple[Expr, tuple[Kernel, ...]]]:
    """Kernels turned by a right angle, written as two real ones: DLMF 4.14.1-2, 10.4.3."""
    for place, kernel in enumerate(kernels):
        split = _split(kernel)
        if split is not None:
            for coefficient, part in split:
                rest = kernels[:place] + (part,) + kernels[place + 1 :]
                for c, ks in _standing(rest):
                    yield coefficient * c, ks
            return
    yield S.One, kernels


def _split(kernel: Kernel) -> list[tuple[Expr, Kernel]] | None:
    wave = kernel.wave
    if wave is None or wave.real or abs(wave.angle) != pi / 2 or kernel.product.lam <= 0:
        return None
    scale = kernel.product.scale
    if kernel.name == "exp":
        # exp(-i*w*y) for an angle of +pi/2
        turn = -I if wave.angle.is_positive else I
        plain = replace(kernel, wave=None)
        return [
            (S.One, replace(plain, name="cos", product=COS.with_scale(scale))),
            (turn, replace(plain, name="sin", product=SIN.with_scale(scale))),
        ]
    if kernel.name in ("hankel1", "hankel2"):
        (nu,) = kernel.arguments
        plain = replace(kernel, wave=None)
        rows = {row.name: row for row in BESSEL_ROWS}
        return [
            (c, replace(plain, name=name, product=rows[name].transform(nu).with_scale(2 * scale)))
            for c, name in ((S.One, "besselj"), (I if kernel.name == "hankel1" else -I, "bessely"))
        ]
    return None


# -- one pair ------------------------------------------------------------------------------------------------


def _grows(kernel: Kernel) -> bool:
    return kernel.wave is not None and not kernel.wave.real


def _uncertain(kernel: Kernel, facts: Facts) -> bool:
    return facts.sign(kernel.product.scale) != 1


def _pair(term: Term, facts: Facts, region: Region) -> Expr | None:
    """The value for two kernels, the second of which gives its scale to the power in front."""

    def rank(kernel: Kernel) -> tuple[bool, bool, bool]:
        return (
            _grows(kernel),
            kernel.wave is None and _uncertain(kernel, facts),
            kernel.name != "exp",
        )

    first, second = sorted(term.kernels, key=rank, reverse=True)
    rho = first.ratio / second.ratio
    if not rho.is_Rational:
        rho = rho.cancel()
        if not rho.is_Rational:
            return None
    if any(k.tilt is not None for k in (first, second)):
        return None
    if _grows(second) or (_grows(first) and rho.is_negative):
        return None
    v = ((term.power + 1) / second.ratio).expand()
    factors = list(first.product.factors)
    for a, A, e in second.product.factors:
        factors.append(Factor((a + A * v).expand(), -A * rho, e))
    rows = cancel(tuple(factors))
    size = second.ratio if second.ratio.is_positive else -second.ratio
    constant = term.coefficient * first.product.constant * second.product.constant / size
    values = []
    for c1, eta1 in _scales(first):
        for c2, eta2 in _scales(second):
            value = _joined(rows, first, eta1, eta2, rho, v, facts, region)
            if value is None:
                return None
            values.append(constant * c1 * c2 * value)
    if len(values) == 1:
        return tidy(values[0])
    if len(values) == 2:
        return _conjugates(values)
    return None


def _scales(kernel: Kernel) -> list[tuple[Expr, Expr]]:
    """(coefficient, scale) of the rotated kernels that a kernel is the sum of."""
    wave = kernel.wave
    if wave is None or not wave.real:
        return [(S.One, kernel.product.scale)]
    real, imaginary = polar_scale(kernel)
    return [(exp(-turn * I * wave.phase) / 2, real + turn * I * imaginary) for turn in (1, -1)]


def _joined(
    rows: tuple[Factor, ...], first: Kernel, eta1: Expr, eta2: Expr, rho: Expr, v: Expr, facts: Facts, region: Region
) -> Expr | None:
    """``eta2**(-v) * F(eta1*eta2**(-rho))`` with F the inverse transform of the rows."""
    front = positive_power(eta2, (-v).expand())
    z = eta1 * positive_power(eta2, -rho)
    if _grows(first):
        assert first.wave is not None
        found = _entire_series(rows, first.wave, z)
        return None if found is None else front * found
    if z.is_positive:
        found = inverse_mellin(rows, z, facts)
        return None if found is None else front * found
    if not facts.real(z):
        kind = "complex"
    else:
        kind = "positive" if region.sign(z) == 1 else "real"
    d = Dummy("z", positive=True)
    found = inverse_mellin(rows, d, facts)
    if found is None or (kind == "real" and not _single_valued(found, d)) or (
        kind == "complex" and not _in_half_plane(found, d, rho)
    ):
        return None
    # eta1 and eta2 have their own principal powers: z**e may not be split otherwise
    moves = {
        node: positive_power(eta1, node.exp) * positive_power(eta2, (-rho * node.exp).expand())
        for node in sorted(found.atoms(Pow), key=str)
        if node.base == d
    }
    moves[d] = z
    return front * found.xreplace(moves)


def _entire_series(rows: tuple[Factor, ...], wave: Wave, z: Expr) -> Expr | None:
    """The growing kernel's own series, integrated term by term against the other kernel.

    It converges where the other kernel decays faster, and gives the value there.
    """
    norm = normalise(rows)
    if norm.signature.delta < 0:
        return None
    w = Dummy("w", positive=True)
    series = left_series(norm.signature, w)
    if series is None or series.head is not S.Zero:
        return None
    turn = wave.angle * norm.power / pi
    size = norm.scale * positive_power(z, norm.power)
    parts = []
    for tail in series.tails:
        if not turn.is_Integer:
            return None
        sign = tail.sign * (-1) ** int(turn)
        phase = exp((I * (wave.angle * norm.power * tail.exponent - wave.phase)).expand())
        f = named_pfq(tail.upper, tail.lower, sign * w)
        if f is None:
            upper, lower = list(tail.upper), list(tail.lower)
            for a in tail.upper:
                if a in lower:
                    upper.remove(a)
                    lower.remove(a)
            f = hyper(upper, lower, sign * w)
        parts.append((tail.coefficient, phase, tail.exponent, f))
    total = [norm.constant * c * phase * positive_power(size, e) * f.xreplace({w: size}) for c, phase, e, f in parts]
    return Add(*total)


# -- continuation to other arguments -------------------------------------------------------------------------


def _single_valued(expr: Expr, z: Symbol) -> bool:
    """Whether a formula for z > 0 is one analytic function on the whole real line."""
    if expr.has(Piecewise, meijerg, log):
        return False
    for node in expr.atoms(Pow):
        if node.base.has(z) and not (node.exp.is_Integer and (node.exp > 0 or node.base == z)):
            return False
    from sympy import besselk, bessely, expint, uppergamma

    return not any(node.has(z) for node in expr.atoms(besselk, bessely, expint, uppergamma))


def _in_half_plane(expr: Expr, z: Symbol, rho: Expr) -> bool:
    """Whether principal branches serve for abs(arg(z)) < pi/2 times the larger of 1 and abs(rho)."""
    if expr.has(Piecewise):
        return False
    spread = _highest_power(expr, z)
    return bool(spread * max(S.One, abs(rho)) <= 2)


def _highest_power(expr: Expr, z: Symbol) -> Expr:
    return max([abs(n.exp) for n in expr.atoms(Pow) if n.base == z and n.exp.is_Rational], default=S.One)


def _conjugates(values: list[Expr]) -> Expr:
    """The sum of two conjugate terms."""
    return Add(*(tidy(v) for v in values))


__all__ = ["parseval"]
