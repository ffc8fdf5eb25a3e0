"""Transforms of functions that no table holds, from the differential equation that they satisfy.

The equation ``A(theta) f + x**m B(theta) f = 0`` gives the Gamma factors, the exponents of ``f`` at 0 say which of
them have poles left of the strip, and the values of the leading coefficients decide the rest.

Proof of each result: the product ``G`` satisfies ``A(-s) G(s) + B(-s-m) G(s+m) = 0`` and its residues at the left
poles are the leading coefficients of ``f``, so the sum of all of them is the series of ``f``.  By the growth test
``G`` decays on vertical lines, so that the inverse Mellin integral of ``G`` is analytic on x > 0 and, closed to
the left, is that series: it is ``f``.

Sources: R. B. Paris and D. Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), 2.2 and 2.4; Hardy, Ramanujan (1940),
ch. XI; W. Koepf, J. Symb. Comp. 13 (1992) (equations of hypergeometric type).
"""
from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product as choices
from typing import Protocol

import mpmath
from sympy import Dummy, Expr, Function, Integer, Mul, Poly, Pow, Rational, S, Symbol, besseli, besselj, besselk, bessely
from sympy import gamma as gamma_function
from sympy import pi, sin
from sympy.polys.rings import PolyElement

from ..gamma import Factor, GammaProduct, shortest_quotient
from ..gamma.product import cancel
from .frobenius import NoSeries, Pieces, coefficient, pieces
from .growth import Sign, assumed_sign, growth_ok
from .recurrence import Recurrence, two_term
from .tower import Tower, Unknown, constants_of, order_power, split_power

_DIGITS = 40
_BESSEL = (besselj, bessely, besseli, besselk)
# Values for parameters where a candidate is tried; nothing special happens at them.
_SAMPLES = (
    ("0.8414709848", "1.3774920541", "0.6180339887", "1.1283791671", "0.9159655942"),
    ("1.2020569031", "0.7390851332", "1.4513692348", "0.5671432904", "1.0823232337"),
)


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
    3**(-s/3 - 2/3)*gamma(s)/gamma(s/3 + 2/3)
    >>> taylor_transform(exp(-x)*sin(x**2), x) is None
    True
    """
    if not f.has(Pow, Function) or constants_of(f, x) is None and not _has_loose_power(f, x):
        return None
    alpha, rest = split_power(f, x)
    q = order_power(rest, x)
    if q is None or q.q > 6 or rest.is_polynomial(x):
        return None
    sign = assumed_sign if facts is None else facts.sign
    t = Dummy("t", positive=True)
    rest, special = _generic_orders(rest.xreplace({x: t**q.q}), t)
    found = _found(rest, t, sign)
    if found is None:
        return None
    product, recurrence = found
    steps = _steps(recurrence, product, x, t)
    product = product.rescaled(Integer(q.q)).shifted(alpha)
    if special:
        product = GammaProduct(
            product.constant.xreplace(special),
            product.scale.xreplace(special),
            tuple(Factor(a.xreplace(special), A, e) for a, A, e in product.factors),
        )
        steps = tuple((name, value.xreplace(special)) for name, value in steps)
    return TaylorTransform(GammaProduct(q.q * product.constant, product.scale, product.factors), steps)


def _has_loose_power(f: Expr, x: Symbol) -> bool:
    """Whether a factor ``x**alpha`` may be all that kept the expression from being known."""
    return any(a.is_Pow and a.base is x for a in Mul.make_args(f))


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
    return f.replace(
        lambda node: isinstance(node, _BESSEL), lambda node: type(node)(nu, node.args[1])
    ), {nu: order}


def _found(f: Expr, t: Symbol, sign: Sign) -> tuple[GammaProduct, Recurrence] | None:
    constants = constants_of(f, t)
    if constants is None:
        return None
    try:
        tower = Tower(t, constants)
        element = tower.element(f)
        recurrence = two_term(tower, element, Symbol("theta"))
        if recurrence is None:
            return None
        numbers = [r for r in recurrence.left if r.is_Rational]
        size = int(max(numbers, default=S.Zero)) + 3
        series = pieces(f, t, max(size, 4))
    except (Unknown, NoSeries):
        return None
    product = _matching(recurrence, series, sign)
    if product is None or not _analytic(tower, t, sign):
        return None
    return product, recurrence


# -- the Gamma product ---------------------------------------------------------------------------------


def _matching(recurrence: Recurrence, series: Pieces, sign: Sign) -> GammaProduct | None:
    """The one candidate whose residues are the leading coefficients."""
    leading: list[tuple[Expr, Expr]] = []
    for root in recurrence.left:
        c = coefficient(series, root)
        if c is None:
            return None
        leading.append((root, c))
    present = _ladder_heads(leading, recurrence.step)
    if not present:
        return None
    symbols = sorted({s for pair in leading for e in pair for s in e.free_symbols}
                     | {s for r in recurrence.right for s in r.free_symbols}, key=str)
    if len(symbols) > len(_SAMPLES[0]):
        return None
    samples = [dict(zip(symbols, (Rational(v) for v in values), strict=False)) for values in _SAMPLES]
    for product in _candidates(recurrence, present, sign):
        if not _agrees(product, leading, present[0], samples[0]):
            continue
        constant = _constant(product, dict(leading)[present[0]], present[0])
        if constant is None:
            return None
        complete = GammaProduct(constant, product.scale, product.factors)
        if all(_same(complete, root, c, samples) for root, c in leading):
            return complete
    return None


def _ladder_heads(leading: list[tuple[Expr, Expr]], step: int) -> list[Expr]:
    """The exponents from which series of ``f`` start: the smallest one of each residue class."""
    heads: list[Expr] = []
    for root, c in leading:
        if c is S.Zero or root in heads:
            continue
        for i, other in enumerate(heads):
            gap = (root - other).expand() / step
            if gap.is_Integer:
                heads[i] = root if gap < 0 else other
                break
        else:
            heads.append(root)
    return heads


def _candidates(recurrence: Recurrence, present: list[Expr], sign: Sign) -> Iterator[GammaProduct]:
    """Solutions of the difference equation with exactly the left poles asked for, growing slowly enough."""
    m = Integer(recurrence.step)
    unit = 1 / m
    rest = list(present)
    left: list[Factor] = []
    absent = 0
    for root in recurrence.left:
        if root in rest:
            rest.remove(root)
            left.append(Factor(root / m, unit, 1))
        else:
            absent += 1
            left.append(Factor(1 - root / m, -unit, -1))
    degrees = len(recurrence.left), len(recurrence.right)
    bare = -recurrence.ratio * S.NegativeOne ** (degrees[0] + degrees[1] + absent) * m ** (degrees[0] - degrees[1])
    for sides in choices((False, True), repeat=degrees[1]):
        power = bare * S.NegativeOne ** sum(sides)
        if sign(power) != 1:
            continue
        right = [
            Factor(-root / m, -unit, 1) if there else Factor(1 + root / m, unit, -1)
            for root, there in zip(recurrence.right, sides, strict=True)
        ]
        factors = cancel((*left, *right))
        if growth_ok(factors, sign=sign).ok:
            yield GammaProduct(S.One, _root(power, recurrence.step), factors)


def _root(power: Expr, m: int) -> Expr:
    """``power**(-1/m)`` for positive power, each factor by itself."""
    parts = []
    for factor in Mul.make_args(power):
        base, exponent = factor.as_base_exp()
        parts.append(Pow(base, -exponent / m))
    return Mul(*parts)


def _number(c: Expr, sample: dict[Symbol, Expr]) -> mpmath.mpc:
    value = c.xreplace(sample).evalf(2 * _DIGITS + 30)
    re_part, im_part = value.as_real_imag()
    return mpmath.mpc(str(re_part), str(im_part))


def _residue(product: GammaProduct, root: Expr, sample: dict[Symbol, Expr]) -> mpmath.mpc:
    """Residue at ``s = -root``, numerically, from just beside the pole."""
    with mpmath.workdps(2 * _DIGITS + 30):
        step = mpmath.mpf(10) ** (-_DIGITS - 5)
        s = -_number(root, sample) + step
        value = step * _number(product.constant, sample) * _number(product.scale, sample) ** (-s)
        for a, A, e in product.factors:
            argument = _number(a, sample) + mpmath.mpf(int(A.p)) / int(A.q) * s
            value *= mpmath.gamma(argument) if e > 0 else mpmath.rgamma(argument)
        return value


def _agrees(product: GammaProduct, leading: list[tuple[Expr, Expr]], head: Expr, sample: dict[Symbol, Expr]) -> bool:
    """Whether the residues are proportional to the leading coefficients."""
    first = _residue(product, head, sample)
    with mpmath.workdps(_DIGITS):
        if not mpmath.isfinite(first) or abs(first) < mpmath.mpf(10) ** (-_DIGITS // 2):
            return False
        scale = _number(dict(leading)[head], sample) / first
        for root, c in leading:
            wanted = _number(c, sample)
            gap = abs(scale * _residue(product, root, sample) - wanted)
            if not gap <= mpmath.mpf(10) ** (8 - _DIGITS) * (1 + abs(wanted)):
                return False
    return True


def _constant(product: GammaProduct, c: Expr, head: Expr) -> Expr | None:
    """What makes the residue at ``-head`` equal to ``c``."""
    lead = product.laurent(-head, 1)
    if lead.valuation != -1:
        return None
    return constant_form(c / lead.coefficient(-1))


def _same(product: GammaProduct, root: Expr, c: Expr, samples: list[dict[Symbol, Expr]]) -> bool:
    """Residue and leading coefficient compared: exactly where they reduce, else to 30 digits at two places."""
    series = product.laurent(-root, 1)
    if series.valuation > -1:
        return c is S.Zero
    if series.valuation < -1:
        return False
    value = series.coefficient(-1)
    if c is not S.Zero and constant_form(value / c) is S.One:
        return True
    with mpmath.workdps(_DIGITS):
        return all(
            abs(_number(value, sample) - _number(c, sample)) <= mpmath.mpf(10) ** -30 * (1 + abs(_number(c, sample)))
            for sample in samples
        )


def constant_form(c: Expr) -> Expr:
    """A product of Gammas, sines and powers with the Gammas brought together.

    Examples
    --------
    >>> from sympy import gamma, pi, sin, symbols
    >>> from sympy_mellin_ext.series.holonomic import constant_form
    >>> nu = symbols('nu')
    >>> constant_form(pi/(2*sin(pi*nu)*gamma(1 - nu)*gamma(1 + nu)))
    1/(2*nu)
    """
    up: list[Expr] = []
    down: list[Expr] = []
    rest: list[Expr] = []
    for factor in Mul.make_args(c):
        base, e = factor.as_base_exp()
        if isinstance(base, gamma_function) and e.is_Integer:
            (up if e > 0 else down).extend([base.args[0]] * abs(int(e)))
        elif isinstance(base, sin) and e.is_Integer and not base.is_number:
            x = (base.args[0] / pi).expand()
            rest.append(pi**e)
            (down if e > 0 else up).extend([x, 1 - x] * abs(int(e)))
        else:
            rest.append(factor)
    if not up and not down:
        return c
    value = Mul(*rest, shortest_quotient(up, down))
    # powers of one base with symbolic exponents, and linear factors, meet only when the exponents are added up
    bases: dict[Expr, list[Expr]] = {}
    for factor in Mul.make_args(value):
        base, e = factor.as_base_exp()
        bases.setdefault(base, []).append(e)
    return Mul(*(Pow(base, sum(e, S.Zero).expand()) for base, e in bases.items()))


# -- that the expression is one analytic function on x > 0 -----------------------------------------------


def _analytic(tower: Tower, t: Symbol, sign: Sign) -> bool:
    """Whether every base of a power or argument of a logarithm stays positive for x > 0."""
    for expr, element in tower.positive:
        if expr.is_positive:
            continue
        norm = tower.norm(element)
        if not norm or not (_no_root(tower, norm.numer, sign) and _no_root(tower, norm.denom, sign)):
            return False
        try:
            ((_, series),) = pieces(expr, t, 4).items()
        except (NoSeries, ValueError):
            return False
        head = next((c for c in series if c is not S.Zero), S.Zero)
        if sign(head) != 1:
            return False
    return True


def _no_root(tower: Tower, polynomial: PolyElement, sign: Sign) -> bool:
    """Whether a polynomial in ``x`` and the parameters has no zero for x > 0."""
    by_power: dict[int, PolyElement] = {}
    ring = polynomial.ring
    for exponents, c in polynomial.terms():
        rest = ring({(0, *exponents[1:]): c})
        by_power[exponents[0]] = by_power.get(exponents[0], ring.zero) + rest
    coefficients = {p: tower.to_expr(tower.K(c)) for p, c in sorted(by_power.items())}
    signs = {sign(c) for c in coefficients.values()}
    if signs in ({1}, {-1}):
        return True
    low, high = min(coefficients), max(coefficients)
    if all(c.is_Rational for c in coefficients.values()):
        x = Symbol("x")
        reduced = Poly({p - low: c for p, c in coefficients.items()}, x)
        return reduced.count_roots(0, None) == 0
    if high - low == 2:
        a, c = coefficients[high], coefficients[low]
        return sign((coefficients.get(low + 1, S.Zero) ** 2 - 4 * a * c).expand()) == -1
    return False


def _steps(recurrence: Recurrence, product: GammaProduct, x: Symbol, t: Symbol) -> tuple[tuple[str, Expr], ...]:
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

