"""Functions whose rows take more than an order: hypergeometric functions, explicit series, Airy functions."""
from __future__ import annotations

from typing import TYPE_CHECKING

from sympy import (
    Expr,
    Mul,
    Pow,
    Rational,
    S,
    Symbol,
    airyai,
    besseli,
    besselj,
    bessely,
    factor_terms,
    hyper,
    jn,
    pi,
    sqrt,
)

from ..kernels import rows
from ..kernels.general import gauss_transform, hyper_transform, meijer_transform
from .monomials import monomial
from .waves import Draft

if TYPE_CHECKING:
    from .reader import Drafts, Reader


def hypergeometric(reader: Reader, expr: Expr) -> Drafts | None:
    """``pFq(a; b; -c*x**r)`` for p <= q + 1: the coefficient formula, DLMF 16.5.1."""
    ap, bq, z = expr.args
    if len(ap) == 2 and len(bq) == 1:
        rest = reader.general(expr, 1 - z, lambda: gauss_transform(*ap, *bq), "DLMF 15.8.4 with 15.14.1", 1)
        if rest is not None:
            return rest
    return reader.general(expr, z, lambda: hyper_transform(tuple(ap), tuple(bq)), "DLMF 16.5.1", -1)


def meijer(reader: Reader, expr: Expr) -> Drafts | None:
    """Meijer's G at a positive argument is a Gamma product by definition, DLMF 16.17.1."""
    return reader.general(expr, expr.argument, lambda: meijer_transform(expr), "DLMF 16.17.1", 1)


def imaginary_error(reader: Reader, expr: Expr) -> Drafts | None:
    """``erfi(z) = 2*z/sqrt(pi)*1F1(1/2; 3/2; z**2)``, DLMF 7.11.4; of use beside a decaying exponential."""
    z = expr.args[0]
    return reader.read(2 * z / sqrt(pi) * hyper((S.Half,), (3 * S.Half,), z**2))


def spherical_bessel(reader: Reader, expr: Expr) -> Drafts | None:
    """``jn(n, z) = sqrt(pi/(2*z))*J_(n+1/2)(z)`` and its like, DLMF 10.47.3 and 10.47.4."""
    n, z = expr.args
    cylinder = besselj if type(expr) is jn else bessely
    return reader.read(sqrt(pi / (2 * z)) * cylinder(n + S.Half, z))


def explicit_series(reader: Reader, expr: Expr) -> Drafts | None:
    """``Sum(c(n)*x**(k*n + q), (n, 0, oo))`` by the coefficient formula, where phi passes the growth test."""
    from ..series import Growth, coefficient_transform

    x = reader.x
    if len(expr.limits) != 1 or len(expr.limits[0]) != 3:
        return None
    n, first, last = expr.limits[0]
    if last is not S.Infinity or not first.is_Integer:
        return None
    body = expr.function if first is S.Zero else expr.function.subs(n, n + first)
    if body.is_Add:
        body = factor_terms(body)
    coefficients, exponent = [], S.Zero
    for factor in Mul.make_args(body.expand(power_exp=False, func=False) if body.is_Mul and _adds(body, x) else body):
        if not factor.has_free(x):
            coefficients.append(factor)
            continue
        base, power = factor.as_base_exp()
        single = monomial(base, x)
        if single is None:
            return None
        coefficients.append(Pow(single[0], power))
        exponent += single[1] * power
    exponent = exponent.expand()
    step, front = exponent.coeff(n, 1), exponent.coeff(n, 0)
    if step.has_free(n) or (exponent - step * n - front).expand() is not S.Zero or reader.facts.sign(step) != 1:
        return None
    transform = coefficient_transform(Mul(*coefficients), n, reader.facts.sign)
    if isinstance(transform, Growth) or transform.growth.ok is not True or transform.extras:
        return None
    kernel = reader.kernel("series", transform.product, S.One, step, "Hardy, Ramanujan: Twelve Lectures (1940), ch. XI")
    return None if kernel is None else [Draft(power=front, kernels=(kernel,))]


def _adds(body: Expr, x: Symbol) -> bool:
    return any(f.is_Add and f.has_free(x) for f in body.args)


def airy(reader: Reader, expr: Expr) -> Drafts | None:
    """Bi, and Ai to the left of 0, through Bessel functions of order 1/3: DLMF 9.6.4-9.6.7."""
    kind, inner = type(expr), expr.args[0]
    single = monomial(inner, reader.x)
    if single is None:
        return None
    sign = reader.facts.sign(single[0])
    third = Rational(1, 3)
    if sign == -1:
        y = -inner
        zeta = 2 * y ** Rational(3, 2) / 3
        plus, minus = besselj(third, zeta), besselj(-third, zeta)
        if kind is airyai:
            return reader.read(sqrt(y) / 3 * (plus + minus))
        return reader.read(sqrt(y / 3) * (minus - plus))
    if kind is airyai:
        return reader.row(rows()[airyai], expr)
    if sign != 1:
        return None
    zeta = 2 * inner ** Rational(3, 2) / 3
    return reader.read(sqrt(inner / 3) * (besseli(-third, zeta) + besseli(third, zeta)))
