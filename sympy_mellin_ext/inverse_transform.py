"""From a transform and its strip back to the function.

The strip says on which side of the contour each pole lies, and so which function the transform belongs to.

Source: DLMF 1.14.35 (inversion), 5.5.3 (reflection), 16.17.1.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from sympy import (
    Add,
    Expr,
    I,
    Mul,
    Pow,
    S,
    Symbol,
    arg,
    cos,
    cot,
    csc,
    exp,
    factorial,
    gamma,
    hyper,
    log,
    meijerg,
    pi,
    roots,
    sec,
    sin,
    sympify,
    tan,
)

from .arguments import Given, expression, relations, symbol
from .expansions.arithmetic import NotMeromorphic, vanishes
from .expansions.poles import in_gammas, principal_part
from .expansions.poles import side as side_of_strip
from .gamma import Factor, GammaProduct
from .gamma.product import cancel
from .region import Facts, real_part

# A Gamma that has more poles on the wrong side of the strip is left alone.
_MOST_MOVED = 12


def inverse_transform(
    G: GammaProduct | Expr, s: Symbol, x: Symbol, strip: tuple[Any, Any], given: Given = ()
) -> Expr | None:
    """The function ``f(x)``, x > 0, whose Mellin transform is ``G`` on a strip.

    Parameters
    ----------
    G : GammaProduct or Expr
        Gammas, Beta functions, powers of constants, trigonometric functions of ``s`` times pi, rational
        functions of s, and sums of products of these.
    s, x : Symbol
    strip : tuple (lower, upper)
        ``lower < Re s < upper``, free of poles.  A GammaProduct is taken apart and put together for this strip.
    given : relation or iterable of relations
        What the parameters are known to satisfy.

    Returns
    -------
    Expr or None
        A Piecewise where the function is not analytic at one point.  None where G is no transform of a
        function on this strip, or of none with a known form.

    Raises
    ------
    ValueError
        If a pole of G lies inside the strip, or the strip is empty.
    TypeError
        For malformed arguments.

    Examples
    --------
    >>> from sympy import gamma, oo, symbols
    >>> from sympy_mellin_ext import inverse_transform
    >>> s = symbols('s')
    >>> x = symbols('x', positive=True)
    >>> inverse_transform(gamma(s), s, x, (0, oo))
    exp(-x)
    >>> inverse_transform(gamma(s), s, x, (-1, 0))
    -1 + exp(-x)
    """
    symbol(s, "s"), symbol(x, "x")
    facts = Facts(relations(given))
    lower, upper = (expression(sympify(b), "a bound of the strip") for b in strip)
    if lower is not S.NegativeInfinity and upper is not S.Infinity and facts.sign(lower - upper) in (0, 1):
        raise ValueError(f"the strip ({lower}, {upper}) is empty")
    if isinstance(G, GammaProduct):
        G = G.as_expr(s)
    G = expression(G, "G")
    if G.has_free(x):
        raise ValueError(f"G must be free of {x}")
    return _inverse(_distributed(G, s), s, x, lower, upper, facts)


class _PoleInside(ValueError):
    def __init__(self, pole: Expr, lower: Expr, upper: Expr) -> None:
        super().__init__(f"the pole at {pole} lies inside the strip ({lower}, {upper})")
        self.pole = pole


def _distributed(G: Expr, s: Symbol) -> Expr:
    """Sums multiplied out where they are no polynomials."""
    if G.is_Add:
        return Add(*(_distributed(t, s) for t in G.args))
    sums = [f for f in Mul.make_args(G) if f.is_Add and not f.is_polynomial(s)]
    if not sums:
        return G
    rest = Mul(*(f for f in Mul.make_args(G) if f is not sums[0]))
    return Add(*(_distributed(rest * t, s) for t in sums[0].args))


def _inverse(G: Expr, s: Symbol, x: Symbol, lower: Expr, upper: Expr, facts: Facts) -> Expr | None:
    products = []
    for term in Add.make_args(G):
        product = gamma_product_of(term, s)
        if product is None:
            return None
        products.append(product)
    total = []
    try:
        for product in products:
            value = _inverse_of_product(product, s, x, lower, upper, facts)
            if value is None:
                return None
            total.append(value)
    except _PoleInside as error:
        if not G.is_Add or not _regular_at(G, s, error.pole):
            raise
        # poles of the terms that cancel: on either side of them the terms belong to the same function
        place = real_part(error.pole)
        left = _inverse(G, s, x, lower, place, facts)
        return left if left is not None else _inverse(G, s, x, place, upper, facts)
    return Add(*total)


def _regular_at(G: Expr, s: Symbol, pole: Expr) -> bool:
    try:
        return all(vanishes(c) for c in principal_part(G, s, pole))
    except NotMeromorphic:
        return False


def _inverse_of_product(
    product: GammaProduct, s: Symbol, x: Symbol, lower: Expr, upper: Expr, facts: Facts
) -> Expr | None:
    from .inverse import inverse_mellin

    sided = on_strip(product, lower, upper, facts)
    if sided is None or not sided.factors or not _is_transform(sided, lower, upper, facts):
        return None
    value = inverse_mellin(sided.factors, sided.scale * x, facts)
    if value is None or value.has(meijerg, hyper):
        other = _past_poles(product, s, x, lower, upper, facts)
        if other is not None and (value is None or not other.has(meijerg, hyper)):
            return other
    return None if value is None else sided.constant * value


def _past_poles(product: GammaProduct, s: Symbol, x: Symbol, lower: Expr, upper: Expr, facts: Facts) -> Expr | None:
    """The function of the strip where each Gamma has all poles on its own side, and the residues between."""
    from .inverse import inverse_mellin

    moved: dict[Expr, int] = {}
    for f in product.factors:
        if f.power > 0:
            n = _on_the_wrong_side(product, f, lower, upper, facts)
            if n is None:
                return None
            moved.update((_pole(f, k), 1 if f.slope > 0 else -1) for k in range(n))
    value = inverse_mellin(product.factors, product.scale * x, facts) if moved else None
    if value is None:
        return None
    residues = []
    for pole, sign in moved.items():
        for j, c in enumerate(principal_part(product.as_expr(s), s, pole)):
            residues.append(-sign * c * x**-pole * (-log(x)) ** j / factorial(j))
    return product.constant * value + Add(*residues)


def _is_transform(product: GammaProduct, lower: Expr, upper: Expr, facts: Facts) -> bool:
    """Whether the contour integral converges (Paris and Kaminski, section 2.4), if only conditionally."""
    lam = product.lam
    angle = abs(arg(product.scale)) if not product.scale.is_positive else S.Zero
    excess = pi * lam / 2 - angle
    if excess.is_positive:
        return True
    if not excess.is_zero:
        return False
    if product.delta == 0:
        return facts.sign(product.kappa(S.Zero)) == -1
    # kappa grows with delta*sigma: the better edge of the strip
    edge = lower if product.delta > 0 else upper
    return edge.is_infinite or facts.sign(S.Half - product.kappa(edge)) == 1


# -- reading -----------------------------------------------------------------------------------------------------


def gamma_product_of(value: Expr, s: Symbol) -> GammaProduct | None:
    """A product of Gammas, powers, rational and trigonometric functions of ``s``; None for anything else."""
    reader = _Reader(s)
    return reader.product() if reader.read(in_gammas(value), 1) else None


class _Reader:
    def __init__(self, s: Symbol) -> None:
        self.s = s
        self.constant: Expr = S.One
        self.modulus: Expr = S.One
        self.angle: Expr = S.Zero
        self.factors: list[Factor] = []

    def product(self) -> GammaProduct:
        scale = self.modulus if self.angle.is_zero else self.modulus * exp(I * self.angle)
        return GammaProduct(self.constant, scale, cancel(tuple(self.factors)))

    def read(self, f: Expr, n: int) -> bool:
        """Take in ``f**n``; False if it is no Gamma product."""
        if not f.has_free(self.s):
            self.constant *= Pow(f, n)
            return True
        if f.is_Mul:
            return all(self.read(a, n) for a in f.args)
        if isinstance(f, exp):
            return self.power(S.Exp1, f.args[0], n)
        if f.is_Pow and f.exp.is_Integer:
            return self.read(f.base, n * int(f.exp))
        if f.is_Pow and not f.base.has_free(self.s):
            return self.power(f.base, f.exp, n)
        if f == self.s or f.is_Add:
            return self.polynomial(f, n)
        z = f.args[0]
        if isinstance(f, gamma):
            return self.gamma(z, n)
        if isinstance(f, (sin, cos, tan, cot, sec, csc)):
            return self.trigonometric(type(f), (z / pi).expand(), n)
        return False

    def linear(self, z: Expr) -> tuple[Expr, Expr] | None:
        z = z.expand()
        slope = z.coeff(self.s)
        shift = (z - slope * self.s).expand()
        return None if shift.has_free(self.s) or not slope.is_Rational or slope.is_zero else (shift, slope)

    def gamma(self, z: Expr, n: int) -> bool:
        parts = self.linear(z)
        if parts is None:
            return False
        self.factors += [Factor(*parts, 1 if n > 0 else -1)] * abs(n)
        return True

    def power(self, base: Expr, exponent: Expr, n: int) -> bool:
        exponent = (n * exponent).expand()
        slope = exponent.coeff(self.s)
        shift = (exponent - slope * self.s).expand()
        if shift.has_free(self.s):
            return False
        self.constant *= Pow(base, shift)
        if base is S.Exp1:
            real, imaginary = slope.as_real_imag()
            self.modulus *= exp(-real)
            self.angle -= imaginary
            return True
        if not slope.is_real:
            return False
        if base.is_positive:
            self.modulus *= Pow(base, -slope)
            return True
        if not base.is_number:
            return False
        self.modulus *= Pow(abs(base), -slope)
        self.angle -= slope * arg(base)
        return True

    def polynomial(self, f: Expr, n: int) -> bool:
        if not f.is_polynomial(self.s):
            return False
        parts = self.linear(f)
        if parts is not None:
            return self.gamma(f + 1, n) and self.gamma(f, -n)
        found = roots(f, self.s)
        if sum(found.values()) != f.as_poly(self.s).degree():
            return False
        self.constant *= f.as_poly(self.s).LC() ** n
        return all(
            self.gamma(self.s - r + 1, n * m) and self.gamma(self.s - r, -n * m)
            for r, m in sorted(found.items(), key=str)
        )

    def trigonometric(self, kind: type, z: Expr, n: int) -> bool:
        if kind in (tan, cot):
            return self.trigonometric(sin, z, n if kind is tan else -n) and self.trigonometric(
                cos, z, -n if kind is tan else n
            )
        if kind in (sec, csc):
            kind, n = (cos, -n) if kind is sec else (sin, -n)
        shift = S.Zero if kind is sin else S.Half
        self.constant *= pi**n
        return self.gamma(z + shift, -n) and self.gamma(1 - shift - z, -n)


# -- the strip ----------------------------------------------------------------------------------------------------


def on_strip(product: GammaProduct, lower: Expr, upper: Expr, facts: Facts) -> GammaProduct | None:
    """The same function of s, with every Gamma's poles on the side where they lie of this strip.

    None where that cannot be decided; ValueError for a pole inside the strip.
    """
    constant = product.constant
    factors: list[Factor] = []
    up = [f for f in product.factors if f.power > 0]
    down = [f for f in product.factors if f.power < 0]
    for f in up:
        partner = _partner(f, down)
        if partner is not None:
            down.remove(partner)
            n = int((partner.shift - f.shift).expand())
            zeros = [Factor((f.shift + k).expand(), f.slope, -1) for k in range(n)]
            sides = [_side(product, _pole(z, 0), lower, upper, facts) for z in zeros]
            if None in sides:
                return None
            natural = 1 if f.slope > 0 else -1
            if all(side in (natural, 0) for side in sides):
                factors += [f, partner]
                continue
            for z, side in zip(zeros, sides, strict=True):
                # 1/z = Gamma(z)/Gamma(z + 1) = -Gamma(-z)/Gamma(1 - z)
                if side == natural:
                    factors += [Factor(z.shift, z.slope, 1), Factor(z.shift + 1, z.slope, -1)]
                else:
                    constant = -constant
                    factors += [Factor(-z.shift, -z.slope, 1), Factor(1 - z.shift, -z.slope, -1)]
            continue
        moved = _on_the_wrong_side(product, f, lower, upper, facts)
        if moved is None:
            return None
        if moved == 0:
            factors.append(f)
        else:
            # Gamma(z) = (-1)**n*Gamma(z + n)*Gamma(1 - n - z)/Gamma(1 - z), DLMF 5.5.3
            constant *= S.NegativeOne**moved
            factors += [
                Factor((f.shift + moved).expand(), f.slope, 1),
                Factor((1 - moved - f.shift).expand(), -f.slope, 1),
                Factor((1 - f.shift).expand(), -f.slope, -1),
            ]
    return GammaProduct(constant, product.scale, cancel((*factors, *down)))


def _partner(f: Factor, down: Sequence[Factor]) -> Factor | None:
    """The denominator that leaves fewest poles of f."""
    gaps = {}
    for d in down:
        gap = (d.shift - f.shift).expand()
        if d.slope == f.slope and gap.is_Integer and 0 < gap <= _MOST_MOVED:
            gaps[int(gap)] = d
    return gaps[min(gaps)] if gaps else None


def _pole(f: Factor, n: int) -> Expr:
    return (-(f.shift + n) / f.slope).expand()


def _side(product: GammaProduct, pole: Expr, lower: Expr, upper: Expr, facts: Facts) -> int | None:
    """+1 left of the strip, -1 right of it, 0 if the product is regular there, None if it is not known."""
    try:
        return side_of_strip(pole, lower, upper, facts)
    except NotMeromorphic:
        pass
    if product.order_at(pole) <= 0:
        return 0
    place = real_part(pole)
    if all(b.is_infinite or facts.sign((c * (place - b)).expand()) == 1 for b, c in ((lower, 1), (upper, -1))):
        raise _PoleInside(pole, lower, upper)
    return None


def _on_the_wrong_side(
    product: GammaProduct, f: Factor, lower: Expr, upper: Expr, facts: Facts
) -> int | None:
    natural = 1 if f.slope > 0 else -1
    for n in range(_MOST_MOVED):
        side = _side(product, _pole(f, n), lower, upper, facts)
        if side is None:
            return None
        if side in (natural, 0):
            return n
    return None


__all__ = ["gamma_product_of", "inverse_transform", "on_strip"]
