"""Products of exponentials, sines and hyperbolic functions of one power of x become sums of single waves.

Sources: DLMF 4.21.15-17 and 4.35.15-17 (products of circular and hyperbolic functions).
"""
from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

from sympy import Abs, Add, Expr, I, Ne, S, atan, cos, exp, pi, sign, sin, sqrt
from sympy.logic.boolalg import And, Boolean

from ..kernels.elementary import COS, EXP, SIN
from ..region import Facts, real_part
from .pairing import combine
from .term import Kernel, Term, Wave

_SOURCE = "DLMF 5.9.1, 5.9.6, 5.9.7"


@dataclass(frozen=True)
class Draft:
    """A term before its waves are multiplied out: ``exponents`` hold (ratio, c) for ``exp(c*x**ratio)``.

    ``series`` holds factors that only the exponential series know: powers and logarithms of sums of exponentials.
    """

    coefficient: Expr = S.One
    power: Expr = S.Zero
    logs: int = 0
    exponents: tuple[tuple[Expr, Expr], ...] = ()
    trig: tuple[tuple[str, Expr, Expr], ...] = ()
    kernels: tuple[Kernel, ...] = ()
    series: tuple[Any, ...] = ()

    def times(self, other: Draft) -> Draft:
        return Draft(
            self.coefficient * other.coefficient,
            self.power + other.power,
            self.logs + other.logs,
            self.exponents + other.exponents,
            self.trig + other.trig,
            self.kernels + other.kernels,
            self.series + other.series,
        )

    def scaled(self, constant: Expr) -> Draft:
        return replace(self, coefficient=self.coefficient * constant)


@dataclass(frozen=True)
class _Mode:
    """``coefficient * exp(rate*y) * shape(frequency*y)`` with shape 1, cos or sin, y a power of x."""

    coefficient: Expr
    rate: Expr
    frequency: Expr = S.Zero
    shape: str = "one"


def finish(drafts: list[Draft], facts: Facts) -> list[Term] | None:
    """Multiply the waves of every draft out and merge equal terms; None where a wave cannot decay."""
    terms: dict[tuple, list[Expr]] = {}
    for draft in drafts:
        if draft.exponents or draft.trig:
            parts = _wave_terms(draft, facts)
            if parts is None:
                return None
        else:
            parts = [(draft.coefficient, draft.kernels)]
        for coefficient, kernels in parts:
            key = (draft.power, draft.logs, combine(kernels))
            terms.setdefault(key, []).append(coefficient)
    result = []
    for (power, logs, kernels), coefficients in terms.items():
        total = coefficients[0] if len(coefficients) == 1 else Add(*coefficients)
        if total is not S.Zero:
            result.append(Term(total, power, logs, kernels))
    return result


def _wave_terms(draft: Draft, facts: Facts) -> list[tuple[Expr, tuple[Kernel, ...]]] | None:
    parts: list[tuple[Expr, tuple[Kernel, ...]]] = [(draft.coefficient, draft.kernels)]
    ratios = dict.fromkeys([r for r, _ in draft.exponents] + [r for _, _, r in draft.trig])
    for ratio in ratios:
        rate = Add(*(c for r, c in draft.exponents if r == ratio))
        modes = [_Mode(S.One, rate)]
        for kind, c, r in draft.trig:
            if r == ratio:
                modes = [m for mode in modes for m in _times(mode, kind, c, facts)]
        read = []
        for mode in _collected(modes):
            kernel = _mode_kernel(mode, ratio, facts)
            if kernel is None:
                return None
            read.extend(kernel)
        parts = [(c * factor, ks + extra) for c, ks in parts for factor, extra in read]
    return parts


def _times(mode: _Mode, kind: str, c: Expr, facts: Facts) -> list[_Mode]:
    half = mode.coefficient / 2
    if kind in ("sinh", "cosh"):
        flip = -1 if kind == "sinh" else 1
        return [
            _Mode(half, mode.rate + c, mode.frequency, mode.shape),
            _Mode(flip * half, mode.rate - c, mode.frequency, mode.shape),
        ]
    if not c.is_extended_real:
        flip = 1 / I if kind == "sin" else S.One
        other = -flip if kind == "sin" else flip
        return [
            _Mode(half * flip, mode.rate + I * c, mode.frequency, mode.shape),
            _Mode(half * other, mode.rate - I * c, mode.frequency, mode.shape),
        ]
    w = mode.frequency
    if mode.shape == "one":
        return [_signed(mode.coefficient, mode.rate, c, kind)]
    plus, minus = w + c, w - c
    if mode.shape == "cos" and kind == "cos":
        pair = ((half, plus, "cos"), (half, minus, "cos"))
    elif mode.shape == "sin" and kind == "sin":
        pair = ((-half, plus, "cos"), (half, minus, "cos"))
    elif mode.shape == "sin":
        pair = ((half, plus, "sin"), (half, minus, "sin"))
    else:
        pair = ((half, plus, "sin"), (-half, minus, "sin"))
    return [_signed(k, mode.rate, v, shape) for k, v, shape in pair]


def _signed(coefficient: Expr, rate: Expr, frequency: Expr, shape: str) -> _Mode:
    """Give every frequency the sign in which it reads better, so that equal modes meet."""
    if frequency is S.Zero:
        return _Mode(coefficient if shape == "cos" else S.Zero, rate)
    if frequency.could_extract_minus_sign():
        return _Mode(-coefficient if shape == "sin" else coefficient, rate, -frequency, shape)
    return _Mode(coefficient, rate, frequency, shape)


def _collected(modes: list[_Mode]) -> list[_Mode]:
    merged: dict[tuple[Expr, Expr, str], list[Expr]] = {}
    for m in modes:
        merged.setdefault((m.rate, m.frequency, m.shape), []).append(m.coefficient)
    result = [_Mode(Add(*c), *key) for key, c in merged.items()]
    return [m for m in result if m.coefficient is not S.Zero]


def _mode_kernel(mode: _Mode, ratio: Expr, facts: Facts) -> list[tuple[Expr, tuple[Kernel, ...]]] | None:
    """The kernel of one mode as [(coefficient, kernels)]; an undamped unit mode has no kernel."""
    coefficient, decay, frequency = mode.coefficient, -mode.rate, mode.frequency
    condition: Boolean = S.true
    if mode.shape == "one" or frequency is S.Zero:
        if decay is S.Zero:
            return [(coefficient, ())]
        return _decaying(coefficient, decay, ratio, facts)
    known = facts.sign(frequency)
    if known is None and decay is S.Zero:
        condition = Ne(frequency, 0)
        if mode.shape == "sin":
            coefficient = coefficient * sign(frequency)
        frequency = Abs(frequency)
    elif known == -1:
        coefficient, frequency = (-coefficient if mode.shape == "sin" else coefficient), -frequency
    if decay is S.Zero:
        product = COS if mode.shape == "cos" else SIN
        kernel = Kernel(mode.shape, product.with_scale(frequency), ratio, None, condition, False, _SOURCE)
        return [(coefficient, (kernel,))]
    if not decay.is_extended_real:
        # exp(-decay*y)*cos(w*y) with complex decay: two exponentials
        flip = (1 / I, -1 / I) if mode.shape == "sin" else (S.One, S.One)
        both: list[tuple[Expr, tuple[Kernel, ...]]] = []
        for f, turn in zip(flip, (1, -1), strict=True):
            part = _decaying(coefficient * f / 2, decay - turn * I * frequency, ratio, facts)
            if part is None:
                return None
            both.extend(part)
        return both
    modulus, angle, inside = _polar(decay, frequency)
    positive = facts.sign(decay)
    if positive == -1:
        return None
    condition = inside if positive == 1 else And(inside, decay > 0)
    wave = Wave(angle, S.Zero if mode.shape == "cos" else -pi / 2, True, (decay, frequency))
    return [(coefficient, (Kernel("exp", EXP.with_scale(modulus), ratio, wave, condition, True, _SOURCE),))]


def _turned(scale: Expr) -> Expr:
    """``c*cos(t) + I*c*sin(t)`` written ``c*exp(I*t)``."""
    if type(scale) is Add and len(scale.args) == 2:
        for one, other in (scale.args, scale.args[::-1]):
            c, wave = one.as_independent(cos, as_Add=False)
            d, second = other.as_independent(sin, as_Add=False)
            if isinstance(wave, cos) and isinstance(second, sin) and wave.args == second.args and d in (I * c, -I * c):
                return c * exp(d / c * wave.args[0])
    return scale


def _decaying(
    coefficient: Expr, decay: Expr, ratio: Expr, facts: Facts
) -> list[tuple[Expr, tuple[Kernel, ...]]] | None:
    """``exp(-decay*y)``; a negative decay is growth and not ours alone."""
    condition, inside, wave = S.true, True, None
    if decay.is_extended_real:
        known = facts.sign(decay)
        if known == -1:
            return [(coefficient, (_growing(decay, ratio),))]
        if known is None:
            condition = decay > 0
    else:
        frequency = decay / I
        turn = facts.sign(frequency) if frequency.is_extended_real else 0
        if turn is None:
            # exp(-I*w*y) = cos(|w|*y) - I*sign(w)*sin(|w|*y)
            size, known = Abs(frequency), Ne(frequency, 0)
            return [
                (c, (Kernel(name, product.with_scale(size), ratio, None, known, False, _SOURCE),))
                for c, name, product in (
                    (coefficient, "cos", COS),
                    (-I * sign(frequency) * coefficient, "sin", SIN),
                )
            ]
        if turn in (1, -1):
            decay, wave, inside = turn * frequency, Wave(turn * pi / 2, S.Zero, False), False
        else:
            condition = real_part(decay) > 0
            decay = _turned(decay)
    return [(coefficient, (Kernel("exp", EXP.with_scale(decay), ratio, wave, condition, inside, _SOURCE),))]


def _growing(decay: Expr, ratio: Expr) -> Kernel:
    """``exp(+k*y)``: scale turned by pi, outside the sector; only a product with decay may use it."""
    return Kernel("exp", EXP.with_scale(-decay), ratio, Wave(pi, S.Zero, False), S.true, False, _SOURCE)


def _polar(re: Expr, im: Expr) -> tuple[Expr, Expr, Boolean]:
    """Modulus and angle of ``re + I*im`` in the right half plane, with the condition for the angle."""
    (cr, rest_r), (ci, rest_i) = re.as_independent(cos, as_Add=False), im.as_independent(sin, as_Add=False)
    if isinstance(rest_r, cos) and isinstance(rest_i, sin) and rest_r.args == rest_i.args and cr == ci:
        t = rest_r.args[0]
        if t.is_number:
            return cr, t, S.true
        return cr, t, (t < pi / 2 if t.is_nonnegative else Abs(t) < pi / 2)
    return sqrt(re**2 + im**2), atan(im / re), S.true
