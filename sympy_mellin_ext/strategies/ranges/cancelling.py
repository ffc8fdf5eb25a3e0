"""Sums on (0, 1) whose terms diverge one by one at x = 0: ``(exp(x) - 1)/x``, ``(1 - cos(x))/x``.

Each kernel is integrated term by term (its series converges everywhere).  The term in ``1/x`` has finite part 0;
where the total converges these terms cancel (D. Zagier, The Mellin transform and related analytic techniques (2006),
section 1).
"""

from __future__ import annotations

from collections.abc import Sequence

from sympy import Add, Dummy, Expr, Integer, Mul, S, hyper, rf

from ...closed_form import ClosedForm, Step
from ...inverse import named_pfq
from ...inverse.residues import left_series
from ...inverse.signature import normalise, power
from ...matching.term import Kernel
from ...pieces import Piece
from ...problem import Problem
from ...region import Region, real_part
from ..finite_part import edge
from ..tidy import tidy as shortened
from .combined import BAD
from .joint import UnitTerm, short

_MOST_TERMS = 12
_SOURCE = "D. Zagier, The Mellin transform and related analytic techniques (2006), section 1"


def cancelling(problem: Problem, terms: Sequence[UnitTerm], name: str) -> ClosedForm | None:
    """The sum of the finite parts, where everything that diverges at 0 cancels."""
    pieces: list[Piece] = []
    values: list[Expr] = []
    for term in terms:
        if term.minus or term.unit_logs or (term.foreign and term.logs):
            return None
        kernel = term.foreign[0] if term.foreign else None
        value = _power(term) if kernel is None else _series(term, kernel)
        if value is None:
            return None
        values.append(term.coefficient * value)
        if kernel is None:
            pieces.append(Piece(term.coefficient, term.power, term.logs))
        else:
            pieces.append(Piece(term.coefficient, term.power, 0, kernel.product, kernel.ratio))
    found = edge(pieces, 1, problem.facts)
    if found is None:
        return None
    region = Region(problem.facts).positive(*(real_part(e) + 1 for e in found.survivors))
    total = Add(*values)
    if region.empty or total.has(*BAD):
        return None
    step = Step("series integrated term by term, finite parts added", _SOURCE, total)
    return ClosedForm(shortened(total), region.to_boolean(), None, name, (step,), (_SOURCE,))


def _power(term: UnitTerm) -> Expr | None:
    """``int_0^1 x**p*log(x)**k``, 0 for p = -1 (finite part)."""
    u, k = (term.power + 1).expand(), term.logs
    if u.is_zero:
        return S.Zero
    return (-1) ** k * Mul(*(Integer(i) for i in range(1, k + 1))) / u ** (k + 1) if u.is_number else None


def _series(term: UnitTerm, kernel: Kernel) -> Expr | None:
    """``sum c_n/(p + 1 + n*step)`` without the term that reads 1/0."""
    if kernel.product.delta <= 0 or kernel.wave is not None or not kernel.ratio.is_positive:
        return None
    norm = normalise(kernel.product.factors)
    series = left_series(norm.signature, Dummy("w", positive=True))
    if series is None or series.head is not S.Zero:
        return None
    total: list[Expr] = []
    for tail in series.tails:
        step = kernel.ratio * norm.power
        start = (term.power + 1 + step * tail.exponent).expand()
        degree = (norm.power * tail.exponent).expand()
        if not start.is_Rational or not step.is_Rational or not degree.is_Integer:
            return None
        argument = tail.sign * norm.scale * kernel.product.scale**norm.power
        front = (
            norm.constant * kernel.product.constant * tail.coefficient
            * power(norm.scale, tail.exponent) * kernel.product.scale**degree
        )  # fmt: skip
        first = max(0, int(-start / step) + 1) if start <= 0 else 0
        if first > _MOST_TERMS:
            return None
        for n in range(first):
            if start + n * step != 0:
                total.append(front * _coefficient(tail.upper, tail.lower, n) * argument**n / (start + n * step))
        rest = (start + first * step) / step
        upper, lower = short(
            [*(a + first for a in tail.upper), S.One, rest],
            [*(c + first for c in tail.lower), Integer(first + 1), rest + 1],
        )
        known = argument.is_positive or argument.is_negative
        f = named_pfq(upper, lower, argument) if known else None
        leading = front * _coefficient(tail.upper, tail.lower, first) * argument**first / (start + first * step)
        total.append(leading * (hyper(upper, lower, argument) if f is None else f))
    return Add(*total)


def _coefficient(upper: Sequence[Expr], lower: Sequence[Expr], n: int) -> Expr:
    return Mul(*(rf(a, n) for a in upper)) / Mul(rf(S.One, n), *(rf(c, n) for c in lower))
