"""From an expression in several positive variables to a sum of products."""
from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

from sympy import Dummy, Expr, Mul, Pow, Rational, S, Symbol, cos, cosh, exp, hyper, log, meijerg, sin, sinh

from ..gamma import GammaProduct
from ..kernels import rows
from ..kernels.elementary import COS, EXP, SIN
from ..kernels.general import hyper_transform, meijer_transform
from ..region import Facts
from .integrand import Product, Special
from .polynomial import Monomial, Polynomial, collected, read_monomial, read_polynomial, whole_power

MAX_TERMS = 40
Products = list[Product]


class Reader:
    """Reads one integrand; None stands for what is not in the table."""

    def __init__(self, variables: Sequence[Symbol], facts: Facts) -> None:
        self.variables = tuple(variables)
        self.facts = facts
        self.n = len(self.variables)
        self.one = Product.constant(S.One, self.n)

    def read(self, expr: Expr) -> Products | None:
        if not expr.has_free(*self.variables):
            return [Product.constant(expr, self.n)]
        single = read_monomial(expr, self.variables)
        if single is not None:
            return [Product(single.coefficient, single.exponents)]
        if expr.is_Mul:
            found: Products = [self.one]
            for a in expr.args:
                part = self.read(a)
                if part is None or len(part) * len(found) > MAX_TERMS:
                    return None
                found = [p.times(q) for p in found for q in part]
            return found
        if expr.is_Add:
            return self._sum(expr)
        if type(expr) is exp:
            return self._exponential(expr.args[0])
        if expr.is_Pow:
            return self._power(expr.base, expr.exp)
        rule = _RULES.get(type(expr))
        if rule is not None:
            return rule(self, expr)
        return self._row(expr)

    def _sum(self, expr: Expr) -> Products | None:
        poly = read_polynomial(expr, self.variables)
        if poly is not None and all(self._positive(c) for c, _ in poly):
            product = self.one.with_power(poly, S.NegativeOne, self.facts)
            return None if product is None else [product]
        found: Products = []
        for a in expr.args:
            part = self.read(a)
            if part is None or len(part) + len(found) > MAX_TERMS:
                return None
            found.extend(part)
        return found

    def _positive(self, c: Expr) -> bool:
        return bool(c.is_extended_real) and self.facts.sign(c) == 1

    # -- powers ------------------------------------------------------------------------------------------

    def _power(self, base: Expr, e: Expr) -> Products | None:
        variables = self.variables
        if e.has_free(*variables):
            return None if base.has_free(*variables) else self._exponential(e * log(base))
        if base.is_Pow and not base.exp.has_free(*variables):
            if not (e.is_integer or self._nonnegative(base.base)):
                return None
            return self._power(base.base, base.exp * e)
        if base.is_Mul:
            found: Products = [self.one]
            for a in base.args:
                if not (e.is_integer or self._nonnegative(a)):
                    return None
                part = self.read(Pow(a, e))
                if part is None or len(part) * len(found) > MAX_TERMS:
                    return None
                found = [p.times(q) for p in found for q in part]
            return found
        if type(base) is exp:
            return self._exponential(base.args[0] * e)
        if base.is_Add:
            poly = read_polynomial(base, variables)
            if poly is not None:
                product = self.one.with_power(poly, -e, self.facts)
                return None if product is None else [product]
        if type(base) is log:
            return self._logarithm(base, e)
        if e.is_Integer and 1 < e <= 4:
            part = self.read(base)
            if part is None or len(part) ** int(e) > MAX_TERMS:
                return None
            found = part
            for _ in range(int(e) - 1):
                found = [p.times(q) for p in found for q in part]
            return found
        return None

    def _nonnegative(self, expr: Expr) -> bool:
        if not expr.has_free(*self.variables):
            return self._positive(expr)
        if expr.is_Symbol:
            return True
        if expr.is_Add or expr.is_Mul:
            return all(self._nonnegative(a) for a in expr.args)
        if expr.is_Pow:
            return bool(expr.exp.is_real) and self._nonnegative(expr.base)
        return False

    # -- functions ---------------------------------------------------------------------------------------

    def _exponential(self, inner: Expr) -> Products | None:
        """``exp(inner)``: monomials together, whole and broken powers of sums as kernels of their own."""
        coefficient: Expr = S.One
        monomials: list[Monomial] = []
        specials: list[Special] = []
        for term in inner.expand(deep=False).args if inner.is_Add or (inner.is_Mul and _has_sum(inner)) else (inner,):
            if not isinstance(term, Expr):
                return None
            poly = read_polynomial(term, self.variables)
            if poly is None:
                argument = self.argument(-term)
                if argument is None:
                    return None
                poly, r = argument
                specials.append(_special("exp", EXP, poly, r, _exp_of, "DLMF 5.9.1"))
                continue
            for m in poly:
                if m.constant:
                    coefficient = coefficient * exp(m.coefficient)
                else:
                    monomials.append(Monomial(-m.coefficient, m.exponents))
        return [replace(self.one, coefficient=coefficient, exponent=collected(monomials), specials=tuple(specials))]

    def argument(self, expr: Expr) -> tuple[Polynomial, Expr] | None:
        """``(poly, r)`` with expr = poly**r, all coefficients of poly positive.

        A monomial in front joins the sum: x*y/(x + y) is (1/x + 1/y)**(-1).
        """
        poly = read_polynomial(expr, self.variables)
        r: Expr = S.One
        if poly is None:
            outside: list[Expr] = []
            inside: Polynomial | None = None
            for a in Mul.make_args(expr):
                if a.is_Pow and a.base.is_Add and inside is None and a.exp.is_Rational:
                    inside, r = read_polynomial(a.base, self.variables), a.exp
                    if inside is None:
                        return None
                else:
                    outside.append(a)
            front = read_monomial(Mul(*outside), self.variables)
            if inside is None or front is None or not self._positive(front.coefficient):
                return None
            front = front.power(1 / r)
            poly = collected(m.times(front) for m in inside)
        if not poly or not all(self._positive(c) for c, _ in poly) or all(m.constant for m in poly):
            return None
        return poly, r

    def _row(self, expr: Expr) -> Products | None:
        row = rows().get(type(expr))
        if row is None or row.turn is not S.Zero:
            return None
        args = list(expr.args)
        place = row.argument % len(args)
        inner = args[place]
        if any(a.has_free(*self.variables) for i, a in enumerate(args) if i != place):
            return None
        argument = self.argument(row.sign * inner)
        if argument is None:
            return None
        poly, r = argument
        orders = [a for i, a in enumerate(args) if i != place]
        product = row.transform(*orders)
        domain = tuple(d for d in row.domain(*orders) if self.facts.sign(d) != 1)
        if any(self.facts.sign(d) in (0, -1) for d in domain):
            return None
        function, sign = type(expr), row.sign

        def build(z: Expr) -> Expr:
            return function(*(sign * z if i == place else a for i, a in enumerate(args)))

        special = _special(row.name, product, poly, r, build, row.source, domain)
        return [replace(self.one, specials=(special,))]

    def general(self, expr: Expr, inner: Expr, product: GammaProduct | None, source: str) -> Products | None:
        argument = self.argument(inner)
        if argument is None or product is None:
            return None
        poly, r = argument
        z0 = expr.args[-1]

        def build(z: Expr) -> Expr:
            return expr.func(*expr.args[:-1], z if inner == z0 else -z)

        return [replace(self.one, specials=(_special(type(expr).__name__, product, poly, r, build, source),))]

    def wave(self, expr: Expr, product: GammaProduct, function: Callable[[Expr], Expr]) -> Products | None:
        argument = self.argument(expr.args[0])
        if argument is None:
            return None
        special = _special(function.__name__, product, *argument, function, "DLMF 5.9.6, 5.9.7")
        return [replace(self.one, specials=(special,))]

    def hyperbolic(self, expr: Expr, sign: int) -> Products | None:
        up, down = self._exponential(expr.args[0]), self._exponential(-expr.args[0])
        if up is None or down is None:
            return None
        return [replace(p, coefficient=p.coefficient * s / 2) for p, s in ((up[0], 1), (down[0], sign))]

    def _logarithm(self, expr: Expr, k: Expr = S.One) -> Products | None:
        """``log(m)**k`` as the k-th derivative of ``m**eps`` at eps = 0."""
        if not (k.is_Integer and 0 < k <= 4):
            return None
        poly = read_polynomial(expr.args[0], self.variables)
        if poly is None or not all(self._positive(c) for c, _ in poly):
            return None
        eps = Dummy("eps", real=True)
        product = self.one.with_power(poly, -eps, self.facts)
        return None if product is None else [replace(product, tilts=((eps, int(k)),))]


def _has_sum(expr: Expr) -> bool:
    return any(a.is_Add for a in expr.args)


def _exp_of(z: Expr) -> Expr:
    return exp(-z)


def _special(
    name: str,
    product: GammaProduct,
    poly: Polynomial,
    r: Expr,
    build: Callable[[Expr], Expr],
    source: str,
    domain: tuple[Expr, ...] = (),
) -> Special:
    """The kernel ``z -> build(z**r)`` at the argument ``poly``."""
    if r is S.One:
        return Special(name, product, poly, build, source, domain)
    if r.is_Integer:
        whole = whole_power(poly, int(r))
        if whole is not None and len(poly) == 1:
            return Special(name, product, whole, build, source, domain)
    turned = product.rescaled(Rational(1) / r)
    turned = replace(turned, constant=turned.constant / abs(r))
    return Special(name, turned, poly, lambda z: build(Pow(z, r)), source, domain)


def _hyper(reader: Reader, expr: Expr) -> Products | None:
    ap, bq, z = expr.args
    return reader.general(expr, -z, hyper_transform(tuple(ap), tuple(bq)), "DLMF 16.5.1")


def _meijer(reader: Reader, expr: Expr) -> Products | None:
    return reader.general(expr, expr.argument, meijer_transform(expr), "DLMF 16.17.1")


_RULES: dict[type, Callable[[Reader, Expr], Products | None]] = {
    sin: lambda reader, e: reader.wave(e, SIN, sin),
    cos: lambda reader, e: reader.wave(e, COS, cos),
    sinh: lambda reader, e: reader.hyperbolic(e, -1),
    cosh: lambda reader, e: reader.hyperbolic(e, 1),
    log: lambda reader, e: reader._logarithm(e),
    hyper: _hyper,
    meijerg: _meijer,
}


def read_products(expr: Expr, variables: Sequence[Symbol], facts: Facts) -> Products | None:
    """Write an expression as a sum of products for positive variables.

    Examples
    --------
    >>> from sympy import exp, symbols
    >>> from sympy_mellin_ext.orthant.reader import read_products
    >>> from sympy_mellin_ext.region import Facts
    >>> x, y = symbols('x y', positive=True)
    >>> product, = read_products(x*exp(-x*y)*(x + y)**-3, (x, y), Facts())
    >>> product.powers, product.index
    ((1, -3), 0)
    """
    products = Reader(variables, facts).read(expr)
    return None if products is None else [p.logarithms_alone() for p in products]
