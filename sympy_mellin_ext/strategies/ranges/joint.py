"""One kernel against a truncated power: ``int_0^1 x**p*(1 - x**r)**(b-1)*g(c*x**q) dx``.

Parseval's formula for the Mellin transform makes it the inverse transform of a Gamma product; as a series in c
it is the series of g with two more parameters (DLMF 16.5.2).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from sympy import (
    Add,
    Dummy,
    Eq,
    Expr,
    Function,
    Integer,
    Piecewise,
    Pow,
    Rational,
    S,
    Shi,
    Si,
    Symbol,
    asin,
    asinh,
    atan,
    atanh,
    besseli,
    besselj,
    cos,
    cosh,
    erf,
    erfi,
    exp,
    gamma,
    hyper,
    log,
    meijerg,
    sin,
    sinh,
    sqrt,
)
from sympy.logic.boolalg import Boolean

from ...inverse import inverse_mellin, named_pfq
from ...inverse.pfq import put
from ...inverse.residues import left_series
from ...inverse.signature import normalise, power
from ...matching.term import Kernel
from ...pieces import Piece
from ...region import Facts, real_part
from ..tidy import tidy as shortened
from .combined import BAD

# Kernels that are truncated themselves.
ALONE = ("unit acos", "unit asech")

# 3F2(1, 1, 3/2; 2, 2; z) = -4*log((1 + sqrt(1 - z))/2)/z
_LOGARITHM = ([S.One, S.One, Rational(3, 2)], [Integer(2), Integer(2)])

# Value, conditions, what must be positive, and the limit at a removable point
Joint = tuple[Expr, list[Boolean], list[Expr], tuple[Boolean, Expr] | None]


@dataclass
class UnitTerm:
    """A draft sorted: ``coefficient*x**power*log(x)**logs * prod (1-x**r)**e * prod log(1-x**r)**n * foreign``."""

    coefficient: Expr
    power: Expr
    logs: int
    minus: dict[Expr, Expr] = field(default_factory=dict)
    unit_logs: dict[Expr, int] = field(default_factory=dict)
    foreign: list[Kernel] = field(default_factory=list)


def joint(term: UnitTerm, facts: Facts) -> Joint | None:
    """Value, conditions, what must be positive, and a removable point, for a truncated power against one kernel."""
    (kernel,) = term.foreign
    if len(term.minus) > 1 or kernel.wave is not None:
        return None
    q, p = kernel.ratio, term.power
    r, e = next(iter(term.minus.items()), (S.One, S.Zero)) if term.minus else (S.One, S.Zero)
    b = e + 1
    if kernel.name in ALONE:
        return None if term.minus else _lone(kernel, term)
    slope = q / r
    if not slope.is_Rational:
        slope = slope.cancel()
    if not slope.is_Rational:
        if term.minus:
            return None
        r, slope = q if q.is_positive else -q, S.One if q.is_positive else S.NegativeOne
    conditions: list[Boolean] = [kernel.condition]
    positive = _edge(kernel, p)
    if positive is None:
        return None
    scale = kernel.product.scale
    known = facts.sign(scale) if scale.is_extended_real else None
    at_end = S.Zero
    if kernel.product.delta == 0 and known == -1 and facts.sign(1 + _argument(kernel)) == 0:
        kappa = kernel.product.kappa(S.Zero)
        at_end = -kappa - 1
    positive.append(real_part(b))
    if at_end is not S.Zero:
        positive.append(real_part(b) + at_end)
    start = ((p + 1) / r).expand()
    rows = [*kernel.product.factors, (start, -slope, 1), (start + b, -slope, -1)]
    front = term.coefficient * kernel.product.constant * gamma(b) / r
    if known == 1:
        value = _inverse(rows, scale, facts)
        return None if value is None else (front * value, conditions, positive, None)
    if slope < 0:
        return None
    found = _entire(rows, scale, known)
    if found is None:
        return None
    value, limit = found
    if limit is not None:
        return front * value, conditions, positive, (limit[0], front * limit[1])
    return front * value, conditions, positive, None


def _argument(kernel: Kernel) -> Expr:
    """The scale, up to what the row keeps in it; rows with Delta = 0 keep nothing."""
    return kernel.product.scale


def _inverse(rows: list[tuple[Expr, Rational, int]], scale: Expr, facts: Facts) -> Expr | None:
    """The inverse transform at a positive scale; at a number by the formula for every scale where it has a name."""
    if scale.is_number:
        w = Dummy("w", positive=True)
        general = inverse_mellin(rows, w, facts)
        if general is not None and not general.has(hyper, meijerg, Piecewise):
            there = general.subs(w, scale)
            if not there.has(*BAD):
                return there
    return inverse_mellin(rows, scale, facts)


def _lone(kernel: Kernel, term: UnitTerm) -> Joint:
    u = ((term.power + 1) / kernel.ratio).expand()
    value = term.coefficient / kernel.ratio * kernel.product.at(u)
    return value, [], [real_part(term.power + 1)], None


def at_zero(term: UnitTerm) -> list[Expr]:
    """What must be positive for convergence of a term at x = 0."""
    return _edge(term.foreign[0], term.power) or []


def _edge(kernel: Kernel, p: Expr) -> list[Expr] | None:
    """What must be positive for convergence at x = 0."""
    bare = Kernel(kernel.name, kernel.product, kernel.ratio, None, kernel.condition, True)
    piece = Piece(S.One, p, 0, bare.product, bare.ratio, None, (), S.true, False)
    positive = []
    for ladder in piece.rungs(1):
        exponent = next(ladder, None)
        if exponent is not None:
            positive.append(real_part(exponent) + 1)
    if kernel.ratio.is_negative:
        growth = piece.growth()
        if growth is None or growth.positive is not None:
            return None
        if growth.conditional is not None:
            end, exponent = growth.conditional
            if end != 1:
                return None
            positive.append(exponent + 1)
    return positive


def _entire(
    rows: list[tuple[Expr, Rational, int]], scale: Expr, known: int | None
) -> tuple[Expr, tuple[Boolean, Expr] | None] | None:
    """The series at 0, which converges for every scale that the reader lets pass (DLMF 16.5.2).

    With the value at scale 0 where the closed form reads 0/0 there.
    """
    norm = normalise(rows)
    w = Dummy("w", positive=True)
    series = left_series(norm.signature, w)
    if series is None or series.head is not S.Zero:
        return None
    total: list[Expr] = []
    limits: list[Expr] = []
    removable = False
    for tail in series.tails:
        degree = (tail.exponent * norm.power).expand()
        if not degree.is_Integer and not (known is None and degree.is_integer):
            return None
        argument = tail.sign * norm.scale * scale**norm.power
        upper, lower = short(tail.upper, tail.lower)
        front = tail.coefficient * power(norm.scale, tail.exponent) * scale**degree
        if degree is S.One and norm.power is S.One and _is_logarithm(upper, lower):
            # integrate 2F1(1/2, 1; 2), DLMF 15.4.17; the scale cancels
            total.append(-4 * front / argument * log((1 + sqrt((1 - argument).cancel())) / 2))
            limits.append(S.Zero)
            continue
        f, smooth = _series_function(upper, lower, argument, known)
        removable = removable or not smooth
        total.append(front * f)
        limits.append(front if degree is S.Zero else S.Zero)
    special = None
    if removable:
        symbol = next(a for a in sorted(scale.free_symbols, key=str) if not a.is_positive)
        special = (Eq(symbol, 0), norm.constant * Add(*limits))
    return norm.constant * Add(*total), special


def _is_logarithm(upper: Sequence[Expr], lower: Sequence[Expr]) -> bool:
    if not all(p.is_Rational for p in (*upper, *lower)):
        return False
    return (sorted(upper), sorted(lower)) == _LOGARITHM


def _series_function(
    upper: Sequence[Expr], lower: Sequence[Expr], argument: Expr, known: int | None
) -> tuple[Expr, bool]:
    """The series by name where that holds for every argument allowed; whether the form is defined at argument 0."""
    plain = hyper(upper, lower, argument)
    if len(upper) == 1 and not lower:
        return (1 - argument).cancel() ** (-upper[0]), True
    if known == -1:
        f = named_pfq(upper, lower, argument)
        return (plain if f is None else f), True
    c, symbol, degree = _monomial_scale(argument)
    if c is None or (degree == 2 and not symbol.is_real):
        return plain, True
    y = Dummy("y", positive=True)
    if degree == 1:
        # exp, log and sqrt of 1 + y continue to y < 0 as they stand
        f = named_pfq(upper, lower, -y)
        if f is None or not all(type(node) in _CONTINUED for node in f.atoms(Function)):
            return plain, True
        if not all(_continues(node, y) for node in f.atoms(Pow)) or (f.has(log) and not symbol.is_real):
            return plain, True
        return put(f, y, S.One, -argument, S.One), f.subs(y, 0) == 1
    # c*symbol**2: the root of y = abs(c)*symbol**2 may have either sign, for the series is one in y
    f = named_pfq(upper, lower, y if c.is_positive else -y)
    if f is None or not all(type(node) in _EVEN for node in f.atoms(Function)):
        return plain, True
    if any(not n.args[0].is_Integer for n in f.atoms(besselj, besseli)):
        return plain, True
    root = Dummy("t", positive=True)
    form = put(f, y, S.One, root**2, S.One)
    smooth = form.subs(root, 0) == 1
    return shortened(form.xreplace({root: sqrt(c if c.is_positive else -c) * symbol})), smooth


_CONTINUED = (exp, log)
_EVEN = (exp, log, sin, cos, sinh, cosh, Si, Shi, erf, erfi, atan, atanh, asin, asinh, besselj, besseli)


def _continues(node: Pow, y: Symbol) -> bool:
    """Integer powers of y, and powers of 1 + y, which is positive."""
    base, exponent = node.args
    if not node.has(y) or base is S.Exp1:
        return True
    if base == y:
        return bool(exponent.is_Integer)
    return base == 1 + y and bool(exponent.is_real)


def _monomial_scale(argument: Expr) -> tuple[Expr | None, Expr, int]:
    """``argument = c*symbol**degree`` with real c != 0 and one symbol of unknown sign, degree 1 or 2."""
    unknown = [a for a in argument.free_symbols if not a.is_positive]
    if len(unknown) == 1:
        c, rest = argument.as_independent(unknown[0], as_Add=False)
        base, degree = rest.as_base_exp()
        if base == unknown[0] and degree in (1, 2) and (c.is_positive or c.is_negative):
            return c, base, int(degree)
    return None, S.Zero, 0


def short(upper: Sequence[Expr], lower: Sequence[Expr]) -> tuple[list[Expr], list[Expr]]:
    """Equal parameters cancelled."""
    ups, downs = [a.expand() for a in upper], [c.expand() for c in lower]
    for a in list(ups):
        if a in downs:
            ups.remove(a)
            downs.remove(a)
    return ups, downs
