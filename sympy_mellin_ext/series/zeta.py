"""Transforms of digamma, loggamma, polygamma and Hurwitz zeta: phi is built on zeta functions.

With ``c(n) = (-1)**(n+1)*zeta(n+1, a)`` for digamma(a+x) - digamma(a), and its derivatives and integral, the
master theorem gives Gamma factors times ``zeta(k - s, a)``.  Subtracting other terms of the expansions at
0 and oo moves the strip and leaves the product as it is: a power or logarithm has finite part 0.

Sources: DLMF 5.7.3 and 5.7.4 (loggamma and digamma at 1), 5.11.1 and 5.11.2 (at oo), 5.15.1 (polygamma),
25.11.10 and 25.11.43 (Hurwitz zeta); E. C. Titchmarsh, The Theory of the Riemann Zeta-Function (1951), 2.9.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from sympy import (
    Add,
    Expr,
    Integer,
    Mul,
    Pow,
    Rational,
    S,
    Symbol,
    digamma,
    expand_log,
    gamma,
    harmonic,
    log,
    loggamma,
    pi,
    polygamma,
    zeta,
)

from ..gamma import GammaProduct
from .growth import Sign, assumed_sign
from .holonomic import HasSign
from .matching import constant_form

# Terms of the expansions at 0 and oo that subtractions may take away.
_TERMS = 4

# exponent of x, power of log(x)
Term = tuple[Expr, int]


@dataclass(frozen=True)
class ZetaTransform:
    """``product(s) * zeta(argument(s), offset)`` on ``lower < Re s < upper``.

    The strip is the one stated, whatever the poles of the product: subtractions move it.
    """

    product: GammaProduct
    argument: Callable[[Expr], Expr]
    offset: Expr
    lower: Expr
    upper: Expr
    source: str

    def extra(self, s: Expr) -> Expr:
        """The zeta factor at ``s``."""
        return zeta(self.argument(s)) if self.offset is S.One else zeta(self.argument(s), self.offset)

    def at(self, s: Expr) -> Expr:
        """The transform at ``s``."""
        return self.product.at(s) * self.extra(s)


@dataclass(frozen=True)
class ZetaKernel:
    """A function of ``z`` beside its expansions: at 0 (powers 0, 1, ...) and at oo (terms in order)."""

    product: GammaProduct
    argument: Callable[[Expr], Expr]
    offset: Expr
    at_zero: tuple[Expr, ...]
    at_infinity: tuple[tuple[Term, Expr], ...]
    beyond: Expr
    source: str


def _digamma(a: Expr) -> ZetaKernel:
    """DLMF 5.7.4, 5.11.2."""
    product = GammaProduct.of(up=[(0, 1), (1, -1)], constant=-1)
    zero = (digamma(a), *(S.NegativeOne ** (n + 1) * zeta(n + 1, a) for n in range(1, _TERMS)))
    infinity = (((S.Zero, 1), S.One), ((S.NegativeOne, 0), a - S.Half))
    return ZetaKernel(product, lambda s: 1 - s, a, zero, infinity, Integer(-2), "DLMF 5.7.4")


def _loggamma(a: Expr) -> ZetaKernel:
    """DLMF 5.7.3, 5.11.1; the constant term at oo is log(2*pi)/2."""
    product = GammaProduct.of(up=[(0, 1), (0, -1)])
    zero = (loggamma(a), digamma(a), *(S.NegativeOne**n * zeta(n, a) / n for n in range(2, _TERMS)))
    infinity = (
        ((S.One, 1), S.One),
        ((S.One, 0), S.NegativeOne),
        ((S.Zero, 1), a - S.Half),
        ((S.Zero, 0), log(2 * pi) / 2),
        ((S.NegativeOne, 0), (a**2 - a + Rational(1, 6)) / 2),
    )
    return ZetaKernel(product, lambda s: -s, a, zero, infinity, Integer(-2), "DLMF 5.7.3")


def _hurwitz(p: Expr, a: Expr) -> ZetaKernel:
    """DLMF 25.11.10, 25.11.43."""
    product = GammaProduct.of(up=[(0, 1), (p, -1)], constant=1 / gamma(p))
    zero = tuple(S.NegativeOne**n * _rising(p, n) * zeta(p + n, a) for n in range(_TERMS))
    infinity = (((1 - p, 0), 1 / (p - 1)), ((-p, 0), S.Half - a))
    return ZetaKernel(product, lambda s: p - s, a, zero, infinity, -p - 1, "DLMF 25.11.10")


def _rising(p: Expr, n: int) -> Expr:
    return Mul(*(p + j for j in range(n))) / Mul(*range(1, n + 1))


def zeta_kernel(node: Expr, x: Symbol, sign: Sign) -> tuple[ZetaKernel, Expr, Expr] | None:
    """The kernel, and ``scale`` and ``ratio`` of its argument ``a + scale*x**ratio``."""
    kind = type(node)
    factor, inner = S.One, node
    if kind is log and isinstance(node.args[0], gamma):
        inner, kind = node.args[0], loggamma
    split = _argument(inner.args[-1] if kind in (polygamma, zeta) else inner.args[0], x)
    if split is None:
        return None
    a, scale, ratio = split
    if kind is harmonic:
        a = a + 1
    if sign(a) != 1 or sign(scale) != 1 or sign(ratio) != 1:
        return None
    if kind is loggamma:
        kernel = _loggamma(a)
    elif kind is harmonic and len(node.args) == 1:
        kernel = _digamma(a)
        kernel = _moved(kernel, S.EulerGamma)
    elif kind is polygamma and node.args[0].is_Integer and node.args[0] >= 0:
        m = node.args[0]
        if m == 0:
            kernel = _digamma(a)
        else:
            kernel = _hurwitz(m + 1, a)
            factor = S.NegativeOne ** (m + 1) * gamma(m + 1)
    elif kind is zeta and len(node.args) == 2 and _may_converge(node.args[0], x, sign):
        kernel = _hurwitz(node.args[0], a)
    else:
        return None
    return (_times(kernel, factor) if factor is not S.One else kernel), scale, ratio


def _may_converge(p: Expr, x: Symbol, sign: Sign) -> bool:
    """Whether zeta(p, a) is not known to be outside its series; the strip says the rest."""
    return not p.has_free(x) and (sign(p - 1) == 1 or (not p.is_number and sign(p - 1) is None))


def _moved(kernel: ZetaKernel, constant: Expr) -> ZetaKernel:
    """The kernel plus a constant."""
    zero = (kernel.at_zero[0] + constant, *kernel.at_zero[1:])
    infinity = (kernel.at_infinity[0], ((S.Zero, 0), constant), *kernel.at_infinity[1:])
    return ZetaKernel(
        kernel.product, kernel.argument, kernel.offset, zero, infinity, kernel.beyond, kernel.source
    )


def _times(kernel: ZetaKernel, factor: Expr) -> ZetaKernel:
    product = kernel.product
    return ZetaKernel(
        GammaProduct(constant_form(factor * product.constant), product.scale, product.factors),
        kernel.argument,
        kernel.offset,
        tuple(factor * c for c in kernel.at_zero),
        tuple((term, factor * c) for term, c in kernel.at_infinity),
        kernel.beyond,
        kernel.source,
    )


def _argument(argument: Expr, x: Symbol) -> tuple[Expr, Expr, Expr] | None:
    """``a + scale*x**ratio``; None for anything else."""
    a, rest = argument.as_independent(x, as_Add=True)
    scale, power = rest.as_independent(x, as_Add=False)
    base, ratio = power.as_base_exp()
    return (a, scale, ratio) if base == x and not ratio.has_free(x) else None


def _plain(terms: list[Expr], x: Symbol) -> dict[Term, Expr] | None:
    """Powers of ``x`` times logarithms of ``c*x``, by exponents."""
    found: dict[Term, Expr] = {}
    for term in terms:
        constant, exponent, logs = S.One, S.Zero, [S.One]
        for factor in Mul.make_args(term):
            base, e = factor.as_base_exp()
            if not factor.has_free(x):
                constant *= factor
            elif base == x and not e.has_free(x):
                exponent += e
            elif isinstance(factor, log) and len(logs) == 1:
                c, power = factor.args[0].as_independent(x, as_Add=False)
                inner, r = power.as_base_exp()
                if inner != x or r.has_free(x) or not c.is_positive:
                    return None
                logs = [log(c), r]
            else:
                return None
        for k, part in enumerate(logs):
            if part is not S.Zero:
                found[exponent, k] = found.get((exponent, k), S.Zero) + constant * part
    return found


def zeta_transform(f: Expr, x: Symbol, facts: HasSign | None = None) -> ZetaTransform | None:
    """Mellin transform of one digamma, loggamma, polygamma or Hurwitz zeta function of ``a + b*x**r``.

    Powers and logarithms of ``x`` may be added, as far as they cancel terms of the expansions at 0 or oo; the
    whole may be multiplied by a power of ``x``.

    Parameters
    ----------
    f : Expr
    x : Symbol
    facts : Facts, optional
        What is known about the parameters; ``a``, ``b`` and ``r`` must be known to be positive.

    Returns
    -------
    ZetaTransform or None
        None also where the expansions leave no strip; where the parameters decide that, ``lower < upper`` is
        the condition.

    Examples
    --------
    >>> from sympy import EulerGamma, digamma, log, symbols
    >>> from sympy_mellin_ext.series import zeta_transform
    >>> x, s = symbols('x s', positive=True)
    >>> T = zeta_transform(digamma(1 + x) + EulerGamma, x)
    >>> T.at(s), T.lower, T.upper
    (-pi*zeta(1 - s)/sin(pi*s), -1, 0)
    >>> T = zeta_transform(digamma(1 + x) - log(x), x)
    >>> T.at(s), T.lower, T.upper
    (-pi*zeta(1 - s)/sin(pi*s), 0, 1)
    """
    if not f.has(polygamma, loggamma, gamma, zeta, harmonic):
        return None
    sign = assumed_sign if facts is None else facts.sign
    split = _special_term(f, x)
    if split is None:
        return None
    front, c, node, rest = split
    read = zeta_kernel(node, x, sign)
    extra = _plain(rest, x)
    if read is None or extra is None:
        return None
    kernel, scale, ratio = read
    bounds = _strip(_times(kernel, c), scale, ratio, extra, sign)
    if bounds is None:
        return None
    product, inverse = _times(kernel, c).product, 1 / ratio
    # the transform of g(b*x**r) is G(s/r)*b**(-s/r)/r
    product = product.with_scale(scale)
    if ratio is not S.One:
        if not ratio.is_Rational:
            return None
        product = product.rescaled(inverse)
        product = GammaProduct(product.constant / ratio, product.scale, product.factors)
    product = product.shifted(front)
    return ZetaTransform(
        product,
        lambda s: kernel.argument(inverse * (s + front)).expand(),
        kernel.offset,
        bounds[0] - front,
        bounds[1] - front,
        kernel.source,
    )


_KINDS = (polygamma, loggamma, zeta, harmonic)


def _special_term(f: Expr, x: Symbol) -> tuple[Expr, Expr, Expr, list[Expr]] | None:
    """``f = x**front * (c*node + sum of rest)`` with exactly one special function, ``node``."""
    outside, body = [], f
    if f.is_Mul:
        sums = [a for a in f.args if a.is_Add]
        if len(sums) > 1:
            return None
        if sums:
            outside, body = [a for a in f.args if not a.is_Add], sums[0]
    found: tuple[Expr, Expr, Expr] | None = None
    rest: list[Expr] = []
    for term in Add.make_args(body):
        if not term.has_free(x) or not term.has(*_KINDS, gamma):
            rest += Add.make_args(term.expand())
            continue
        front, c, node = S.Zero, S.One, None
        for factor in (*outside, *Mul.make_args(term)):
            base, e = factor.as_base_exp()
            if not factor.has_free(x):
                c *= factor
            elif base == x and not e.has_free(x):
                front += e
            elif node is None:
                node = factor
            else:
                return None
        if node is None or found is not None:
            return None
        if type(node) not in _KINDS and not (isinstance(node, log) and isinstance(node.args[0], gamma)):
            return None
        found = front, c, node
    if found is None:
        return None
    scale = Mul(*outside) * Pow(x, -found[0])
    return (*found, [scale * term for term in rest])


def _strip(
    kernel: ZetaKernel, scale: Expr, ratio: Expr, extra: dict[Term, Expr], sign: Sign
) -> tuple[Expr, Expr] | None:
    """Minus the first exponents at 0 and at oo that survive, in this order, if they leave room."""
    zero = dict(extra)
    for n, c in enumerate(kernel.at_zero):
        key = (n * ratio, 0)
        zero[key] = zero.get(key, S.Zero) + c * scale**n
    infinity = dict(extra)
    for (e, logs), c in kernel.at_infinity:
        size = c * Pow(scale, e)
        key = (e * ratio, logs)
        if logs:
            infinity[key] = infinity.get(key, S.Zero) + size * ratio
            key, size = (e * ratio, 0), size * log(scale)
        infinity[key] = infinity.get(key, S.Zero) + size
    lowest = _extreme(zero, _TERMS * ratio, sign, -1)
    highest = _extreme(infinity, kernel.beyond * ratio, sign, 1)
    if lowest is None or highest is None or sign(lowest - highest) in (0, -1):
        return None
    return -lowest, -highest


def _extreme(terms: dict[Term, Expr], end: Expr, sign: Sign, side: int) -> Expr | None:
    """The largest (``side=1``) or smallest exponent of a term that is not zero, ``end`` if none is."""
    best = end
    for (exponent, _), c in terms.items():
        if c is S.Zero or expand_log(c.expand()).expand() is S.Zero:
            continue
        order = sign(exponent - best)
        if order is None:
            return None
        if order == side:
            best = exponent
    return best
