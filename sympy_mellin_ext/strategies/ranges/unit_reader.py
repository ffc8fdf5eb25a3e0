"""Reading an integrand on (0, 1), where ``1 - x**r`` is positive and counts as a factor of its own."""

from __future__ import annotations

from collections.abc import Callable
from math import gcd

from sympy import (
    Add,
    Dummy,
    Expr,
    Mul,
    Poly,
    Pow,
    Rational,
    S,
    Symbol,
    acos,
    acosh,
    acoth,
    asech,
    asin,
    atanh,
    besseli,
    cos,
    cosh,
    cyclotomic_poly,
    divisors,
    elliptic_e,
    elliptic_k,
    exp,
    factor_list,
    gamma,
    hyper,
    log,
    mobius,
    pi,
    sin,
    sinh,
    together,
    totient,
)
from sympy.logic.boolalg import And, Boolean

from ...gamma import GammaProduct
from ...kernels.elementary import LOG1P
from ...kernels.elementary import power as power_transform
from ...kernels.truncated import ACOS, ASECH, STEP, unit_power
from ...matching.monomials import monomial, monomials
from ...matching.reader import MAX_TERMS, Reader
from ...matching.term import Kernel
from ...matching.waves import Draft
from ...region import Facts

_LARGEST_DEGREE = 12
_LARGEST_ORDER = 43
_BETA = "DLMF 5.12.1"
Drafts = list[Draft]


class UnitReader(Reader):
    """A reader for 0 < x < 1.

    It adds the kernels 'unit power' (``(1 - x**ratio)**e``, argument e), 'unit log' (``log(1 - x**ratio)``),
    'unit acos' and 'unit asech', and lets kernels have a negative scale where no singular point comes to lie
    inside (0, 1).  Several denominators stay a product unless ``fractions`` is set: then they are split.
    """

    def __init__(self, x: Symbol, facts: Facts, fractions: bool = False) -> None:
        super().__init__(x, facts)
        self.fractions = fractions

    def read(self, expr: Expr) -> Drafts | None:
        if type(expr) in (cos, sin) and expr.has(asin, acos):
            turned = (_cosine if type(expr) is cos else _sine)(expr.args[0])
            return None if turned is None else self.read(turned)
        rule = _UNIT_RULES.get(type(expr))
        if rule is not None and expr.has_free(self.x):
            changed = rule(*expr.args)
            return None if changed is None else self.read(changed)
        if type(expr) is log and expr.has_free(self.x):
            return self._logarithm(expr.args[0])
        if type(expr) in (acos, acosh, asech):
            return self._inverse_cosine(expr)
        return super().read(expr)

    def _product(self, expr: Expr) -> Drafts | None:
        if self.fractions:
            return super()._product(expr)
        drafts: Drafts = [Draft()]
        for a in expr.args:
            part = self.read(a)
            if part is None or len(part) * len(drafts) > MAX_TERMS:
                return None
            drafts = [d.times(p) for d in drafts for p in part]
        return drafts

    def general(
        self, expr: Expr, inner: Expr, transform: Callable[[], GammaProduct | None], source: str, turn: int
    ) -> Drafts | None:
        single = monomial(inner, self.x)
        if single is None or self.facts.sign(single[1]) in (None, 0):
            return None
        product = transform()
        if product is None:
            return None
        kernel = self.kernel(type(expr).__name__, product, turn * single[0], single[1], source)
        return None if kernel is None else [Draft(kernels=(kernel,))]

    def _unit_power(self, ratio: Expr, e: Expr) -> Drafts:
        kernel = Kernel("unit power", unit_power(e + 1), ratio, None, S.true, True, _BETA, (e,))
        return [Draft(kernels=(kernel,))]

    def _inverse_cosine(self, expr: Expr) -> Drafts | None:
        """acos of ``x**r`` and acosh of its inverse."""
        parts = monomial(expr.args[0], self.x)
        if parts is None or parts[0] is not S.One:
            return None
        r = -parts[1] if type(expr) is acosh else parts[1]
        if self.facts.sign(r) != 1:
            return None
        name, product = ("unit acos", ACOS) if type(expr) is acos else ("unit asech", ASECH)
        return [Draft(kernels=(Kernel(name, product, r, None, S.true, True, _BETA),))]

    # -- denominators with roots on the unit circle ------------------------------------------------

    def _sum_power(self, base: Add, exponent: Expr) -> Drafts | None:
        if exponent.is_Integer and exponent < 0:
            parts = monomials(base, self.x)
            if parts is not None and len(parts) > 2:
                found = self._circle(parts, exponent)
                if found is not None:
                    return found
        return super()._sum_power(base, exponent)

    def _circle(self, parts: list[tuple[Expr, Expr]], exponent: Expr) -> Drafts | None:
        """Products of cyclotomic polynomials: ``Phi_n(y) = prod (1 - y**d)**mu(n/d)``."""
        lowest = parts[0][1]
        for _, p in parts:
            if self.facts.sign(p - lowest) == -1:
                lowest = p
        steps = [(p - lowest).expand() for _, p in parts]
        first = next(q for q in steps if q is not S.Zero)
        multiples = [q / first for q in steps]
        if not all(m.is_Rational and m >= 0 for m in multiples) or not all(c.is_Rational for c, _ in parts):
            return None
        unit = Rational(gcd(*(int(m * 60) for m in multiples)), 60)
        if any((m * 60).q != 1 for m in multiples) or max(multiples) / unit > _LARGEST_DEGREE:
            return None
        y = Dummy("y")
        content, factors = factor_list(
            Poly(Add(*(c * y ** (m / unit) for (c, _), m in zip(parts, multiples, strict=True))), y)
        )
        front: Expr = content
        powers: dict[int, Expr] = {}
        for factor, k in factors:
            order = _cyclotomic_order(factor, y)
            if order is None:
                return None
            if order == 1:
                front = -front if k % 2 else front
            for d in divisors(order):
                mu = int(mobius(order // d))
                if mu:
                    powers[d] = powers.get(d, S.Zero) + mu * k
        draft = Draft(coefficient=Pow(front, exponent), power=lowest * exponent)
        for d, e in sorted(powers.items()):
            if e:
                draft = draft.times(self._unit_power(first * unit * d, e * exponent)[0])
        return [draft]

    # -- binomials ---------------------------------------------------------------------------------

    def _binomial_power(self, parts: list[tuple[Expr, Expr]], exponent: Expr) -> Drafts | None:
        (c0, p0), (c1, p1) = parts
        gap = self.facts.sign(p1 - p0)
        if gap in (None, 0):
            return None
        if gap == -1:
            (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
        ratio = (p1 - p0).expand()
        if not exponent.is_integer and self.facts.sign(c0) != 1:
            return super()._binomial_power(parts, exponent)
        front = Draft(coefficient=Pow(c0, exponent), power=p0 * exponent)
        if _opposite(c0, c1):
            return [front.times(d) for d in self._unit_power(ratio, exponent)]
        sign0, sign1 = self.facts.sign(c0), self.facts.sign(c1)
        if sign0 is None or sign1 is None or sign0 * sign1 != -1:
            return super()._binomial_power(parts, exponent)
        kernel = self.kernel("power", power_transform(-exponent), c1 / c0, ratio, "DLMF 5.12.3", (-exponent,))
        return None if kernel is None else [front.times(Draft(kernels=(kernel,)))]

    # -- logarithms --------------------------------------------------------------------------------

    def _logarithm(self, inner: Expr) -> Drafts | None:
        """``log(inner)``: products of positive factors are sums, ``log(1 - x**r)`` is a kernel of its own."""
        single = monomial(inner, self.x)
        if single is not None:
            return self._log_monomial(*single)
        kind = type(inner)
        if kind is Mul:
            drafts: Drafts = []
            for a in inner.args:
                part = self._logarithm(a) if self.nonnegative(a) else None
                if part is None:
                    return None
                drafts.extend(part)
            return drafts
        if kind is Pow and not inner.exp.has_free(self.x) and self.nonnegative(inner.base):
            part = self._logarithm(inner.base)
            return None if part is None else [d.scaled(inner.exp) for d in part]
        if kind is exp and self.real(inner.args[0]):
            return self.read(inner.args[0])
        if kind is Add:
            return self._log_sum(inner)
        return None

    def _log_monomial(self, c: Expr, p: Expr) -> Drafts | None:
        if self.facts.sign(c) != 1:
            return None
        moving = [Draft(coefficient=p, logs=1)] if p is not S.Zero else []
        return moving if c is S.One else [*moving, Draft(coefficient=log(c))]

    def _log_sum(self, inner: Add) -> Drafts | None:
        parts = monomials(inner, self.x)
        if parts is None:
            fraction = together(inner)
            return self._logarithm(fraction) if type(fraction) is Mul else None
        if len(parts) == 3:
            return self._log_circle(parts)
        if len(parts) != 2:
            return None
        (c0, p0), (c1, p1) = parts
        gap = self.facts.sign(p1 - p0)
        if gap == -1:
            (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
        if gap not in (1, -1) or self.facts.sign(c0) != 1:
            return None
        ratio = (p1 - p0).expand()
        if _opposite(c0, c1):
            kernel: Kernel | None = _unit_log(ratio)
        else:
            kernel = self.kernel("log1p", LOG1P, c1 / c0, ratio, "from memory: Gradshteyn-Ryzhik 4.293.3")
        front = self._log_monomial(c0, p0)
        if kernel is None or front is None:
            return None
        return [Draft(kernels=(kernel,)), *front]

    def _log_circle(self, parts: list[tuple[Expr, Expr]]) -> Drafts | None:
        """Logarithms of cyclotomic polynomials: ``sum mu(n/d)*log(1 - y**d)``."""
        found = self._circle(parts, S.One)
        if found is None or self.facts.sign(found[0].coefficient) != 1:
            return None
        front = self._log_monomial(found[0].coefficient, found[0].power) or []
        return [Draft(coefficient=k.arguments[0], kernels=(_unit_log(k.ratio),)) for k in found[0].kernels] + front

    # -- scales ------------------------------------------------------------------------------------

    def kernel(
        self,
        name: str,
        product: GammaProduct,
        scale: Expr,
        ratio: Expr,
        source: str,
        arguments: tuple[Expr, ...] = (),
        condition: Boolean = S.true,
    ) -> Kernel | None:
        """As on the half line for positive scales; others where the series at 0 reaches to x = 1."""
        known = self.facts.sign(scale) if scale.is_extended_real else None
        if known == 1:
            return super().kernel(name, product, scale, ratio, source, arguments, condition)
        if known == 0 or self.facts.sign(ratio) != 1:
            return None
        if product.delta < 0:
            return None
        if product.delta == 0:
            # singular where x**ratio = 1/abs(scale): may lie at x = 1, not inside
            if not scale.is_extended_real:
                return None
            room = self.facts.sign(1 + scale)
            if room == -1:
                return None
            if room is None or (room == 0 and known is None):
                condition = And(condition, scale > -1)
        return Kernel(name, product.with_scale(scale), ratio, None, condition, True, source, arguments)

    def nonnegative(self, expr: Expr) -> bool:
        if type(expr) is Add and len(expr.args) == 2:
            parts = monomials(expr, self.x)
            if parts is not None and len(parts) == 2:
                (c0, p0), (c1, p1) = parts if self.facts.sign(parts[1][1] - parts[0][1]) == 1 else parts[::-1]
                gap = self.facts.sign(p1 - p0)
                if gap == 1 and self.facts.sign(c0) == 1 and self.facts.sign((c0 + c1).expand()) in (0, 1):
                    return True
        if type(expr) is log and expr.args[0].is_Add:
            return False
        return super().nonnegative(expr)


def _opposite(c0: Expr, c1: Expr) -> bool:
    return (c0 + c1).expand() is S.Zero


def _unit_log(ratio: Expr) -> Kernel:
    return Kernel("unit log", STEP, ratio, None, S.true, True, _BETA)


def _cyclotomic_order(factor: Poly, y: Symbol) -> int | None:
    """The n with ``factor = +-Phi_n``."""
    degree = factor.degree()
    for n in range(1, _LARGEST_ORDER):
        if totient(n) == degree:
            phi = cyclotomic_poly(n, y, polys=True)
            if phi == factor or phi == -factor:
                return n
    return None


def _cosine(z: Expr) -> Expr | None:
    """``cos(k*asin(y))`` and ``cos(k*acos(y))``, DLMF 15.4.12."""
    for inverse in (asin, acos):
        k, rest = z.as_independent(inverse, as_Add=False)
        if type(rest) is inverse:
            y = rest.args[0]
            even = hyper([k / 2, -k / 2], [S.Half], y**2)
            if inverse is asin:
                return even
            odd = k * y * hyper([(1 + k) / 2, (1 - k) / 2], [3 * S.Half], y**2)
            return cos(pi * k / 2) * even + sin(pi * k / 2) * odd
    return None


def _sine(z: Expr) -> Expr | None:
    """``sin(k*asin(y))``, DLMF 15.4.16."""
    k, rest = z.as_independent(asin, as_Add=False)
    if type(rest) is asin:
        y = rest.args[0]
        return k * y * hyper([(1 + k) / 2, (1 - k) / 2], [3 * S.Half], y**2)
    return None


_UNIT_RULES: dict[type, Callable[..., Expr | None]] = {
    # DLMF 4.37.24, 19.5.1, 19.5.2, 10.39.9
    asin: lambda z: pi / 2 - acos(z),
    atanh: lambda z: (log(1 + z) - log(1 - z)) / 2,
    acoth: lambda z: (log(1 + 1 / z) - log(1 - 1 / z)) / 2,
    cosh: lambda z: (exp(z) + exp(-z)) / 2,
    sinh: lambda z: (exp(z) - exp(-z)) / 2,
    elliptic_k: lambda m: pi / 2 * hyper([S.Half, S.Half], [1], m),
    elliptic_e: lambda m: pi / 2 * hyper([-S.Half, S.Half], [1], m),
    besseli: lambda nu, z: (z / 2) ** nu / gamma(nu + 1) * hyper([], [nu + 1], z**2 / 4),
}
