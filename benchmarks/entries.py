"""Reading lists of integrals: one JSON object a line, fields as the corpus README describes them."""
from __future__ import annotations

import json
import random
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from pathlib import Path
from typing import Any

from sympy import I, Integer, Ne, Rational, Symbol, sympify, true
from sympy.core.expr import Expr

ASSUMPTIONS: dict[str, dict[str, bool]] = {
    "positive": {"positive": True},
    "real": {"real": True},
    "integer": {"integer": True},
    "positive integer": {"positive": True, "integer": True},
    "complex": {},
}


@dataclass(frozen=True)
class Entry:
    """One integral of a list, its texts turned into SymPy objects."""

    name: str
    family: str
    kinds: dict[str, str]
    integrand: Expr
    limits: tuple[tuple[Symbol, Expr, Expr], ...]
    value: Expr
    valid: Any  # a SymPy Boolean, or None where the list states no comparable region
    points: tuple[dict[Symbol, Expr], ...]
    outside: tuple[dict[Symbol, Expr], ...]
    raw: dict[str, Any] = field(repr=False)

    @property
    def parameters(self) -> dict[str, Symbol]:
        return {name: Symbol(name, **ASSUMPTIONS[kind]) for name, kind in self.kinds.items()}


def parse(record: dict[str, Any]) -> Entry:
    """An `Entry` from one record of a file. The files are trusted: their texts are sympified."""
    kinds = record.get("symbols", {})
    names: dict[str, Symbol] = {name: Symbol(name, **ASSUMPTIONS[kind]) for name, kind in kinds.items()}
    parameters = dict(names)
    ranges = record.get("limits") or [[record["variable"], record["lower"], record["upper"]]]
    for variable, lower, _ in ranges:
        # names of the list shadow SymPy's only where the list declares them
        below = sympify(lower, locals=names)
        kind = "real" if below.is_extended_negative else "positive"
        names[variable] = Symbol(variable, **ASSUMPTIONS[kind])

    def read(text: str) -> Any:
        return sympify(text, locals=names)

    def point(texts: dict[str, str]) -> dict[Symbol, Expr]:
        return {parameters[name]: sympify(text) for name, text in texts.items()}

    valid = None if record.get("partial") or "valid" not in record else sympify(read(record["valid"]))
    if valid is not None:
        # removable singularities of the printed value are no gaps of the region
        valid = valid.replace(lambda node: isinstance(node, Ne), lambda node: true)
    return Entry(
        name=record["id"],
        family=record.get("family") or record["id"].rsplit("-", 1)[0],
        kinds=kinds,
        integrand=read(record["integrand"]),
        limits=tuple((names[v], read(a), read(b)) for v, a, b in ranges),
        value=read(record["value"]),
        valid=valid,
        points=tuple(point(p) for p in record.get("points", [])),
        outside=tuple(point(p) for p in record.get("outside", [])),
        raw=record,
    )


def load(path: str | Path, only: Sequence[str] = ()) -> Iterator[Entry]:
    """The entries of one file, or of all ``*.jsonl`` files of a folder; `only` names families or entries."""
    place = Path(path)
    files = sorted(place.glob("*.jsonl")) if place.is_dir() else [place]
    for file in files:
        for line in file.read_text(encoding="utf-8").splitlines():
            if not line.strip():
                continue
            record = json.loads(line)
            family = record.get("family") or record["id"].rsplit("-", 1)[0]
            if not only or record["id"] in only or family in only:
                yield parse(record)


def random_points(entry: Entry, count: int) -> list[dict[Symbol, Expr]]:
    """Parameter values drawn from the assumptions alone, the same ones in every run."""
    source = random.Random(f"regions of {entry.name}")

    def draw(kind: str) -> Expr:
        if kind == "positive":
            return _rational(Fraction(source.randint(7, 240), 60) + Fraction(1, 421))
        if kind == "positive integer":
            return Integer(source.randint(1, 6))
        if kind == "integer":
            return Integer(source.randint(-5, 5))
        value = _rational(Fraction(source.randint(-1600, 1600), 420) + Fraction(1, 1009))
        if kind == "complex" and source.random() < 0.4:
            value += I * Rational(source.randint(-12, 12), 8)
        return value

    return [{symbol: draw(entry.kinds[name]) for name, symbol in sorted(entry.parameters.items())}
            for _ in range(count)]


def _rational(value: Fraction) -> Expr:
    return Rational(value.numerator, value.denominator)
