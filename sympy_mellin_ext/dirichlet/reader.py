"""The reader of the matcher, extended by powers and logarithms of sums of exponentials."""

from __future__ import annotations

from typing import NamedTuple

from sympy import Add, Expr, I, Mul, Pow, S, Symbol, cosh, coth, csch, exp, log, sech, sinh, tanh
from sympy.functions.elementary.hyperbolic import HyperbolicFunction

from ..matching.reader import Drafts, Reader
from ..matching.waves import Draft

_QUOTIENTS = {tanh: (sinh, cosh), coth: (cosh, sinh), sech: (None, cosh), csch: (None, sinh)}
_MOST_TERMS = 80
_HIGHEST_EXPANDED = 8


class Exponentials(NamedTuple):
    """``sum c*exp(e*y)`` over (e, c), ``y = x**ratio``."""

    ratio: Expr
    terms: tuple[tuple[Expr, Expr], ...]


class SeriesFactor(NamedTuple):
    """``base**power``, or ``log(base)`` if ``logarithm``; ``positive``: right for a positive base only."""

    base: Exponentials
    power: Expr
    logarithm: bool = False
    positive: bool = False


class Quotient(NamedTuple):
    """``coefficient * x**power * prod base**n``."""

    power: Expr
    factors: tuple[tuple[Exponentials, Expr], ...]


def has_exponential_series(expr: Expr, x: Symbol) -> bool:
    """Whether an exponential stands where only a series helps: below the line, in a log, in tanh."""
    if expr.is_Atom or not expr.has_free(x):
        return False
    kind = type(expr)
    if kind in _QUOTIENTS:
        return True
    if kind is log:
        return _contains_exponential(expr.args[0], x)
    if kind is Pow:
        base, exponent = expr.args
        whole = exponent.is_Integer and exponent.is_positive
        if (
            not whole
            and not exponent.has_free(x)
            and type(base) is not exp
            and _contains_exponential(base, x)
        ):
            return True
    return any(has_exponential_series(a, x) for a in expr.args)


def _contains_exponential(expr: Expr, x: Symbol) -> bool:
    """Whether an exponential or hyperbolic function of x occurs."""
    if expr.is_Atom:
        return False
    if isinstance(expr, (exp, HyperbolicFunction)) and expr.has_free(x):
        return True
    if type(expr) is Pow and expr.exp.has_free(x):
        return True
    return any(_contains_exponential(a, x) for a in expr.args)


class SeriesReader(Reader):
    """Reads powers and logarithms of sums of exponentials besides what :class:`Reader` knows."""

    def read(self, expr: Expr) -> Drafts | None:
        kind = type(expr)
        if kind is Pow:
            base, exponent = expr.args
            whole = exponent.is_Integer and 0 < exponent <= _HIGHEST_EXPANDED
            if (
                not whole
                and not exponent.has_free(self.x)
                and type(base) is not exp
                and _contains_exponential(base, self.x)
            ):
                return self._power_of_sum(base, exponent)
        elif kind is log and _contains_exponential(expr.args[0], self.x):
            return self._logarithm_of_sum(expr.args[0])
        elif isinstance(expr, HyperbolicFunction) and expr.has_free(self.x):
            if kind in (sinh, cosh):
                return self._hyperbolic(expr)
            if kind in _QUOTIENTS:
                above, below = _QUOTIENTS[kind]
                under = self._power_of_sum(below(expr.args[0]), S.NegativeOne)
                over = [Draft()] if above is None else self.read(above(expr.args[0]))
                if under is None or over is None:
                    return None
                return [d.times(e) for d in over for e in under]
        return super().read(expr)

    def _hyperbolic(self, expr: Expr) -> Drafts | None:
        """``sinh`` and ``cosh`` as exponentials, so that shifts go into the coefficients: DLMF 4.28.1-2."""
        argument = expr.args[0]
        up, down = self._exponential(argument), self._exponential(-argument)
        if up is None or down is None:
            return None
        sign = -1 if type(expr) is sinh else 1
        return [*(d.scaled(S.Half) for d in up), *(d.scaled(sign * S.Half) for d in down)]

    def _power_of_sum(self, base: Expr, exponent: Expr) -> Drafts | None:
        quotient = self._quotient(base)
        if quotient is None:
            return None
        positive = not exponent.is_integer
        factors = tuple(SeriesFactor(b, n * exponent, False, positive) for b, n in quotient.factors)
        return [Draft(power=quotient.power * exponent, series=factors)]

    def _logarithm_of_sum(self, inner: Expr) -> Drafts | None:
        quotient = self._quotient(inner)
        if quotient is None:
            return None
        drafts = [
            Draft(coefficient=n, series=(SeriesFactor(b, S.One, True, True),)) for b, n in quotient.factors
        ]
        if quotient.power is not S.Zero:
            drafts.append(Draft(coefficient=quotient.power, logs=1))
        return drafts

    def _quotient(self, base: Expr) -> Quotient | None:
        """Powers of sums of exponentials and a power of x, if `base` is a product of such."""
        kind = type(base)
        if kind is Mul:
            power: Expr = S.Zero
            factors: list[tuple[Exponentials, Expr]] = []
            for a in base.args:
                part = self._quotient(a)
                if part is None:
                    return None
                power += part.power
                factors.extend(part.factors)
            return Quotient(power, tuple(factors))
        if kind is Pow and base.exp.is_integer and not base.exp.has_free(self.x):
            part = self._quotient(base.base)
            if part is None:
                return None
            return Quotient(part.power * base.exp, tuple((b, n * base.exp) for b, n in part.factors))
        if kind in _QUOTIENTS:
            above, below = _QUOTIENTS[kind]
            under = self._quotient(below(base.args[0]))
            over = Quotient(S.Zero, ()) if above is None else self._quotient(above(base.args[0]))
            if under is None or over is None:
                return None
            return Quotient(S.Zero, over.factors + tuple((b, -n) for b, n in under.factors))
        drafts = self.read(base)
        return None if drafts is None else self._common_denominator(drafts)

    def _common_denominator(self, drafts: Drafts) -> Quotient | None:
        power, ratio = drafts[0].power, None
        below: dict[Exponentials, int] = {}
        for d in drafts:
            if d.kernels or d.logs or d.trig or d.power != power:
                return None
            for r, _ in d.exponents:
                if ratio is not None and r != ratio:
                    return None
                ratio = r
            for factor in d.series:
                n = factor.power
                if factor.logarithm or not n.is_Integer or n > 0 or ratio not in (None, factor.base.ratio):
                    return None
                ratio = factor.base.ratio
                below[factor.base] = max(below.get(factor.base, 0), -int(n))
        if ratio is None:
            total = Add(*(d.coefficient for d in drafts))
            return Quotient(power, ((Exponentials(S.One, ((S.Zero, total),)), S.One),))
        columns: dict[Expr, list[Expr]] = {}
        for d in drafts:
            start = {Add(*(c for _, c in d.exponents)): d.coefficient}
            missing = dict(below)
            for factor in d.series:
                missing[factor.base] += int(factor.power)
            for base, n in missing.items():
                for _ in range(n):
                    start = times(start, dict(base.terms))
                    if len(start) > _MOST_TERMS:
                        return None
            for e, c in start.items():
                columns.setdefault(e, []).append(c)
        top = collected(columns)
        if not top:
            return None
        return Quotient(
            power, ((Exponentials(ratio, top), S.One), *((base, S(-n)) for base, n in below.items()))
        )


def times(left: dict[Expr, Expr], right: dict[Expr, Expr]) -> dict[Expr, Expr]:
    """Product of two sums of exponentials."""
    columns: dict[Expr, list[Expr]] = {}
    for e, c in left.items():
        for f, d in right.items():
            columns.setdefault(e + f, []).append(c * d)
    return dict(collected(columns))


def collected(columns: dict[Expr, list[Expr]]) -> tuple[tuple[Expr, Expr], ...]:
    """Exponents with their coefficients added up, zeros dropped."""
    totals = []
    for e, column in columns.items():
        total = column[0] if len(column) == 1 else Add(*column).expand()
        if total is not S.Zero:
            totals.append((e, total))
    return tuple(totals)


def as_exponentials(draft: Draft) -> list[Draft]:
    """The draft with sines and cosines of its series' power of x as complex exponentials."""
    if not draft.trig:
        return [draft]
    parts = [
        Draft(draft.coefficient, draft.power, draft.logs, draft.exponents, (), draft.kernels, draft.series)
    ]
    for kind, c, ratio in draft.trig:
        weights = (1 / (2 * I), -1 / (2 * I)) if kind == "sin" else (S.Half, S.Half)
        parts = [
            d.times(Draft(coefficient=weight, exponents=((ratio, turn * I * c),)))
            for d in parts
            for weight, turn in zip(weights, (1, -1), strict=True)
        ]
    return parts


__all__ = [
    "Exponentials",
    "SeriesFactor",
    "SeriesReader",
    "as_exponentials",
    "collected",
    "has_exponential_series",
    "times",
]
