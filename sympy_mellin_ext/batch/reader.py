"""Lists of integrals as TOML: the schema, and errors that name file, entry and position.

The schema is written down in ``SCHEMA.md`` beside this file.
"""
from __future__ import annotations

import csv
import re
import tomllib
from collections.abc import Iterable, Mapping
from itertools import product
from pathlib import Path
from typing import Any

from sympy import Expr, Rational, Symbol, exp, log

from .entry import DIGITS, Entry
from .safe import InputError, read_condition, read_expression, read_symbol, suggestion

MAX_POINTS = 100_000
MAX_ENTRIES = 100_000

Point = dict[Symbol, Expr]

# key of an entry -> what is expected there
SCHEMA: dict[str, str] = {
    "name": "a text, unique in the list",
    "integrand": "a formula",
    "variable": "a name, or a list of names",
    "lower": "a formula or a number",
    "upper": "a formula or a number",
    "assume": "a table: symbol = assumption",
    "given": "a list of relations",
    "sweep": "a table: symbol = list of values, or {first, last, count, spacing}",
    "csv": "the name of a file beside the list",
    "expected": "a formula",
    "digits": "a whole number from 3 to 100",
    "note": "a text",
}
TOP = ("integral", "title", "note")
RANGE = ("first", "last", "count", "spacing")
SPACINGS = ("linear", "logarithmic")


class ListError(ValueError):
    """A list that cannot be used: all that is wrong with it.

    Attributes
    ----------
    problems : list of str
    """

    def __init__(self, problems: Iterable[str]) -> None:
        self.problems = list(problems)
        super().__init__("\n".join(self.problems))


class _Fault(ValueError):
    """What is wrong at a key of an entry."""

    def __init__(self, key: str, problem: str) -> None:
        super().__init__(f"{key}: {problem}")
        self.key = key


def read_list(path: str | Path) -> list[Entry]:
    """The entries of a list of integrals.

    Parameters
    ----------
    path : path of a TOML file

    Raises
    ------
    ListError
        With every fault found, each with file, line, entry and position.
    OSError
        If the file cannot be read.
    """
    path = Path(path)
    try:
        text = path.read_bytes().decode("utf-8")
        data = tomllib.loads(text)
    except UnicodeDecodeError as error:
        raise ListError([f"{path}: not UTF-8 text (byte {error.start})"]) from None
    except (tomllib.TOMLDecodeError, RecursionError) as error:
        raise ListError([f"{path}: not valid TOML: {error}"]) from None
    problems = [f"{path}: unknown key {key!r} at the top{suggestion(key, TOP)}" for key in data if key not in TOP]
    tables = data.get("integral", [])
    if not isinstance(tables, list) or not all(isinstance(t, dict) for t in tables):
        raise ListError([f"{path}: integral must be an array of tables, written [[integral]]"])
    if not tables and not problems:
        problems.append(f"{path}: no [[integral]] table found")
    if len(tables) > MAX_ENTRIES:
        raise ListError([f"{path}: {len(tables)} entries, at most {MAX_ENTRIES} are accepted"])
    places = _Places(text, len(tables))
    entries: list[Entry] = []
    seen: dict[str, int] = {}
    for number, table in enumerate(tables, start=1):
        label = table.get("name") if isinstance(table.get("name"), str) else f"number {number}"
        try:
            entry = entry_from_table(table, path.parent)
            if entry.name in seen:
                raise _Fault("name", f"entry number {seen[entry.name]} has this name already")
            seen[entry.name] = number
            entries.append(entry)
        except _Fault as fault:
            problems.append(f"{path}{places.of(number, fault.key)}, entry {label}, {fault}")
    if problems:
        raise ListError(problems)
    return entries


def read_title(path: str | Path) -> str:
    """The title of a list, or the name of its file."""
    path = Path(path)
    title = tomllib.loads(path.read_text(encoding="utf-8")).get("title")
    return title if isinstance(title, str) else path.stem


class _Places:
    """Line numbers of entries and their keys, as far as a look at the text shows them."""

    def __init__(self, text: str, count: int) -> None:
        self.lines = text.splitlines()
        heads = [i for i, line in enumerate(self.lines) if re.match(r"\s*\[\[\s*integral\s*\]\]", line)]
        self.heads = heads if len(heads) == count else []

    def of(self, number: int, key: str) -> str:
        if not self.heads:
            return ""
        start = self.heads[number - 1]
        stop = self.heads[number] if number < len(self.heads) else len(self.lines)
        pattern = re.compile(rf"""\s*(\[\s*integral\s*\.\s*)?["']?{re.escape(key)}["']?\s*[=.\]]""")
        found = next((i for i in range(start, stop) if pattern.match(self.lines[i])), start)
        return f", line {found + 1}"


def entry_from_table(table: Mapping[str, Any], folder: Path | None = None) -> Entry:
    """An entry from one table of the schema; `folder` is where its CSV file may lie.

    Raises
    ------
    ValueError
        Naming the key, the position and what is expected.
    """
    for key in table:
        if key not in SCHEMA:
            raise _Fault(str(key)[:60], f"unknown key{suggestion(str(key), SCHEMA)}; known are {', '.join(SCHEMA)}")
    name = table.get("name")
    if not isinstance(name, str) or not name.strip() or len(name) > 200 or not name.isprintable():
        raise _Fault("name", f"{SCHEMA['name']} is expected")
    symbols = _symbols(table.get("assume", {}))
    limits = _limits(table, symbols)
    inside = {**symbols, **{v.name: v for v, _, _ in limits}}
    if "integrand" not in table:
        raise _Fault("integrand", "is missing")
    integrand = _formula("integrand", table["integrand"], inside)
    expected = None if "expected" not in table else _formula("expected", table["expected"], symbols)
    digits = table.get("digits", DIGITS)
    if not isinstance(digits, int) or isinstance(digits, bool) or not 3 <= digits <= 100:
        raise _Fault("digits", f"{SCHEMA['digits']} is expected, not {digits!r}")
    note = table.get("note", "")
    if not isinstance(note, str):
        raise _Fault("note", "a text is expected")
    entry = Entry(name, integrand, limits, _given(table.get("given", []), symbols), expected, (), digits, note)
    points = _points(table, symbols, folder)
    if points is None:
        return entry
    missing = [s.name for s in entry.parameters if any(s not in point for point in points)]
    if missing:
        raise _Fault("sweep" if "sweep" in table else "csv", f"no value for {', '.join(missing)}")
    return Entry(name, integrand, limits, entry.given, expected, points, digits, note)


def _formula(key: str, value: Any, symbols: Mapping[str, Symbol]) -> Expr:
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        value = repr(value)
    if not isinstance(value, str):
        raise _Fault(key, f"{SCHEMA.get(key, 'a number or a formula')} is expected, not {str(value)[:60]!r}")
    try:
        return read_expression(value, symbols)
    except InputError as error:
        raise _Fault(key, error.pointed()) from None


def _symbols(table: Any) -> dict[str, Symbol]:
    if not isinstance(table, Mapping):
        raise _Fault("assume", f"{SCHEMA['assume']} is expected")
    try:
        return {name: read_symbol(name, kind) for name, kind in table.items()}
    except InputError as error:
        raise _Fault("assume", str(error)) from None


def _limits(table: Mapping[str, Any], symbols: Mapping[str, Symbol]) -> tuple[tuple[Symbol, Expr, Expr], ...]:
    names = _listed(table, "variable", "x")
    lower, upper = _listed(table, "lower", 0), _listed(table, "upper", "oo")
    for key, ends in (("lower", lower), ("upper", upper)):
        if len(ends) == 1:
            ends *= len(names)
        if len(ends) != len(names):
            raise _Fault(key, f"{len(names)} values are expected, one a variable, not {len(ends)}")
    known, result = dict(symbols), []
    # the ends of an inner variable may contain the outer ones
    for name, low, high in reversed(list(zip(names, lower, upper, strict=True))):
        if not isinstance(name, str):
            raise _Fault("variable", f"{SCHEMA['variable']} is expected")
        if name in known:
            raise _Fault("variable", f"{name} is a symbol of assume, or stands twice")
        ends = [_formula(key, end, known) for key, end in (("lower", low), ("upper", high))]
        try:
            variable = read_symbol(name, "positive" if ends[0].is_nonnegative else "real")
        except InputError as error:
            raise _Fault("variable", str(error)) from None
        known[name] = variable
        result.append((variable, ends[0], ends[1]))
    return tuple(reversed(result))


def _listed(table: Mapping[str, Any], key: str, default: Any) -> list[Any]:
    value = table.get(key, default)
    return list(value) if isinstance(value, list) else [value]


def _given(items: Any, symbols: Mapping[str, Symbol]) -> tuple[Any, ...]:
    if isinstance(items, str):
        items = [items]
    if not isinstance(items, list) or not all(isinstance(item, str) for item in items):
        raise _Fault("given", f"{SCHEMA['given']} is expected")
    try:
        return tuple(read_condition(item, symbols) for item in items)
    except InputError as error:
        raise _Fault("given", error.pointed()) from None


def _points(table: Mapping[str, Any], symbols: Mapping[str, Symbol], folder: Path | None,
            ) -> tuple[Point, ...] | None:
    """The grid of `sweep`, for every row of `csv`; None if the entry has neither."""
    if "sweep" not in table and "csv" not in table:
        return None
    sweep = table.get("sweep", {})
    if not isinstance(sweep, Mapping) or not (sweep or "csv" in table):
        raise _Fault("sweep", f"{SCHEMA['sweep']} is expected")
    axes, size = [], 1
    for name, values in sweep.items():
        if name not in symbols:
            raise _Fault("sweep", f"unknown symbol {name}{suggestion(name, symbols)}; assume declares it")
        axis = _axis(name, values)
        axes.append([(symbols[name], value) for value in axis])
        size *= len(axis)
        if size > MAX_POINTS:
            raise _Fault("sweep", f"more than {MAX_POINTS} points")
    rows: list[Point] = _rows(table["csv"], symbols, folder) if "csv" in table else [{}]
    if size * len(rows) > MAX_POINTS:
        raise _Fault("csv", f"more than {MAX_POINTS} points")
    return tuple({**row, **dict(point)} for row in rows for point in product(*axes))


def _axis(name: str, values: Any) -> list[Expr]:
    if isinstance(values, list):
        if not values:
            raise _Fault("sweep", f"{name}: at least one value is expected")
        return [_value("sweep", name, value) for value in values]
    if not isinstance(values, Mapping):
        return [_value("sweep", name, values)]
    for key in values:
        if key not in RANGE:
            raise _Fault("sweep", f"{name}: unknown key {key}{suggestion(key, RANGE)}; known are {', '.join(RANGE)}")
    if "first" not in values or "last" not in values:
        raise _Fault("sweep", f"{name}: first, last and count are expected")
    first, last = (_value("sweep", name, values[end]) for end in ("first", "last"))
    count, spacing = values.get("count"), values.get("spacing", "linear")
    if not isinstance(count, int) or isinstance(count, bool) or not 2 <= count <= MAX_POINTS:
        raise _Fault("sweep", f"{name}: count must be a whole number from 2 to {MAX_POINTS}, not {count!r}")
    if spacing not in SPACINGS:
        raise _Fault("sweep", f"{name}: spacing must be {' or '.join(SPACINGS)}, not {spacing!r}")
    if spacing == "linear":
        return [first + (last - first) * Rational(i, count - 1) for i in range(count)]
    if not (first.is_positive and last.is_positive):
        raise _Fault("sweep", f"{name}: logarithmic spacing needs positive ends")
    inner = [exp(log(first) + log(last / first) * Rational(i, count - 1)).evalf(30) for i in range(1, count - 1)]
    return [first, *inner, last]


def _value(key: str, name: str, value: Any) -> Expr:
    number = _formula(key, value, {}) if not isinstance(value, bool) else None
    if number is None or not number.is_number or not number.is_finite:
        raise _Fault(key, f"{name}: a number is expected, not {value!r}")
    return number


def _rows(file: Any, symbols: Mapping[str, Symbol], folder: Path | None) -> list[Point]:
    if not isinstance(file, str) or Path(file).is_absolute() or ".." in Path(file).parts:
        raise _Fault("csv", "the name of a file in the folder of the list is expected")
    path = (folder or Path()) / file
    result: list[Point] = []
    try:
        with path.open(encoding="utf-8-sig", newline="") as stream:
            reader = csv.DictReader(stream, skipinitialspace=True)
            columns = [c for c in reader.fieldnames or [] if c in symbols]
            if not columns:
                raise _Fault("csv", f"{file}: no column is named after a symbol; known are {', '.join(symbols)}")
            for row in reader:
                try:
                    result.append({symbols[c]: _value("csv", c, row[c] or "") for c in columns})
                except _Fault as fault:
                    raise _Fault("csv", f"{file}, line {reader.line_num}: {fault}") from None
                if len(result) > MAX_POINTS:
                    raise _Fault("csv", f"{file}: more than {MAX_POINTS} rows")
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise _Fault("csv", f"{file} cannot be read: {error}") from None
    if not result:
        raise _Fault("csv", f"{file} has no rows")
    return result
