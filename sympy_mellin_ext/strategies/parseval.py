"""The value of an integral of two kernels, as a function of the quotient of their scales."""
from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from sympy import (
    Add,
    Derivative,
    Dummy,
    Expr,
    Gt,
    I,
    Lt,
    Piecewise,
    Pow,
    S,
    Subs,
    besselk,
    count_ops,
    exp,
    expand_log,
    expint,
    factorial,
    hyper,
    log,
    meijerg,
    pi,
    sqrt,
    together,
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
from .continuation import conjugate_sum, holomorphic, single_valued
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
    slopes: dict[Dummy, tuple[Expr, Expr]] = {}
    if term.logs == 1:
        for node in sorted(value.atoms(besselk), key=str):
            if node.args[0].has(p):
                order, z = node.args
                slope = _order_slope(order.subs(p, 0), z)
                if slope is None:
                    return None
                slopes[Dummy("K")] = (node, slope * order.diff(p))
        value = value.xreplace({node: d for d, (node, _) in slopes.items()})
    for _ in range(term.logs):
        value = value.diff(p) + Add(*(value.diff(d) * slope for d, (_, slope) in slopes.items()))
        if value.has(Derivative, Subs):
            return None
    value = value.subs({d: node for d, (node, _) in slopes.items()}).subs(p, 0)
    return None if value.has(*_BAD, meijerg) else tidy(value)


def _order_slope(order: Expr, z: Expr) -> Expr | None:
    """The derivative of ``K_order(z)`` in the order, odd in it: DLMF 10.38.4 and 10.38.7."""
    sign = -1 if order.is_negative else 1
    order = abs(order)
    if order == S.Half:
        return sign * sqrt(pi / (2 * z)) * exp(z) * expint(1, 2 * z)
    if not order.is_Integer:
        return None
    n = int(order)
    terms = ((z / 2) ** (k - n) / (factorial(k) * (n - k)) * besselk(k, z) for k in range(n))
    return sign * factorial(n) / 2 * Add(*terms)


# -- kernels on the edge of their sector -------------------------------------------------------------------


def _standing(kernels: tuple[Kernel, ...]) -> Iterator[tuple[Expr, tuple[Kernel, ...]]]:
    """Kernels turned by a right angle, written as two real ones: DLMF 4.14.1-2, 10.4.3."""
    for place, kernel in enumerate(kernels):
        split = _split(kernel)
        if split is not None:
            for coefficient, part in split:
                rest = (*kernels[:place], part, *kernels[place + 1 :])
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


def _pair(term: Term, facts: Facts, region: Region) -> Expr | None:
    """The value for two kernels: ``eta2**(-v)*F(eta1*eta2**(-rho))``, F the inverse transform of the product.

    The formula is found for positive scales and continued to the others.
    """

    def rank(kernel: Kernel) -> tuple[bool, bool, bool]:
        scale = kernel.product.scale
        unknown = facts.real(scale) and facts.sign(scale) != 1
        return _grows(kernel), unknown, kernel.name != "exp"

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
    scales = [_certain(k, facts) or Dummy("eta", positive=True) for k in (first, second)]
    z = scales[0] * positive_power(scales[1], -rho)
    value = _entire_series(rows, first.wave, z) if _grows(first) else inverse_mellin(rows, z, facts)
    if value is None and z is S.One and first.product.lam > 0 and second.product.lam > 0:
        value = _through_neighbours(rows, facts)
    if value is None:
        return None
    size = second.ratio if second.ratio.is_positive else -second.ratio
    constant = term.coefficient * first.product.constant * second.product.constant / size
    value = tidy(constant * positive_power(scales[1], (-v).expand()) * value)
    for kernel, scale in zip((first, second), scales, strict=True):
        if isinstance(scale, Dummy) and value is not None:
            value = _at_true_scale(value, scale, kernel, region)
    return _closed(value, region) if isinstance(value, Piecewise) else value


def _through_neighbours(rows: tuple[Factor, ...], facts: Facts) -> Expr | None:
    """The value at equal scales from the formula for different ones.

    Neither kernel oscillates, so that the integral is continuous in the ratio of the scales.
    """
    z = Dummy("z", positive=True)
    value = inverse_mellin(rows, z, facts)
    if value is None:
        return None
    for branch in [e for e, _ in value.args] if isinstance(value, Piecewise) else [value]:
        met = branch.subs(z, S.One)
        if not met.has(*_BAD) and not met.has(z):
            return met
    return None


def _one_formula(value: Piecewise) -> Expr | None:
    """The branch that holds on both sides, where the two are one function in different words.

    Logarithms are split formally; where each branch holds, their arguments are positive.
    """
    first, second = (branch.expr for branch in value.args)
    difference = first - second
    if not difference.has(log) or difference.has(Piecewise):
        return None
    split = difference.replace(
        lambda node: isinstance(node, log), lambda node: expand_log(log(together(node.args[0])), force=True)
    )
    if split.expand() is not S.Zero:
        return None
    everywhere = [e for e in (first, second) if all(node.args[0].is_positive for node in e.atoms(log))]
    return min(everywhere, key=count_ops) if everywhere else None


def _closed(value: Piecewise, region: Region) -> Expr:
    """Two branches ``l < r`` and ``l > r``, the second one closed where the integral is continuous at l = r."""
    one = _one_formula(value) if len(value.args) == 2 else None
    if one is not None:
        return one
    if len(value.args) != 2:
        return value
    (first, where), (second, there) = value.args
    if not isinstance(where, Lt | Gt) or region.nonzero(where.lhs - where.rhs):
        return value
    for branch, other, condition in ((second, first, where), (first, second, there)):
        # the convergence at l = r makes both branches meet there
        side = where.lhs if where.lhs.is_Symbol else where.rhs
        if side.is_Symbol and not branch.subs(side, where.rhs if side == where.lhs else where.lhs).has(*_BAD):
            return Piecewise((other, condition), (branch, True))
    return value


def _certain(kernel: Kernel, facts: Facts) -> Expr | None:
    """The scale where it is positive and the only one."""
    if kernel.wave is not None and kernel.wave.real:
        return None
    scale = kernel.product.scale
    return scale if scale.is_positive else None


def _at_true_scale(value: Expr, eta: Dummy, kernel: Kernel, region: Region) -> Expr | None:
    """A formula for positive ``eta``, continued to the scale of the kernel."""
    wave, scale = kernel.wave, kernel.product.scale
    if wave is not None and wave.real:
        if not holomorphic(value, eta, S.Half):
            return None
        real, imaginary = polar_scale(kernel)
        return conjugate_sum(value, eta, real, imaginary, wave.phase)
    if region.facts.real(scale):
        if region.sign(scale) != 1 and not single_valued(value, eta):
            return None
    elif not holomorphic(value, eta, kernel.product.lam / 2):
        return None
    moves = {n: positive_power(scale, n.exp) for n in sorted(value.atoms(Pow), key=str) if n.base == eta}
    return value.xreplace({**moves, eta: scale})


def _entire_series(rows: tuple[Factor, ...], wave: Wave | None, z: Expr) -> Expr | None:
    """The growing kernel's own series, integrated term by term against the other kernel.

    It converges where the other kernel decays faster, and gives the value there.
    """
    norm = normalise(rows)
    if wave is None or norm.signature.delta < 0:
        return None
    w = Dummy("w", positive=True)
    series = left_series(norm.signature, w)
    turn = wave.angle * norm.power / pi
    if series is None or series.head is not S.Zero or not turn.is_Integer:
        return None
    size = norm.scale * positive_power(z, norm.power)
    parts = []
    for tail in series.tails:
        phase = exp((I * (wave.angle * norm.power * tail.exponent - wave.phase)).expand())
        f = _pfq(tail.upper, tail.lower, tail.sign * (-1) ** int(turn) * w)
        front = norm.constant * tail.coefficient * phase * positive_power(size, tail.exponent)
        parts.append(front * f.xreplace({w: size}))
    return Add(*parts)


def _pfq(upper: tuple[Expr, ...], lower: tuple[Expr, ...], z: Expr) -> Expr:
    found = named_pfq(upper, lower, z)
    if found is not None:
        return found
    ups, downs = list(upper), list(lower)
    for a in upper:
        if a in downs:
            ups.remove(a)
            downs.remove(a)
    return hyper(ups, downs, z)


__all__ = ["parseval"]
