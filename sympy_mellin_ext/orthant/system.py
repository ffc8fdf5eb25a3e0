"""The linear system between Mellin variables, and where its contours exist.

Each kernel is replaced by its inverse Mellin integral and each sum by Barnes' splitting; the integration over
x_i gives one linear equation.  Index = number of Mellin variables - number of equations.

Where the integral converges absolutely: the exponents must lie inside the Minkowski sum of the kernels' strips
(segments along the kernels' exponent vectors, simplices for the powers of sums), which is the projection of
the polyhedron of all contours.

Sources: DLMF 1.14.39 (Parseval), 5.12.3; R. B. Paris and D. Kaminski, Asymptotics and
Mellin-Barnes Integrals (2001), ch. 7 (several variables).
"""
from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import combinations

from sympy import Dummy, Expr, S, gamma
from sympy.logic.boolalg import Boolean

from ..closed_form import Step
from ..matching.reader import sector
from ..region import Facts, Region, project, real_part
from .integrand import Product, Special
from .linear import fraction, rational, reduced
from .polynomial import Polynomial

_ONE = Fraction(1)


@dataclass(frozen=True)
class Form:
    """``constant + sum slopes[j]*s_j``."""

    constant: Expr
    slopes: tuple[tuple[int, Fraction], ...] = ()

    def slope(self, j: int) -> Fraction:
        return dict(self.slopes).get(j, Fraction(0))

    def plus(self, other: Form, factor: Fraction = _ONE) -> Form:
        slopes = dict(self.slopes)
        for j, a in other.slopes:
            slopes[j] = slopes.get(j, Fraction(0)) + factor * a
        constant = (self.constant + rational(factor) * other.constant).expand()
        return Form(constant, tuple((j, a) for j, a in slopes.items() if a))

    def same(self, other: Form) -> bool:
        return self.constant == other.constant and dict(self.slopes) == dict(other.slopes)

    def without(self, j: int) -> Form:
        return Form(self.constant, tuple((i, a) for i, a in self.slopes if i != j))

    def at(self, solution: dict[int, Form]) -> Form:
        result = Form(self.constant, tuple((j, a) for j, a in self.slopes if j not in solution))
        for j, a in self.slopes:
            if j in solution:
                result = result.plus(solution[j], a)
        return result

    def expr(self, symbols: dict[int, Expr]) -> Expr:
        return self.constant + sum((rational(a) * symbols[j] for j, a in self.slopes), S.Zero)


def single(j: int, slope: Fraction = _ONE, constant: Expr = S.Zero) -> Form:
    return Form(constant, ((j, slope),))


Gammas = list[tuple[Form, int]]
Scales = list[tuple[Expr, Form]]


class System:
    """Mellin variables of one product: exponent vectors, scales, Gammas and strips."""

    def __init__(self, product: Product, facts: Facts) -> None:
        self.product = product
        self.facts = facts
        self.vectors: list[tuple[Expr, ...]] = []
        self.scales: Scales = []
        self.gammas: Gammas = []
        self.bounds: list[Form] = []
        self.constant: Expr = S.One
        self.positive: list[Expr] = []
        self.booleans: list[Boolean] = []
        self.sources: list[str] = []
        self.names: list[str] = []
        self.steps: list[Step] = []

    @classmethod
    def of(cls, product: Product, facts: Facts) -> System | None:
        system = cls(product, facts)
        index_zero = product.index == 0
        for c, e in product.exponent:
            if not system._admit(c, S.One, index_zero):
                return None
            j = system._variable(c, e, "exp")
            system.gammas.append((single(j), 1))
            system.bounds.append(single(j))
        for base, p in product.sums:
            if not system._sum(base, p, index_zero):
                return None
        for special in product.specials:
            if not system._special(special):
                return None
        return system

    def _variable(self, scale: Expr, vector: tuple[Expr, ...], name: str) -> int:
        self.vectors.append(vector)
        self.names.append(name)
        j = len(self.vectors) - 1
        if scale is not S.One:
            self.scales.append((scale, single(j)))
        return j

    def _admit(self, c: Expr, lam: Expr, index_zero: bool) -> bool:
        """Whether a scale is admissible; conditions are noted."""
        if c.is_extended_real:
            known = self.facts.sign(c)
            if known is None:
                self.positive.append(c)
            return known in (1, None)
        if not index_zero:
            return False
        self.booleans.append(sector(c, lam))
        return True

    def _sum(self, base: Polynomial, p: Expr, index_zero: bool) -> bool:
        """``(1 + A_1 + ... + A_m)**(-p)``: Barnes' splitting, DLMF 5.12.3 repeated."""
        rest = Form(p)
        self.constant = self.constant / gamma(p)
        if len(base) > 2:
            told = f"a sum of {len(base)} monomials split into {len(base) - 1} contour integrals"
            self.steps.append(Step(told, "DLMF 5.12.3"))
        for c, e in base[1:]:
            known = self.facts.sign(c) if c.is_extended_real else None
            if (known is None and not (index_zero and len(base) == 2)) or known in (0, -1):
                return False
            if known is None:
                self._admit(c, S(2), index_zero)
            j = self._variable(c, e, "power")
            self.gammas.append((single(j), 1))
            self.bounds.append(single(j))
            rest = rest.plus(single(j, Fraction(-1)))
        self.gammas.append((rest, 1))
        self.bounds.append(rest)
        self.sources.append("DLMF 5.12.3")
        return True

    def _special(self, special: Special) -> bool:
        strip = special.strip()
        if strip is None:
            return False
        argument = special.argument
        total = Form(S.Zero)
        for c, e in argument:
            j = self._variable(c, e, special.name)
            total = total.plus(single(j))
            if len(argument) > 1:
                self.gammas.append((single(j), 1))
                self.bounds.append(single(j))
        if len(argument) > 1:
            self.gammas.append((total, -1))
        product = special.product
        self.constant = self.constant * product.constant
        if product.scale is not S.One:
            self.scales.append((product.scale, total))
        for a, A, power in product.factors:
            self.gammas.append((Form(a).plus(total, fraction(A)), power))
        self.bounds += [total.plus(Form(-b)) for b in strip[0]]
        self.bounds += [Form(b).plus(total, Fraction(-1)) for b in strip[1]]
        self.positive += special.conditions()
        if special.source:
            self.sources.append(special.source)
        return True

    @property
    def targets(self) -> list[Expr]:
        return [p + 1 for p in self.product.powers]

    def solutions(self) -> Iterator[tuple[dict[int, Form], Fraction, list[int]]]:
        """``(s_j in terms of the free ones, abs(det), free ones)`` for one choice of them after another."""
        n, total = len(self.product.powers), len(self.vectors)
        matrix = [[fraction(v[i]) for v in self.vectors] for i in range(n)]
        targets = self.targets
        for free in combinations(range(total - 1, -1, -1), total - n):
            columns = [j for j in range(total) if j not in free]
            solved = reduced(matrix, columns)
            if solved is None:
                continue
            inverse, determinant = solved
            solution: dict[int, Form] = {}
            for row, j in zip(inverse, columns, strict=True):
                constant = sum((rational(q) * t for q, t in zip(row, targets, strict=True)), S.Zero).expand()
                slopes = []
                for f in free:
                    slope = -sum((q * matrix[i][f] for i, q in enumerate(row)), Fraction(0))
                    if slope:
                        slopes.append((f, slope))
                solution[j] = Form(constant, tuple(slopes))
            yield solution, abs(determinant), sorted(free)


def region_of(product: Product, facts: Facts) -> tuple[list[Expr], list[Boolean]] | None:
    """Where the product converges absolutely over the orthant; None where that is nowhere, or not known.

    A sum to a positive power is largest, along every ray, in one of its monomials: each of them is asked.
    """
    for place, (base, p) in enumerate(product.sums):
        if facts.sign(real_part(p)) in (0, -1):
            rest = replace(product, sums=product.sums[:place] + product.sums[place + 1 :])
            positive: list[Expr] = []
            booleans: list[Boolean] = []
            for _, e in base:
                powers = tuple((b - p * a).expand() for a, b in zip(e, rest.powers, strict=True))
                part = region_of(replace(rest, powers=powers), facts)
                if part is None:
                    return None
                positive += part[0]
                booleans += part[1]
            return positive, booleans
    system = System.of(product, facts)
    if system is None or product.index < 0:
        return None
    first = next(system.solutions(), None)
    if first is None:
        return None
    solution, _, free = first
    return _projected(system, solution, free)


def _projected(
    system: System, solution: dict[int, Form], free: Sequence[int]
) -> tuple[list[Expr], list[Boolean]] | None:
    symbols: dict[int, Expr] = {j: Dummy(f"c{j}", real=True) for j in free}
    rows = []
    for bound in system.bounds:
        form = bound.at(solution)
        rows.append(Form(real_part(form.constant), form.slopes).expr(symbols))
    if free:
        try:
            rows = project(rows, [symbols[j] for j in free], system.facts)
        except ValueError:
            return None
    return [*rows, *system.positive], system.booleans



def unbounded(products: Sequence[Product], facts: Facts) -> Expr | None:
    """oo or -oo where an integrand of one sign is shown to have no finite integral; else None."""
    if len(products) != 1 or products[0].tilts:
        return None
    (product,) = products
    c = product.coefficient
    sign = facts.sign(c) if c.is_extended_real else None
    signs_known = all(facts.sign(p) is not None for _, p in product.sums if p.is_extended_real)
    if sign not in (1, -1) or not signs_known or not product.positive(facts) or not product.rational():
        return None
    if not all(e.is_extended_real for e in (*product.powers, *(p for _, p in product.sums))):
        return None
    if not all(s.name in _POSITIVE_KERNELS and not s.conditions() and s.real for s in product.specials):
        return None
    return sign * S.Infinity if _diverges(product, facts) else None


_POSITIVE_KERNELS = ("exp", "besselk", "erfc")


def _diverges(product: Product, facts: Facts) -> bool:
    """Whether the exponents lie outside the Minkowski sum of the strips (positive kernels: exactly then)."""
    for place, (base, p) in enumerate(product.sums):
        if facts.sign(p) in (0, -1):
            rest = replace(product, sums=product.sums[:place] + product.sums[place + 1 :])
            moved = (tuple((b - p * a).expand() for a, b in zip(e, rest.powers, strict=True)) for _, e in base)
            return any(_diverges(replace(rest, powers=powers), facts) for powers in moved)
    system = System.of(product, facts)
    if system is None:
        return False
    first = next(system.solutions(), None) if product.index >= 0 else None
    if first is None:
        return True  # some direction in which nothing decays
    projected = _projected(system, first[0], first[2])
    return projected is not None and Region(facts).positive(*projected[0]).empty


__all__ = ["Form", "Gammas", "Scales", "System", "region_of", "unbounded"]
