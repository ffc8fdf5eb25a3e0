"""One entry, measured: what came back, whether it is right, where it claims to hold, and how fast."""
from __future__ import annotations

import signal
import statistics
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

from mpmath import mp
from sympy import Integral, Piecewise, count_ops, sympify
from sympy.core.cache import clear_cache

from sympy_mellin_ext.verify.numeric import NUMERIC_ERRORS, Undefined, Unevaluated, evaluate, holds

from .entries import Entry, random_points

TOLERANCE = 1e-8
SOLVED, WRONG, OVERCLAIMS, UNEVALUATED, TIMEOUT, ERROR = (
    "solved", "wrong", "overclaims", "unevaluated", "timeout", "error")
OUTCOMES = (SOLVED, WRONG, OVERCLAIMS, UNEVALUATED, TIMEOUT, ERROR)


class OutOfTime(BaseException):
    """Raised by the alarm; not an `Exception`, so that no handler inside the integrator swallows it."""


@contextmanager
def time_limit(seconds: float) -> Iterator[None]:
    """Stop after so many seconds of processor time, so that other load on the machine changes no outcome."""

    def stop(*_: Any) -> None:
        raise OutOfTime

    previous = signal.signal(signal.SIGPROF, stop)
    signal.setitimer(signal.ITIMER_PROF, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0)
        signal.signal(signal.SIGPROF, previous)


def timed(integrator: Callable[..., Any], entry: Entry, seconds: float) -> tuple[Any, float, str, str]:
    """(answer, processor seconds, outcome so far, detail) of one call with a cold cache."""
    clear_cache()
    start = time.process_time()
    answer, outcome, detail = None, "", ""
    try:
        with time_limit(seconds):
            answer = integrator(entry.integrand, *entry.limits)
    except OutOfTime:
        outcome, detail = TIMEOUT, f"over {seconds:g} s"
    except Exception as error:  # any failure of the integrator is an outcome to report
        outcome, detail = ERROR, f"{type(error).__name__}: {error}"
    return answer, time.process_time() - start, outcome, detail


def classify(answer: Any, entry: Entry) -> tuple[str, str]:
    """Outcome and detail of an answer, judged at the entry's inside and outside points."""
    answer = sympify(answer)
    for point in entry.points:
        try:
            got = evaluate(answer, point)
        except Unevaluated as left:
            return UNEVALUATED, f"at {point}: {left}"
        except Undefined as cause:
            return WRONG, f"undefined at {point}: {cause}"
        expected = evaluate(entry.value, point)
        if abs(got - expected) > TOLERANCE * (abs(expected) or 1):
            return WRONG, f"at {point}: {mp.nstr(got, 12)} instead of {mp.nstr(expected, 12)}"
    for point in entry.outside:
        try:
            got = evaluate(answer, point)
        except (Unevaluated, Undefined):
            continue
        return OVERCLAIMS, f"at {point}: claims {mp.nstr(got, 12)}"
    return SOLVED, ""


def compare_region(condition: Any, entry: Entry, count: int = 60) -> tuple[str, str]:
    """'exact', 'narrow' or 'wide' (claims more than the list), with the first point that shows it."""
    verdict, point = region_witness(condition, entry, count)
    return verdict, "" if point is None else str(point)


def region_witness(condition: Any, entry: Entry, count: int = 60) -> tuple[str, dict[Any, Any] | None]:
    """As `compare_region`, with the point itself."""
    verdict, witness = "exact", None
    for point in random_points(entry, count):
        true_region, ours = holds(entry.valid, point), holds(condition, point)
        if true_region is None or ours is true_region:
            continue
        if true_region:
            if verdict == "exact":
                verdict, witness = "narrow", point
        elif verdict != "wide":
            verdict, witness = "wide", point
    return verdict, witness


def main_branch(answer: Any) -> Any:
    """The general formula of an answer: the last branch that is no integral."""
    answer = sympify(answer)
    if isinstance(answer, Piecewise):
        closed = [branch for branch, _ in answer.args if not branch.has(Integral)]
        return closed[-1] if closed else answer
    return answer


def shortened(text: Any, width: int = 150) -> str:
    line = " ".join(str(text).split())
    return line if len(line) <= width else line[:width - 3] + "..."


def measure(entry: Entry, seconds: float, stock: bool, regions: bool, rounds: int = 3) -> dict[str, Any]:
    """Everything the command reports about one entry, as plain data."""
    import sympy

    from sympy_mellin_ext import integrate

    answer, spent, outcome, detail = timed(integrate, entry, seconds)
    if not outcome:
        outcome, detail = _judged(answer, entry)
    result: dict[str, Any] = {
        "id": entry.name, "family": entry.family, "outcome": outcome, "seconds": spent, "detail": detail,
        "answer": "" if answer is None else str(answer),
    }
    if outcome == SOLVED and entry.points:
        result["ops"] = [int(count_ops(main_branch(answer))), int(count_ops(entry.value))]
    result.update(_own(entry, seconds, regions))
    if stock:
        other, other_spent, other_outcome, other_detail = timed(sympy.integrate, entry, seconds)
        if not other_outcome:
            other_outcome, other_detail = _judged(other, entry)
        result["stock"] = {"outcome": other_outcome, "seconds": other_spent, "detail": other_detail,
                           "answer": "" if other is None else str(other)}
        if outcome == other_outcome == SOLVED and entry.points:
            ours, theirs = [spent], [other_spent]
            for _ in range(rounds - 1):  # interleaved, so that both see the same load of the machine
                ours.append(timed(integrate, entry, seconds)[1])
                theirs.append(timed(sympy.integrate, entry, seconds)[1])
            result["seconds"] = statistics.median(ours)
            result["ratio"] = statistics.median(theirs) / max(statistics.median(ours), 1e-6)
    return result


def _judged(answer: Any, entry: Entry) -> tuple[str, str]:
    try:
        with time_limit(60):
            return classify(answer, entry)
    except OutOfTime:
        return ERROR, "the answer could not be evaluated within 60 s"
    except NUMERIC_ERRORS as error:
        return ERROR, f"the answer could not be evaluated: {type(error).__name__}: {error}"


def _own(entry: Entry, seconds: float, regions: bool) -> dict[str, Any]:
    """Whether the answer is a closed form of this package, and how its region compares."""
    from sympy_mellin_ext import closed_form

    try:
        with time_limit(seconds):
            found = closed_form(entry.integrand, *entry.limits)
        if found is None:
            return {"strategy": ""}
        result = {"strategy": found.strategy or "unnamed"}
        if regions and entry.valid is not None:
            verdict, witness = region_witness(found.condition, entry)
            # a list may state less than is true: quadrature at the very point decides
            if verdict == "wide" and found.verify(digits=5, points=[witness]).ok is True:
                verdict = "beyond"
            result.update(region=verdict, witness=str(witness or ""), condition=str(found.condition))
        return result
    except OutOfTime:
        return {"strategy": "", "trouble": f"closed_form: over {seconds:g} s"}
    except Exception as error:  # reported as an outcome of its own
        return {"strategy": "", "trouble": f"closed_form: {type(error).__name__}: {error}"}
