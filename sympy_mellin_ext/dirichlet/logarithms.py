"""``x**k*exp(-A*x)*log(1 - z*exp(-d*x))`` for whole k: partial fractions in the index of the series.

With u = k + 1 and alpha = A/d,

    1/(m*(m + alpha)**u) = alpha**(-u)/m - sum_{i=1..u} alpha**(-(u-i+1))/(m + alpha)**i,

so that the integral is a combination of Dirichlet series at whole arguments.  Source: DLMF 4.6.1, 25.14.5.
"""

from __future__ import annotations

from collections.abc import Sequence

from sympy import Add, Expr, Integer, S, factorial
from sympy.logic.boolalg import And, Boolean

from ..region import Facts, real_part
from . import functions
from .combination import Combination, Row
from .expansion import Expansion, LogFactor, Unsupported

_MOST_LOGS = 8


def logarithmic_value(expansions: Sequence[Expansion], facts: Facts) -> tuple[Expr, Boolean]:
    """The value of the terms with a logarithm and an exponential, and where each of them converges."""
    groups: dict[tuple[Expr, Integer, Expr], tuple[list[Row], list[Expr]]] = {}
    condition: Boolean = S.true
    for e in expansions:
        if not e.logarithms:
            continue
        u = ((e.power + 1) / e.ratio).expand()
        if e.logs or not u.is_Integer or not 0 < u <= _MOST_LOGS or e.ratio.is_positive is not True:
            raise Unsupported("a power of x times a logarithm times an exponential")
        for factor in e.logarithms:
            real = (real_part(factor.rate, facts) + factor.d).expand()
            sign = facts.sign(real)
            if sign in (0, -1):
                raise Unsupported("a logarithm that grows")
            condition = And(condition, e.condition, S.true if sign == 1 else real > 0)
            rows, rest = groups.setdefault((factor.d, u, e.ratio), ([], []))
            _take(factor, u, facts, rows, rest)
    values = [
        factorial(u - 1) * d ** (-u) / ratio * (Combination(tuple(rows)).at(u) + Add(*rest))
        for (d, u, ratio), (rows, rest) in groups.items()
    ]
    return Add(*values), condition


def _take(factor: LogFactor, u: Integer, facts: Facts, rows: list[Row], rest: list[Expr]) -> None:
    alpha = (factor.rate / factor.d).expand()
    if alpha.is_zero is not False and not facts.nonzero(alpha):
        raise Unsupported("a rate that may vanish")
    z, c = factor.z, factor.coefficient
    rows.append(Row(z, u - 1, S.One, S.One, -c * z * alpha ** (-u)))
    start, down = alpha + 1, 0
    if alpha.is_Rational:
        down = int(-((-start) // 1)) - 1
        start = start - down
    for i in range(1, int(u) + 1):
        weight = c * z * alpha ** (i - u - 1)
        scale, remainder = functions.shifted(z, Integer(i), start, down)
        rows.append(Row(z, u - i, S.One, start, weight * scale))
        rest.append(weight * remainder)


__all__ = ["logarithmic_value"]
