"""What a generated function needs besides mpmath; its text goes into the stand-alone source."""
from typing import Any

from mpmath import mp


def _evaluated(value: Any, inside: Any, arguments: Any) -> Any:
    """The value at numbers, or a list of values at sequences; nan outside the region."""
    lengths = [len(v) for v in arguments if hasattr(v, "__len__")]
    if lengths:
        rows = [[v[i] if hasattr(v, "__len__") else v for v in arguments] for i in range(max(lengths))]
        return [_evaluated(value, inside, row) for row in rows]
    point = [mp.mpmathify(v) for v in arguments]
    if any(mp.isnan(v) for v in point) or not inside(*point):
        return mp.nan
    goal, before = mp.prec, None
    # large arguments of Gamma cost the digits of their logarithm
    size = 2 * max([0, *(mp.mag(v) for v in point if v and mp.isfinite(v))])
    for extra in (20 + size, 60 + size, 160 + size, 500 + size, 1500 + size):
        with mp.workprec(goal + extra):
            now = _once(value, point)
        if before is not None and abs(now - before) <= mp.ldexp(abs(now), -goal - 4):
            return +now
        if before is not None and max(abs(now), abs(before)) < mp.ldexp(1, -goal - 40):
            return +now
        before = now
    return mp.nan


def _once(value: Any, point: Any) -> Any:
    try:
        found = value(*point)
        if mp.isfinite(found) and found != 0:  # an exact zero may stand over one that is not exact
            return found
    except (ZeroDivisionError, ValueError, OverflowError):
        pass
    # at a removable singularity: the mean of two neighbours has an error of second order
    step, precision = mp.ldexp(1, -mp.prec), mp.prec
    with mp.workprec(4 * precision):
        moves = [step * (1 + mp.sqrt(i) / 3) * (-1) ** i for i in range(len(point))]
        pair = [value(*(v + sign * d for v, d in zip(point, moves, strict=True))) for sign in (1, -1)]
        return (pair[0] + pair[1]) / 2
