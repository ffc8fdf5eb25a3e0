"""Coefficients of power series, read into Gamma functions.

Sources: DLMF 5.2(iii) (Pochhammer symbols), 5.5.3 (reflection), 5.4.2 (double factorial), 1.2.6 (binomials),
25.6.2 (Bernoulli numbers); growth of the remaining factors: DLMF 25.10, 25.11.43, 5.11.2, 25.12.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

from sympy import (
    Add,
    Expr,
    Integer,
    Mul,
    Poly,
    PolynomialError,
    Pow,
    S,
    Symbol,
    bernoulli,
    beta,
    binomial,
    catalan,
    cos,
    dirichlet_eta,
    exp,
    factorial,
    factorial2,
    ff,
    gamma,
    harmonic,
    log,
    polygamma,
    polylog,
    rf,
    sin,
    sqrt,
    together,
    zeta,
)

from ..gamma import Factor
from ..gamma.product import cancel

# A Gamma to a higher power than this is no coefficient that a handbook holds.
_HIGHEST_POWER = 12


class Extra(NamedTuple):
    """A factor that no Gamma product holds, analytic and of finite type on a right half plane.

    ``type`` bounds it by ``exp(type*abs(Im n))`` up to a power of ``abs(n)``; it is analytic for
    ``Re n > -right`` (everywhere if ``right`` is None).
    """

    value: Expr
    type: Expr
    right: Expr | None


@dataclass(frozen=True)
class CoefficientForm:
    """``constant * base**n * prod Gamma(shift + slope*n)**power * prod extras``."""

    constant: Expr
    base: Expr
    factors: tuple[Factor, ...]
    extras: tuple[Extra, ...] = ()


def linear(expr: Expr, n: Symbol) -> tuple[Expr, Expr] | None:
    """``(shift, slope)`` of an expression linear in ``n``, else None."""
    if expr == n:
        return S.Zero, S.One
    if expr.is_Mul or expr.is_Pow:
        expr = expr.expand()
    shift, slope = [], []
    for term in Add.make_args(expr):
        if not term.has_free(n):
            shift.append(term)
            continue
        factors = [a for a in Mul.make_args(term) if a != n]
        if len(factors) != len(Mul.make_args(term)) - 1 or any(a.has_free(n) for a in factors):
            return None
        slope.append(Mul(*factors))
    return Add(*shift), Add(*slope)


class _Reader:
    """Collects the factors of one coefficient."""

    def __init__(self, n: Symbol) -> None:
        self.n = n
        self.constant: list[Expr] = []
        self.base: list[Expr] = []
        self.factors: list[Factor] = []
        self.extras: list[Extra] = []
        self.culprit: Expr | None = None

    def form(self) -> CoefficientForm:
        return CoefficientForm(
            Mul(*self.constant), Mul(*self.base), cancel(tuple(self.factors)), tuple(self.extras)
        )

    def take(self, node: Expr, e: int = 1) -> bool:
        """Multiply by ``node**e``; False if the node is of no known kind."""
        if not node.has_free(self.n):
            self.constant.append(Pow(node, e))
            return True
        if node.is_Mul:
            return all(self.take(a, e) for a in node.args)
        if node == self.n:
            return self.root(S.Zero, S.One, e)
        if isinstance(node, exp):
            return self.power(S.Exp1, node.exp, e)
        if node.is_Pow:
            return self.power(node.base, node.exp, e)
        if node.is_Add:
            return self.sum(node, e)
        rule = _RULES.get(type(node))
        return rule is not None and rule(self, node, e)

    def gamma(self, argument: Expr, e: int) -> bool:
        """``Gamma(argument)**e``, turned so that it grows as little as its values at integers allow."""
        if not argument.has_free(self.n):
            self.constant.append(Pow(gamma(argument), e))
            return True
        line = linear(argument, self.n)
        if line is None or abs(e) > _HIGHEST_POWER:
            return False
        shift, slope = line
        if not (slope.is_Rational or slope.is_positive or slope.is_negative):
            return False
        if slope.is_negative:
            if slope.is_Integer:
                # Gamma(a-A*n) = Gamma(a)*Gamma(1-a)*(-1)**(A*n)/Gamma(1-a+A*n), which has no poles for n >= 0
                if shift.is_integer is not False and (shift.is_number or shift.is_integer):
                    self.culprit = Pow(gamma(argument), e)
                    return False
                self.constant.append(Pow(gamma(shift) * gamma(1 - shift), e))
                self.base.append(S.NegativeOne**slope)
                return self.gamma(1 - argument, -e)
            if e > 0:
                # poles at positive n that are no poles of the coefficients
                self.culprit = Pow(gamma(argument), e)
                return False
        self.factors.extend([Factor(shift, slope, 1 if e > 0 else -1)] * abs(e))
        return True

    def quotient(self, up: tuple[Expr, ...], down: tuple[Expr, ...], e: int) -> bool:
        return all(self.gamma(a, e) for a in up) and all(self.gamma(a, -e) for a in down)

    def root(self, shift: Expr, slope: Expr, e: int) -> bool:
        """``(shift + slope*n)**e`` as a quotient of Gammas."""
        a = shift / slope
        self.constant.append(Pow(slope, e))
        return self.quotient((self.n + a + 1,), (self.n + a,), e)

    def power(self, base: Expr, exponent: Expr, e: int) -> bool:
        if not base.has_free(self.n):
            line = linear(exponent, self.n)
            if line is None:
                return False
            self.constant.append(Pow(base, e * line[0]))
            self.base.append(Pow(base, e * line[1]))
            return True
        if exponent.is_Integer:
            return abs(exponent) <= _HIGHEST_POWER and self.take(base, e * int(exponent))
        line = linear(base, self.n)
        if exponent.has_free(self.n) or line is None or not line[1].is_positive:
            return False
        return self.extra(Pow(base, exponent), e, S.Zero, line[0] / line[1])

    def extra(self, value: Expr, e: int, type_: Expr, right: Expr | None) -> bool:
        # the reciprocal of a zeta function or a polygamma has poles that nobody knows
        if e < 0:
            return False
        self.extras.append(Extra(value**e, e * type_, right))
        return True

    def sum(self, node: Expr, e: int) -> bool:
        """A polynomial in ``n``, over its linear factors; or a sum of bounded factors."""
        line = linear(node, self.n)
        if line is not None:
            return self.root(*line, e)
        whole = together(node)
        if not whole.is_Add:
            return self.take(whole, e)
        try:
            poly = Poly(whole, self.n)
            polynomial = not any(c.has_free(self.n) for c in poly.coeffs())
        except PolynomialError:
            polynomial = False
        if polynomial:
            return self.polynomial(poly, e)
        rights: list[Expr] = []
        for term in node.args:
            reader = _Reader(self.n)
            if not reader.take(term) or reader.factors or Mul(*reader.base) is not S.One:
                return False
            for extra in reader.extras:
                if extra.type is not S.Zero:
                    return False
                rights += [] if extra.right is None else [extra.right]
        if not all(r.is_number for r in rights):
            return False
        return self.extra(node, e, S.Zero, min(rights) if rights else None)

    def polynomial(self, poly: Poly, e: int) -> bool:
        content, parts = poly.factor_list()
        self.constant.append(Pow(content, e))
        for part, multiplicity in parts:
            power = e * multiplicity
            if part.degree() == 1:
                slope, shift = part.all_coeffs()
                done = self.root(shift, slope, power)
            elif part.degree() == 2:
                a, b, c = part.all_coeffs()
                middle, gap = b / (2 * a), sqrt(b**2 - 4 * a * c) / (2 * a)
                self.constant.append(Pow(a, power))
                done = self.root(middle + gap, S.One, power) and self.root(middle - gap, S.One, power)
            else:
                done = False
            if not done:
                return False
        return True

    def wave(self, phase: Expr, e: int) -> bool:
        """``sin(pi*phase)**e`` by reflection, or as a factor of finite type."""
        line = linear(phase, self.n)
        if line is None or e < 0:
            return False
        shift, slope = line
        if slope.is_Integer:
            self.constant.append(sin(S.Pi * shift) ** e)
            self.base.append(S.NegativeOne ** (e * slope))
            return True
        if slope.is_Rational:
            self.constant.append(S.Pi**e)
            return self.quotient((), (phase, 1 - phase), e)
        if not slope.is_extended_real:
            return False
        return self.extra(sin(S.Pi * phase), e, S.Pi * abs(slope), None)


def _binomial(reader: _Reader, node: Expr, e: int) -> bool:
    upper, lower = node.args
    if not upper.has_free(reader.n):
        # (-1)**k*(-upper)_k/k!: regular for every k, and terminating for a natural upper
        return (
            reader.take(S.NegativeOne**lower, e)
            and _rising(reader, rf(-upper, lower, evaluate=False), e)
            and (reader.gamma(lower + 1, -e))
        )
    return reader.quotient((upper + 1,), (lower + 1, upper - lower + 1), e)


def _rising(reader: _Reader, node: Expr, e: int) -> bool:
    a, k = node.args
    if not a.has_free(reader.n) and a.is_integer and not a.is_positive:
        reader.culprit = Pow(node, e)
        return False
    return reader.quotient((a + k,), (a,), e)


def _falling(reader: _Reader, node: Expr, e: int) -> bool:
    a, k = node.args
    if a.has_free(reader.n):
        return reader.quotient((a + 1,), (a - k + 1,), e)
    return reader.take(S.NegativeOne**k, e) and _rising(reader, rf(-a, k, evaluate=False), e)


def _double_factorial(reader: _Reader, node: Expr, e: int) -> bool:
    line = linear(node.args[0], reader.n)
    if line is None or not line[1].is_Integer or line[1] % 2 or not line[0].is_Integer:
        return False
    half = node.args[0] / 2
    if line[0] % 2:
        return reader.take(2 ** (half + S.Half) / sqrt(S.Pi), e) and reader.gamma(half + 1, e)
    return reader.take(2**half, e) and reader.gamma(half + 1, e)


def _zeta(reader: _Reader, node: Expr, e: int) -> bool:
    """zeta(k + A*n), also Hurwitz: bounded for ``Re(k + A*n) > 1 + delta``."""
    line = linear(node.args[0], reader.n)
    if line is None or not line[1].is_positive or any(a.has_free(reader.n) for a in node.args[1:]):
        return False
    if any(not a.is_positive for a in node.args[1:]):
        return False
    return reader.extra(node, e, S.Zero, (line[0] - 1) / line[1])


def _entire_dirichlet(reader: _Reader, node: Expr, e: int) -> bool:
    """dirichlet_eta(k + A*n) and polylog(k + A*n, z): bounded on every right half plane of convergence."""
    line = linear(node.args[0], reader.n)
    if line is None or not line[1].is_positive:
        return False
    if isinstance(node, polylog):
        z = node.args[1]
        if z.has_free(reader.n) or not z.is_number or not abs(z) < 1:
            return False
        return reader.extra(node, e, S.Zero, None)
    return reader.extra(node, e, S.Zero, line[0] / line[1])


def _polygamma(reader: _Reader, node: Expr, e: int) -> bool:
    order, argument = node.args if isinstance(node, polygamma) else (S.Zero, node.args[0] + 1)
    line = linear(argument, reader.n)
    if line is None or order.has_free(reader.n) or not line[1].is_positive or len(node.args) > 2:
        return False
    if isinstance(node, harmonic) and len(node.args) > 1:
        return False
    return reader.extra(node, e, S.Zero, line[0] / line[1])


def _log(reader: _Reader, node: Expr, e: int) -> bool:
    line = linear(node.args[0], reader.n)
    if line is None or not line[1].is_positive:
        return False
    return reader.extra(node, e, S.Zero, line[0] / line[1])


def _bernoulli(reader: _Reader, node: Expr, e: int) -> bool:
    """B(2k) = (-1)**(k+1)*2*(2k)!*zeta(2k)/(2*pi)**(2k), for even indices from 2 on."""
    line = linear(node.args[0], reader.n)
    if len(node.args) > 1 or line is None or not all(p.is_Integer and p % 2 == 0 and p > 0 for p in line):
        return False
    index = node.args[0]
    return (
        reader.take(-2 * S.NegativeOne ** (index / 2) / (2 * S.Pi) ** index, e)
        and reader.gamma(index + 1, e)
        and _zeta(reader, zeta(index), e)
    )


_RULES: dict[type, Callable[[_Reader, Expr, int], bool]] = {
    gamma: lambda r, f, e: r.gamma(f.args[0], e),
    factorial: lambda r, f, e: r.gamma(f.args[0] + 1, e),
    factorial2: _double_factorial,
    binomial: _binomial,
    catalan: lambda r, f, e: r.quotient((2 * f.args[0] + 1,), (f.args[0] + 1, f.args[0] + 2), e),
    rf: _rising,
    ff: _falling,
    beta: lambda r, f, e: r.quotient(f.args[:2], (f.args[0] + f.args[1],), e),
    sin: lambda r, f, e: r.wave((f.args[0] / S.Pi).expand(), e),
    cos: lambda r, f, e: r.wave((f.args[0] / S.Pi).expand() + S.Half, e),
    zeta: _zeta,
    dirichlet_eta: _entire_dirichlet,
    polylog: _entire_dirichlet,
    polygamma: _polygamma,
    harmonic: _polygamma,
    log: _log,
    bernoulli: _bernoulli,
}


def gamma_form(c: Expr, n: Symbol) -> CoefficientForm | None:
    """The coefficient ``c(n)`` as constant, power and Gamma functions, or None.

    Only the values at ``n = 0, 1, 2, ...`` matter: Gammas that fall with ``n`` are reflected, and
    ``sin(pi*n + c)`` becomes ``(-1)**n*sin(c)``, so that what grows without need is gone.

    Parameters
    ----------
    c : Expr
        Factorials, binomials, Pochhammer symbols, Gammas of ``alpha*n + beta`` (alpha rational or
        positive), powers ``lam**n``, rational functions of ``n``, zeta, polygamma, sine and cosine.
    n : Symbol

    Returns
    -------
    CoefficientForm or None

    Examples
    --------
    >>> from sympy import binomial, symbols
    >>> from sympy_mellin_ext.series import gamma_form
    >>> n = symbols('n')
    >>> form = gamma_form(binomial(2*n, n)/4**n, n)
    >>> form.base, [tuple(f) for f in form.factors]
    (1/4, [(1, 2, 1), (1, 1, -1), (1, 1, -1)])
    """
    reader = _Reader(n)
    return reader.form() if reader.take(c) else None


def form_or_culprit(c: Expr, n: Symbol) -> tuple[CoefficientForm | None, Expr | None]:
    """As `gamma_form`; on refusal also the factor without admissible continuation, where that is why."""
    reader = _Reader(n)
    return (reader.form(), None) if reader.take(c) else (None, reader.culprit)


def term_ratio(c: Expr, n: Symbol) -> Expr | None:
    """``c(n+1)/c(n)`` as a product of linear factors, or None if it is no rational function of ``n``.

    Examples
    --------
    >>> from sympy import binomial, symbols
    >>> from sympy_mellin_ext.series import term_ratio
    >>> n, a = symbols('n a')
    >>> term_ratio(binomial(a, n), n)
    -(-a + n)/(n + 1)
    """
    form = gamma_form(c, n)
    if form is None or form.extras:
        return None
    parts = [form.base]
    for shift, slope, power in form.factors:
        if not slope.is_Integer:
            return None
        start = shift + slope * n
        rungs = range(int(slope)) if slope > 0 else range(int(slope), 0)
        ratio = Mul(*(start + j for j in rungs))
        parts.append(Pow(ratio, Integer(power if slope > 0 else -power)))
    return Mul(*parts)
