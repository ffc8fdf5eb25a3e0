"""Powers of binomials in ``q = exp(-d*y)``: Euler's Beta integral in q, in q/(1+q) or in tanh**2.

Sources: DLMF 5.12.1, 5.12.3; I. S. Gradshteyn and I. M. Ryzhik, 3.312.1, 3.512 (from memory).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from sympy import Add, Expr, Rational, S
from sympy.logic.boolalg import And, Boolean

from ..closed_form import ClosedForm, Step
from ..gamma import GammaProduct
from ..gamma.shortest import collect_powers
from ..kernels.elementary import power as binomial_power
from ..matching.waves import Draft
from ..pieces import Piece
from ..problem import Problem
from ..strategies.master_theorem import closed_form_of_pieces
from ..strategies.ranges.beta import BetaTerm, convergence, total_value
from .expansion import BetaFactor, Expansion, Unsupported
from .reader import as_exponentials

_SOURCE = "DLMF 5.12.1"
_MOST_LOGS = 6


def is_finite(draft: Draft, ratio: Expr) -> bool:
    """Whether a draft is a sum of exponentials of y times a whole power of y."""
    if draft.logs or draft.kernels or any(r != ratio for r, _ in draft.exponents) or not draft.exponents:
        return False
    k = ((draft.power + 1) / ratio - 1).expand()
    return bool(k.is_Integer and 0 <= k <= _MOST_LOGS)


def closed_form_of_beta(
    problem: Problem, expansions: Sequence[Expansion], plain: Sequence[Draft], name: str
) -> ClosedForm | None:
    """Powers of one binomial times exponentials and whole powers of y, besides `plain` exponentials."""
    condition: Boolean = S.true
    items: list[tuple[BetaFactor, int, Expr]] = []
    ratio = expansions[0].ratio
    rest = list(plain)
    for e in expansions:
        if e.ratio != ratio or e.logs:
            raise Unsupported("several powers of x in exponents")
        condition = And(condition, e.condition)
        k = _whole_power(e.power, ratio)
        items.extend((b, k, ratio) for b in e.beta)
    if len({(b.z, b.d) for b, _, _ in items}) != 1:
        raise Unsupported("different binomials")
    first = items[0][0]
    if first.z is S.One:
        terms = (
            [_in_q(b, k) for b, k, _ in items]
            if first.other is S.Zero
            else [_in_tanh(b, k) for b, k, _ in items]
        )
        if any((b.other is S.Zero) != (first.other is S.Zero) for b, _, _ in items):
            raise Unsupported("different binomials")
        if rest and first.other is not S.Zero:
            raise Unsupported("exponentials besides powers of sinh and cosh")
        terms += [_finite(d, first.d, ratio) for draft in rest for d in as_exponentials(draft)]
        return _of_terms(problem, terms, condition, name, ratio)
    if rest:
        raise Unsupported("exponentials besides a power of 1 + q")
    pieces = _mirrored(items, condition)
    answer = closed_form_of_pieces(problem, pieces, name, (_SOURCE,))
    return None if answer is None else replace(answer, strip=None)


def _whole_power(power: Expr, ratio: Expr) -> int:
    """k with ``x**power dx = y**k dy/ratio``, ``y = x**ratio``."""
    k = ((power + 1) / ratio - 1).expand()
    if not k.is_Integer or not 0 <= k <= _MOST_LOGS or ratio.is_positive is not True:
        raise Unsupported("a power of x times a power of a binomial")
    return int(k)


def _in_q(b: BetaFactor, k: int) -> BetaTerm:
    """With q as variable, ``y = -log(q)/d``."""
    c = b.coefficient * S.NegativeOne**k / b.d ** (k + 1)
    return BetaTerm(c, (b.rate / b.d).expand(), (b.power + 1).expand(), k, b.logs)


def _finite(draft: Draft, d: Expr, ratio: Expr) -> BetaTerm:
    k = _whole_power(draft.power, ratio)
    rate = Add(*(-c for _, c in draft.exponents))
    return BetaTerm(draft.coefficient * S.NegativeOne**k / d ** (k + 1), (rate / d).expand(), S.One, k)


def _in_tanh(b: BetaFactor, k: int) -> BetaTerm:
    """``sinh(c*y)**p*cosh(c*y)**(-m)`` with ``tanh(c*y)**2`` as variable, c = d/2."""
    p, m = b.power, -b.other
    if k or b.logs or (b.rate - b.d * (m - p) / 2).expand() is not S.Zero:
        raise Unsupported("a power of x times powers of sinh and cosh")
    # exp(-rate*y)*(1-q)**p*(1+q)**(-m) = 2**(p-m)*sinh**p*cosh**(-m); dy = dT/(2*c*sqrt(T)*(1-T))
    c = b.coefficient * 2 ** (p - m) / b.d
    return BetaTerm(c, ((p + 1) / 2).expand(), ((m - p) / 2).expand())


def _of_terms(
    problem: Problem, terms: Sequence[BetaTerm], condition: Boolean, name: str, ratio: Expr
) -> ClosedForm | None:
    region = convergence(terms, problem.facts)
    if region is None:
        return problem.refuse("diverges", "no exponent makes the integral converge at 0 and at oo")
    region = region.holds(condition)
    where = region.to_boolean()
    if where is S.false:
        return problem.refuse("empty region", "the conditions contradict one another")
    value = collect_powers(total_value(terms) / ratio)
    if value.has(S.NaN, S.ComplexInfinity, S.Infinity):
        return None
    step = Step("Beta integral in a power of exp(-x)", _SOURCE, value)
    return ClosedForm(value, where, None, name, (step,), (_SOURCE,))


def _mirrored(items: Sequence[tuple[BetaFactor, int, Expr]], condition: Boolean) -> list[Piece]:
    """``exp(-A*y)*(1+q)**(-m)`` with its mirror image ``A -> m*d - A`` fills 0 < q < oo: DLMF 5.12.3."""
    pieces: list[Piece] = []
    pending = list(items)
    while pending:
        b, k, ratio = pending.pop(0)
        m = -b.power
        mirror = (m * b.d - b.rate).expand()
        weight: Expr = b.coefficient
        if (mirror - b.rate).expand() is S.Zero and k % 2 == 0:
            weight = weight / 2
        else:
            for other in pending:
                o = other[0]
                if (
                    other[1] == k
                    and o.power == b.power
                    and (o.rate - mirror).expand() is S.Zero
                    and (o.coefficient - S.NegativeOne**k * b.coefficient).expand() is S.Zero
                ):
                    pending.remove(other)
                    break
            else:
                raise Unsupported("a power of 1 + q without its mirror image")
        product: GammaProduct = binomial_power(m)
        constant = weight * S.NegativeOne**k / b.d ** (k + 1) / ratio
        power = (b.rate / b.d - Rational(1)).expand()
        pieces.append(Piece(constant, power, k, product, S.One, None, (), condition, True))
    return pieces


__all__ = ["closed_form_of_beta"]
