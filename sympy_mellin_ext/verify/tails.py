"""Oscillating tails: a smooth window over the phase, or a path turned into the decaying half-plane."""
from __future__ import annotations

from mpmath import mp
from sympy import (
    Abs,
    Add,
    Expr,
    Heaviside,
    Max,
    Min,
    Piecewise,
    Symbol,
    arg,
    conjugate,
    hankel1,
    hankel2,
    im,
    re,
    sign,
)

from .functions import Number, asymptotic_from
from .integrand import Integrand
from .numeric import evaluate
from .phases import Phase, Phases, one_phase_each
from .rules import Piece, fejer

# real analytic nowhere: such an integrand must not be carried off the real axis
_NOT_ANALYTIC = (Abs, Heaviside, Max, Min, Piecewise, arg, conjugate, im, re, sign)


def top_power(phases: set[Phase]) -> float:
    return max((p[0][0] for p in phases if p), default=0.0)


def frequencies(phases: set[Phase], r: float) -> list[float]:
    """Magnitudes of the coefficients of x**r, of the phases that have it."""
    return sorted(abs(p[0][1]) for p in phases if p and p[0][0] == r)


def has_slow(phases: set[Phase], r: float) -> bool:
    """Whether some term oscillates more slowly than x**r, or not at all."""
    return any(not p or p[0][0] != r for p in phases)


def windowed(g: Integrand, start: Number, r: float, omegas: list[float], digits: int, shift: Number,
             tolerance: Number, count: int) -> Piece:
    """Integral of g over (start, oo) of a purely oscillating tail.

    With v = x**r the integrand is multiplied by erfc((v - centre)/width)/2. The part so removed is the
    integral of exp(i*omega*v) times a slowly varying amplitude and the complementary window, and it is below
    exp(-(omega*width)**2/4): the path moved by omega*width**2/2 shows it, so `centre` must exceed that.
    """
    slow, fast = mp.mpf(omegas[0]), mp.mpf(omegas[-1])
    width = 2 * mp.sqrt((digits + 4) * mp.log(10)) / slow * shift
    power = mp.mpf(r)
    first = start**power
    centre = max(mp.mpf(7) * width, 4 * first) * shift
    end = centre + 7 * width
    plain = centre - 7 * width

    def integrand(v: Number) -> Number:
        x = v ** (1 / power)
        value = g(x) * x / (power * v)
        return value if v < plain else value * mp.erfc((v - centre) / width) / 2

    step = mp.mpf(count) * mp.mpf("0.55") / fast
    total = Piece(mp.zero, mp.zero)
    v = first
    while v < end:
        # the amplitude x**theta needs panels that grow with v, near the start
        following = min(v + min(step, 2 * v), end)
        total += fejer(integrand, v, following, tolerance, count)
        v = following
    return total


def split_by_phase(g: Integrand, r: float) -> tuple[Expr, Expr, Expr] | None:
    """The terms with growing, with falling and without a phase x**r; None if they do not separate."""
    x: Symbol = g.variable
    if g.expr.has(*_NOT_ANALYTIC):
        return None
    up: list[Expr] = []
    down: list[Expr] = []
    slow: list[Expr] = []
    for term in Add.make_args(one_phase_each(g.expr)):
        reader = Phases(x, g.point)
        found = reader.of(term)
        if reader.opaque or len(found) != 1:
            return None
        phase = found.pop()
        if not phase or phase[0][0] != r:
            slow.append(term)
        else:
            (up if phase[0][1] > 0 else down).append(term)
    return Add(*up), Add(*down), Add(*slow)


def expansions_hold(parts: tuple[Expr, ...], g: Integrand) -> Number:
    """From where on the Hankel functions of the parts have their expansions, which alone are fast."""
    reader = Phases(g.variable, g.point)
    start = mp.zero
    for part in parts:
        for node in sorted(part.atoms(hankel1, hankel2), key=str):
            found = reader.growth(node.args[1])
            if found is not None:
                # the precision is raised while digits are counted
                with mp.workdps(mp.dps + 16):
                    least = asymptotic_from(evaluate(node.args[0], g.point))
                start = max(start, (least / abs(found[0])) ** (1 / mp.mpf(found[1])))
    return start


def rotated(g: Integrand, side: int, start: Number, r: float, omegas: list[float], tolerance: Number,
            count: int) -> Piece:
    """Integral of g over (start, oo) along v = start**r + i*side*y: there exp(i*side*omega*v) decays."""
    power = mp.mpf(r)
    v0 = mp.mpf(start) ** power

    def integrand(y: Number) -> Number:
        v = mp.mpc(v0, side * y)
        x = v ** (1 / power)
        return g(x) * x / (power * v)

    total = Piece(mp.zero, mp.zero)
    y, step, small = mp.zero, 3 / mp.mpf(omegas[-1]), 0
    while small < 2:
        piece = fejer(integrand, y, y + step, tolerance, count)
        total += piece
        y += step
        step *= 2
        small = small + 1 if abs(piece.value) <= tolerance / 100 and y > 3 / mp.mpf(omegas[0]) else 0
    turn = mp.mpc(0, side)
    return Piece(turn * total.value, total.error, total.trouble)
