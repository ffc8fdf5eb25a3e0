"""Inverse Mellin transform of a Gamma product."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from sympy import (
    Dummy,
    Expr,
    Piecewise,
    Rational,
    S,
    Symbol,
    gamma,
    hyper,
    meijerg,
)

from .pfq import named_pfq, put
from .residues import Tail, left_series, residue_at
from .rows import _two_by_two_hyper, look_up, look_up_fixed
from .signature import Signature, Zero, as_int, cancel, compress, is_nonpositive_int, normalise, power, spread
from .tidy import tidy

BAD = (S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity)


def inverse_mellin(factors: Iterable[tuple[Expr, Rational, int]], z: Expr, facts: Any = None) -> Expr | None:
    """The function whose Mellin transform is a product of Gamma functions.

    Parameters
    ----------
    factors : iterable of (shift, slope, power)
        The factors ``Gamma(shift + slope*u)**power``, power = 1 or -1.  A numerator with positive slope
        has its poles on the left of the contour, one with negative slope on the right.
    z : Expr
        The argument, positive, or complex inside the sector where the contour integral converges.
    facts : object, optional
        What is known of the symbols; its method `sign` may decide on which side of 1 the argument lies.

    Returns
    -------
    Expr or None
        ``1/(2*pi*I)*Integral(G(u)*z**(-u), u)``; a Piecewise in z where the function is not analytic
        at one point; None when no form is known or no contour exists.

    Examples
    --------
    >>> from sympy import S, symbols
    >>> from sympy_mellin_ext.inverse import inverse_mellin
    >>> a, z = symbols("a z", positive=True)
    >>> inverse_mellin([(a, S(1), 1)], z)
    z**a*exp(-z)
    >>> inverse_mellin([(S(0), S(1), 1), (S(1), S(-1), 1)], z)
    1/(z + 1)

    Notes
    -----
    The definition is DLMF 16.17.1, the residue series 16.17.2; the rows carry their own sources.
    """
    rows = list(factors)
    if not rows:
        return None
    norm = normalise(rows)
    z = S(z)
    w = Dummy("w", positive=True)
    argument = norm.scale * power(z, norm.power)
    if _pinched(norm.signature):
        return None
    if argument == 1:
        value = _at_one(norm.signature, w)
        return None if value is None else tidy(norm.constant * value)
    value = _Search(w, facts, argument).run(norm.signature)
    if value is None:
        return None
    result = _finished(norm.constant * put(value, w, norm.scale, z, norm.power))
    return None if result.has(*BAD) else result


def _finished(expr: Any) -> Any:
    """`tidy`, piece by piece."""
    if not expr.has(Piecewise):
        return tidy(expr)
    factor, rest = expr.as_independent(Piecewise) if expr.is_Mul else (S.One, expr)
    return Piecewise(*((tidy(factor * e), c) for e, c in rest.args))


def _pinched(sig: Signature) -> bool:
    """Whether a left and a right pole coincide, so that no contour separates them."""
    return any(is_nonpositive_int(a + b) for a in sig.left for b in sig.right)


def _at_one(sig: Signature, w: Symbol) -> Any:
    """F(1), where the function may be undefined as a formula: Barnes' lemmas and Gauss' sum."""
    reduced, zeros = cancel(sig)
    if not zeros:
        for s in (reduced, reduced.inverted()):
            if s.counts == (2, 2, 0, 0):
                return _two_by_two_hyper(s.left, s.right, S.One)
            if s.counts == (3, 2, 1, 0):
                found = _barnes_second(s)
                if found is not None:
                    return found
    value = _Search(w, None, S.One).run(sig)
    if value is None:
        return None
    result = value.xreplace({w: S.One})
    return None if result.has(*BAD) else result


def _barnes_second(sig: Signature) -> Any:
    """DLMF 5.13.4."""
    (a, b, c), (d, e), (f,) = sig.left, sig.right, sig.left_den
    if as_int(f - a - b - c - d - e) != 0:
        return None
    result: Any = S.One
    for x in (a, b, c):
        result *= gamma(x + d) * gamma(x + e) / gamma(f - x)
    return result


def _named(expr: Any) -> bool:
    return not expr.has(hyper, meijerg)


def _rank(expr: Any) -> tuple[int, int, int]:
    return (len(expr.atoms(meijerg)), len(expr.atoms(hyper)), int(expr.count_ops()))


class _Search:
    """One search for a form of F(w); steps are tried from the cheapest to the most general."""

    def __init__(self, w: Symbol, facts: Any, argument: Any) -> None:
        self.w = w
        self.facts = facts
        self.argument = argument

    def run(self, sig: Signature) -> Any:
        """The best form found, or None."""
        best: Any = None
        for step in (self.reduced, self.table, self.series, self.flipped, self.halved):
            found = step(sig)
            if found is None:
                continue
            if _named(found):
                return found
            if best is None or _rank(found) < _rank(best):
                best = found
            if step == self.reduced:
                break
        return best if best is not None else self.meijer(sig)

    def reduced(self, sig: Signature) -> Any:
        """Cancelled Gammas; polynomial factors as differential operators on a named function."""
        smaller, zeros = cancel(sig)
        if smaller == sig:
            return None
        # the operators act on a function, not on its value at 1
        search = _Search(self.w, self.facts, self.w) if zeros else self
        value = search.run(smaller) if any(map(len, smaller)) else None
        if value is None or (zeros and (not _named(value) or value.has(Piecewise))):
            return None
        return self.operated(value, zeros)

    def operated(self, value: Any, zeros: list[Zero]) -> Any:
        for zero in zeros:
            value = spread(zero.shift * value - zero.side * self.w * value.diff(self.w))
        return value

    def table(self, sig: Signature) -> Any:
        for flip in (False, True):
            s = sig.inverted() if flip else sig
            for look in (look_up, look_up_fixed):
                found = look(s, self.w)
                if found is not None:
                    return self.turned(found, flip)
        return None

    def turned(self, value: Any, flip: bool) -> Any:
        return put(value, self.w, S.One, self.w, S.NegativeOne) if flip else value

    # --- residues ---

    def series(self, sig: Signature) -> Any:
        if sig.delta > 0:
            return self.one_side(sig, False)
        if sig.delta < 0:
            return self.one_side(sig, True)
        if sig.lam == 0:
            return self.broken(sig)
        if sig.lam != 2:
            return self.balanced(sig)
        best: Any = None
        for flip in (False, True):
            found = self.one_side(sig, flip)
            if found is not None and (best is None or _rank(found) < _rank(best)):
                best = found
        return best

    def one_side(self, sig: Signature, flip: bool) -> Any:
        found = left_series(sig.inverted() if flip else sig, self.w)
        if found is None:
            return None
        value = found.head
        for tail in found.tails:
            value += self.tail(tail)
        return self.turned(value, flip)

    def tail(self, tail: Tail) -> Any:
        argument = tail.sign * self.w
        if self.argument == 1:
            f = named_pfq(tail.upper, tail.lower, S(tail.sign))
            if f is None:
                f = hyper(tail.upper, tail.lower, S(tail.sign))
        else:
            f = named_pfq(tail.upper, tail.lower, argument)
        if f is None:
            upper, lower = list(tail.upper), list(tail.lower)
            for a in tail.upper:
                if a in lower:
                    upper.remove(a)
                    lower.remove(a)
            f = hyper(upper, lower, argument)
        return spread(tail.coefficient * power(self.w, tail.exponent) * f)

    def broken(self, sig: Signature) -> Any:
        """Lam = 0: two functions, one on each side of w = 1."""
        side = self.side()
        inside = self.one_side(sig, False) if side <= 0 else S.Zero
        outside = self.one_side(sig, True) if side >= 0 else S.Zero
        if inside is None or outside is None:
            return None
        if side:
            return inside if side < 0 else outside
        if self.argument == 1:
            return inside
        return Piecewise((inside, self.w < 1), (outside, self.w > 1))

    def side(self) -> int:
        """Sign of w - 1 where it is known, else 0."""
        gap = self.argument - 1
        if gap.is_positive or gap.is_negative:
            return 1 if gap.is_positive else -1
        sign = self.facts.sign(gap) if self.facts is not None and hasattr(self.facts, "sign") else None
        return sign or 0

    def balanced(self, sig: Signature) -> Any:
        """Lam > 2 without a row: each series holds on its side of w = 1 only."""
        if sig.counts == (2, 2, 0, 0):
            return _two_by_two_hyper(sig.left, sig.right, self.w)
        if sig.lam % 4 == 2:  # the argument is -w: the continuation holds for all w > 0
            return self.one_side(sig, False) or self.one_side(sig, True)
        inside, outside = self.one_side(sig, False), self.one_side(sig, True)
        if inside is None or outside is None:
            return None
        return Piecewise((inside, self.w < 1), (outside, self.w > 1))

    # --- changes of the signature ---

    def flipped(self, sig: Signature) -> Any:
        """A finite left pole 1/(a+u) moved to the right, where a right Gamma absorbs it (and reversed)."""
        for reverse in (False, True):
            s = sig.inverted() if reverse else sig
            for i, a in enumerate(s.left):
                for j, c in enumerate(s.left_den):
                    if as_int(c - a) != 1 or not any(
                        (n := as_int(b + a - 1)) is not None and n >= 0 for b in s.right
                    ):
                        continue
                    if any(is_nonpositive_int(b - a) for k, b in enumerate(s.left) if k != i):
                        continue
                    head = residue_at(s, -a, 1, self.w)
                    moved = Signature(
                        s.left[:i] + s.left[i + 1 :],
                        (*s.right, -a),
                        s.left_den[:j] + s.left_den[j + 1 :],
                        (*s.right_den, 1 - a),
                    )
                    rest = self.run(moved)
                    if rest is not None and _named(rest) and not rest.has(Piecewise):
                        return self.turned(head - rest, reverse)
        return None

    def halved(self, sig: Signature) -> Any:
        norm = compress(sig)
        if norm is None:
            return None
        value = _Search(self.w, None, self.argument).run(norm.signature)
        if value is None or value.has(Piecewise):
            return None
        return norm.constant * put(value, self.w, norm.scale, self.w, norm.power)

    def meijer(self, sig: Signature) -> Any:
        """The Meijer G-function that F is (DLMF 16.17.1 with u = -s)."""
        if sig.lam <= 0:
            return None
        a, b, c, d = sig
        return meijerg(([1 - x for x in b], list(c)), (list(a), [1 - x for x in d]), self.w)
