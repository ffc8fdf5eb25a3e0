"""What the page says about one integral, however it came: a closed form, or a line of a batch's journal."""
from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from mpmath import mp
from sympy import Basic, Expr, Integral, S, Symbol, Tuple, latex, sympify
from sympy.printing.pretty.pretty_symbology import pretty_symbol

from ..closed_form import ClosedForm
from ..derivation.document import Line, Paragraph, document

_CERTIFICATE_DIGITS = 15


@dataclass(frozen=True)
class Record:
    """One integral of a report.

    Attributes
    ----------
    name : str
    answer : ClosedForm
    sweep : mapping from Symbol to values, or sequence of points (mappings)
        Where the closed form is drawn against quadrature.
    note : str
    seconds : float
        Time for each point of quadrature.
    """

    name: str
    answer: ClosedForm
    sweep: Any = field(default_factory=dict)
    note: str = ""
    seconds: float = 5.0


@dataclass(frozen=True)
class Certificate:
    """The comparison with quadrature: verdict, rows (where, closed form, quadrature, digits), remarks."""

    ok: bool | None
    rows: tuple[tuple[str, str, str, str], ...] = ()
    outside: tuple[tuple[str, str], ...] = ()
    note: str = ""

    @property
    def verdict(self) -> str:
        """In words."""
        return {True: "agrees", False: "disagrees", None: "could not be checked"}[self.ok]


@dataclass(frozen=True)
class Card:
    """All that the page shows of one integral; formulas are SymPy objects, or texts that could not be read."""

    name: str
    note: str
    integral: Any
    result: tuple[Line, ...]
    strategy: str = ""
    certificate: Certificate | None = None
    steps: tuple[Paragraph, ...] = ()
    sources: tuple[str, ...] = ()
    source_text: str = ""
    answer: ClosedForm | None = None
    sweep: tuple[dict[Symbol, Any], ...] = ()
    seconds: float = 5.0


def card(record: Record | tuple[str, Any] | Mapping[str, Any]) -> Card:
    """What there is to say about a record.

    Raises
    ------
    TypeError
        If it is neither a Record, nor a pair (name, ClosedForm), nor a mapping with a name.
    """
    if isinstance(record, tuple) and len(record) == 2 and isinstance(record[1], ClosedForm):
        record = Record(*record)
    if isinstance(record, Record):
        return _of_answer(record, certificate_of(record))
    if isinstance(record, Mapping) and "name" in record:
        return _of_journal(record)
    raise TypeError(f"record: a Record, (name, ClosedForm) or a journal's record is accepted, not {record!r}")


def _of_answer(record: Record, certificate: Certificate | None) -> Card:
    answer = record.answer
    told = document(answer)
    return Card(
        record.name, record.note, told.integral, told.result, answer.strategy, certificate, told.steps, told.sources,
        f"{latex(told.integral)} = {latex(answer.value)}", answer, points(record.sweep), record.seconds,
    )  # fmt: skip


def certificate_of(record: Record) -> Certificate:
    """The comparison with quadrature."""
    try:
        found = record.answer.verify(_CERTIFICATE_DIGITS)
    except ValueError as reason:
        return Certificate(None, note=str(reason))
    rows = tuple(
        (where(p), _number(c), _number(q), f"{d:.1f}")
        for p, c, q, d in zip(found.points, found.closed, found.quadrature, found.digits, strict=True)
    )
    outside = tuple((where(p), verdict) for p, verdict in getattr(found, "outside", ()))
    return Certificate(found.ok, rows, outside, found.note)


def where(point: Mapping[Any, Any]) -> str:
    """A point as text."""
    items = sorted(point.items(), key=lambda item: str(item[0]))
    return ", ".join(f"{letter(k)} = {_value(v)}" for k, v in items) or "no parameters"


def letter(symbol: Any) -> str:
    """The name of a symbol, Greek letters as such."""
    return str(pretty_symbol(str(symbol)))


def _value(value: Any) -> str:
    text = str(value)
    return text if len(text) <= 12 else str(sympify(value).evalf(8))


def _number(value: Any) -> str:
    if abs(mp.im(value)) <= mp.mpf(10) ** -_CERTIFICATE_DIGITS * abs(value):
        value = mp.re(value)
    return str(mp.nstr(value, _CERTIFICATE_DIGITS))


def points(sweep: Any) -> tuple[dict[Symbol, Any], ...]:
    """A sweep as points: all combinations of the values, or the points themselves."""
    if not sweep:
        return ()
    if not isinstance(sweep, Mapping):
        return tuple(dict(p) for p in sweep)
    found: list[dict[Symbol, Any]] = [{}]
    for symbol in sorted(sweep, key=str):
        found = [{**p, symbol: sympify(v)} for p in found for v in sweep[symbol]]
    return tuple(found)


# -- journals of a batch ----------------------------------------------------------------------------------


def _of_journal(record: Mapping[str, Any]) -> Card:
    """A card from texts; a formula that cannot be read is shown as it stands."""
    read = _reader(record.get("assume", {}), [limit[0] for limit in record.get("limits", [])])
    integrand = read(record.get("integrand", ""))
    limits = [tuple(read(part) for part in limit) for limit in record.get("limits", [])]
    integral: Any = str(record.get("integrand", ""))
    if isinstance(integrand, Expr) and all(isinstance(part, Basic) for limit in limits for part in limit):
        integral = Integral(integrand, *(Tuple(*limit) for limit in limits))
    result = []
    if record.get("value") is None:
        result.append(Line(str(record.get("status", "not solved")), str(record.get("reason", ""))))
    else:
        result.append(Line("value", read(record["value"])))
        region = record.get("condition")
        told = "all parameters that the assumptions allow" if region == "True" else read(region or "")
        result.append(Line("for", told))
        result += [Line(f"where {place}", read(value)) for place, value in record.get("special", [])]
    steps = tuple(Paragraph(text, "", ()) for text in record.get("steps", []))
    return Card(
        str(record["name"]), str(record.get("note", "")), integral, tuple(result), str(record.get("strategy", "")),
        _certificate(record.get("certificate")), steps, tuple(record.get("sources", ())),
    )  # fmt: skip


def _certificate(found: Mapping[str, Any] | None) -> Certificate | None:
    if not found:
        return None
    columns: Sequence[Sequence[Any]] = [found.get(key, []) for key in ("points", "closed", "quadrature", "digits")]
    rows = tuple((where(p), str(c), str(q), str(d)) for p, c, q, d in zip(*columns, strict=False))
    return Certificate(found.get("ok"), rows, (), str(found.get("note", "")))


def _reader(assumed: Mapping[str, str], variables: Sequence[str]) -> Any:
    """Text -> SymPy object by the reader that knows mathematics only; the text itself where that fails."""
    from ..batch.names import ASSUMPTIONS
    from ..batch.safe import InputError, read_condition, read_expression

    symbols = {name: Symbol(name, **ASSUMPTIONS.get(kind, {})) for name, kind in assumed.items()}
    symbols |= {name: Symbol(name, real=True) for name in variables if name not in symbols}

    def read(text: str) -> Any:
        if text in ("oo", "-oo"):
            return S.Infinity if text == "oo" else S.NegativeInfinity
        for reader in (read_expression, read_condition):
            try:
                return reader(text, symbols)
            except (InputError, TypeError, ValueError):
                continue
        return text

    return read


__all__ = ["Card", "Certificate", "Record", "card", "certificate_of", "letter", "points", "where"]
