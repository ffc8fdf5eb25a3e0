"""The recursive reader: integrand -> sum of terms."""
from __future__ import annotations

from collections.abc import Callable

from sympy import (
    Abs,
    Add,
    Expr,
    Integer,
    Mul,
    Ne,
    Pow,
    Rational,
    S,
    Sum,
    Symbol,
    airyai,
    airybi,
    arg,
    binomial,
    cos,
    cosh,
    erfi,
    exp,
    hyper,
    jn,
    log,
    meijerg,
    pi,
    sign,
    sin,
    sinh,
    sqrt,
    yn,
)
from sympy.logic.boolalg import And, Boolean
from sympy.ntheory.multinomial import multinomial_coefficients

from ..gamma import GammaProduct
from ..kernels import rows
from ..kernels.elementary import power as power_transform
from ..kernels.table import Row
from ..region import Facts, real_part
from .fractions import pole_kernel, split
from .logarithms import logarithm
from .monomials import monomial, monomials
from .special import airy, explicit_series, hypergeometric, imaginary_error, meijer, spherical_bessel
from .term import Kernel, Term, Wave
from .waves import Draft, finish

# A sum that multiplies out to more terms than this is not ours.
MAX_TERMS = 600
_MAX_KERNEL_POWER = 6

Drafts = list[Draft]


class Reader:
    """Reads one integrand; holds the variable and the facts, so that the rules below stay short."""

    def __init__(self, x: Symbol, facts: Facts) -> None:
        self.x = x
        self.facts = facts

    # -- the recursion -----------------------------------------------------------------------------

    def read(self, expr: Expr) -> Drafts | None:
        """A sum of drafts equal to ``expr`` for x > 0, or None."""
        x = self.x
        if not expr.has_free(x):
            return [Draft(coefficient=expr)]
        if expr is x or expr == x:
            return [Draft(power=S.One)]
        kind = type(expr)
        if kind is Mul:
            return self._product(expr)
        if kind is Add:
            return self._sum(expr)
        if kind is Pow:
            return self._power(expr)
        rule = _RULES.get(kind)
        if rule is not None:
            return rule(self, expr)
        row = rows().get(kind)
        if row is not None:
            return self.row(row, expr)
        return None

    def _sum(self, expr: Expr) -> Drafts | None:
        drafts: Drafts = []
        for a in expr.args:
            part = self.read(a)
            if part is None:
                return None
            drafts.extend(part)
            if len(drafts) > MAX_TERMS:
                return None
        return drafts

    def _product(self, expr: Expr) -> Drafts | None:
        args: tuple[Expr, ...] = expr.args
        fractions = [a for a in args if _is_fraction(a, self.x)]
        drafts: Drafts = [Draft()]
        if len(fractions) > 1:
            part = split([(a.base, -int(a.exp)) for a in fractions], self.x, self.facts)
            if part is not None:
                drafts, args = part, tuple(a for a in args if a not in fractions)
        for a in args:
            part = self.read(a)
            if part is None:
                return None
            if len(part) * len(drafts) > MAX_TERMS:
                return None
            drafts = [d.times(p) for d in drafts for p in part]
        return drafts

    # -- powers ------------------------------------------------------------------------------------

    def _power(self, expr: Expr) -> Drafts | None:
        base, exponent = expr.args
        if exponent.has_free(self.x):
            return self._exponential(exponent * log(base)) if not base.has_free(self.x) else None
        single = monomial(base, self.x)
        if single is not None:
            coefficient = single[0] if single[0] is S.One else Pow(single[0], exponent)
            return [Draft(coefficient=coefficient, power=single[1] * exponent)]
        kind = type(base)
        if kind is Mul:
            return self._product_power(base, exponent)
        if kind is Add:
            return self._sum_power(base, exponent)
        if kind is exp:
            return self._exponential(base.args[0] * exponent) if self.real(base.args[0]) else None
        if kind is Pow and (exponent.is_integer or self.nonnegative(base.base)):
            return self._power(Pow(base.base, base.exp * exponent, evaluate=False))
        if exponent.is_Integer and 0 < exponent <= _MAX_KERNEL_POWER:
            part = self.read(base)
            return None if part is None else self._integer_power(part, int(exponent))
        return None

    def _product_power(self, base: Mul, exponent: Expr) -> Drafts | None:
        drafts: Drafts = [Draft()]
        for a in base.args:
            if exponent.is_integer or self.nonnegative(a):
                part = self.read(Pow(a, exponent))
            else:
                return None
            if part is None:
                return None
            drafts = [d.times(p) for d in drafts for p in part]
        return drafts

    def _sum_power(self, base: Add, exponent: Expr) -> Drafts | None:
        if exponent.is_Integer and exponent > 0:
            part = self.read(base)
            return None if part is None else self._integer_power(part, int(exponent))
        parts = monomials(base, self.x)
        if parts is None:
            return None
        if len(parts) == 1:
            c, p = parts[0]
            return [Draft(coefficient=Pow(c, exponent), power=p * exponent)]
        if len(parts) == 2:
            return self._binomial_power(parts, exponent)
        square = self._as_square(parts)
        if square is not None:
            return self._binomial_power(square, 2 * exponent)
        if exponent.is_Integer:
            return split([(base, -int(exponent))], self.x, self.facts)
        return None

    def _as_square(self, parts: list[tuple[Expr, Expr]]) -> list[tuple[Expr, Expr]] | None:
        """``a**2*x**2p + 2*a*b*x**p + b**2 = (a*x**p + b)**2``."""
        if len(parts) != 3:
            return None
        for middle in range(3):
            (c0, p0), (c1, p1) = (parts[i] for i in range(3) if i != middle)
            cm, pm = parts[middle]
            if 2 * pm != p0 + p1 or (cm**2 - 4 * c0 * c1).expand() is not S.Zero:
                continue
            if self.facts.sign(cm) == 1 and self.facts.sign(c0) == 1:
                return [(sqrt(c0), p0 / 2), (sqrt(c1), p1 / 2)]
        return None

    def _binomial_power(self, parts: list[tuple[Expr, Expr]], exponent: Expr) -> Drafts | None:
        """``(c0*x**p0 + c1*x**p1)**e = (c0*x**p0)**e * (1 + (c1/c0)*x**(p1-p0))**e``."""
        (c0, p0), (c1, p1) = parts
        if not p0.is_zero and p1.is_zero:
            (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
        sign0, sign1 = self.facts.sign(c0), self.facts.sign(c1)
        if sign0 == -1 and sign1 == -1 and exponent.is_integer:
            draft = self._binomial_power([(-c0, p0), (-c1, p1)], exponent)
            return None if draft is None else [d.scaled(S.NegativeOne**exponent) for d in draft]
        if not exponent.is_integer and sign0 != 1:
            if sign1 != 1:
                return None
            (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
        ratio = p1 - p0
        if self.facts.sign(ratio) in (None, 0):
            return None
        if sign0 is not None and sign1 is not None and sign0 * sign1 == -1:
            # a pole on the half line: of use only where it cancels
            if not exponent.is_Integer:
                return None
            pole = pole_kernel(-int(exponent), -c1 / c0, ratio)
            return [Draft(coefficient=Pow(c0, exponent), power=p0 * exponent, kernels=(pole,))]
        kernel = self.kernel(
            "power", power_transform(-exponent), c1 / c0, ratio, "DLMF 5.12.3", arguments=(-exponent,)
        )
        if kernel is None:
            return None
        return [Draft(coefficient=Pow(c0, exponent), power=p0 * exponent, kernels=(kernel,))]

    def _integer_power(self, part: Drafts, n: int) -> Drafts | None:
        if len(part) == 1:
            result = part[0]
            for _ in range(n - 1):
                result = result.times(part[0])
            return [result]
        if binomial(n + len(part) - 1, n) > MAX_TERMS:
            return None
        powers: list[list[Draft]] = []
        for d in part:
            ladder = [Draft()]
            for _ in range(n):
                ladder.append(ladder[-1].times(d))
            powers.append(ladder)
        drafts = []
        for exponents, count in sorted(multinomial_coefficients(len(part), n).items()):
            term = Draft(coefficient=Integer(count))
            for ladder, k in zip(powers, exponents, strict=True):
                term = term.times(ladder[k])
            drafts.append(term)
        return drafts

    # -- functions ---------------------------------------------------------------------------------

    def _exponential(self, exponent: Expr) -> Drafts | None:
        parts = monomials(exponent, self.x)
        if parts is None:
            return None
        coefficient, exponents = S.One, []
        for c, p in parts:
            if p.is_zero:
                coefficient = coefficient * exp(c)
            elif self.facts.sign(p) is None:
                return None
            else:
                exponents.append((p, c))
        return [Draft(coefficient=coefficient, exponents=tuple(exponents))]

    def _exp(self, expr: Expr) -> Drafts | None:
        return self._exponential(expr.args[0])

    def _trigonometric(self, expr: Expr) -> Drafts | None:
        kind = type(expr).__name__
        parts = monomials(expr.args[0], self.x)
        if parts is None or len(parts) > 2:
            return None
        moving = [(c, p) for c, p in parts if not p.is_zero]
        if len(moving) != 1:
            return None
        c, p = moving[0]
        if self.facts.sign(p) is None:
            return None
        fixed = Add(*(c for c, p in parts if p.is_zero))
        if fixed is S.Zero:
            return [Draft(trig=((kind, c, p),))]
        # addition theorem, DLMF 4.21.2 and 4.35.2
        even, odd = ("cos", "sin") if kind in ("cos", "sin") else ("cosh", "sinh")
        f_even, f_odd = (cos, sin) if kind in ("cos", "sin") else (cosh, sinh)
        here, there = (even, odd) if kind == even else (odd, even)
        flip = -1 if kind == "cos" else 1
        return [
            Draft(coefficient=f_even(fixed), trig=((here, c, p),)),
            Draft(coefficient=flip * f_odd(fixed), trig=((there, c, p),)),
        ]

    def row(self, row: Row, expr: Expr) -> Drafts | None:
        args = list(expr.args)
        inner = args.pop(row.argument)
        if any(a.has_free(self.x) for a in args):
            return None
        single = monomial(inner, self.x)
        if single is None:
            return None
        c, ratio = single
        if self.facts.sign(ratio) in (None, 0):
            return None
        c = c * row.sign
        coefficient: Expr = S.One
        condition: Boolean = S.true
        if row.parity and c.is_real and self.facts.sign(c) != 1:
            if self.facts.sign(c) is None:
                condition = Ne(c, 0)
            if row.parity < 0:
                coefficient = sign(c) if self.facts.sign(c) is None else S.NegativeOne
            c = Abs(c) if self.facts.sign(c) is None else -c
        if row.turn is not S.Zero:
            if self.facts.sign(c) != 1:
                return None
            wave = Wave(pi * row.turn, S.Zero, False)
            product = row.transform(*args).with_scale(c)
            turned = Kernel(row.name, product, ratio, wave, S.true, False, row.source, tuple(args))
            return [Draft(kernels=(turned,))]
        kernel = self.kernel(
            row.name, row.transform(*args), c, ratio, row.source, arguments=tuple(args), condition=condition
        )
        if kernel is None:
            return None
        domain = row.domain(*args)
        if domain:
            signs = [self.facts.sign(d) for d in domain]
            if any(s in (0, -1) for s in signs):
                return None
        return [Draft(coefficient=coefficient, kernels=(kernel,))]

    def general(
        self, expr: Expr, inner: Expr, transform: Callable[[], GammaProduct | None], source: str, turn: int
    ) -> Drafts | None:
        """A function of ``turn*inner`` whose parameters are free of x."""
        single = monomial(inner, self.x)
        if single is None or self.facts.sign(single[1]) in (None, 0):
            return None
        product = transform()
        if product is None:
            return None
        c, ratio = single
        if type(expr) is hyper and len(expr.ap) <= len(expr.bq) and self.facts.sign(c) == 1:
            # grows at oo: of use only in a product with a decaying kernel
            turned = Kernel(
                f"turned {len(expr.ap)}F{len(expr.bq)}", product.with_scale(c), ratio, Wave(pi, S.Zero, False),
                S.true, False, source, (*expr.ap, *expr.bq),
            )  # fmt: skip
            return [Draft(kernels=(turned,))]
        kernel = self.kernel(type(expr).__name__, product, turn * c, ratio, source)
        return None if kernel is None else [Draft(kernels=(kernel,))]

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
        """A kernel at ``scale*x**ratio`` with the condition under which the scale is admissible."""
        known = self.facts.sign(scale) if scale.is_extended_real else None
        wave, inside = None, known == 1
        if known in (0, -1):
            return None
        if known is None:
            imaginary = (scale / S.ImaginaryUnit) if scale.is_number or scale.is_Mul else S.Zero
            turn = self.facts.sign(imaginary) if imaginary.is_extended_real else None
            if turn in (1, -1):
                scale, wave = Abs(imaginary), Wave(turn * pi / 2, S.Zero, False)
            else:
                condition = And(condition, sector(scale, product.lam))
                inside = True
        return Kernel(name, product.with_scale(scale), ratio, wave, condition, inside, source, arguments)

    def nonnegative(self, expr: Expr) -> bool:
        """Whether ``expr >= 0`` for every x > 0, by what is easily seen."""
        if not expr.has_free(self.x):
            return self.facts.sign(expr) in (0, 1)
        if expr == self.x or type(expr) is Abs:
            return True
        kind = type(expr)
        if kind in (Add, Mul):
            return all(self.nonnegative(a) for a in expr.args)
        if kind is Pow:
            even = bool(expr.exp.is_even) and self.real(expr.base)
            return bool(expr.exp.is_real) and (even or self.nonnegative(expr.base))
        return kind is exp and self.real(expr.args[0])

    def real(self, expr: Expr) -> bool:
        if expr == self.x:
            return True
        if not expr.has_free(self.x):
            return bool(expr.is_real)
        if type(expr) in (Add, Mul):
            return all(self.real(a) for a in expr.args)
        if type(expr) is Pow:
            whole = bool(expr.exp.is_integer) and self.real(expr.base)
            return whole or (self.nonnegative(expr.base) and bool(expr.exp.is_real))
        return type(expr) is log and self.nonnegative(expr.args[0])


def _is_fraction(expr: Expr, x: Symbol) -> bool:
    if type(expr) is not Pow or type(expr.base) is not Add:
        return False
    return bool(expr.exp.is_Integer and expr.exp.is_negative and expr.has_free(x))


def sector(scale: Expr, lam: Rational) -> Boolean:
    """``abs(arg(scale)) < pi/2*lam`` in the plainest words."""
    if scale.is_extended_real:
        return scale > 0
    above, below = scale.as_numer_denom()
    if above.is_extended_real and below.is_extended_real:
        return above * below > 0  # real where it is defined
    if lam == 1:
        return real_part(scale) > 0
    return Abs(arg(scale)) < pi * lam / 2


def _magnitude(reader: Reader, expr: Expr) -> Drafts | None:
    inner = expr.args[0]
    return reader.read(inner) if reader.nonnegative(inner) else None


_RULES: dict[type, Callable[[Reader, Expr], Drafts | None]] = {
    exp: Reader._exp,
    sin: Reader._trigonometric,
    cos: Reader._trigonometric,
    sinh: Reader._trigonometric,
    cosh: Reader._trigonometric,
    log: logarithm,
    Abs: _magnitude,
    airyai: airy,
    airybi: airy,
    erfi: imaginary_error,
    jn: spherical_bessel,
    yn: spherical_bessel,
    hyper: hypergeometric,
    meijerg: meijer,
    Sum: explicit_series,
}


def read_terms(expr: Expr, x: Symbol, facts: Facts) -> list[Term] | None:
    """Write ``expr`` as a sum of terms for x > 0.

    Parameters
    ----------
    expr : Expr
        The integrand.
    x : Symbol
        The variable; it counts as positive whatever its own assumptions say.
    facts : Facts
        What is known of the parameters.

    Returns
    -------
    list of Term, or None where some factor is not in the table.

    Examples
    --------
    >>> from sympy import exp, symbols
    >>> from sympy_mellin_ext.matching import read_terms
    >>> from sympy_mellin_ext.region import Facts
    >>> x, a = symbols('x a', positive=True)
    >>> term, = read_terms(x**2*exp(-a*x), x, Facts())
    >>> term.power, term.kernels[0].name, term.kernels[0].product.scale
    (2, 'exp', a)
    """
    drafts = Reader(x, facts).read(expr)
    return None if drafts is None else finish(drafts, facts)
