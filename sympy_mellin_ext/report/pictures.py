"""Pictures as SVG text: poles and strip of a transform, and a closed form against quadrature.

They take the page's text colour, so that they can be read in light and dark.  Needs matplotlib (extra ``report``).
"""
from __future__ import annotations

import io
import re
from collections.abc import Iterable, Iterator, Mapping, Sequence
from itertools import islice
from typing import Any, NamedTuple

from mpmath import mp
from sympy import Expr, Symbol

from ..closed_form import ClosedForm
from ..steps import Contour, Total
from ..verify.numeric import NUMERIC_ERRORS, Undefined, Unevaluated, evaluate
from ..verify.quadrature import quad
from ..verify.sampling import sample
from .card import letter, points, where

_LEFT, _RIGHT, _STRIP = "#c8641e", "#3a86c8", "#2f9e6e"
_CURVES = ("#3a86c8", "#c8641e", "#2f9e6e", "#a05ab4", "#b08a1e")
_INK = "#010203"  # replaced by the page's text colour
_RUNGS = 8
_REACH = 4.5
_FINE = 81
_DIGITS = 15


class Picture(NamedTuple):
    """SVG text and what it shows."""

    svg: str
    caption: str


# -- poles ------------------------------------------------------------------------------------------------


class Poles(NamedTuple):
    """Poles left and right of the strip, poles that cancel, the strip and the point of evaluation, as numbers."""

    variable: str
    left: tuple[complex, ...]
    right: tuple[complex, ...]
    cancelled: tuple[complex, ...]
    strip: tuple[float, float]
    at: complex | None
    point: dict[Symbol, Any]


def poles_of(answer: ClosedForm, point: Mapping[Symbol, Any] | None = None) -> Poles | None:
    """Poles and strip of the transform behind a closed form, at one point of its region.

    None where no transform was used, or where its poles are no numbers at the point.
    """
    if point is None:
        symbols = answer.integral.free_symbols | answer.condition.free_symbols
        found = sample(symbols, answer.condition, answer.given, count=1)
        if not found:
            return None
        point = found[0]
    for step in reversed(answer.steps):
        try:
            if isinstance(step.subject, Total):
                return _total(step.subject, dict(point), step)
            if isinstance(step.subject, Contour):
                return _contour(step.subject, dict(point), step)
        except (Undefined, Unevaluated, *NUMERIC_ERRORS):
            return None
    return None


def _total(total: Total, point: dict[Symbol, Any], step: Any) -> Poles | None:
    def numbers(exponents: Iterable[Expr]) -> list[complex]:
        return [complex(evaluate(step.replaced(total.reference - e), point)) for e in exponents]

    sides = []
    for end in (1, -1):
        rungs = [e for piece in total.pieces for ladder in piece.rungs(end) for e in islice(ladder, _RUNGS)]
        sides.append(numbers(dict.fromkeys(rungs)))
    cancelled = numbers([*total.at_zero.cancelled, *total.at_infinity.cancelled])
    lower = max((p.real for p in numbers(total.at_zero.survivors)), default=-mp.inf)
    upper = min((p.real for p in numbers(total.at_infinity.survivors)), default=mp.inf)
    at = complex(evaluate(step.replaced(total.reference + 1), point))
    left, right = ([p for p in side if p not in cancelled] for side in sides)
    return Poles("s", tuple(left), tuple(right), tuple(cancelled), (float(lower), float(upper)), at, point)


def _contour(contour: Contour, point: dict[Symbol, Any], step: Any) -> Poles | None:
    double = [t for t in contour.terms if len(t.kernels) == 2]
    if len(double) != 1:
        return None
    term = double[0]
    first, second = term.kernels

    def heads(product: Any, side: int) -> Iterator[Expr]:
        for ladder in product.ladders(side):
            length = ladder[2]
            for k in range(_RUNGS if length is None else min(length, _RUNGS)):
                yield ladder.start - k * ladder.step

    def number(e: Expr) -> complex:
        return complex(evaluate(step.replaced(e), point))

    left = [number(p) for p in heads(first.product, 1)]
    right = [number(p) for p in heads(first.product, -1)]
    flips = number(first.ratio / second.ratio).real > 0
    for side, ours in ((1, right if flips else left), (-1, left if flips else right)):
        ours += [number((term.power + 1 - second.ratio * p) / first.ratio) for p in heads(second.product, side)]
    lower = max((p.real for p in left), default=-mp.inf)
    upper = min((p.real for p in right), default=mp.inf)
    return Poles("u", tuple(left), tuple(right), (), (float(lower), float(upper)), None, point)


def pole_picture(answer: ClosedForm, point: Mapping[Symbol, Any] | None = None) -> Picture | None:
    """Poles and strip in the complex plane; None where no transform was used.

    Raises
    ------
    ImportError
        If matplotlib is not installed.
    """
    found = poles_of(answer, point)
    if found is None or not (found.left or found.right):
        return None
    lower, upper = found.strip
    centre = [v for v in (lower, upper) if mp.isfinite(v)] or [0.0]
    low, high = min(centre) - _REACH, max(centre) + _REACH
    if found.at is not None:
        low, high = min(low, found.at.real - 1), max(high, found.at.real + 1)
    shown = [p for p in (*found.left, *found.right, *found.cancelled) if low <= p.real <= high]
    tall = max((abs(p.imag) for p in shown), default=0.0)
    figure = _figure(5.6, 2.0 if tall == 0 else 3.0)
    axes = figure.add_subplot()
    axes.axhline(0, color=_INK, linewidth=0.6, alpha=0.5)
    if low <= 0 <= high:
        axes.axvline(0, color=_INK, linewidth=0.6, alpha=0.5)
    if lower < upper:
        axes.axvspan(max(lower, low), min(upper, high), color=_STRIP, alpha=0.2, linewidth=0, label="strip")
    marks = ((found.left, "x", _LEFT, "poles left of it"), (found.right, "x", _RIGHT, "poles right of it"),
             (found.cancelled, "o", _INK, "poles that cancel"))  # fmt: skip
    for places, mark, colour, label in marks:
        places = tuple(p for p in places if low <= p.real <= high)
        if places:
            fill = {"facecolors": "none", "edgecolors": colour} if mark == "o" else {"color": colour}
            axes.scatter([p.real for p in places], [p.imag for p in places], s=42, marker=mark, label=label,
                         linewidths=1.6, zorder=3, **fill)  # fmt: skip
    if found.at is not None:
        axes.scatter([found.at.real], [found.at.imag], s=26, color=_STRIP, zorder=4, label="taken here")
    axes.set_xlim(low, high)
    height = max(1.0, 1.25 * tall)
    axes.set_ylim(-height, height)
    axes.set_xlabel(f"Re {found.variable}")
    axes.set_ylabel(f"Im {found.variable}")
    figure.legend(loc="outside upper center", ncols=5, frameon=False, fontsize=7.5, handletextpad=0.2,
                  columnspacing=0.8)  # fmt: skip
    what = "the transform" if found.variable == "s" else "the integrand of the contour integral"
    caption = f"Poles and strip of {what} for {where(found.point)}"
    return Picture(_svg(figure, caption), caption)


# -- sweeps -----------------------------------------------------------------------------------------------


class Comparison(NamedTuple):
    """Closed form and quadrature at the points of a sweep; None where there is no reliable value."""

    symbol: Symbol
    points: tuple[dict[Symbol, Any], ...]
    closed: tuple[Any, ...]
    quadrature: tuple[Any, ...]
    note: str


def compare(answer: ClosedForm, sweep: Any, seconds: float = 5.0) -> Comparison:
    """Values of a sweep; the variable of the picture is the symbol with the most values.

    Parameters
    ----------
    answer : ClosedForm
    sweep : mapping from Symbol to values, or sequence of points
    seconds : float
        Time for each quadrature.
    """
    places = points(sweep)
    symbols = sorted({v for p in places for v in p}, key=str)
    if not symbols:
        raise ValueError("sweep: at least one symbol with values is needed")
    symbol = max(symbols, key=lambda v: len({p.get(v) for p in places}))
    closed, numbers, missing = [], [], 0
    for p in places:
        closed.append(_value(answer, p))
        value = None
        if len(answer.limits) == 1 and closed[-1] is not None:
            found, _, reliable, _ = quad(answer.integrand, answer.limits[0], p, _DIGITS, seconds)
            value = found if reliable and mp.isfinite(found) else None
        missing += value is None
        numbers.append(value)
    note = f"{missing} of {len(places)} points without a reliable quadrature" if missing else ""
    return Comparison(symbol, places, tuple(closed), tuple(numbers), note)


def _value(answer: ClosedForm, point: Mapping[Symbol, Any]) -> Any:
    from ..verify.numeric import holds

    if holds(answer.condition, point) is False:
        return None
    try:
        value = evaluate(answer.as_piecewise(nested=True), point, _DIGITS)
    except (Undefined, Unevaluated, *NUMERIC_ERRORS):
        return None
    return value if mp.isfinite(value) else None


def sweep_picture(answer: ClosedForm, sweep: Any, seconds: float = 5.0) -> Picture | None:
    """Closed form (lines) against quadrature (dots) over a sweep, the relative error below.

    Returns
    -------
    Picture, or None where the closed form has no value at any point of the sweep.

    Raises
    ------
    ImportError
        If matplotlib is not installed.
    """
    if not points(sweep):
        return None
    found = compare(answer, sweep, seconds)
    v = found.symbol
    if all(c is None for c in found.closed):
        return None
    turned = any(abs(mp.im(c)) > 1e-9 * abs(c) for c in found.closed if c is not None)
    figure = _figure(5.6, 3.6)
    above, below = figure.subplots(2, 1, sharex=True, height_ratios=(3, 1.4))

    def height(value: Any) -> float:
        return float(abs(value) if turned else mp.re(value))

    groups: dict[str, list[int]] = {}
    for i, p in enumerate(found.points):
        groups.setdefault(where({k: w for k, w in p.items() if k != v}) if len(p) > 1 else "", []).append(i)
    every = sorted({float(p[v]) for p in found.points})
    logarithmic = every[0] > 0 and every[-1] > 30 * every[0]
    for (label, members), colour in zip(groups.items(), _CURVES, strict=False):
        lines = list(_fine(answer, [found.points[i] for i in members], v, logarithmic))
        above.plot([a for a, _ in lines], [mp.nan if y is None else height(y) for _, y in lines], color=colour,
                   linewidth=1.3, label=label or None)  # fmt: skip
        both = [i for i in members if found.closed[i] is not None and found.quadrature[i] is not None]
        at = [float(found.points[i][v]) for i in both]
        above.scatter(at, [height(found.quadrature[i]) for i in both], s=16, color=colour, zorder=3)
        errors = [_error(found.closed[i], found.quadrature[i]) for i in both]
        below.scatter(at, errors, s=14, color=colour)
    if logarithmic:
        above.set_xscale("log")
    sizes = [height(c) for c in found.closed if c is not None]
    if min(sizes) > 0 and max(sizes) > 100 * min(sizes):
        above.set_yscale("log")
    below.set_yscale("log")
    below.set_ylim(1e-18, max([1e-10, *(10 * e for e in _errors(found))]))
    above.set_ylabel("absolute value" if turned else "value")
    below.set_ylabel("rel. error")
    below.set_xlabel(letter(v))
    if any(groups) and len(groups) > 1:
        figure.legend(loc="outside upper center", ncols=3, frameon=False, fontsize=8)
    only = next(iter(groups)) if len(groups) == 1 else ""
    over = f"{letter(v)}, {only}" if only else letter(v)
    caption = f"Closed form (line) and quadrature (dots) over {over}; below, the relative difference"
    left_out = len(groups) - len(_CURVES)
    if left_out > 0:
        caption += f"; {left_out} more curves are left out"
    caption += f"; {found.note}" if found.note else ""
    return Picture(_svg(figure, caption), caption)


def _fine(
    answer: ClosedForm, places: Sequence[dict[Symbol, Any]], v: Symbol, logarithmic: bool
) -> Iterator[tuple[float, Any]]:
    """The closed form along the sweep, between its points too unless the symbol is an integer."""
    values = sorted({mp.mpf(float(p[v])) for p in places})
    if not v.is_integer and len(values) > 1:
        first, last = values[0], values[-1]
        if logarithmic:
            values = sorted({*values, *(first * (last / first) ** (mp.mpf(k) / _FINE) for k in range(1, _FINE))})
        else:
            values = sorted({*values, *(first + (last - first) * mp.mpf(k) / _FINE for k in range(1, _FINE))})
    exact = {float(p[v]): p[v] for p in places}
    from sympy import Float

    for value in values:
        place = {**places[0], v: exact.get(float(value), Float(float(value)))}
        yield float(value), _value(answer, place)


def _error(closed: Any, number: Any) -> float:
    size = max(abs(closed), abs(number))
    return max(float(abs(closed - number) / size), 1e-17) if size else 1e-17


def _errors(found: Comparison) -> list[float]:
    pairs = zip(found.closed, found.quadrature, strict=True)
    return [_error(c, q) for c, q in pairs if c is not None and q is not None]


# -- figures ----------------------------------------------------------------------------------------------


def _figure(width: float, height: float) -> Any:
    from matplotlib.figure import Figure

    return Figure(figsize=(width, height), layout="constrained")


def _svg(figure: Any, title: str) -> str:
    """The figure as an ``svg`` element with the page's text colour, and names of its own inside."""
    import hashlib

    from matplotlib import rc_context
    from matplotlib.backends.backend_svg import FigureCanvasSVG

    for axes in figure.axes:
        axes.set_facecolor("none")
        axes.tick_params(colors=_INK, labelsize=8, which="both")
        for spine in axes.spines.values():
            spine.set_color(_INK)
            spine.set_alpha(0.4)
        axes.xaxis.label.set(color=_INK, fontsize=9)
        axes.yaxis.label.set(color=_INK, fontsize=9)
    for legend in figure.legends:
        for text in legend.get_texts():
            text.set_color(_INK)
    figure.patch.set_alpha(0)
    buffer = io.StringIO()
    with rc_context({"svg.fonttype": "path", "svg.hashsalt": title}):
        FigureCanvasSVG(figure).print_svg(buffer, metadata={"Date": None, "Creator": None})
    text = buffer.getvalue()
    text = text[text.index("<svg") :]
    text = re.sub(r"<metadata>.*?</metadata>", "", text, flags=re.DOTALL).replace(_INK, "currentColor")
    mark = "p" + hashlib.sha256(text.encode()).hexdigest()[:8]
    text = re.sub(r'\bid="', f'id="{mark}-', text)
    text = re.sub(r'(href="#|url\(#)', rf"\1{mark}-", text)
    escaped = title.replace("&", "&amp;").replace("<", "&lt;").replace('"', "&quot;")
    return text.replace("<svg ", f'<svg role="img" aria-label="{escaped}" ', 1)


__all__ = ["Comparison", "Picture", "Poles", "compare", "pole_picture", "poles_of", "sweep_picture"]
