"""One integral to be done, and the refusal that says why it was not."""
from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any, NamedTuple

from sympy import Expr, S, Symbol, oo

from .region import Facts

if TYPE_CHECKING:
    from .matching import Term

REASONS = ("no kernel", "growth", "empty region", "diverges", "range", "too many kernels")


class Refusal(Exception):
    """Why an integral was not done, raised under ``strict=True``.

    Attributes
    ----------
    reason : str
        One of 'no kernel', 'growth', 'empty region', 'diverges', 'range', 'too many kernels'.
    detail : str
        Which factor, which end.
    """

    def __init__(self, reason: str, detail: str) -> None:
        super().__init__(f"{reason}: {detail}")
        self.reason = reason
        self.detail = detail

    def __reduce__(self) -> tuple[type[Refusal], tuple[str, str]]:
        return type(self), (self.reason, self.detail)


class Finding(NamedTuple):
    """A reason that nobody has asked for yet: writing out an integrand takes longer than to refuse it."""

    reason: str
    detail: str
    about: tuple[Any, ...] = ()


class Diagnosis:
    """Collects the reasons of the strategies that refused; exists only when somebody asked."""

    def __init__(self) -> None:
        self.findings: list[Finding] = []
        self.divergent = False  # shown for the question as it was asked
        self.infinity: Expr | None = None  # oo or -oo, where it diverges to that
        self.proved: list[int] = []  # depths of the questions that were shown to diverge

    def refusal(self) -> Refusal:
        """The most telling finding: a later strategy that got further outranks 'no kernel'."""
        for vague in (("no kernel", "too many kernels"), ("no kernel",), ()):
            ranked = [f for f in self.findings if f.reason not in vague]
            if ranked:
                reason, detail, about = ranked[0]
                return Refusal(reason, detail.format(*about) if about else detail)
        return Refusal("no kernel", "no strategy recognises the integrand")


@dataclass(frozen=True)
class Problem:
    """``int integrand d(variable)`` over (lower, upper), with what is known of the parameters.

    Attributes
    ----------
    integrand : Expr
    variable : Symbol
        Counts as positive on the half line, whatever its own assumptions.
    lower, upper : Expr
    facts : Facts
    diagnosis : Diagnosis or None
        Where refusals leave their reasons; None (the rule) costs nothing.
    depth : int
        How many strategies have handed a changed problem on; bounded, so that none runs in circles.
    reference : Expr or None
        The exponent ``s - 1`` that counts as the variable of the transform when a strip is stated.
    principal : bool
        Whether simple poles on the range are taken in the sense of Cauchy's principal value.
    """

    integrand: Expr
    variable: Symbol
    lower: Expr = S.Zero
    upper: Expr = oo
    facts: Facts = Facts()  # noqa: RUF009 - immutable
    diagnosis: Diagnosis | None = None
    depth: int = 0
    reference: Expr | None = None
    principal: bool = False

    @property
    def half_line(self) -> bool:
        """Whether the range is (0, oo)."""
        return self.lower is S.Zero and self.upper is S.Infinity

    @cached_property
    def terms(self) -> list[Term] | None:
        """The integrand as a sum of terms for x > 0, read once for all strategies (see `read_terms`)."""
        from .matching import read_terms

        return read_terms(self.integrand, self.variable, self.facts)

    def refuse(self, reason: str, detail: str, *about: Any) -> Any:
        """Note why a strategy refuses; returns None so that it can be returned.

        With ``about``, the detail is a format string, filled in when somebody reads it.
        """
        if self.diagnosis is not None:
            self.diagnosis.findings.append(Finding(reason, detail, about))

    def diverges(self, detail: str, infinity: Expr | None = None) -> Any:
        """Note that the integral is shown to diverge, for every value of the parameters (to oo or -oo)."""
        if self.diagnosis is not None:
            self.diagnosis.proved.append(self.depth)
            if self.depth == 0:
                self.diagnosis.divergent = True
                self.diagnosis.infinity = infinity
        return self.refuse("diverges", detail)

    def changed(self, integrand: Expr, lower: Expr = S.Zero, upper: Expr = oo) -> Problem:
        """The same question about another integrand and range, one level deeper."""
        return replace(self, integrand=integrand, lower=lower, upper=upper, depth=self.depth + 1)
