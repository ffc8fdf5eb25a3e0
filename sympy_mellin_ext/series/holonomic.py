"""Transforms of functions that no table holds, from the differential equation that they satisfy.

The equation ``A(theta) f + x**m B(theta) f = 0`` gives the Gamma factors, the exponents of ``f`` at 0 say
which of them have poles left of the strip, and the values of the leading coefficients decide the rest.

Proof of each result: the product ``G`` satisfies ``A(-s) G(s) + B(-s-m) G(s+m) = 0`` and its residues at the
left poles are the leading coefficients of ``f``, so the sum of all of them is the series of ``f``.  By the
growth test ``G`` decays on vertical lines, so that the inverse Mellin integral of ``G`` is analytic on x > 0
and, closed to the left, is that series: it is ``f``.

Sources: R. B. Paris and D. Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), 2.2, 2.4; G. H. Hardy,
Ramanujan (1940), ch. XI; W. Koepf, J. Symb. Comp. 13 (1992) (equations of hypergeometric type).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple, Protocol

from sympy import (
    Dummy,
    Expr,
    Function,
    Integer,
    Mul,
    Pow,
    S,
    Symbol,
    besseli,
    besselj,
    besselk,
    bessely,
    hyper,
)

from ..gamma import Factor, GammaProduct
from .analytic import is_analytic
from .frobenius import NoSeries, coefficient, pieces
from .growth import Sign, assumed_sign
from .jets import shape_of
from .matching import Leading, ladder_heads, matching_product
from .recurrence import Recurrence, two_term
from .tower import Tower, Unknown, constants_of, order_power, split_power

_BESSEL = (besselj, bessely, besseli, besselk)


class HasSign(Protocol):
    def sign(self, expr: Expr) -> int | None: ...


@dataclass(frozen=True)
class TaylorTransform:
    """A transform found from a differential equation.

    Attributes
    ----------
    product : GammaProduct
        The transform of the function in its variable.
    steps : tuple of (str, Expr)
        Equation in ``theta = x*d/dx``, ratio of the recurrence, transform before the change of variable.
    """

    product: GammaProduct
    steps: tuple[tuple[str, Expr], ...]


def taylor_transform(f: Expr, x: Symbol, facts: HasSign | None = None) -> TaylorTransform | None:
    """Mellin transform of ``f`` from a two-term recurrence of its series at 0, or None.

    Parameters
    ----------
    f : Expr
        Sums, products and powers of algebraic, elementary, Airy, Bessel and error functions of ``x``.
    x : Symbol
    facts : Facts, optional
        What is known about the parameters.

    Returns
    -------
    TaylorTransform or None
        None whenever a step is not proved; a product whose strip is empty means that no transform exists.

    Examples
    --------
    >>> from sympy import airyai, exp, sin, symbols
    >>> from sympy_mellin_ext.series import taylor_transform
    >>> x, s = symbols('x s', positive=True)
    >>> taylor_transform(airyai(x), x).product.at(s)
    3**(1/3)*gamma(s)/(3*3**(s/3)*gamma(s/3 + 2/3))
    >>> taylor_transform(exp(-x)*sin(x**2), x) is None
    True
    """
    if not f.has(Pow, Function) or (constants_of(f, x) is None and not _has_loose_power(f, x)):
        return None
    alpha, rest = split_power(f, x)
    unit = order_power(rest, x)
    if unit is None or unit.q > 6 or rest.is_polynomial(x):
        return None
    sign = assumed_sign if facts is None else facts.sign
    t = Dummy("t", positive=True)
    q = Integer(unit.q) * (-1 if _only_reciprocal(rest, x) else 1)
    found: tuple[GammaProduct, Recurrence] | None = None
    special: dict[Expr, Expr] = {}
    for power in (q, 2 * q):
        changed, special = _generic_orders(rest.xreplace({x: t**power}), t)
        try:
            found = _found(changed, t, sign)
            break
        except NoSeries:
            # branches at 0 in half powers that no power of x shows, as in sqrt(x**2 + x)
            continue
    if found is None:
        return None
    product, recurrence = found
    steps = _steps(recurrence, product, x, t)
    product = product.rescaled(power).shifted(alpha)
    if special:
        product = GammaProduct(
            product.constant.xreplace(special),
            product.scale.xreplace(special),
            tuple(Factor(a.xreplace(special), A, e) for a, A, e in product.factors),
        )
        steps = tuple((name, value.xreplace(special)) for name, value in steps)
    return TaylorTransform(GammaProduct(abs(power) * product.constant, product.scale, product.factors), steps)


def _has_loose_power(f: Expr, x: Symbol) -> bool:
    """Whether a factor ``x**alpha`` may be all that kept the expression from being known."""
    return any(a.is_Pow and a.base == x for a in Mul.make_args(f))


def _only_reciprocal(f: Expr, x: Symbol) -> bool:
    """Whether ``x`` occurs in negative powers alone."""
    stack, seen = [f], False
    while stack:
        node = stack.pop()
        if node == x:
            return False
        if node.is_Pow and node.base == x:
            if not node.exp.is_negative:
                return False
            seen = True
        elif node.has_free(x):
            stack.extend(node.args)
    return seen


def _generic_orders(f: Expr, t: Symbol) -> tuple[Expr, dict[Expr, Expr]]:
    """Bessel functions of the second kind have no logarithms at a generic order: continue from there."""
    if not f.has(besselk, bessely):
        return f, {}
    orders = {node.args[0] for node in f.atoms(*_BESSEL)}
    if len(orders) != 1:
        return f, {}
    (order,) = orders
    if order.has_free(t) or order.is_integer is False or not (order.is_number or order.is_integer):
        return f, {}
    nu = Dummy("nu", positive=True)
    return f.replace(lambda node: isinstance(node, _BESSEL), lambda node: type(node)(nu, node.args[1])), {
        nu: order
    }


def _found(f: Expr, t: Symbol, sign: Sign) -> tuple[GammaProduct, Recurrence] | None:
    equation = _equation(f, t)
    if equation is None:
        return None
    tower, recurrence, leading = equation
    product = matching_product(recurrence, leading, sign)
    if product is None or not is_analytic(tower, t, sign, S.Infinity):
        return None
    return product, recurrence


def _equation(f: Expr, t: Symbol) -> tuple[Tower, Recurrence, Leading] | None:
    """The two-term equation, and the coefficient of ``f`` at each exponent that it allows."""
    constants = constants_of(f, t)
    if constants is None:
        return None
    try:
        shape = shape_of(f, t, constants)
        if shape is None:
            return None
        tower = Tower(t, constants)
        recurrence = two_term(tower, tower.element(f), Symbol("theta"), *shape)
    except Unknown:
        return None
    if recurrence is None:
        return None
    numbers = [r for r in recurrence.left if r.is_Rational]
    series = pieces(f, t, max(int(max(numbers, default=S.Zero)) + 3, 4))
    leading: Leading = []
    for root in recurrence.left:
        c = coefficient(series, root)
        if c is None:
            return None
        leading.append((root, c))
    return tower, recurrence, leading


class Piece(NamedTuple):
    """``coefficient * x**exponent * pFq(upper; lower; argument*x**step)``."""

    coefficient: Expr
    exponent: Expr
    upper: tuple[Expr, ...]
    lower: tuple[Expr, ...]
    argument: Expr
    step: int

    def moment(self, s: Expr) -> Expr:
        """Its integral with ``x**(s-1)`` over 0 < x < 1, term by term."""
        start = (s + self.exponent) / self.step
        value = hyper((*self.upper, start), (*self.lower, start + 1), self.argument)
        return self.coefficient / (s + self.exponent) * value


def hypergeometric_pieces(f: Expr, x: Symbol, facts: HasSign | None = None) -> tuple[Piece, ...] | None:
    """``f`` on 0 < x < 1 as interlaced generalized hypergeometric series, or None.

    The equation and the leading coefficients prove it; nothing is asked of ``f`` beyond x = 1.  The series
    have ``len(upper) <= len(lower) + 1``, and where equality holds ``abs(argument) <= 1``; at argument 1 the
    moments converge iff ``Re(sum(lower) - sum(upper)) > -1``.

    Examples
    --------
    >>> from sympy import asin, cos, symbols
    >>> from sympy_mellin_ext.series import hypergeometric_pieces
    >>> x, k = symbols('x k', positive=True)
    >>> hypergeometric_pieces(cos(k*asin(x)), x)
    (Piece(coefficient=1, exponent=0, upper=(k/2, -k/2), lower=(1/2,), argument=1, step=2),)
    """
    if constants_of(f, x) is None or f.has(besselk, bessely):
        return None
    sign = assumed_sign if facts is None else facts.sign
    t = Dummy("t", positive=True)
    try:
        equation = _equation(f.xreplace({x: t}), t)
    except NoSeries:
        return None
    if equation is None:
        return None
    tower, recurrence, leading = equation
    if not is_analytic(tower, t, sign, S.One):
        return None
    m = Integer(recurrence.step)
    degrees = len(recurrence.right) - len(recurrence.left)
    argument = -(m**degrees) / recurrence.ratio
    if degrees > 0 or (degrees == 0 and sign(1 - abs(argument)) not in (0, 1)):
        return None
    found = []
    for head in ladder_heads(leading, recurrence.step):
        upper = tuple(((head - r) / m).expand() for r in recurrence.right)
        lower = [(1 + (head - r) / m).expand() for r in recurrence.left]
        lower.remove(S.One)
        if any(b.is_integer and not b.is_positive for b in lower):
            return None
        found.append(Piece(dict(leading)[head], head, upper, tuple(lower), argument, recurrence.step))
    return tuple(found)


def _steps(
    recurrence: Recurrence, product: GammaProduct, x: Symbol, t: Symbol
) -> tuple[tuple[str, Expr], ...]:
    n, s = Symbol("n"), Symbol("s")
    m = recurrence.step
    ratio = Mul(
        -1 / recurrence.ratio,
        *(n - r for r in recurrence.right),
        *(1 / (n + m - r) for r in recurrence.left),
    )
    plain = Symbol(x.name)
    return (
        ("differential equation, theta = x*d/dx", recurrence.equation.xreplace({Symbol(t.name): plain})),
        (f"c(n+{m})/c(n)", ratio),
        ("transform", product.as_expr(s)),
    )
