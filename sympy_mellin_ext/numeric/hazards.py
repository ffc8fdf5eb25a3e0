"""Where a formula may read 0*oo or oo - oo, as distances that a generated function can compute."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import permutations
from typing import NamedTuple

from sympy import (
    Add,
    Expr,
    Function,
    Pow,
    Rational,
    S,
    Symbol,
    cos,
    cot,
    csc,
    gamma,
    pi,
    polygamma,
    sec,
    sin,
    tan,
    zeta,
)

from .printer import NumpyPrinter, _gammas_of

# Rates of the parameters on the line along which the formula is interpolated: no small integer relations.
_RATES = (1.0, 0.6180339887, -0.7548776662, 0.4142135623, -0.3027756377, 0.8164965809)


class Hazard(NamedTuple):
    """A singularity where ``form`` is 0, a whole number, or one that is not positive."""

    form: Expr
    kind: str  # 'zero', 'whole', 'nonpositive'


class Watch(NamedTuple):
    """The hazards of a formula, and the line on which all of them are left behind."""

    hazards: tuple[Hazard, ...]
    rates: tuple[float, ...]
    relative: tuple[bool, ...]


def hazards_of(value: Expr) -> list[Hazard]:
    """Possible singularities of a formula, those of single factors included."""
    found: dict[Hazard, None] = {}
    _collect(value, found, False)
    return list(found)


def _collect(e: Expr, found: dict[Hazard, None], below: bool) -> None:
    if not e.free_symbols:
        return
    for argument, n in _gammas_of(e):
        if (n > 0) is not below:
            found[Hazard(argument, "nonpositive")] = None
    if e.is_Pow and e.exp.is_Rational and e.exp.is_negative:
        _collect(e.base, found, not below)
        if not _gammas_of(e) and not isinstance(e.base, (sin, cos)):
            found[Hazard(e.base, "zero")] = None
        return
    if isinstance(e, Function):
        z = e.args[0]
        if isinstance(e, polygamma):
            found[Hazard(e.args[1], "nonpositive")] = None
        elif isinstance(e, zeta):
            found[Hazard(z - 1, "zero")] = None
        elif isinstance(e, (cot, csc)) or (isinstance(e, sin) and below):
            found[Hazard((z / pi).expand(), "whole")] = None
        elif isinstance(e, (tan, sec)) or (isinstance(e, cos) and below):
            found[Hazard((z / pi + S.Half).expand(), "whole")] = None
        for a in e.args if not isinstance(e, gamma) else ():
            if isinstance(a, Expr):
                _collect(a, found, False)
        return
    for a in e.args:
        if isinstance(a, Expr):
            _collect(a, found, below and e.is_Mul)


def watch(value: Expr, parameters: Sequence[Symbol]) -> Watch:
    """The hazards and a line through the parameters that moves every one of them."""
    hazards = [h for h in hazards_of(value) if h.form.free_symbols & set(parameters)]
    in_exponents = {s for h in hazards if h.kind != "zero" for s in h.form.free_symbols}
    in_exponents |= {s for p in value.atoms(Pow) for s in p.exp.free_symbols}
    relative = tuple(bool(p.is_positive) and p not in in_exponents for p in parameters)
    best, rates = -1.0, tuple([1.0] * len(parameters))
    fewest = _RATES[: max(len(parameters), 1)] if len(parameters) <= len(_RATES) else ()
    for choice in list(permutations(fewest))[:120]:
        speeds = []
        for h in hazards:
            speed = _speed(h.form, parameters, choice, relative)
            if speed.is_zero:
                speeds.append(0.0)
            elif speed.is_number:
                speeds.append(abs(float(speed)))
        least, most = (min(speeds), max(speeds)) if speeds else (1.0, 1.0)
        if least and least / most > best:
            best, rates = least / most, tuple(choice)
    return Watch(tuple(hazards), rates, relative)


def _speed(form: Expr, parameters: Sequence[Symbol], rates: Sequence[float], relative: Sequence[bool]) -> Expr:
    steps = [
        form.diff(p) * Rational(str(round(r, 10))) * (p if m else 1)
        for p, r, m in zip(parameters, rates, relative, strict=True)
    ]
    return Add(*steps)


def moving_forms(found: Watch, parameters: Sequence[Symbol], printer: NumpyPrinter) -> list[str]:
    """Text for every hazard: its form, its kind, and how fast it moves with each parameter."""
    lines = []
    for h in found.hazards:
        speeds = [h.form.diff(p) * (p if m else 1) for p, m in zip(parameters, found.relative, strict=True)]
        text = ", ".join(printer.text(v) for v in speeds)
        lines.append(f"({printer.text(h.form)}, {h.kind!r}, ({text},))")
    return lines


__all__ = ["Hazard", "Watch", "hazards_of", "moving_forms", "watch"]
