"""A piece of an integral: one term whose Mellin transform is known, and its exact behaviour at both ends."""
from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import count
from typing import NamedTuple, Protocol

from sympy import Abs, Add, Expr, I, Mul, S, acos, binomial, chebyshevt, chebyshevu, cos, cot, exp, factorial, pi, sqrt
from sympy.logic.boolalg import Boolean

from .expanding import expanded
from .gamma import GammaProduct, Ladder
from .gamma.laurent import Series, cosine_series, cotangent_series, exponential, multiply, power_series
from .gamma.shortest import positive_power
from .gamma.tilt import Tilt
from .matching import Term, Wave
from .region import real_part


class DirichletFactor(Protocol):
    """A factor of a transform with isolated poles: zeta, Hurwitz, Lerch, polylog in ``slope*u + shift``."""

    def at(self, u: Expr) -> Expr:
        """The value at ``u``."""

    def laurent(self, u: Expr, rate: Expr, terms: int) -> Series:
        """Series of the factor at ``u + rate*eps``."""

    def poles(self) -> tuple[Expr, ...]:
        """Its poles in ``u``; they lie left of the strip."""


@dataclass(frozen=True)
class Piece:
    """``constant * x**power * log(x)**logs * g(x**ratio)`` with the transform of ``g`` given.

    A pure power has ``product`` None: its transform vanishes (in the regularised sense), but its
    behaviour at both ends counts.
    """

    constant: Expr
    power: Expr
    logs: int = 0
    product: GammaProduct | None = None
    ratio: Expr = S.One
    wave: Wave | None = None
    dirichlet: tuple[DirichletFactor, ...] = ()
    condition: Boolean = S.true
    inside: bool = True
    pole_order_inside: int = 0
    tilt: Tilt | None = None

    @classmethod
    def of_term(cls, term: Term) -> Piece:
        """From a term with at most one kernel."""
        if not term.kernels:
            return cls(term.coefficient, term.power, term.logs)
        (k,) = term.kernels
        return cls(
            term.coefficient, term.power, term.logs, k.product, k.ratio, k.wave, (), k.condition, k.inside,
            int(k.arguments[0]) if k.name == "pole" else 0, k.tilt,
        )  # fmt: skip

    @property
    def u(self) -> Expr:
        """The point at which the transform of ``g`` is needed."""
        return (self.power + 1) / self.ratio

    def subs(self, *replacement: Expr) -> Piece:
        """The piece with a parameter replaced in its constant and exponents."""
        old, new = replacement
        return replace(
            self,
            constant=self.constant.subs(old, new),
            power=self.power.subs(old, new),
            ratio=self.ratio.subs(old, new),
        )

    # -- value -----------------------------------------------------------------------------------------

    def value(self) -> Expr:
        """The finite part of the transform at ``eps = 0`` with the logarithms as derivatives."""
        product = self.product
        if product is None:
            return S.Zero
        u = self.u
        if not u.is_Atom:
            u = expanded(u) if u.is_Mul else u
        front = self.constant if self.ratio is S.One else self.constant / _modulus(self.ratio)
        if self.logs == 0 and self.tilt is None and self.pole_order(u) <= 0:
            if self.wave is None:
                factors = [front, product.at(u)]
            elif self.pole_order_inside == 1:
                factors = [front, positive_power(product.scale, -u), pi * cot(expanded(pi * u))]
            elif u.is_Integer and u.is_positive and self.wave.parts is not None:
                factors = [front, GammaProduct(product.constant, S.One, product.factors).at(u)]
                factors.append(_algebraic_wave(self.wave, int(u)))
            else:
                factors = [front, product.at(u), _wave_value(self.wave, u)]
            factors.extend(d.at(u) for d in self.dirichlet)
            return Mul(*factors)
        series = self.series(u, self.logs + self.pole_order(u) + 1)
        return front * factorial(self.logs) * series.coefficient(self.logs)

    def pole_order(self, u: Expr) -> int:
        """Order of the pole that the Gammas and the Dirichlet series make at ``u``; zeros do not count."""
        assert self.product is not None
        order = max(self.product.order_at(u), 0)
        if order and self.tilt is not None:
            order += self.tilt.order
        if self.dirichlet:
            order += sum(1 for d in self.dirichlet for p in d.poles() if expanded(p - u).is_zero)
        return order

    def series(self, u: Expr, terms: int) -> Series:
        """Laurent series of the transform at ``u + eps/ratio``, without the constant."""
        assert self.product is not None
        rate = 1 / self.ratio
        if self.tilt is not None:
            scale = power_series(self.product.scale, -u, -rate, terms)
            tilted = self.tilt.laurent(u, rate, -self.pole_order(u), terms)
            return multiply(scale, tilted, terms).times(self.product.constant)
        if self.pole_order_inside == 1:
            # Gamma(u)*Gamma(1-u)*cos(pi*u)
            scale = power_series(self.product.scale, -u, -rate, terms)
            return multiply(scale, cotangent_series(u, rate, terms), terms)
        series = self.product.laurent(u, terms, rate)
        if self.wave is not None:
            series = multiply(series, _wave_series(self.wave, u, rate, terms), terms)
        for d in self.dirichlet:
            series = multiply(series, d.laurent(u, rate, terms), terms)
        return series

    # -- behaviour at 0 and oo -------------------------------------------------------------------------

    def rungs(self, end: int) -> list[Iterator[Expr]]:
        """Ladders of exponents of x in the expansion at 0 (``end=+1``) or at oo (``end=-1``)."""
        if self.product is None:
            return [iter([self.power])]
        side = end if self.ratio.is_positive else -end
        ladders = [self._climb(ladder) for ladder in self.product.ladders(side)]
        if side > 0:
            ladders += [iter([self._exponent(p)]) for d in self.dirichlet for p in d.poles()]
        return ladders

    def _climb(self, ladder: Ladder) -> Iterator[Expr]:
        for n in count() if ladder.length is None else range(ladder.length):
            yield self._exponent(ladder.start - n * ladder.step)

    def _exponent(self, pole: Expr) -> Expr:
        return expanded(self.power - self.ratio * pole)

    @property
    def plain(self) -> bool:
        """Whether nothing but the Gammas can cancel a pole."""
        return self.wave is None and self.tilt is None and not self.dirichlet

    def has_pole(self, exponent: Expr) -> bool:
        """Whether ``x**exponent`` occurs in the expansions, for a plain piece."""
        if self.product is None:
            return True
        return self.pole_order(expanded((self.power - exponent) / self.ratio)) > 0

    def coefficients(self, exponent: Expr, end: int) -> list[Expr]:
        """Coefficients of ``x**exponent * log(x)**j``, j = 0, 1, ..., in the expansion at this end."""
        if self.product is None:
            return [S.Zero] * self.logs + [self.constant]
        u = expanded((self.power - exponent) / self.ratio)
        order = self.pole_order(u)
        if order == 0:
            return []
        series = self.series(u, order)  # in eps, u = u0 + eps/ratio
        side = end if self.ratio.is_positive else -end
        result = [S.Zero] * self.logs
        for j in range(order):
            # residue in u of G(u)*x**(-ratio*u): eps**(-j-1) meets (-eps*log x)**j / j!, du = deps/ratio
            c = series.coefficient(-j - 1) * (-1) ** j / factorial(j) / self.ratio
            result.append(self.constant * c * side)
        return result

    # -- growth ----------------------------------------------------------------------------------------

    def growth(self) -> Growth | None:
        """What the growth on vertical lines demands (design table); None: not a Mellin transform of g."""
        if self.product is None or self.pole_order_inside:
            return Growth()
        lam, delta = self.product.lam, self.product.delta
        angle = abs(self.wave.angle) if self.wave is not None else S.Zero
        if self.inside and not lam.is_nonpositive:
            return Growth(self.condition, None if lam.is_positive else lam)
        if self.inside and self.wave is not None:
            return None
        excess = angle - pi * lam / 2
        if excess.is_negative:
            return Growth(self.condition)
        if not excess.is_zero:
            return None
        if delta == 0:
            return Growth(self.condition, -self.product.kappa(S.Zero))
        # kappa(sigma) < 1/2: an oscillating end, at oo for delta > 0 and ratio > 0
        bound = (S.Half - self.product.kappa(S.Zero)) / delta
        end = -1 if (delta > 0) == bool(self.ratio.is_positive) else 1
        return Growth(self.condition, None, (end, real_part(self._exponent(bound))))


class Growth(NamedTuple):
    """Conditions from the growth: a Boolean, an expression to be positive, an end of conditional convergence.

    ``conditional`` is (end, exponent): the oscillating part counts like ``x**exponent`` at that end.
    """

    condition: Boolean = S.true
    positive: Expr | None = None
    conditional: tuple[int, Expr] | None = None


def _modulus(ratio: Expr) -> Expr:
    return ratio if ratio.is_positive else -ratio if ratio.is_negative else Abs(ratio)


def _wave_value(wave: Wave, u: Expr) -> Expr:
    phase = expanded(wave.angle * u) + wave.phase
    if not wave.real:
        return exp(-I * phase)
    if isinstance(wave.angle, acos):
        algebraic = _half_angles(phase, wave.angle)
        if algebraic is not None:
            return algebraic
    return cos(phase)


def _half_angles(phase: Expr, angle: Expr) -> Expr | None:
    """``cos(k*angle + offset)`` in terms of ``c = cos(angle)`` for whole and half k, offset 0 or -pi/2."""
    k = phase.coeff(angle)
    offset = phase - k * angle
    if not k.is_Rational or k.q > 2 or offset.has(angle) or not (offset.is_zero or offset == -pi / 2):
        return None
    c, sign = angle.args[0], 1 if k >= 0 else -1
    n = abs(k)
    if n.q == 1:
        return chebyshevt(n, c) if offset.is_zero else sign * sqrt(1 - c) * sqrt(1 + c) * chebyshevu(n - 1, c)
    # cos(n*t) and sin(n*t) at n = m + 1/2 by the half angle, DLMF 18.5.3-4
    m = n - S.Half
    difference = chebyshevu(m, c) - (chebyshevu(m - 1, c) if m > 0 else 0)
    total = chebyshevu(m, c) + (chebyshevu(m - 1, c) if m > 0 else 0)
    return sqrt(1 + c) / sqrt(2) * difference if offset.is_zero else sign * sqrt(1 - c) / sqrt(2) * total


def _algebraic_wave(wave: Wave, u: int) -> Expr:
    """``modulus**(-u)*cos(u*angle + phase)`` for a whole u, without the angle: Re of (re + I*im)**u."""
    re, im = wave.parts  # type: ignore[misc]
    shift = 0 if wave.phase.is_zero else 1  # cos(y - pi/2) = sin(y)
    total = Add(
        *(binomial(u, k) * re ** (u - k) * im**k * (-1) ** ((k - shift) // 2) for k in range(shift, u + 1, 2))
    )
    return total / (re**2 + im**2) ** u


def _wave_series(wave: Wave, u: Expr, rate: Expr, terms: int) -> Series:
    phase = expanded(wave.angle * u) + wave.phase
    if wave.real:
        return cosine_series(phase, wave.angle * rate, terms)
    step = -I * wave.angle * rate
    return Series(0, exponential([step] + [S.Zero] * terms, terms), exp(-I * phase))


__all__ = ["DirichletFactor", "Piece"]
