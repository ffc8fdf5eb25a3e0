"""Gamma products: the form in which every kernel's Mellin transform is kept.

Sources: E. T. Whittaker and G. N. Watson, A Course of Modern Analysis (1927), ch. XII (Gamma function);
R. B. Paris and D. Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), sections 2.1-2.4 (growth).
"""
from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import NamedTuple

from sympy import Add, Expr, Integer, Mul, Pow, Rational, S, Symbol, sympify

from ..expanding import expanded
from .laurent import Series, gamma_series, linear_series, multiply, power_series, sine_series
from .shortest import positive_power, shortest_quotient

# A pole ladder whose first so many rungs are all cancelled is taken to be cancelled for good.
_LONGEST_CANCELLATION = 24


class Factor(NamedTuple):
    """``Gamma(shift + slope*s)**power`` with a rational non-zero slope and power +1 or -1."""

    shift: Expr
    slope: Rational
    power: int


class Ladder(NamedTuple):
    """The poles of one numerator Gamma that the denominators leave: ``start, start - step, ...``.

    ``step`` is positive for poles to the left of the strip and negative for poles to the right.
    ``length`` rungs are left where a denominator cancels all further ones; None if it never ends.
    """

    start: Expr
    step: Expr
    length: int | None = None


@dataclass(frozen=True)
class GammaProduct:
    """``constant * scale**(-s) * prod Gamma(shift + slope*s)**power``, an immutable function of ``s``.

    A numerator Gamma with positive slope has its poles to the left of the strip on which the product is
    meant, one with negative slope to the right.  The strip therefore needs no storage of its own.

    Parameters
    ----------
    constant, scale : Expr
        Free of ``s``; ``scale`` is non-zero and its power is the principal one.
    factors : tuple of Factor

    Examples
    --------
    >>> from sympy import S, symbols
    >>> from sympy_mellin_ext.gamma import GammaProduct
    >>> s = symbols('s')
    >>> G = GammaProduct.of(up=[(0, 1)], scale=3)
    >>> G.at(s)
    gamma(s)/3**s
    >>> (G * GammaProduct.of(up=[(1, -1)])).at(S(1)/3)
    2*3**(1/6)*pi/3
    """

    constant: Expr = S.One
    scale: Expr = S.One
    factors: tuple[Factor, ...] = ()

    @classmethod
    def of(
        cls,
        up: list | tuple = (),
        down: list | tuple = (),
        constant: Expr | int = S.One,
        scale: Expr | int = S.One,
    ) -> GammaProduct:
        """Build from pairs ``(shift, slope)`` of the numerator (``up``) and the denominator (``down``)."""
        factors = tuple(
            Factor(sympify(shift), Rational(slope), power)
            for pairs, power in ((up, 1), (down, -1))
            for shift, slope in pairs
        )
        return cls(sympify(constant), sympify(scale), factors)

    def __mul__(self, other: GammaProduct) -> GammaProduct:
        """Product of two transforms in the same variable, equal Gammas cancelled."""
        return GammaProduct(
            self.constant * other.constant, self.scale * other.scale, cancel(self.factors + other.factors)
        )

    def shifted(self, p: Expr) -> GammaProduct:
        """The product as a function of ``s`` at ``s + p``: the transform of ``x**p * g(x)``."""
        return GammaProduct(
            self.constant * positive_power(self.scale, -p),
            self.scale,
            tuple(Factor(a + A * p, A, e) for a, A, e in self.factors),
        )

    def rescaled(self, k: Rational) -> GammaProduct:
        """The product at ``k*s`` for rational non-zero ``k``.

        The transform of ``g(x**r)`` is this at ``k = 1/r``, divided by ``abs(r)``.
        """
        k = Rational(k)
        return GammaProduct(
            self.constant,
            positive_power(self.scale, k),
            tuple(Factor(a, A * k, e) for a, A, e in self.factors),
        )

    def with_scale(self, eta: Expr) -> GammaProduct:
        """The transform of ``g(eta*x)``."""
        return GammaProduct(self.constant, self.scale * eta, self.factors)

    # -- growth on vertical lines (Paris and Kaminski, section 2.1; DLMF 5.11.9) ------------------------

    @property
    def lam(self) -> Rational:
        """``sum e*abs(A)``: the decay of ``abs(G)`` is ``exp(-pi/2*lam*abs(Im s))`` for positive scale."""
        return Add(*(e * abs(A) for _, A, e in self.factors))

    @property
    def delta(self) -> Rational:
        """``sum e*A``: positive where the series at 0 converges everywhere."""
        return Add(*(e * A for _, A, e in self.factors))

    def kappa(self, sigma: Expr) -> Expr:
        """The exponent of ``abs(Im s)`` in ``abs(G)`` on the line ``Re s = sigma``."""
        from ..region import real_part

        return Add(*(e * (real_part(a) + A * sigma - S.Half) for a, A, e in self.factors))

    # -- poles -----------------------------------------------------------------------------------------

    def order_at(self, s0: Expr) -> int:
        """Order of the pole at ``s0`` (negative for a zero), as far as the arguments are known numbers."""
        order = 0
        for a, A, e in self.factors:
            argument = a + A * s0
            if argument.is_Symbol or argument.is_number is False:
                argument = expanded(argument)
            if argument.is_Integer and argument.is_nonpositive:
                order += e
        return order

    def ladders(self, side: int) -> Iterator[Ladder]:
        """Uncancelled pole ladders to the left (``side=+1``) or to the right (``side=-1``)."""
        below = [f for f in self.factors if f.power < 0]
        for a, A, e in self.factors:
            if e < 0 or (A > 0) != (side > 0):
                continue
            length = _LONGEST_CANCELLATION
            count = None
            for f in below:
                # Gamma(a + A*s)/Gamma(a + d + A*s) is one over a polynomial of degree d
                gap = f.shift - a if f.slope == A else S.Zero
                if not gap.is_Integer:
                    gap = expanded(gap)
                if gap.is_Integer and gap > 0:
                    count = length = int(gap)
                    below.remove(f)
                    break
            start, step = -a / A, 1 / A
            for n in range(length):
                pole = expanded(start - n * step)
                if self._survives(pole, side):
                    yield Ladder(pole, step, None if count is None else count - n)
                    break

    def poles(self, side: int, count: int) -> list[tuple[Expr, int]]:
        """The first ``count`` poles on a side with their orders, nearest to the strip first.

        Parameters
        ----------
        side : int
            +1 for the poles to the left, -1 for those to the right.  Ladders whose distance is not known
            (symbolic shifts) follow one another.
        count : int

        Examples
        --------
        >>> from sympy import S
        >>> from sympy_mellin_ext.gamma import GammaProduct
        >>> GammaProduct.of(up=[(0, 1), (0, 1)]).poles(1, 2)
        [(0, 2), (-1, 2)]
        >>> GammaProduct.of(up=[(0, 1)], down=[(0, S.Half)]).poles(1, 2)  # every second one is cancelled
        [(-1, 1), (-3, 1)]
        """
        found: dict[Expr, int] = {}
        for ladder in self.ladders(side):
            for n in range(_LONGEST_CANCELLATION if ladder.length is None else ladder.length):
                pole = (ladder.start - n * ladder.step).expand()
                order = self.order_at(pole)
                if order > 0:
                    found[pole] = order
        numbers = sorted((p for p in found if p.is_number and p.is_real), key=lambda p: -side * p)
        ordered = [*numbers, *(p for p in found if p not in numbers)]
        return [(p, found[p]) for p in ordered[:count]]

    def _survives(self, pole: Expr, side: int) -> bool:
        """Whether Gammas of this side leave a pole here; a Gamma of the other side cannot cancel it."""
        order = 0
        for a, A, e in self.factors:
            argument = a + A * pole
            if not argument.is_Number:
                argument = expanded(argument)
            if argument.is_Integer and argument.is_nonpositive:
                order += e
        return order > 0

    def strip(self) -> tuple[list[Expr], list[Expr]]:
        """Left and right pole heads: ``Re s`` lies above every left and below every right one."""
        return [l.start for l in self.ladders(1)], [l.start for l in self.ladders(-1)]

    # -- values ----------------------------------------------------------------------------------------

    def at(self, s: Expr) -> Expr:
        """The value at ``s`` in the shortest form found; ``s`` must not be a pole (see ``laurent``)."""
        up = [a + A * s for a, A, e in self.factors if e > 0]
        down = [a + A * s for a, A, e in self.factors if e < 0]
        value = shortest_quotient(up, down)
        return Mul(self.constant, positive_power(self.scale, -s), value)

    def laurent(self, s0: Expr, terms: int, rate: Expr = S.One) -> Series:
        """Laurent series of ``G(s0 + rate*eps)`` in ``eps``: ``terms`` coefficients from the leading one."""
        series = power_series(self.scale, -s0, -rate, terms)
        rest = [(expanded(a + A * s0), A * rate, e) for a, A, e in self.factors]
        while rest:
            a, r, e = rest.pop()
            partner = next((f for f in rest if f[2] == e and f[1] == -r and (f[0] + a - 1).is_Integer), None)
            if partner is None:
                factor = gamma_series(a, r, e, terms)
            else:
                # Gamma(a)*Gamma(n-a) = pi/sin(pi a) * (1-a)_(n-1)
                rest.remove(partner)
                n = int(partner[0] + a)
                factor = sine_series(a, r, e, terms)
                for j in range(n - 1):
                    factor = multiply(factor, linear_series(1 - a + j, -r, e, terms), terms)
                for j in range(1 - n):
                    factor = multiply(factor, linear_series(-a - j, -r, -e, terms), terms)
            series = multiply(series, factor, terms)
        return series.times(self.constant)

    def as_expr(self, s: Symbol) -> Expr:
        """The product as it stands, with nothing cancelled."""
        from sympy import gamma

        return Mul(
            self.constant, Pow(self.scale, -s), *(gamma(a + A * s) ** Integer(e) for a, A, e in self.factors)
        )


def cancel(factors: tuple[Factor, ...]) -> tuple[Factor, ...]:
    """Drop equal Gammas of numerator and denominator (same shift, same slope)."""
    rest: list[Factor] = []
    for factor in factors:
        opposite = Factor(factor.shift, factor.slope, -factor.power)
        if opposite in rest:
            rest.remove(opposite)
        else:
            rest.append(factor)
    return tuple(rest)
