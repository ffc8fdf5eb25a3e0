"""What a step of a derivation rests on, written out: kernel, series, growth on vertical lines, strip, poles.

Sources: G. H. Hardy, Ramanujan: Twelve Lectures (1940), ch. XI (phi); R. B. Paris and D. Kaminski, Asymptotics
and Mellin-Barnes Integrals (2001), sections 2.1-2.4 (growth); DLMF 1.14.39 (two transforms).
"""
from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any, NamedTuple

from sympy import (
    Abs,
    Basic,
    Dummy,
    Expr,
    I,
    Integral,
    Max,
    Min,
    Mul,
    Pow,
    Rational,
    S,
    Symbol,
    Tuple,
    cos,
    exp,
    log,
    oo,
)

from ..gamma import GammaProduct
from ..matching import Kernel, Term, Wave
from ..pieces import Piece
from ..region import real_part
from ..steps import Contour, Question, Step, Total
from .series import power_series

# More terms of a sum, or cancelled powers, than this are not listed.
_MOST_LISTED = 6
# The functions that the matcher reads itself, by the names of their kernels.
_FORMS = {
    "exp": "exp(-z)", "cos": "cos(z)", "sin": "sin(z)", "power": "(1 + z)**(-c)", "pole": "(1 - z)**(-n)",
    "log1p": "log(1 + z)", "log1m": "log(abs(1 - z))",
}  # fmt: skip

s, n, u = Symbol("s"), Symbol("n"), Symbol("u")
sigma = Symbol("sigma", real=True)


class Detail(NamedTuple):
    """One fact: a short name, what it says in words, and the SymPy object (or text)."""

    name: str
    label: str
    value: Any


def details(step: Step) -> list[Detail]:
    """The facts behind a step; empty where the strategy left none.

    Parameters
    ----------
    step : Step

    Examples
    --------
    >>> from sympy_mellin_ext.derivation.details import details
    >>> from sympy_mellin_ext.gamma import GammaProduct
    >>> from sympy_mellin_ext.steps import Step
    >>> for d in details(Step('transform', subject=GammaProduct.of(up=[(0, 1)]))):
    ...     print(d.label, '=', d.value)
    phi(n) = 1
    c(n+1)/c(n) = -1/(n + 1)
    Lambda = 1
    Delta = 1
    kappa(sigma) = sigma - 1/2
    strip of Re s = (0, oo)
    """
    return [Detail(d.name, d.label, plain(step.replaced(d.value))) for d in _found(step.subject)]


def plain(value: Any) -> Any:
    """The object with auxiliary symbols written as ordinary ones, under names that are free."""
    if not isinstance(value, Basic):
        return value
    hidden = sorted(value.atoms(Dummy), key=lambda d: (d.name, d.dummy_index))
    taken = {v.name for v in value.atoms(Symbol) if not isinstance(v, Dummy)}
    names: dict[Dummy, Symbol] = {}
    for dummy in hidden:
        name = next(c for c in _names(dummy.name) if c not in taken)
        taken.add(name)
        names[dummy] = Symbol(name, positive=dummy.is_positive, real=dummy.is_real)
    return value.xreplace(names) if names else value


def _names(name: str) -> Iterator[str]:
    yield name
    yield from "tuvwyz"
    count = 1
    while True:
        yield f"{name}_{count}"
        count += 1


def _found(subject: Any) -> Iterator[Detail]:
    if isinstance(subject, Kernel):
        yield from _of_kernel(subject)
    elif isinstance(subject, GammaProduct):
        yield from _of_product(subject, s)
    elif isinstance(subject, Total):
        yield from _of_total(subject)
    elif isinstance(subject, Contour):
        yield from _of_contour(subject)
    elif isinstance(subject, Question):
        x, lower, upper = subject.limits
        yield Detail("integral", "integral", Integral(subject.integrand, (x, lower, upper)))


# -- kernels ----------------------------------------------------------------------------------------------


def kernel_form(kernel: Kernel) -> str:
    """The kernel as text, a function of z."""
    orders = ", ".join([*map(str, kernel.arguments), "z"])
    return _FORMS.get(kernel.name, f"{kernel.name}({orders})")


def kernel_transform(kernel: Kernel, at: Expr) -> Expr:
    """The Mellin transform of a kernel at a point, with the factor of a turned scale."""
    value = _gammas(kernel.product, at)
    if kernel.wave is not None:
        value = value * _wave(kernel.wave, at)
    return value


def _gammas(product: GammaProduct, at: Expr) -> Expr:
    t = Dummy("t")
    return product.as_expr(t).xreplace({t: at})


def _wave(wave: Wave, at: Expr) -> Expr:
    phase = wave.angle * at + wave.phase
    return cos(phase) if wave.real else exp(-I * phase)


def _of_kernel(kernel: Kernel) -> Iterator[Detail]:
    x = Symbol("x", positive=True)
    yield Detail("kernel", "function of z", kernel_form(kernel))
    yield Detail("scale", "scale", kernel.product.scale)
    if kernel.ratio is not S.One:
        yield Detail("z", "z is a multiple of", Pow(x, kernel.ratio))
    if kernel.wave is not None:
        yield Detail("rotation", "factor of the turned scale", _wave(kernel.wave, s))
    if kernel.tilt is not None:
        yield Detail("derivatives", "derivatives in a parameter (powers of a logarithm)", S(kernel.tilt.order))
    yield from _of_product(kernel.product, s, series=kernel.wave is None and kernel.tilt is None)
    if kernel.condition is not S.true:
        yield Detail("condition", "holds where", kernel.condition)


def _of_product(product: GammaProduct, variable: Symbol, series: bool = True) -> Iterator[Detail]:
    for i, found in enumerate(power_series(product, n) if series else ()):
        mark = "" if not i else f"_{i + 1}"
        if found.head is not S.Zero or found.step != 1:
            z = Symbol("z", positive=True)
            general = z**found.head * (-(z**found.step)) ** n
            yield Detail(f"term{mark}", f"series at 0: sum of phi{mark}(n)/n! times", general)
        yield Detail(f"phi{mark}(n)", f"phi{mark}(n)", found.phi)
        if found.ratio is not None:
            name = f"c{mark}(n+{found.period})/c{mark}(n)"
            yield Detail(f"term_ratio{mark}", name, found.ratio)
    yield Detail("Lambda", "Lambda", product.lam)
    yield Detail("Delta", "Delta", product.delta)
    yield Detail("kappa", "kappa(sigma)", product.kappa(sigma))
    left, right = product.strip()
    lower, upper = (Max, -oo), (Min, oo)
    yield Detail("strip", f"strip of Re {variable}", Tuple(_bound(left, *lower), _bound(right, *upper)))


def _bound(heads: Sequence[Expr], choose: Any, none: Expr) -> Expr:
    return choose(*(real_part(h) for h in heads)) if heads else none


# -- sums of pieces ---------------------------------------------------------------------------------------


def _of_total(total: Total) -> Iterator[Detail]:
    from ..strategies.master_theorem import strip_of

    x = Symbol("x", positive=True)
    for i, piece in enumerate(total.pieces[:_MOST_LISTED], start=1):
        mark = "" if len(total.pieces) == 1 else f"_{i}"
        front = piece.constant * x**piece.power * log(x) ** piece.logs
        yield Detail(f"front{mark}", f"factor of the kernel{_nth(i, total.pieces)}", front)
        if piece.product is None:
            yield Detail(f"transform{mark}", "a power alone: transform, in the regularised sense", S.Zero)
            continue
        yield Detail(f"point{mark}", f"its transform is taken at s{mark}", piece.u)
        if piece.ratio is not S.One:
            yield Detail(f"divided{mark}", "and divided by", Abs(piece.ratio))
        if piece.logs:
            yield Detail(f"derivatives{mark}", "derivatives in s, for the powers of log(x)", S(piece.logs))
        order = piece.pole_order(piece.u)
        if order > 0:
            yield Detail(f"pole{mark}", "a pole there of order", S(order))
    if len(total.pieces) > _MOST_LISTED:
        yield Detail("more", "further terms", S(len(total.pieces) - _MOST_LISTED))
    for end, edge in (("0", total.at_zero), ("oo", total.at_infinity)):
        for i, exponent in enumerate(edge.cancelled[:_MOST_LISTED], start=1):
            yield Detail(f"cancelled_at_{end}_{i}", f"residues cancel: no term at {end} with", x**exponent)
        for i, exponent in enumerate(edge.survivors[:_MOST_LISTED], start=1):
            yield Detail(f"leading_at_{end}_{i}", f"what decides at {end}", x**exponent)
    yield Detail("strip", "strip of Re s", Tuple(*strip_of(total.at_zero, total.at_infinity, total.reference)))


def _nth(i: int, pieces: Sequence[Piece]) -> str:
    return f" in term {i}" if len(pieces) > 1 else ""


# -- two kernels ------------------------------------------------------------------------------------------


def contour_integrand(term: Term) -> Expr:
    """``G1(u)*G2((p + 1 - r1*u)/r2)/abs(r2)`` of a term with two kernels; over du/(2*pi*I)."""
    first, second = term.kernels
    at = (term.power + 1 - first.ratio * u) / second.ratio
    return Mul(term.coefficient / Abs(second.ratio), kernel_transform(first, u), kernel_transform(second, at))


def _of_contour(contour: Contour) -> Iterator[Detail]:
    double = [t for t in contour.terms if len(t.kernels) == 2]
    for i, term in enumerate(double[:_MOST_LISTED], start=1):
        mark = "" if len(double) == 1 else f"_{i}"
        yield Detail(f"integrand{mark}", "integrand, over du/(2*pi*I)", contour_integrand(term))
        first, second = term.kernels
        ratio = first.ratio / second.ratio
        if isinstance(ratio, Rational):
            lam = first.product.lam + second.product.lam * abs(ratio)
            yield Detail(f"Lambda{mark}", "Lambda", lam)
            yield Detail(f"Delta{mark}", "Delta", first.product.delta - second.product.delta * ratio)
        if term.logs:
            yield Detail(f"derivatives{mark}", "derivatives in s, for the powers of log(x)", S(term.logs))


__all__ = ["Detail", "contour_integrand", "details", "kernel_form", "kernel_transform", "plain"]
