"""What the reductions hand back: a value, and what must hold for it."""
from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from sympy import Expr, S
from sympy.logic.boolalg import Boolean

from ..closed_form import Step

BAD = (S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity)


@dataclass(frozen=True)
class Outcome:
    """``value`` of an integral that converges iff all of ``positive`` are > 0 and ``booleans`` hold.

    ``exact``: False where the conditions are sufficient only.
    """

    value: Expr
    positive: tuple[Expr, ...] = ()
    booleans: tuple[Boolean, ...] = ()
    steps: tuple[Step, ...] = ()
    sources: tuple[str, ...] = ()
    special: tuple[tuple[Boolean, Expr], ...] = ()
    exact: bool = True

    def under(
        self,
        factor: Expr,
        positive: Sequence[Expr],
        booleans: Sequence[Boolean] = (),
        steps: Sequence[Step] = (),
        sources: Sequence[str] = (),
    ) -> Outcome:
        """This as the inner result of a reduction: ``factor`` times it, with further conditions and steps."""
        return replace(
            self,
            value=factor * self.value,
            positive=(*positive, *self.positive),
            booleans=(*booleans, *self.booleans),
            steps=(*steps, *self.steps),
            sources=(*sources, *self.sources),
            special=tuple((where, factor * value) for where, value in self.special),
        )
