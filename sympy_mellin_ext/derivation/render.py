"""A derivation as plain text, as Markdown and as LaTeX."""
from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from sympy import Basic, Tuple, latex

from .document import Document, Line, document

if TYPE_CHECKING:
    from ..closed_form import ClosedForm

FORMATS = ("text", "markdown", "latex")

_ESCAPES = {
    "\\": r"\textbackslash{}", "{": r"\{", "}": r"\}", "$": r"\$", "&": r"\&", "#": r"\#", "%": r"\%", "_": r"\_",
    "^": r"\textasciicircum{}", "~": r"\textasciitilde{}", "<": r"\textless{}", ">": r"\textgreater{}",
    "|": r"\textbar{}",
}  # fmt: skip
# Labels that are formulas themselves.
_FORMULA = re.compile(r"(Lambda|Delta|kappa\(sigma\)|phi(_\d+)?\(n\)|c(_\d+)?\(n\+\d+\)/c(_\d+)?\(n\)|G\(s\))(_\d+)?")
_LETTERS = {"Lambda": r"\Lambda", "Delta": r"\Delta", "kappa": r"\kappa", "sigma": r"\sigma", "phi": r"\varphi"}
_HEAD = r"""\documentclass{article}
\usepackage[T1]{fontenc}
\usepackage[utf8]{inputenc}
\usepackage{amsmath,amssymb}
\begin{document}
"""
# Formulas wider than a line (in characters of their plain text) are set smaller.
_WIDE, _VERY_WIDE = 90, 150


def render(answer: ClosedForm, format: str = "text", standalone: bool = False) -> str:
    """The derivation of a closed form.

    Parameters
    ----------
    answer : ClosedForm
    format : 'text', 'markdown' or 'latex'
    standalone : bool
        With LaTeX: a whole document; else a part of one that loads amsmath.

    Raises
    ------
    ValueError
        For another format.
    """
    if format not in FORMATS:
        raise ValueError(f"format: one of {', '.join(FORMATS)} is accepted, not {format!r}")
    content = document(answer)
    if format == "text":
        return _text(content)
    if format == "markdown":
        return _markdown(content)
    return _HEAD + _latex(content) + "\\end{document}\n" if standalone else _latex(content)


# -- plain text -------------------------------------------------------------------------------------------


def shown(value: Any) -> str:
    """A value as plain text; an interval as ``(lower, upper)``."""
    return str(value)


def _text(content: Document) -> str:
    lines = [f"Integral: {content.integral}", ""]
    for i, step in enumerate(content.steps, start=1):
        lines.append(f"{i}. {step.action}.  [{step.theorem}]")
        lines += [f"     {line.label + ': ' if line.label else '= '}{shown(line.value)}" for line in step.lines]
        lines.append("")
    lines.append("Result:")
    lines += [f"     {line.label}: {shown(line.value)}" for line in content.result]
    lines += ["", "Sources: " + "; ".join(content.sources)] if content.sources else []
    return "\n".join(lines)


# -- Markdown ---------------------------------------------------------------------------------------------


def _markdown(content: Document) -> str:
    blocks = ["**Integral**", f"$$\n{latex(content.integral)}\n$$"]
    for i, step in enumerate(content.steps, start=1):
        blocks.append(f"{i}. {_marked(step.action)}. *({_marked(step.theorem)})*")
        blocks += [_markdown_line(line, "   ") for line in step.lines]
    blocks.append("**Result**")
    blocks += [_markdown_line(line, "") for line in content.result]
    if content.sources:
        blocks.append("Sources: " + _marked("; ".join(content.sources)))
    return "\n\n".join(blocks) + "\n"


def _marked(text: str) -> str:
    """Text with the characters escaped that Markdown would read as marks."""
    return "".join("\\" + c if c in "\\`*_[]<>#|$" else c for c in text)


def _markdown_line(line: Line, indent: str) -> str:
    label = f"{_label(line.label, _marked)}: " if line.label else ""
    if not isinstance(line.value, (Basic, int)):
        return f"{indent}- {label}{_marked(str(line.value))}"
    return f"{indent}- {label}${formula(line.value)}$"


# -- LaTeX ------------------------------------------------------------------------------------------------


def escaped(text: str) -> str:
    """Text for LaTeX."""
    return "".join(_ESCAPES.get(c, c) for c in text)


def _label(label: str, escape: Any) -> str:
    if not _FORMULA.fullmatch(label):
        return str(escape(label))
    for name, sign in _LETTERS.items():
        label = label.replace(name, sign)
    return f"${label}$"


def formula(value: Any) -> str:
    """A value in LaTeX's mathematical mode; an interval as ``(lower, upper)``."""
    if isinstance(value, Tuple):
        return r"\left(" + ",\\ ".join(latex(v) for v in value) + r"\right)"
    return latex(value)


def _latex(content: Document) -> str:
    parts = [r"\subsection*{Derivation}", _display(formula(content.integral), content.integral)]
    parts.append(r"\begin{enumerate}")
    for step in content.steps:
        parts.append(rf"\item {escaped(step.action)} ({escaped(step.theorem)}).")
        parts += [_latex_line(line) for line in step.lines]
    if not content.steps:
        parts.append(r"\item Nothing to be done.")
    parts.append(r"\end{enumerate}")
    parts.append(r"\noindent Result")
    parts += [_latex_line(line) for line in content.result]
    if content.sources:
        parts.append(r"\noindent Sources: " + escaped("; ".join(content.sources)) + ".")
    return "\n".join(parts) + "\n"


def _latex_line(line: Line) -> str:
    label = f"{_label(line.label, escaped)}: " if line.label else ""
    if not isinstance(line.value, (Basic, int)):
        return rf"\par {label}\texttt{{{escaped(str(line.value))}}}"
    return (rf"\par {label}" if label else "") + _display(formula(line.value), line.value)


def _display(text: str, value: Any) -> str:
    width = len(str(value))
    size = r"\scriptsize" if width > _VERY_WIDE else r"\footnotesize" if width > _WIDE else ""
    body = f"\\[ {text} \\]"
    return f"{{{size}\n{body}\n}}" if size else body


__all__ = ["FORMATS", "escaped", "formula", "render", "shown"]
