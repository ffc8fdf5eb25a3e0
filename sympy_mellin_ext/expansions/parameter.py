"""The Laurent series of a closed form in one of its parameters."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from sympy import Add, Dummy, Expr, O, Pow, S, Symbol, expand_func, factorial, latex, polygamma, sympify

from ..arguments import expression, symbol
from .arithmetic import NotMeromorphic, TooFewTerms, series_of

# Where so many leading coefficients cancel, the expression is taken to vanish or to be out of reach.
_MOST_TERMS = 40
# Gauss' theorem and the recurrence write digammas out at small rationals (DLMF 5.4.19, 5.15.5); elsewhere
# the sums would be longer than what they stand for.
_LARGEST_DENOMINATOR, _FARTHEST = 6, 12
_LONGEST = 300


@dataclass(frozen=True)
class ParameterSeries:
    """``sum coefficients[k]*(parameter - point)**(valuation + k)``, truncated.

    Attributes
    ----------
    parameter : Symbol
    point : Expr
    valuation : int
        The leading power; negative at a pole.
    coefficients : tuple of Expr
    """

    parameter: Symbol
    point: Expr
    valuation: int
    coefficients: tuple[Expr, ...]

    @property
    def order(self) -> int:
        """The last power of which the coefficient is known."""
        return self.valuation + len(self.coefficients) - 1

    def coefficient(self, n: int) -> Expr:
        """The coefficient of the n-th power; IndexError beyond the truncation."""
        if n < self.valuation:
            return S.Zero
        return self.coefficients[n - self.valuation]

    def as_expr(self, remainder: bool = False) -> Expr:
        """The sum, with the order of what is left out if ``remainder``."""
        step = self.parameter - self.point
        total = Add(*(c * step ** (self.valuation + k) for k, c in enumerate(self.coefficients)))
        return total + O(step ** (self.order + 1), (self.parameter, self.point)) if remainder else total

    def __str__(self) -> str:
        step = self.parameter - self.point
        terms = ordered_sum([c * step ** (self.valuation + k) for k, c in enumerate(self.coefficients)])
        return f"{terms} + O({step ** (self.order + 1)})"

    def _repr_latex_(self) -> str:
        return rf"$\displaystyle {latex(self.as_expr(remainder=True))}$"


def parameter_series(value: Any, parameter: Symbol, point: Any, order: int) -> ParameterSeries:
    """Laurent series of an expression in Gammas, zeta functions and the like.

    Parameters
    ----------
    value : Expr
    parameter : Symbol
    point : Expr
        Finite.
    order : int
        The last power wanted.

    Raises
    ------
    NotMeromorphic
        A ValueError that says what stands in the way: a branch point, an essential singularity, a function
        whose derivatives have no name.

    Examples
    --------
    >>> from sympy import gamma, symbols
    >>> from sympy_mellin_ext.expansions import parameter_series
    >>> eps = symbols('epsilon')
    >>> print(parameter_series(gamma(eps)*gamma(1 - eps)**2/gamma(2 - 2*eps), eps, 0, 0))
    1/epsilon + 2 - EulerGamma + O(epsilon)
    """
    value, point = expression(value, "value"), expression(sympify(point), "point")
    symbol(parameter, "parameter")
    if point.is_infinite or point.has_free(parameter):
        raise ValueError(f"point must be finite and free of {parameter}, not {point}")
    eps = Dummy("epsilon")
    shifted = value.xreplace({parameter: point + eps})
    terms = max(order, 0) + 2
    while True:
        try:
            series = series_of(shifted, eps, terms)
        except TooFewTerms:
            if terms >= _MOST_TERMS:
                raise
            terms += 2
            continue
        reach = series.valuation + len(series.coefficients) - 1
        if reach >= order or series.head is S.Zero:
            break
        if terms >= _MOST_TERMS:
            raise NotMeromorphic(f"its terms cancel up to the power {reach} of {parameter - point}")
        terms += order - reach
    first = min(series.valuation, order)
    coefficients = tuple(named(series.coefficient(k)) for k in range(first, order + 1))
    return ParameterSeries(parameter, point, first, coefficients)


def ordered_sum(terms: Sequence[Expr]) -> str:
    """The terms of a sum as text in the order given."""
    return " + ".join(str(t) for t in terms if t is not S.Zero).replace("+ -", "- ") or "0"


def named(c: Expr) -> Expr:
    """A coefficient with the digammas and trigammas at rational points in constants, and its terms collected."""
    moved = {
        p: _known(p) for p in sorted(c.atoms(polygamma), key=str) if p.args[0].is_Integer and p.args[1].is_Rational
    }
    if moved:
        c = c.xreplace(moved)
    if c.count_ops() > _LONGEST:
        return c
    expanded = c.expand(log=False, func=False, trig=False, power_base=False, power_exp=False)
    return expanded if expanded.count_ops() <= c.count_ops() or expanded.is_number else c


def _known(p: Expr) -> Expr:
    if not isinstance(p, polygamma) or p.args[1].q > _LARGEST_DENOMINATOR or not 0 < p.args[1] <= _FARTHEST:
        return p
    n, z = p.args
    if z > 1:  # DLMF 5.15.5
        whole = int(z) - (1 if z.is_Integer else 0)
        low = z - whole
        steps = Add(*(Pow(low + k, -n - 1) for k in range(whole)))
        return _known(polygamma(n, low)) + S.NegativeOne**n * factorial(n) * steps
    return expand_func(p) if n == 0 else p
