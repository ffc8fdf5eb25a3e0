"""Contour integrals that the linear system leaves: Gamma products at once, Barnes' lemmas, the inverse transform.

Sources: DLMF 5.12.3, 5.13.1-5.13.4 (Barnes' lemmas), 16.17.1; R. B. Paris and D. Kaminski, Asymptotics and
Mellin-Barnes Integrals (2001), ch. 7 (several variables).
"""
from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from itertools import islice

from sympy import Dummy, Expr, ImmutableDenseMatrix, Matrix, Mul, Pow, S, gamma, hyper, meijerg
from sympy.core.sorting import default_sort_key
from sympy.logic.boolalg import Boolean

from ..closed_form import Step
from ..gamma.product import Factor, cancel
from ..gamma.shortest import collect_powers, positive_power, shortest_quotient
from ..inverse import inverse_mellin
from ..inverse.signature import normalise
from ..region import Facts, Region, real_part
from ..strategies.tidy import tidy
from .integrand import Product
from .linear import rational
from .outcome import BAD, Outcome
from .system import Form, Gammas, Scales, System, region_of

_MOST_CHOICES = 30
_SOURCE = "Paris and Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), ch. 7"


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
        Step(f"exponent matrix of the kernels {names}, index {index}", "DLMF 1.14.39 in each variable", matrix),
        Step(f"solution {solved}, abs(det) = {determinant}", "linear equations of the Mellin variables"),
    ]
    how = "strips of the kernels at the solution"
    if free:
        how = f"free variables eliminated from {len(system.bounds)} strips"
    told = ", ".join(f"{p} > 0" for p in positive)
    steps.append(Step(f"{how}: {told or 'nothing further'}", "Fourier-Motzkin elimination" if free else "Fubini"))
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
    lower = (list(left), [1 - x for x in right_den])
    return norm.constant * meijerg(([1 - x for x in right], list(left_den)), lower, argument)


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
        opposite = next((r for r in rest if r[1] == -e and r[0].same(g)), None)
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
    told = f"exponent matrix of the kernels {', '.join(system.names)}, index 0"
    step = Step(told, "DLMF 1.14.39 in each variable", ImmutableDenseMatrix(matrix))
    return Outcome(value, tuple(positive), tuple(system.booleans), (step,), (*system.sources, _SOURCE))


__all__ = ["contour", "fragile"]
