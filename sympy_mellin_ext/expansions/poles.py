"""Poles of a transform that is an expression in s, and its decay on vertical lines.

Sources: DLMF 5.11.9 (Gamma on vertical lines), 25.11.43-type (zeta functions grow like powers there);
P. Flajolet, X. Gourdon, P. Dumas, Mellin transforms and asymptotics: harmonic sums, TCS 144 (1995).
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import count
from typing import NamedTuple

from sympy import (
    Add,
    Dummy,
    Expr,
    Function,
    Max,
    Min,
    S,
    Symbol,
    arg,
    beta,
    binomial,
    cos,
    cot,
    csc,
    dirichlet_eta,
    exp,
    factorial,
    ff,
    gamma,
    harmonic,
    pi,
    polygamma,
    rf,
    roots,
    sec,
    sin,
    tan,
    zeta,
)

from ..region import Facts, real_part
from .arithmetic import NotMeromorphic, TooFewTerms, series_of

# Where a ladder needs so many rungs, the order asked for is taken to be a mistake.
_MOST_RUNGS = 200


class Rungs(NamedTuple):
    """Possible poles ``start + n*step``, n = 0, 1, ... (``length`` of them, or all whole n if ``both``)."""

    start: Expr
    step: Expr
    length: int | None = None
    both: bool = False


def in_gammas(value: Expr) -> Expr:
    """Factorials, binomials and Beta functions as Gammas."""

    def rewrite(node: Expr) -> Expr:
        return node.rewrite(gamma)

    return value.replace(lambda e: isinstance(e, (factorial, binomial, beta, rf, ff)), rewrite)


def ladders(value: Expr, s: Symbol) -> list[Rungs]:
    """Where ``value`` may have poles in ``s``; NotMeromorphic if a part of it is not understood."""
    found: dict[Rungs, None] = {}
    _collect(value, s, found, False)
    return list(found)


def _collect(node: Expr, s: Symbol, found: dict[Rungs, None], below: bool) -> None:
    if not node.has_free(s) or node == s:
        return
    if node.is_Add or node.is_Mul:
        for a in node.args:
            _collect(a, s, found, below)
        if below and node.is_Add:
            found.update(dict.fromkeys(_zeros(node, s)))
        return
    if isinstance(node, exp):
        _polynomial(node.args[0], s)
        return
    if node.is_Pow:
        if node.exp.is_Integer:
            inverse = bool(node.exp.is_negative)
            if inverse and node.base == s:
                found[Rungs(S.Zero, S.One, 1)] = None
            _collect(node.base, s, found, inverse)
            return
        if node.base.has_free(s):
            raise NotMeromorphic(f"a branch point of {node} in {s}")
        _polynomial(node.exp, s)
        return
    found.update(dict.fromkeys(_of_function(node, s, below)))


def _polynomial(e: Expr, s: Symbol) -> None:
    if not e.is_polynomial(s):
        raise NotMeromorphic(f"an exponent {e}")


def _linear(e: Expr, s: Symbol) -> tuple[Expr, Expr]:
    slope = e.diff(s)
    if slope.has_free(s) or slope.is_zero:
        raise NotMeromorphic(f"an argument {e} that is not linear in {s}")
    return (e - slope * s).expand(), slope


def _zeros(node: Expr, s: Symbol) -> list[Rungs]:
    if not node.is_polynomial(s):
        raise NotMeromorphic(f"zeros of {node}")
    if node.diff(s).diff(s).expand().is_zero:
        a, A = _linear(node, s)
        return [Rungs((-a / A).expand(), S.One, 1)]
    return [Rungs(root, S.One, 1) for root in sorted(roots(node, s), key=str)]


def _of_function(node: Expr, s: Symbol, below: bool) -> list[Rungs]:
    kind = type(node)
    if kind in (gamma, polygamma, harmonic):
        if kind is gamma and below:
            return []
        if kind is polygamma and (below or not node.args[0].is_Integer):
            raise NotMeromorphic(f"zeros of {node}")
        z = node.args[-1] + (1 if kind is harmonic else 0)
        a, A = _linear(z, s)
        return [Rungs((-a / A).expand(), -1 / A)]
    if kind in (sin, cos, tan, cot, sec, csc):
        at_zeros = {sin: below, cos: below, tan: True, cot: True, sec: not below, csc: not below}[kind]
        if not at_zeros:
            _linear(node.args[0], s)
            return []
        shift, slope = _linear(node.args[0], s)
        quarter = [pi / 2] if kind in (cos, sec) or (kind is tan and not below) or (kind is cot and below) else [S.Zero]
        return [Rungs(((q - shift) / slope).expand(), (pi / slope).expand(), None, True) for q in quarter]
    if kind is zeta and not below:
        if len(node.args) > 1 and node.args[1].has_free(s):
            raise NotMeromorphic(f"{node} with {s} in its parameter")
        a, A = _linear(node.args[0], s)
        return [Rungs(((1 - a) / A).expand(), S.One, 1)]
    if kind is dirichlet_eta and not below:
        return []
    raise NotMeromorphic(f"{kind.__name__} as a function of {s}")


def decay(value: Expr, s: Symbol) -> Expr:
    """A rate r with ``abs(value) < abs(Im s)**K * exp(-r*abs(Im s))`` on vertical lines, away from poles.

    Raises NotMeromorphic for what is not understood.
    """
    if not value.has_free(s) or value.is_polynomial(s):
        return S.Zero
    if value.is_Add:
        rates = [decay(t, s) for t in value.args]
        least = [r for r in rates if all((q - r).is_nonnegative for q in rates)]
        if not least:
            raise NotMeromorphic("terms that decay at unknown rates")
        return least[0]
    if value.is_Mul:
        return Add(*(decay(f, s) for f in value.args))
    if value.is_Pow and value.exp.is_Integer:
        n = value.exp
        if n > 0:
            return n * decay(value.base, s)
        return n * _exact_decay(value.base, s)
    if value.is_Pow and not value.base.has_free(s):
        _, slope = _linear(value.exp, s)
        angle = S.Zero if value.base.is_positive else arg(value.base)
        return -abs(slope * angle)
    if isinstance(value, exp):
        _, slope = _linear(value.args[0], s)
        return -abs(slope.as_real_imag()[1])
    if isinstance(value, zeta):
        _linear(value.args[0], s)
        if len(value.args) > 1 and not value.args[1].is_positive:
            raise NotMeromorphic(f"the growth of {value}")
        return S.Zero
    if isinstance(value, (dirichlet_eta, polygamma, harmonic)):
        _linear(value.args[-1] if not isinstance(value, dirichlet_eta) else value.args[0], s)
        return S.Zero
    return _exact_decay(value, s)


def _exact_decay(base: Expr, s: Symbol) -> Expr:
    """The rate of functions that are as large as their bound, so that they may stand in a denominator."""
    if not base.has_free(s) or base.is_polynomial(s):
        return S.Zero
    if base.is_Mul:
        return Add(*(_exact_decay(f, s) for f in base.args))
    if base.is_Pow and base.exp.is_Integer:
        return base.exp * _exact_decay(base.base, s)
    if isinstance(base, Function) and len(base.args) == 1 and type(base) in (gamma, sin, cos, tan, cot, sec, csc):
        _, slope = _linear(base.args[0], s)
        size = abs(slope)
        if size.is_real and not slope.is_real:
            raise NotMeromorphic(f"the growth of {base}")
        return {gamma: pi * size / 2, sin: -size, cos: -size, sec: size, csc: size}.get(type(base), S.Zero)
    raise NotMeromorphic(f"the growth of {base}")


def numeric_part(e: Expr) -> Expr:
    """The real part of ``e`` with its symbols set to nothing: what an order is counted by."""
    constant = Add(*(t for t in Add.make_args(e.expand()) if not t.free_symbols))
    return real_part(constant)


def side(pole: Expr, lower: Expr, upper: Expr, facts: Facts) -> int:
    """+1 for a pole left of the strip, -1 for one to the right; NotMeromorphic where that is not known."""
    place = real_part(pole)
    for bound, sign in ((lower, 1), (upper, -1)):
        # to the left of one bound of several is to the left of their maximum
        for b in bound.args if isinstance(bound, (Max, Min)) else (bound,):
            if b.is_finite is not False and facts.nonnegative((sign * (b - place)).expand()):
                return sign
    raise NotMeromorphic(f"a possible pole at {pole}, and the strip ({lower}, {upper})")


def poles_of(
    rungs: list[Rungs], lower: Expr, upper: Expr, end: int, order: Expr, facts: Facts, regular: object
) -> list[Expr]:
    """Possible poles on the side that matters (``end=+1``: left), ``end*Re(pole) >= -order``."""
    found: dict[Expr, None] = {}
    for ladder in rungs:
        walks: list[Iterator[int]] = [iter(range(ladder.length)) if ladder.length is not None else count()]
        if ladder.both:
            walks = [count(), count(-1, -1)]
        for walk in walks:
            for n in walk:
                if abs(n) > _MOST_RUNGS:
                    raise NotMeromorphic("too many poles")
                pole = (ladder.start + n * ladder.step).expand()
                direction = (ladder.step * (1 if n >= 0 else -1)).is_positive
                # how far outwards, on the side that matters
                reach = -end * numeric_part(pole)
                if reach > order:
                    if (direction is True) == (end < 0):
                        break
                    continue
                if -reach > order + _MOST_RUNGS:
                    break
                try:
                    where = side(pole, lower, upper, facts)
                except NotMeromorphic:
                    if regular(pole):  # type: ignore[operator]
                        continue
                    raise
                if where == end:
                    found[pole] = None
                elif (direction is True) == (end > 0) and direction is not None:
                    break
    return list(found)


def principal_part(value: Expr, s: Symbol, pole: Expr) -> list[Expr]:
    """Coefficients of ``(s - pole)**(-1), (s - pole)**(-2), ...``; empty where ``value`` is regular."""
    eps = Dummy("epsilon")
    shifted = value.xreplace({s: pole + eps})
    for terms in range(2, 14):
        try:
            series = series_of(shifted, eps, terms)
        except TooFewTerms:
            continue
        if series.head is S.Zero or series.valuation >= 0:
            return []
        if series.valuation + len(series.coefficients) >= 0:
            return [series.coefficient(-j) for j in range(1, -series.valuation + 1)]
    raise NotMeromorphic(f"the pole at {pole}")


__all__ = ["Rungs", "decay", "in_gammas", "ladders", "numeric_part", "poles_of", "principal_part", "side"]
