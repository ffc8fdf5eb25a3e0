"""What a run leaves behind: a table for the terminal, LaTeX, a Python module, CSV of the sweeps, a report."""
from __future__ import annotations

import csv
import os
import re
from collections import Counter
from collections.abc import Mapping, Sequence
from importlib import import_module
from importlib.util import find_spec
from keyword import iskeyword
from pathlib import Path
from typing import Any, TextIO

from sympy import Integral, S, latex

from ..closed_form import ClosedForm
from ..numeric.build import function_text, support_text
from .entry import Entry
from .journal import Record
from .safe import InputError, read_condition, read_expression

Pair = tuple[Entry, Record]

_COLOURS = {"solved": "32", "stock": "36", "refused": "33", "timeout": "35", "crashed": "31", "error": "31"}


def succeeded(record: Mapping[str, Any]) -> bool:
    """Whether there is a value that neither quadrature nor the expected formula contradicts."""
    return (
        record["status"] in ("solved", "stock")
        and record.get("certificate", {}).get("ok") is not False
        and record.get("expected", {}).get("ok") is not False
    )


def counted(count: int) -> str:
    """``1 point``, ``4 points``."""
    return f"{count} point{'s' * (count != 1)}"


def verdict(record: Mapping[str, Any]) -> str:
    """What the numerical check says, in a few words."""
    found = record.get("certificate")
    if not found:
        return ""
    if found["ok"] is None:
        return "not checked"
    word = "agrees" if found["ok"] else "DISAGREES"
    return f"{word} to {min(found['digits']):.0f} digits" if found["ok"] and found["digits"] else word


def coloured(stream: TextIO) -> bool:
    """Whether colours are wanted: on a terminal, unless NO_COLOR says no."""
    return stream.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def summary(records: Sequence[Record], total: int, width: int = 100, colour: bool = False) -> list[str]:
    """The table for the terminal: a line each, reasons below where there are any, and the counts."""
    lines = []
    size = min(max((len(r["name"]) for r in records), default=4), 40)
    room = max(width - size - 46, 20)
    lines.append(f"{'name':{size}}  {'status':8} {'seconds':>8}  {'quadrature':20}  closed form, region")
    lines.append("-" * len(lines[0]))
    for record in records:
        status = f"{record['status']:8}"
        if colour:
            status = f"\x1b[{_COLOURS[record['status']]}m{status}\x1b[0m"
        lines.append(f"{_cut(record['name'], size):{size}}  {status} {record['seconds']:8.3f}  {verdict(record):20}  "
                     f"{_cut(_result(record), room)}")
        remarks = [record["reason"]] if not succeeded(record) and record["reason"] else []
        expected = record.get("expected", {})
        if expected.get("ok") is False:
            remarks.append(f"expected formula {expected['note']}")
        remarks += record.get("warnings", [])
        lines += [f"{'':{size}}    {_cut(remark, width - size - 4)}" for remark in remarks]
    counts = Counter(record["status"] for record in records)
    told = ", ".join(f"{counts[status]} {status}" for status in _COLOURS if counts[status])
    checked = sum(record.get("certificate", {}).get("ok") is True for record in records)
    lines.append(f"{len(records)} of {total}: {told or 'none'}; {checked} agree with quadrature")
    return lines


def _result(record: Mapping[str, Any]) -> str:
    value = record["value"] or ""
    if value and record["status"] not in ("solved", "stock", "error"):
        return f"diverges to {value}"
    return value if record["condition"] in (None, "True") else f"{value}  for {record['condition']}"


def _cut(text: str, width: int) -> str:
    text = " ".join(text.split())
    return text if len(text) <= width else text[:width - 3] + "..."


def read_back(entry: Entry, record: Mapping[str, Any]) -> ClosedForm | None:
    """The closed form of a record; None if there is no value to be read."""
    if record["status"] not in ("solved", "stock") or record["value"] is None:
        return None
    known = {s.name: s for s in entry.parameters}
    try:
        value = read_expression(record["value"], known)
        condition = S.true if record["condition"] == "True" else read_condition(record["condition"], known)
        special = tuple((read_condition(c, known), read_expression(v, known)) for c, v in record.get("special", []))
    except InputError:
        return None
    return ClosedForm(value, condition, strategy=record.get("strategy", ""), special=special,
                      integrand=entry.integrand, limits=entry.limits, given=entry.given)


def formula(entry: Entry, record: Mapping[str, Any]) -> str:
    """LaTeX of ``integral = value, region``."""
    integral = latex(Integral(entry.integrand, *entry.limits))
    found = read_back(entry, record)
    if found is None:
        text = record["reason"] or record["value"] or record["status"]
        return rf"{integral} : \quad \text{{{_escaped(text)}}}"
    where = "" if found.condition is S.true else rf",\qquad {latex(found.condition)}"
    more = "".join(rf",\quad {latex(v)} \text{{ at }} {latex(c)}" for c, v in found.special)
    return f"{integral} = {latex(found.value)}{where}{more}"


def write_tex(pairs: Sequence[Pair], title: str, path: Path) -> None:
    """A LaTeX document with a formula an entry."""
    lines = [r"\documentclass[11pt]{article}", r"\usepackage[a4paper,margin=2cm]{geometry}", r"\usepackage{amsmath}",
             r"\allowdisplaybreaks", r"\begin{document}", rf"\section*{{{_escaped(title)}}}"]
    for entry, record in pairs:
        said = "; ".join(part for part in (record["status"], verdict(record), record.get("strategy", "")) if part)
        if record.get("expected", {}).get("ok") is False:
            said += f"; expected formula {record['expected']['note']}"
        lines += ["", rf"\paragraph{{{_escaped(entry.name)}}} {_escaped(entry.note)}", r"\[", formula(entry, record),
                  r"\]", rf"\emph{{{_escaped(said)}}}"]
    lines += [r"\end{document}", ""]
    path.write_text("\n".join(lines), encoding="utf-8")


_SPECIAL = {"\\": r"\textbackslash{}", "~": r"\textasciitilde{}", "^": r"\textasciicircum{}",
            **{c: "\\" + c for c in "&%$#_{}"}}  # fmt: skip


def _escaped(text: str) -> str:
    return "".join(_SPECIAL.get(c, c) for c in " ".join(text.split()))


def identifiers(names: Sequence[str]) -> list[str]:
    """A Python name for each, all different."""
    result: list[str] = []
    for name in names:
        word = re.sub(r"\W+", "_", name, flags=re.ASCII).strip("_").lower() or "integral"
        if word[0].isdigit() or iskeyword(word):
            word = f"integral_{word}"
        number, unique = 2, word
        while unique in result:
            unique, number = f"{word}_{number}", number + 1
        result.append(unique)
    return result


def write_module(pairs: Sequence[Pair], title: str, path: Path) -> None:
    """A Python module, which needs mpmath only, with a numerical function for each entry that has a value."""
    # the docstring of the support text gives way to the title
    support = support_text("mpmath").partition('"""\n')[2]
    heading = title.replace("\\", " ").replace('"', "'")
    parts = [f'"""{heading}: one numerical function an integral."""\n{support}']
    names = identifiers([entry.name for entry, _ in pairs])
    for name, (entry, record) in zip(names, pairs, strict=True):
        found = read_back(entry, record)
        lacking = " ".join((record["reason"] or record["status"]).split())
        if found is not None:
            try:
                parts.append(function_text(found, "mpmath", None, name, f"_of_{name}"))
                continue
            except ValueError as error:  # a function without numerical values
                lacking = " ".join(str(error).split())
        parts.append(f"# {entry.name}: no function, {lacking}\n")
    path.write_text("\n\n".join(parts), encoding="utf-8")


def write_sweeps(pairs: Sequence[Pair], folder: Path) -> list[Path]:
    """A CSV file for each entry with a sweep: parameters, value, and the expected value if there is one."""
    written = []
    names = identifiers([entry.name for entry, _ in pairs])
    for name, (_, record) in zip(names, pairs, strict=True):
        rows = record.get("sweep")
        if not rows:
            continue
        folder.mkdir(parents=True, exist_ok=True)
        path = folder / f"{name}.csv"
        columns = list(rows[0][0])
        head = [*columns, "value", "expected"][:len(columns) + len(rows[0]) - 1]
        with path.open("w", encoding="utf-8", newline="") as stream:
            writer = csv.writer(stream)
            writer.writerow(head)
            # an empty field where the point lies outside the region
            for point, *values in rows:
                writer.writerow([*(point[c] for c in columns), *("" if v is None else v for v in values)])
        written.append(path)
    return written


def write_all(pairs: Sequence[Pair], title: str, folder: Path) -> list[Path]:
    """All outputs of a run in a folder; returns what was written."""
    folder.mkdir(parents=True, exist_ok=True)
    written = [folder / "results.tex", folder / "results.py"]
    write_tex(pairs, title, written[0])
    write_module(pairs, title, written[1])
    written += write_sweeps(pairs, folder / "sweeps")
    package = __name__.split(".")[0]
    if find_spec(f"{package}.report") is not None:
        pictures = find_spec("matplotlib") is not None  # the extra 'report'
        report = import_module(f"{package}.report")
        report.write_report([record for _, record in pairs], folder / "report.html", title=title, pictures=pictures)
        written.append(folder / "report.html")
    return written
