"""The linear system between Mellin variables, and the contour integrals that it leaves.

Each kernel is replaced by its inverse Mellin integral and each sum by Barnes' splitting; the integration over
x_i gives one linear equation.  Index = number of Mellin variables - number of equations.

Where the integral converges absolutely: the exponents must lie inside the Minkowski sum of the kernels' strips
(segments along the kernels' exponent vectors, simplices for the powers of sums), which is the projection of
the polyhedron of all contours.

Sources: DLMF 1.14.39 (Parseval), 5.13.1-5.13.4 (Barnes' lemmas); R. B. Paris and D. Kaminski, Asymptotics and
Mellin-Barnes Integrals (2001), ch. 7 (several variables).
"""
from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import combinations, islice

from sympy import Dummy, Expr, ImmutableDenseMatrix, Matrix, Mul, Pow, S, gamma, hyper, meijerg
from sympy.core.sorting import default_sort_key
from sympy.logic.boolalg import Boolean

from ..closed_form import Step
from ..gamma.product import Factor, cancel
from ..gamma.shortest import collect_powers, positive_power, shortest_quotient
from ..inverse import inverse_mellin
from ..inverse.signature import normalise
from ..matching.reader import sector
from ..region import Facts, Region, project, real_part
from ..strategies.tidy import tidy
from .integrand import Product
from .linear import fraction, rational, reduced
from .outcome import BAD, Outcome

_MOST_CHOICES = 30
_SOURCE = "Paris and Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), ch. 7"


@dataclass(frozen=True)
class Form:
    """``constant + sum slopes[j]*s_j``."""

    constant: Expr
    slopes: tuple[tuple[int, Fraction], ...] = ()

    def slope(self, j: int) -> Fraction:
        return dict(self.slopes).get(j, Fraction(0))

    def plus(self, other: Form, factor: Fraction = Fraction(1)) -> Form:  # noqa: B008 - immutable
        slopes = dict(self.slopes)
        for j, a in other.slopes:
            slopes[j] = slopes.get(j, Fraction(0)) + factor * a
        constant = (self.constant + rational(factor) * other.constant).expand()
        return Form(constant, tuple((j, a) for j, a in slopes.items() if a))

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


def single(j: int, slope: Fraction = Fraction(1), constant: Expr = S.Zero) -> Form:  # noqa: B008 - immutable
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

    def _sum(self, base: tuple, p: Expr, index_zero: bool) -> bool:
        """``(1 + A_1 + ... + A_m)**(-p)``: Barnes' splitting, DLMF 5.12.3 repeated."""
        rest = Form(p)
        self.constant = self.constant / gamma(p)
        if len(base) > 2:
            self.steps.append(Step(f"a sum of {len(base)} monomials split into {len(base) - 1} contour integrals", "DLMF 5.12.3"))
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

    def _special(self, special) -> bool:  # noqa: ANN001 - Special
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


# -- values --------------------------------------------------------------------------------------------------


def contour(product: Product, facts: Facts, condition: Boolean | None = None) -> Outcome | None:
    """The integral of a product over the orthant by its Mellin variables; None where the index is too high.

    ``condition``: where it is known to converge, instead of the region of absolute convergence.
    """
    if product.index < 0:
        return None
    if not product.rational():
        return _symbolic(product, facts)
    system = System.of(product, facts)
    if system is None:
        return None
    region = region_of(product, facts) if condition is None else ([], [condition])
    if region is None:
        return None
    for solution, determinant, free in islice(system.solutions(), _MOST_CHOICES):
        gammas = [(g.at(solution), e) for g, e in system.gammas]
        scales = [(c, s.at(solution)) for c, s in system.scales]
        constant = product.coefficient * system.constant / rational(determinant)
        found = _value(constant, gammas, scales, list(free), Region(facts).positive(*region[0]).holds(*region[1]))
        if found is None:
            continue
        value, lemmas = found
        if value.has(*BAD):
            continue
        return Outcome(
            value,
            tuple(region[0]),
            tuple(region[1]),
            (*system.steps, *_told(system, solution, free, determinant, region[0]), *lemmas),
            (*system.sources, _SOURCE),
        )
    return None


def _told(
    system: System, solution: dict[int, Form], free: Sequence[int], determinant: Fraction, positive: Sequence[Expr]
) -> list[Step]:
    n = len(system.product.powers)
    matrix = ImmutableDenseMatrix(n, len(system.vectors), lambda i, j: system.vectors[j][i])
    names = ", ".join(system.names)
    symbols: dict[int, Expr] = {j: Dummy(f"s{j + 1}") for j in range(len(system.vectors))}
    solved = "; ".join(f"s{j + 1} = {form.expr(symbols)}".replace("_s", "s") for j, form in sorted(solution.items()))
    index = len(free)
    steps = [
        Step(f"exponent matrix of the kernels {names}, index {index}", result=matrix),
        Step(f"solution {solved}, abs(det) = {determinant}", "linear equations of the Mellin variables"),
    ]
    how = "strips of the kernels at the solution" if not free else f"free variables eliminated from {len(system.bounds)} strips"
    told = ", ".join(f"{p} > 0" for p in positive)
    steps.append(Step(f"{how}: {told}", "Fourier-Motzkin elimination" if free else ""))
    return steps


def _value(
    constant: Expr, gammas: Gammas, scales: Scales, free: list[int], region: Region
) -> tuple[Expr, list[Step]] | None:
    steps: list[Step] = []
    while len(free) > 1:
        lowered = _lower(gammas, scales, free)
        if lowered is None:
            return None
        factor, gammas, scales, gone, step = lowered
        constant = constant * factor
        free = [j for j in free if j != gone]
        steps.append(step)
    if not free:
        return _closed(constant, gammas, scales), steps
    (u,) = free
    rows = cancel(
        tuple(Factor(g.constant, rational(g.slope(u)), e) for g, e in gammas if g.slope(u))
    )
    outside = [(g.constant, e) for g, e in gammas if not g.slope(u)]
    z: Expr = S.One
    back: dict[Expr, Expr] = {}
    for c, s in scales:
        constant = constant * positive_power(c, -s.constant)
        slope = s.slope(u)
        if slope:
            if not c.is_positive:
                eta = Dummy("eta", positive=True)
                back[eta] = c
                c = eta
            z = z * positive_power(c, rational(slope))
    z = collect_powers(z)
    if not rows:
        return None
    value = inverse_mellin(rows, z, region.facts)
    if value is None:
        return None
    if fragile(value, region):
        value = _meijer(rows, z) or value
    up = [a for a, e in outside if e > 0]
    down = [a for a, e in outside if e < 0]
    value = tidy(collect_powers(constant * shortest_quotient(up, down)) * value).xreplace(back)
    steps.append(Step("one contour integral left", "DLMF 16.17.1", value))
    return value, steps


def fragile(value: Expr, region: Region) -> bool:
    """Whether a sum of hypergeometric series has lower parameters that may be 0, -1, ... in the region."""
    return any(
        not b.is_number and region.sign(real_part(b)) != 1
        for h in sorted(value.atoms(hyper), key=default_sort_key)
        for b in h.bq
    )


def _meijer(rows: Sequence[Factor], z: Expr) -> Expr | None:
    """The contour integral as Meijer's G, which has no removable singularities (DLMF 16.17.1)."""
    norm = normalise(rows)
    if norm.signature.lam <= 0:
        return None
    left, right, left_den, right_den = norm.signature
    argument = norm.scale * positive_power(z, norm.power)
    return norm.constant * meijerg(([1 - x for x in right], list(left_den)), (list(left), [1 - x for x in right_den]), argument)


def _closed(constant: Expr, gammas: Gammas, scales: Scales) -> Expr:
    up = [g.constant for g, e in gammas if e > 0]
    down = [g.constant for g, e in gammas if e < 0]
    # the splitting of a sum leaves 1/gamma(p) among the constants
    rest = []
    for factor in Mul.make_args(constant):
        if factor.is_Pow and factor.exp is S.NegativeOne and isinstance(factor.base, gamma):
            down.append(factor.base.args[0])
        elif isinstance(factor, gamma):
            up.append(factor.args[0])
        else:
            rest.append(factor)
    powers = [positive_power(c, -s.constant) for c, s in scales]
    return collect_powers(Mul(*rest, *powers, shortest_quotient(up, down)))


def _lower(gammas: Gammas, scales: Scales, free: Sequence[int]) -> tuple[Expr, Gammas, Scales, int, Step] | None:
    """One contour integral done by a lemma that leaves Gammas: the binomial integral, Barnes' lemmas."""
    for u in free:
        touched = [(g, e) for g, e in gammas if g.slope(u)]
        touched = _cancelled(touched)
        sizes = {abs(g.slope(u)) for g, _ in touched}
        if len(sizes) != 1:
            continue
        (q,) = sizes
        z = Mul(*(Pow(c, rational(s.slope(u) / q)) for c, s in scales if s.slope(u)))
        up = [g.without(u) for g, e in touched if e > 0 and g.slope(u) > 0]
        right = [g.without(u) for g, e in touched if e > 0 and g.slope(u) < 0]
        down = [g.without(u) for g, e in touched if e < 0]
        falling = [g for g, e in touched if e < 0 and g.slope(u) < 0]
        new: Gammas | None = None
        extra: Scales = []
        if len(up) == len(right) == 1 and not down and all(c.is_positive for c, s in scales if s.slope(u)):
            # int Gamma(a+s)*Gamma(b-s)*z**(-s) ds = Gamma(a+b)*z**a*(1+z)**(-a-b)
            total = up[0].plus(right[0])
            new, extra = [(total, 1)], [(1 / z, up[0]), (1 + z, total)]
            name = "DLMF 5.12.3 inverted"
        else:
            z = z if z is S.One else collect_powers(z)
            if z is not S.One:
                continue
            if len(up) == len(right) == 2 and not down:
                (a, b), (c, d) = up, right
                new = [(x.plus(y), 1) for x in (a, b) for y in (c, d)]
                new.append((a.plus(b).plus(c).plus(d), -1))
                name = "Barnes' first lemma, DLMF 5.13.1"
            elif sorted((len(up), len(right))) == [2, 3] and len(down) == 1:
                three, two = (up, right) if len(up) == 3 else (right, up)
                if bool(falling) != (three is right):
                    continue
                total = three[0].plus(three[1]).plus(three[2]).plus(two[0]).plus(two[1])
                gap = down[0].plus(total, Fraction(-1))
                if gap.slopes or gap.constant is not S.Zero:
                    continue
                new = [(x.plus(y), 1) for x in three for y in two]
                new += [(down[0].plus(x, Fraction(-1)), -1) for x in three]
                name = "Barnes' second lemma, DLMF 5.13.4"
        if new is None:
            continue
        rest = [(g, e) for g, e in gammas if not g.slope(u)]
        kept = [(c, s.without(u)) for c, s in scales]
        return 1 / rational(q), _cancelled(rest + new), kept + extra, u, Step("one contour integral done", name)
    return None


def _cancelled(gammas: Gammas) -> Gammas:
    rest: Gammas = []
    for g, e in gammas:
        opposite = next((r for r in rest if r[1] == -e and r[0].constant == g.constant and dict(r[0].slopes) == dict(g.slopes)), None)
        if opposite is not None:
            rest.remove(opposite)
        else:
            rest.append((g, e))
    return rest


def _symbolic(product: Product, facts: Facts) -> Outcome | None:
    """Index 0 with symbols among the exponents inside the kernels, such as exp(-x**k - y)."""
    if product.index != 0 or any(len(s.argument) > 1 for s in product.specials):
        return None
    system = System.of(product, facts)
    if system is None:
        return None
    n = len(product.powers)
    matrix = Matrix(n, n, lambda i, j: system.vectors[j][i])
    determinant = matrix.det(method="berkowitz").expand()
    known = facts.sign(determinant) if determinant.is_extended_real else None
    if known not in (1, -1):
        return None
    solved = (matrix.adjugate() * Matrix(system.targets)) / determinant
    values = [(v.cancel() if v.is_Add or v.is_Mul else v) for v in solved]
    symbols: dict[int, Expr] = dict(enumerate(values))
    gammas = [(Form(g.expr(symbols).expand()), e) for g, e in system.gammas]
    scales = [(c, Form(s.expr(symbols))) for c, s in system.scales]
    positive = [real_part(b.expr(symbols).expand()) for b in system.bounds] + system.positive
    value = _closed(product.coefficient * system.constant / (known * determinant), gammas, scales)
    if value.has(*BAD):
        return None
    step = Step(f"exponent matrix of the kernels {', '.join(system.names)}, index 0", result=ImmutableDenseMatrix(matrix))
    return Outcome(value, tuple(positive), tuple(system.booleans), (step,), (*system.sources, _SOURCE))


__all__ = ["System", "contour", "fragile", "region_of"]
