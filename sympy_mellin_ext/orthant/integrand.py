"""An integrand over the orthant: powers, one exponential, powers of sums, and functions of the kernel table."""
from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace

from sympy import Expr, Mul, Pow, S, Symbol, exp

from ..gamma import GammaProduct
from ..kernels.elementary import LOG1P
from ..region import Facts, real_part
from .polynomial import Polynomial, as_expr, base_and_power, collected, normalised, order


@dataclass(frozen=True)
class Special:
    """``g(argument)`` with the Mellin transform of g; the argument is a sum of monomials.

    Attributes
    ----------
    name : str
    product : GammaProduct
    argument : Polynomial
    build : callable
        ``z -> g(z)`` as an expression.
    source : str
    domain : tuple of Expr
        What must be positive for the transform to hold, beyond the strip.
    """

    name: str
    product: GammaProduct
    argument: Polynomial
    build: Callable[[Expr], Expr] = field(compare=False)
    source: str = ""
    domain: tuple[Expr, ...] = ()

    @property
    def oscillates(self) -> bool:
        """Whether g converges conditionally at one end of its strip."""
        return bool(self.product.lam == 0 and self.product.delta != 0)

    @property
    def real(self) -> bool:
        """Whether the function is real for a positive argument."""
        return all(a.is_extended_real for a, _, _ in self.product.factors)

    def strip(self) -> tuple[list[Expr], list[Expr]] | None:
        """Bounds of the strip of *absolute* convergence of the transform; None where there is none.

        On the boundary of the sector g behaves like ``x**theta`` times a wave, with
        ``theta = (kappa(0) + 1/2)/delta`` (Paris and Kaminski, section 2.3).
        """
        gammas = self.product
        lam, delta = gammas.lam, gammas.delta
        if lam.is_negative:
            return None
        lower, upper = gammas.strip()
        if lam == 0 and delta != 0:
            bound = -(gammas.kappa(S.Zero) + S.Half) / delta
            (upper if delta > 0 else lower).append(bound)
        return lower, upper

    def conditions(self) -> list[Expr]:
        """What must be positive besides the strip."""
        found = list(self.domain)
        if self.product.lam == 0 and self.product.delta == 0:
            found.append(-self.product.kappa(S.Zero))  # an integrable singularity at a finite point
        return found


@dataclass(frozen=True)
class Product:
    """``coefficient * prod x_i**powers[i] * exp(-exponent) * prod base**(-p) * prod special``.

    ``tilts`` lists (eps, k): the k-th derivative at eps = 0 is meant; they stand for powers of logarithms.
    """

    coefficient: Expr
    powers: tuple[Expr, ...]
    exponent: Polynomial = ()
    sums: tuple[tuple[Polynomial, Expr], ...] = ()
    specials: tuple[Special, ...] = ()
    tilts: tuple[tuple[Symbol, int], ...] = ()

    @classmethod
    def constant(cls, c: Expr, n: int) -> Product:
        return cls(c, (S.Zero,) * n)

    def times(self, other: Product) -> Product:
        result = replace(
            self,
            coefficient=self.coefficient * other.coefficient,
            powers=tuple(a + b for a, b in zip(self.powers, other.powers, strict=True)),
            exponent=collected((*self.exponent, *other.exponent)),
            specials=self.specials + other.specials,
            tilts=self.tilts + other.tilts,
        )
        for base, p in other.sums:
            result = result._with_base(base, p)
        return result

    def _with_base(self, base: Polynomial, p: Expr) -> Product:
        sums = dict(self.sums)
        sums[base] = (sums.get(base, S.Zero) + p).expand()
        return replace(self, sums=tuple((b, q) for b, q in sums.items() if q is not S.Zero))

    def with_power(self, poly: Polynomial, p: Expr, facts: Facts) -> Product | None:
        """Times ``poly**(-p)``; None where the sum may change its sign and p is not whole."""
        poly, k = base_and_power(poly)
        p = (p * k).expand() if k > 1 else p
        whole = bool(p.is_integer)
        known = [facts.sign(c) if c.is_extended_real else None for c, _ in poly]
        if 1 not in known:
            if not whole and (len(poly) > 1 or poly[0].coefficient.is_extended_real):
                return None
            place = 0
        else:
            place = known.index(1)
        head, base = normalised((poly[place], *poly[:place], *poly[place + 1 :]))
        base = (base[0], *sorted(base[1:], key=order))
        outside = head.power((-p).expand())
        result = replace(
            self,
            coefficient=self.coefficient * outside.coefficient,
            powers=tuple((a + b).expand() for a, b in zip(self.powers, outside.exponents, strict=True)),
        )
        return result if len(base) == 1 else result._with_base(base, p)

    def logarithms_alone(self) -> Product:
        """A base that stands only under a logarithm, ``base**eps``, as the kernel log(1 + z)."""
        result = self
        for eps, k in self.tilts:
            if any(p.has(eps) for p in (self.coefficient, *self.powers)):
                continue
            for base, p in self.sums:
                if p == -eps and k == 1 and len(base) == 2:
                    log1p = Special("log(1+z)", LOG1P, base[1:], _log1p, "from memory: Gradshteyn-Ryzhik 4.293.3")
                    result = replace(
                        result,
                        sums=tuple(s for s in result.sums if s[0] != base),
                        specials=(*result.specials, log1p),
                        tilts=tuple(t for t in result.tilts if t[0] != eps),
                    )
        return result

    # -- counts ----------------------------------------------------------------------------------------

    def kernels(self) -> int:
        """How many Mellin variables the product takes."""
        return (
            len(self.exponent) + sum(len(b) - 1 for b, _ in self.sums) + sum(len(s.argument) for s in self.specials)
        )

    @property
    def index(self) -> int:
        return self.kernels() - len(self.powers)

    def occurs(self, i: int) -> bool:
        """Whether the variable stands anywhere but in its own power."""
        return any(m.exponents[i] for poly in self.polynomials() for m in poly)

    def polynomials(self) -> list[Polynomial]:
        return [self.exponent, *(b for b, _ in self.sums), *(s.argument for s in self.specials)]

    def rational(self) -> bool:
        """Whether all exponents inside the kernels are rational numbers."""
        return all(a.is_Rational for poly in self.polynomials() for m in poly for a in m.exponents)

    def positive(self, facts: Facts) -> bool:
        """Whether all coefficients inside the kernels are known to be positive."""
        return all(
            c.is_extended_real and facts.sign(c) == 1 for poly in self.polynomials() for c, _ in poly
        )

    def tame(self) -> bool:
        """Whether it converges absolutely wherever it converges."""
        return not any(s.oscillates for s in self.specials)

    def as_expr(self, variables: Sequence[Symbol]) -> Expr:
        """The product as an expression, without its coefficient."""
        parts = [Pow(x, p) for x, p in zip(variables, self.powers, strict=True)]
        if self.exponent:
            parts.append(exp(-as_expr(self.exponent, variables)))
        parts += [Pow(as_expr(b, variables), -p) for b, p in self.sums]
        parts += [s.build(as_expr(s.argument, variables)) for s in self.specials]
        return Mul(*parts)


def _log1p(z: Expr) -> Expr:
    from sympy import log

    return log(1 + z)


def above(expr: Expr, bounds: Sequence[Expr]) -> list[Expr]:
    """``Re(expr - b)`` for all lower bounds."""
    return [real_part((expr - b).expand()) for b in bounds]


def below(expr: Expr, bounds: Sequence[Expr]) -> list[Expr]:
    return [real_part((b - expr).expand()) for b in bounds]
