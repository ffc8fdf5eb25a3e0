"""Logarithms of products, binomials and quadratics."""
from __future__ import annotations

from typing import TYPE_CHECKING

from sympy import Abs, Add, Expr, Integer, Mul, Pow, S, exp, log, pi, sqrt, together
from sympy.core.sorting import default_sort_key

from ..kernels.elementary import LOG1P
from .fractions import turn_of
from .monomials import monomial, monomials
from .term import Kernel, Wave
from .waves import Draft

if TYPE_CHECKING:
    from .reader import Drafts, Reader


def logarithm(reader: Reader, expr: Expr) -> Drafts | None:
    """``log`` of a product of positive factors is a sum; ``log(c0 + c1*x**r)`` is a row."""
    inner = expr.args[0]
    x = reader.x
    if inner == x:
        return [Draft(logs=1)]
    single = monomial(inner, x)
    if single is not None:
        c, p = single
        if reader.facts.sign(c) != 1:
            return None
        moving = [Draft(coefficient=p, logs=1)]
        return moving if c is S.One else [*moving, Draft(coefficient=log(c))]
    kind = type(inner)
    if kind is Mul:
        drafts: Drafts = []
        for a in inner.args:
            if not reader.nonnegative(a):
                return None
            part = logarithm(reader, log(a, evaluate=False)) if a.has_free(x) else [Draft(coefficient=log(a))]
            if part is None:
                return None
            drafts.extend(part)
        return drafts
    if kind is Pow and not inner.exp.has_free(x) and reader.nonnegative(inner.base):
        part = logarithm(reader, log(inner.base, evaluate=False))
        return None if part is None else [d.scaled(inner.exp) for d in part]
    if kind is exp and reader.real(inner.args[0]):
        return reader.read(inner.args[0])
    if kind is Abs:
        return _of_magnitude(reader, inner.args[0])
    if kind is Add:
        return _of_sum(reader, inner)
    return None


def _of_sum(reader: Reader, inner: Add) -> Drafts | None:

    parts = monomials(inner, reader.x)
    if parts is None:
        fraction = together(inner)
        return logarithm(reader, log(fraction, evaluate=False)) if type(fraction) is Mul else None
    if len(parts) == 3:
        return _of_quadratic(reader, parts)
    if len(parts) != 2:
        return None
    (c0, p0), (c1, p1) = parts
    if not p0.is_zero and p1.is_zero:
        (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
    if reader.facts.sign(c0) != 1:
        return None
    ratio = p1 - p0
    if reader.facts.sign(ratio) in (None, 0):
        return None
    kernel = reader.kernel("log1p", LOG1P, c1 / c0, ratio, "from memory: Gradshteyn-Ryzhik 4.293.3")
    if kernel is None:
        return None
    drafts = [Draft(kernels=(kernel,))]
    if c0 is not S.One:
        drafts.append(Draft(coefficient=log(c0)))
    if not p0.is_zero:
        drafts.append(Draft(coefficient=p0, logs=1))
    return drafts


def _of_quadratic(reader: Reader, parts: list[tuple[Expr, Expr]]) -> Drafts | None:
    """``log(c*(1 + z*exp(I*t))*(1 + z*exp(-I*t)))`` with real z > 0: twice the mean of two turned rows."""
    by_power = sorted(parts, key=lambda part: (part[1].is_zero is not True, default_sort_key(part[1])))
    (c, p0), (b, p1), (a, p2) = by_power
    if not p0.is_zero or not (p2 - 2 * p1).is_zero:
        (b, p1), (a, p2) = (a, p2), (b, p1)
        if not p0.is_zero or not (p2 - 2 * p1).is_zero:
            return None
    if reader.facts.sign(a) != 1 or reader.facts.sign(c) != 1 or reader.facts.sign(p1) in (None, 0):
        return None
    m = sqrt(c / a)
    angle, _, condition = turn_of(b / (2 * a * m), reader.facts)
    wave = Wave(angle, S.Zero, True)
    product = LOG1P.with_scale(1 / m)
    kernel = Kernel("log1p", product, p1, wave, condition, True, "from memory: Gradshteyn-Ryzhik 4.296.3")
    drafts = [Draft(coefficient=Integer(2), kernels=(kernel,))]
    return drafts if c is S.One else [*drafts, Draft(coefficient=log(c))]


def _of_magnitude(reader: Reader, inner: Expr) -> Drafts | None:
    """``log(abs(..))`` of a product, and ``log(abs(1 - z))``, the mean of both sides of its branch point."""
    if type(inner) is Mul:
        drafts: Drafts = []
        for factor in inner.args:
            part = logarithm(reader, log(Abs(factor), evaluate=False))
            if part is None:
                return None
            drafts.extend(part)
        return drafts
    if type(inner) is Pow and inner.exp.is_real and not inner.exp.has_free(reader.x):
        part = _of_magnitude(reader, inner.base)
        return None if part is None else [d.scaled(inner.exp) for d in part]
    if reader.nonnegative(inner):
        return logarithm(reader, log(inner, evaluate=False))
    parts = monomials(inner, reader.x)
    if parts is None or len(parts) != 2:
        return None
    (c0, p0), (c1, p1) = parts
    if not p0.is_zero:
        (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
    sign0, sign1 = reader.facts.sign(c0), reader.facts.sign(c1)
    if not p0.is_zero or sign0 is None or sign1 is None or reader.facts.sign(p1) in (None, 0):
        return None
    if sign0 == sign1:
        return logarithm(reader, log(sign0 * inner, evaluate=False))
    product = LOG1P.with_scale(-c1 / c0)
    source = "from memory: Gradshteyn-Ryzhik 4.293.7"
    kernel = Kernel("log1m", product, p1, Wave(pi, S.Zero, True), S.true, False, source)
    drafts = [Draft(kernels=(kernel,))]
    return drafts if abs(c0) is S.One else [*drafts, Draft(coefficient=log(abs(c0)))]
