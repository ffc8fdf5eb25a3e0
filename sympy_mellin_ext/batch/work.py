"""What is done with one entry: closed form, numbers at the points asked for, comparison, certificate."""
from __future__ import annotations

import warnings
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from time import perf_counter
from typing import Any, NamedTuple

import sympy
from mpmath import mp
from sympy import Expr, Integral, Or, Piecewise, S, Symbol, nan, oo, zoo

from ..closed_form import ClosedForm
from ..fallback import refused
from ..integrate import try_strategies
from .entry import Entry
from .journal import Record

# share of the time limit that one point of the certificate may take
_SHARE = 0.12


@dataclass(frozen=True)
class Options:
    """How entries are evaluated.

    Attributes
    ----------
    seconds : float
        Time limit of an entry.
    memory : int
        Memory limit of an entry in MiB, over what a fresh worker uses.
    check : bool
        Whether the result is compared with quadrature.
    stock : bool
        Whether SymPy's own integrator is asked where we have no closed form.
    steps : bool
        Whether the derivation is recorded.
    """

    seconds: float = 60.0
    memory: int = 2048
    check: bool = True
    stock: bool = True
    steps: bool = False


class Answer(NamedTuple):
    """What came out, ours or the host's."""

    status: str
    value: Expr | None = None
    condition: Any = S.true
    whole: Expr | None = None  # value with its condition, as an expression
    reason: str = ""
    closed: ClosedForm | None = None


def solve(entry: Entry, stock: bool) -> Answer:
    """The closed form of an entry, from our strategies or else from SymPy, as `integrate` goes about it."""
    outcome = try_strategies(entry.integrand, entry.limits, entry.given, {})
    closed = outcome.closed
    if closed is not None:
        return Answer("solved", closed.value, closed.condition, closed.as_piecewise(nested=True), "", closed)
    reason = str(outcome.diagnosis.refusal()) if outcome.diagnosis is not None else "the integral is not of our kind"
    if outcome.divergent:
        return Answer("refused", outcome.infinity, reason=reason)
    if not stock:
        return Answer("refused", reason=reason)
    with refused(*(outcome.question or (entry.integrand, entry.limits))):
        result = sympy.integrate(entry.integrand, *entry.limits)
    if not isinstance(result, Expr) or result.has(nan, zoo):
        return Answer("refused", reason=f"{reason}; SymPy finds no value either")
    if result in (oo, -oo):
        return Answer("refused", result, reason="diverges, says SymPy")
    branches = [(v, c) for v, c in result.args if not v.has(Integral)] if isinstance(result, Piecewise) else []
    if result.has(Integral) and not branches:
        return Answer("refused", reason=f"{reason}; SymPy leaves it unevaluated")
    if not branches:
        return Answer("stock", result, S.true, result, reason)
    value = branches[0][0] if len(branches) == 1 else Piecewise(*branches)
    return Answer("stock", value, Or(*(c for _, c in branches)), result, reason)


def work(entry: Entry, options: Options, report: Callable[[Record], None]) -> None:
    """Evaluate one entry; `report` gets its record, more complete with every call."""
    record: Record = {"name": entry.name, "key": entry.key, "status": "error", "value": None, "condition": None,
                      "seconds": 0.0, "reason": "", **entry.described()}
    start = perf_counter()
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        try:
            answer = solve(entry, options.stock)
            record["seconds"] = round(perf_counter() - start, 6)
            record.update(_told(answer, options))
            pending = answer.whole is not None and (options.check or bool(entry.sweep) or entry.expected is not None)
            if pending:
                report(record)
                _numbers(record, entry, answer, options)
        except MemoryError:
            raise
        except Exception as error:  # of whatever kind: it costs this entry alone, and is told
            if record["status"] == "error":
                record["seconds"] = round(perf_counter() - start, 6)
            record.update(status="error", reason=f"{type(error).__name__}: {str(error)[:500]}")
    if caught:
        record["warnings"] = sorted({str(w.message)[:300] for w in caught})
    report(record)


def _told(answer: Answer, options: Options) -> Record:
    told: Record = {
        "status": answer.status,
        "value": None if answer.value is None else str(answer.value),
        "condition": str(answer.condition) if answer.whole is not None else None,
        "reason": answer.reason,
    }
    closed = answer.closed
    if closed is not None:
        told["strategy"] = closed.strategy
        told["sources"] = list(closed.sources)
        if closed.special:
            told["special"] = [[str(where), str(value)] for where, value in closed.special]
        if closed.strip is not None:
            told["strip"] = [str(end) for end in closed.strip]
        if options.steps:
            told["steps"] = [str(step) for step in closed.steps]
    return told


def _numbers(record: Record, entry: Entry, answer: Answer, options: Options) -> None:
    from ..verify.sampling import sample

    assert answer.whole is not None and answer.value is not None
    if entry.sweep:
        record["sweep"] = [_row(entry, answer.whole, point) for point in entry.sweep]
    if entry.expected is not None:
        points = [*entry.sweep, *sample(entry.parameters, answer.condition, entry.given)]
        record["expected"] = {"formula": str(entry.expected), **_compared(entry, answer.whole, points)}
    if options.check:
        record["certificate"] = _certificate(entry, answer, options)
        if record["certificate"]["ok"] is False:
            record.update(status="error", reason=f"quadrature disagrees: {record['certificate']['note']}")


def _row(entry: Entry, whole: Expr, point: Mapping[Symbol, Expr]) -> list[Any]:
    """Parameter values, then the value (None outside the region), then the expected one if there is any."""
    row: list[Any] = [{k.name: _shown(v, entry.digits) for k, v in point.items()}, _value(whole, point, entry.digits)]
    if entry.expected is not None:
        number = _expected(entry.expected, point, entry.digits)
        row.append(None if number is None else mp.nstr(number, entry.digits))
    return row


def _shown(number: Expr, digits: int) -> str:
    return str(number) if number.is_Rational else str(number.evalf(digits))


def _value(whole: Expr, point: Mapping[Symbol, Expr], digits: int) -> str | None:
    number = _number(whole, point, digits)
    return None if number is None else mp.nstr(number, digits)


def _number(expr: Expr, point: Mapping[Symbol, Expr], digits: int) -> Any:
    """The value at a point; None where it has none (outside the region, infinite)."""
    from ..verify.numeric import Undefined, Unevaluated, evaluate

    try:
        return evaluate(expr, point, digits + 3)
    except (Undefined, Unevaluated):
        return None


def _expected(expr: Expr, point: Mapping[Symbol, Expr], digits: int) -> Any:
    """The same for a formula of the user's; where it reads 0*oo, rounding would give it some value."""
    exact = expr.xreplace(dict(point))
    return None if exact.has(nan, zoo, oo) else _number(expr, point, digits)


def _compared(entry: Entry, whole: Expr, points: Sequence[Mapping[Symbol, Expr]]) -> Record:
    """Whether the expected formula has our values: at how many points, and where not."""
    assert entry.expected is not None
    compared, differs = 0, []
    for point in points:
        ours, theirs = _number(whole, point, entry.digits), _expected(entry.expected, point, entry.digits)
        if ours is None or theirs is None:
            continue
        compared += 1
        if abs(ours - theirs) > mp.mpf(10) ** (2 - entry.digits) * max(abs(ours), abs(theirs)):
            where = ", ".join(f"{k} = {_shown(v, 6)}" for k, v in point.items()) or "no parameters"
            differs.append(f"{where}: {mp.nstr(ours, 10)}, expected {mp.nstr(theirs, 10)}")
    note = f"differs at {len(differs)} of {compared} points, first at {differs[0]}" if differs else ""
    return {"ok": not differs if compared else None, "points": compared, "note": note}


def _certificate(entry: Entry, answer: Answer, options: Options) -> Record:
    from ..verify import verify

    if len(entry.limits) != 1:
        return {"ok": None, "digits": [], "points": [], "note": "quadrature is for one variable only"}
    found = verify(entry.integrand, entry.limits[0], answer.whole, answer.condition, entry.digits, given=entry.given,
                   seconds=min(10.0, _SHARE * options.seconds))  # fmt: skip
    points = [{k.name: str(v) for k, v in point.items()} for point in found.points]
    return {
        "ok": found.ok,
        "digits": [round(d, 1) for d in found.digits],
        "points": points,
        "closed": [mp.nstr(v, entry.digits) for v in found.closed],
        "quadrature": [mp.nstr(v, entry.digits) for v in found.quadrature],
        "note": found.note,
    }
