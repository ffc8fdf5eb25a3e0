"""Where an integral over (0, oo) of a product of kernels converges, read off their Gamma products.

At 0 and at oo a kernel is a sum of components: powers (from uncancelled poles) and one exponential that
decays, oscillates or grows (from Stirling's formula).  The components of a product are the products of the
components; the integral converges iff every one of them lets it.

Sources: R. B. Paris and D. Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), sections 2.1-2.4 and
ch. 3; DLMF 2.5 and 16.11 (expansions of hypergeometric type).
"""
from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import chain, combinations, product
from typing import NamedTuple

from sympy import Add, Expr, I, Mul, Ne, Pow, S, atan, cos, exp, pi, sin, sqrt

from .gamma import GammaProduct
from .matching import Kernel, Term
from .region import Facts, Region, real_part

ZERO_END, INFINITE_END = 1, -1


class Component(NamedTuple):
    """``y**exponent * exp(-rate*y**power) * cos(frequency*y**power + phase)`` with y large.

    y is x at oo and 1/x at 0.  ``decays``: the exponential is known to decay, whatever the facts say of
    the sign of ``rate``.
    """

    exponent: Expr
    power: Expr = S.Zero
    rate: Expr = S.Zero
    frequency: Expr = S.Zero
    decays: bool = False


@dataclass
class Convergence:
    """The region of convergence, and the exponents e that count at each end: ``end*(e + 1) > 0``.

    ``exact`` is False where a component may be smaller than stated, so that nothing is proved outside.
    """

    region: Region
    exact: bool = True
    at_zero: list[Expr] = field(default_factory=list)
    at_infinity: list[Expr] = field(default_factory=list)


def polar_scale(kernel: Kernel) -> tuple[Expr, Expr]:
    """Real and imaginary part of the scale of a kernel with a wave, ``modulus*exp(I*angle)``."""
    modulus, wave = kernel.product.scale, kernel.wave
    if wave is not None and wave.parts is not None:
        return wave.parts
    angle = wave.angle if wave is not None else S.Zero
    if isinstance(angle, atan):
        im, re = angle.args[0].as_numer_denom()
        ratio = modulus**2 / (im**2 + re**2)
        ratio = ratio if ratio is S.One else ratio.cancel()
        if ratio.is_positive and not ratio.is_Add:
            return re * sqrt(ratio), im * sqrt(ratio)
    return modulus * cos(angle), modulus * sin(angle)


def components(kernel: Kernel, end: int) -> list[Component] | None:
    """The components of a kernel at 0 (``end=+1``) or at oo (``end=-1``); None where they are not known."""
    side = end if kernel.ratio.is_positive else -end
    turn = kernel.ratio if end == ZERO_END else -kernel.ratio
    found = [Component((turn * ladder.start).expand()) for ladder in kernel.product.ladders(side)]
    delta = kernel.product.delta
    if delta == 0 or (delta > 0) == (side > 0):
        return found
    waves = _exponential(kernel)
    return None if waves is None else found + waves


def _exponential(kernel: Kernel) -> list[Component] | None:
    """The exponential of a kernel at the end where it has one (Paris and Kaminski, section 2.3)."""
    gammas, wave = kernel.product, kernel.wave
    lam, delta = gammas.lam, abs(gammas.delta)
    upright = 1 if gammas.delta > 0 else -1
    modulus = gammas.scale if upright > 0 else 1 / gammas.scale
    # the rows keep their scales in the form that makes this product a plain number times the caller's scale
    number = Mul(*(Pow(abs(A), -e * A * upright) for _, A, e in gammas.factors))
    size = delta * (modulus * number) ** (1 / delta)
    turned = pi / 2 * (1 - lam / delta)
    ratio = kernel.ratio if kernel.ratio.is_positive else -kernel.ratio
    exponent = ratio * (gammas.kappa(S.Zero) + S.Half) / delta
    power = ratio / delta
    if wave is None:
        if (kernel.inside and not gammas.scale.is_extended_real) or not size.is_extended_real:
            rate = real_part(size) if turned == 0 else real_part(size * exp(I * turned))
            return [Component(exponent, power, rate, S.Zero, kernel.name != "exp" and kernel.inside)]
        angle: Expr = S.Zero
    elif kernel.inside and lam > 0:
        re, im = polar_scale(kernel)
        if delta == 1 and lam == 1:
            rate, frequency = re * size / modulus, im * size / modulus
        else:
            rate, frequency = size * cos(turned + wave.angle / delta), size * sin(turned + wave.angle / delta)
        return [Component(exponent, power, rate, sign * frequency, True) for sign in (1, -1)]
    else:
        angle = wave.angle
    turned += abs(angle) / delta
    if not turned.is_number or turned > pi:
        return None
    rate, frequency = size * cos(turned), size * sin(turned)
    if frequency is S.Zero:
        return [Component(exponent, power, rate)]
    if wave is not None and not wave.real and lam > 0:
        return [Component(exponent, power, rate, -frequency if angle.is_positive else frequency)]
    return [Component(exponent, power, rate, sign * frequency) for sign in (1, -1)]


def converge_product(term: Term, facts: Facts) -> Convergence | str:
    """Where the integral over (0, oo) of one term converges, or the reason why it does nowhere.

    Parameters
    ----------
    term : Term
        With any number of kernels.
    facts : Facts

    Returns
    -------
    Convergence or str
        The exact region up to edges of measure zero; or 'growth', 'diverges', 'divergence' (proved).

    Examples
    --------
    >>> from sympy import besselj, symbols
    >>> from sympy_mellin_ext.behaviour import converge_product
    >>> from sympy_mellin_ext.matching import read_terms
    >>> from sympy_mellin_ext.region import Facts
    >>> x, a = symbols('x a', positive=True)
    >>> s, nu = symbols('s nu', real=True)
    >>> term, = read_terms(x**(s - 1)*besselj(nu, a*x)/(1 + x**2), x, Facts())
    >>> converge_product(term, Facts()).region.to_boolean()
    (s < 7/2) & (nu + s > 0)
    """
    result = Convergence(Region(facts))
    reason = restrict_kernels(result, term, facts)
    if reason is None and not result.region.empty:
        return result
    if reason == "growth":
        return reason
    return "divergence" if result.exact else "diverges"


def restrict_kernels(
    result: Convergence,
    term: Term,
    facts: Facts,
    powers: bool = True,
    ends: tuple[int, ...] = (ZERO_END, INFINITE_END),
) -> str | None:
    """Add what one term demands; without ``powers`` only what a sum of terms cannot cancel."""
    for kernel in term.kernels:
        # an exponential states its own condition through its rate, and only where nothing stronger decays
        if kernel.condition is not S.true and (kernel.name != "exp" or kernel.wave is not None):
            result.region = result.region.holds(kernel.condition)
            result.exact = False
    for end in ends:
        lists = [components(kernel, end) for kernel in term.kernels]
        known = [l for l in lists if l is not None]
        if len(known) < len(lists):
            return "growth"
        for combination in product(*known):
            if not powers and all(p.power.is_zero for p in combination):
                continue
            reason = _restrict(result, combination, term.power, end, facts)
            if reason is not None:
                return reason
    return _finite_points(result, term.kernels)


def _restrict(
    result: Convergence, parts: Sequence[Component], power: Expr, end: int, facts: Facts
) -> str | None:
    """Add what one product of components demands; the reason where it cannot be met."""
    signs = [1 if p.decays else facts.sign(p.rate) for p in parts]
    if 1 in signs and all(known in (0, 1) for known in signs):
        return None
    order = _highest_first([p.power for p in parts if not p.power.is_zero], facts)
    if order is None:
        return "growth"
    for r in order:
        rate = Add(*(p.rate for p in parts if p.power == r))
        if rate.is_Add:
            rate = rate.expand()
        if rate is S.Zero:
            continue
        known = facts.sign(rate)
        if known == 1:
            return None
        if known == -1:
            return "diverges"
        if known is None:
            result.region = result.region.positive(rate)
            return None
    bound: Expr = S.Zero
    for r in order:
        frequency = Add(*(p.frequency for p in parts if p.power == r))
        if frequency.is_Add:
            frequency = frequency.expand()
        if frequency is not S.Zero:
            bound = r
            break
    if bound is S.Zero and any(p.frequency is not S.Zero for p in parts):
        # phases cancel, and the amplitude may vanish
        result.exact = False
    theta = Add(*(p.exponent for p in parts))
    # the component counts like a pure power with this exponent
    exponent = power - theta + bound if end == ZERO_END else power + theta - bound
    exponent = real_part(exponent.expand())
    (result.at_zero if end == ZERO_END else result.at_infinity).append(exponent)
    result.region = result.region.positive(end * (exponent + 1))
    if bound is not S.Zero and facts.sign(frequency) is None:
        alone = exponent + end * -bound
        if not result.region.implies(end * (alone + 1) > 0):
            result.region = result.region.holds(Ne(frequency, 0))
    return None


def _highest_first(powers: list[Expr], facts: Facts) -> list[Expr] | None:
    """Distinct powers in falling order; None where two of them cannot be compared."""
    order: list[Expr] = []
    for r in dict.fromkeys(powers):
        for place, other in enumerate(order):
            sign = facts.sign(r - other)
            if sign is None:
                return None
            if sign > 0:
                order.insert(place, r)
                break
        else:
            order.append(r)
    return order


# -- finite singular points ------------------------------------------------------------------------------


def _finite_points(result: Convergence, kernels: Sequence[Kernel]) -> str | None:
    """Integrability at the points where kernels with Lam = Delta = 0 are singular."""
    points: dict[Expr, list[tuple[Expr, bool]]] = {}
    for kernel in kernels:
        gammas = kernel.product
        if gammas.delta != 0:
            continue
        excess = (abs(kernel.wave.angle) if kernel.wave is not None else S.Zero) - pi * gammas.lam / 2
        if (kernel.inside and kernel.wave is not None) or excess.is_negative:
            continue
        if not excess.is_zero:
            return "growth"
        number = Mul(*(Pow(abs(A), e * A) for _, A, e in gammas.factors))
        point = (number / gammas.scale) ** (1 / kernel.ratio)
        points.setdefault(point, []).append((-gammas.kappa(S.Zero) - 1, _one_sided(gammas)))
    for singular in points.values():
        own = [e for e, alone in singular if alone]
        free = [e for e, alone in singular if not alone]
        for chosen in chain.from_iterable(combinations(free, n) for n in range(len(free) + 1)):
            if own or chosen:
                result.region = result.region.positive(Add(*own, *chosen) + 1)
    return None


def _one_sided(gammas: GammaProduct) -> bool:
    """Whether the kernel vanishes on one side of its singular point: all slopes of one sign."""
    return len({A > 0 for _, A, _ in gammas.factors}) == 1


__all__ = [
    "INFINITE_END",
    "ZERO_END",
    "Component",
    "Convergence",
    "components",
    "converge_product",
    "polar_scale",
    "restrict_kernels",
]
