"""A derivation as a list of paragraphs, before it is written as text, Markdown, LaTeX or HTML."""
from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any, NamedTuple

from sympy import Basic, Eq, Integral, S

from .details import details, plain

if TYPE_CHECKING:
    from ..closed_form import ClosedForm


# Signs that begin a sentence as they are.
_SIGNS = ("phi", "theta")


class Line(NamedTuple):
    """A formula with its label in words."""

    label: str
    value: Any


class Paragraph(NamedTuple):
    """A numbered step: what was done, the theorem, formulas."""

    action: str
    theorem: str
    lines: tuple[Line, ...]


class Document(NamedTuple):
    """A whole derivation."""

    integral: Basic
    steps: tuple[Paragraph, ...]
    result: tuple[Line, ...]
    sources: tuple[str, ...]


def document(answer: ClosedForm) -> Document:
    """The derivation of a closed form."""
    steps = []
    for step in answer.steps:
        lines = [Line(d.label, d.value) for d in details(step)]
        formula = step.formula
        if formula is not None:
            if hasattr(step.result, "as_expr") and not isinstance(step.result, Basic):
                lines.insert(0, Line("G(s)", plain(formula)))
            else:
                lines.append(Line("", plain(formula)))
        word = step.action.partition(" ")[0]
        action = step.action[:1].upper() + step.action[1:] if word.isalpha() and word not in _SIGNS else step.action
        steps.append(Paragraph(action, step.theorem or "direct", tuple(lines)))
    return Document(Integral(answer.integrand, *answer.limits), tuple(steps), tuple(_result(answer)), answer.sources)


def _result(answer: ClosedForm) -> Iterator[Line]:
    yield Line("value", answer.value)
    yield Line("for", "all parameters that the assumptions allow" if answer.condition is S.true else answer.condition)
    for where, value in answer.special:
        yield Line(f"at {where.lhs} = {where.rhs}" if isinstance(where, Eq) else f"where {where}", value)


__all__ = ["Document", "Line", "Paragraph", "document"]
