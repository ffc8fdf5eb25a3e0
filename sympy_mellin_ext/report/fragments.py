"""Pieces of HTML: formulas, certificate, derivation, one integral; needs no more than SymPy."""
from __future__ import annotations

import re
from collections.abc import Sequence
from html import escape
from typing import Any

from sympy import Basic, Integral, latex

from ..closed_form import ClosedForm
from ..derivation.document import Line, Paragraph, document
from .card import Card, Certificate
from .mathml import mathml, presentation

_SIGNS = {"Lambda": "Λ", "Delta": "Δ", "kappa": "κ", "sigma": "σ", "phi": "φ", "theta": "θ", "oo": "∞", "pi": "π"}
_SIGN = re.compile(r"\b(" + "|".join(_SIGNS) + r")(?=\b|_)")


def formula(value: Any, block: bool = False) -> str:
    """A formula as MathML; text as it stands."""
    if isinstance(value, (Basic, int)):
        return mathml(value, block)
    return f"<code>{escape(str(value))}</code>"


def signs(text: str) -> str:
    """Greek letters and infinity as such."""
    return _SIGN.sub(lambda match: _SIGNS[match.group(1)], text)


def lines(found: Sequence[Line]) -> str:
    """Labelled formulas, one below the other."""
    return "".join(_line(line) for line in found)


def _line(line: Line) -> str:
    label = f"{escape(signs(line.label))}:" if line.label else "="
    value = formula(line.value)
    if line.label == "for" and isinstance(line.value, str):
        value = f"<span>{escape(line.value)}</span>"
    return f'<div class="line"><span class="label">{label}</span> <span class="formula">{value}</span></div>'


def derivation(steps: Sequence[Paragraph], sources: Sequence[str], open_: bool = False) -> str:
    """The steps, folded."""
    if not steps:
        return ""
    items = []
    for step in steps:
        theorem = f' <span class="theorem">— {escape(step.theorem)}</span>' if step.theorem else ""
        items.append(f"<li><p>{escape(signs(step.action))}{theorem}</p>{lines(step.lines)}</li>")
    told = f'<p class="sources">Sources: {escape("; ".join(sources))}</p>' if sources else ""
    return (
        f"<details{' open' if open_ else ''}><summary>Derivation, {len(steps)} step{'s' * (len(steps) != 1)}</summary>"
        f"<ol>{''.join(items)}</ol>{told}</details>"
    )


def certificate(found: Certificate | None) -> str:
    """The comparison with quadrature as a table."""
    if found is None:
        return ""
    mark = {True: "good", False: "bad", None: "open"}[found.ok]
    head = f'<p class="verdict {mark}">Quadrature: {found.verdict}</p>'
    rows = "".join(
        f'<tr><td>{escape(at)}</td>{_cell("closed form", c)}{_cell("quadrature", q)}{_cell("digits", d)}</tr>'
        for at, c, q, d in found.rows
    )
    outside = "".join(
        f'<tr class="outside"><td>{escape(at)}</td><td colspan="3">outside: {escape(verdict)}</td></tr>'
        for at, verdict in found.outside
    )
    table = (
        '<div class="scroll"><table><thead><tr><th>at</th><th>closed form</th><th>quadrature</th><th>digits</th></tr>'
        f"</thead><tbody>{rows}{outside}</tbody></table></div>"
    )
    note = f'<p class="note">{escape(found.note)}</p>' if found.note else ""
    return f"<div class=certificate>{head}{table if rows or outside else ''}{note}</div>"


def _cell(label: str, number: str) -> str:
    """A number, with the head of its column for screens too narrow for columns."""
    return f'<td class="number" data-label="{label}">{escape(number)}</td>'


def equation(left: Any, right: Any) -> str:
    """``left = right`` as one displayed formula, which may be scrolled where it is wider than the page."""
    if not isinstance(left, Basic) or not isinstance(right, Basic):
        return f'<div class="display">{formula(left)} = {formula(right)}</div>'
    inner = f"{presentation(left)}<mo>=</mo>{presentation(right)}"
    return f'<div class="display" tabindex="0"><math display="block"><mrow>{inner}</mrow></math></div>'


def article(found: Card, number: int, pictures: Sequence[tuple[str, str]] = ()) -> str:
    """One integral of the page; ``pictures`` are (svg, caption)."""
    value = next((line for line in found.result if line.label == "value"), None)
    rest = [line for line in found.result if line is not value]
    shown = f'<div class="display">{formula(found.integral, True)}</div>'
    if value is not None:
        shown = equation(found.integral, value.value)
    parts = [f'<article id="i{number}"><h2><span class="count">{number}</span> {escape(found.name)}</h2>']
    if found.note:
        parts.append(f"<p>{escape(found.note)}</p>")
    parts += [shown, f'<div class="region">{lines(rest)}</div>']
    if found.strategy:
        parts.append(f'<p class="strategy">by {escape(found.strategy)}</p>')
    parts.append(certificate(found.certificate))
    for svg, caption in pictures:
        parts.append(f"<figure>{svg}<figcaption>{escape(caption)}</figcaption></figure>")
    parts.append(derivation(found.steps, found.sources))
    if found.source_text:
        parts.append(f"<details><summary>LaTeX</summary><pre>{escape(found.source_text)}</pre></details>")
    parts.append("</article>")
    return "\n".join(p for p in parts if p)


def notebook(answer: ClosedForm) -> str:
    """A closed form in a notebook: formula, region, derivation folded.  Colours are the notebook's own."""
    told = document(answer)
    integral = told.integral
    assert isinstance(integral, Integral)
    region = "".join(
        f"<div>{escape(line.label)} {escape(line.value) if isinstance(line.value, str) else formula(line.value)}</div>"
        for line in told.result[1:]
    )
    title = escape(f"{latex(integral)} = {latex(answer.value)}", quote=True)
    return (
        f'<div class="closed-form" title="{title}">{equation(integral, answer.value)}'
        f"{region}<div><small>by {escape(answer.strategy)}</small></div>{derivation(told.steps, told.sources)}</div>"
    )


__all__ = ["article", "certificate", "derivation", "equation", "formula", "lines", "notebook"]
