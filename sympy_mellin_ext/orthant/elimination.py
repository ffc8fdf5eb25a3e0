"""One variable integrated out along a direction in which the integrand scales.

Under ``x_i -> lambda**w_i * x_i`` every factor must stay as it is up to a power of lambda, except those that are
functions of one sum A which is homogeneous (Liouville's and Dirichlet's integrals; Schwinger's and Feynman's
parameters read backwards).  By Tonelli the reduced integral of absolute values converges iff the first one does.

Sources: E. T. Whittaker and G. N. Watson, A Course of Modern Analysis (1927), section 12.5 (Dirichlet, Liouville);
DLMF 5.9.1, 5.12.3, 5.14.1.
"""
from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import combinations

from sympy import Add, Dummy, Expr, Mul, Pow, S, Symbol, exp, gamma
from sympy.logic.boolalg import Boolean

from ..closed_form import ClosedForm, Step
from ..problem import Problem
from ..region import Facts, real_part
from ..strategies.registry import attempt
from .integrand import Product, Special, above, below
from .linear import fraction, particular, rational
from .outcome import Outcome
from .polynomial import Monomial, Polynomial, collected, product
from .trinomial import positive_trinomial

Direction = tuple[Fraction, ...]
_MOST_DIRECTIONS = 24
LIOUVILLE = "Whittaker and Watson, A Course of Modern Analysis (1927), section 12.5"


@dataclass(frozen=True)
class Reduction:
    """A product in one variable less, times ``factor``, under conditions."""

    rest: Product
    variables: tuple[Symbol, ...]
    factor: Expr
    positive: tuple[Expr, ...]
    booleans: tuple[Boolean, ...]
    step: Step
    source: str
    special: tuple[tuple[Boolean, Expr], ...] = ()

    def complete(self, inner: Outcome) -> Outcome:
        return inner.under(self.factor, self.positive, self.booleans, (self.step,), (self.source,))


def reductions(prod: Product, variables: Sequence[Symbol], facts: Facts) -> Iterator[Reduction]:
    """All reductions that are found, the simplest directions first."""
    seen: set[tuple[Direction, int]] = set()
    for w in _directions(prod):
        y = _eliminated(w)
        if (w, y) in seen:
            continue
        seen.add((w, y))
        found = _along(prod, variables, facts, w, y)
        if found is not None:
            yield found


def _eliminated(w: Direction) -> int:
    """The last variable that moves becomes the radius."""
    return max(i for i, c in enumerate(w) if c)


def _vector(m: Monomial) -> list[Fraction]:
    return [fraction(a) for a in m.exponents]


def _differences(poly: Polynomial) -> list[list[Fraction]]:
    first = _vector(poly[0])
    return [[a - b for a, b in zip(_vector(m), first, strict=True)] for m in poly[1:]]


def _directions(prod: Product) -> Iterator[Direction]:
    """Directions in which the integrand may scale: coordinates, then solutions of linear equations."""
    n = len(prod.powers)
    for i in range(n):
        yield tuple(Fraction(int(i == j)) for j in range(n))
    if n == 1:
        return
    polys = prod.polynomials()[1:]
    exponent = prod.exponent
    count = 0
    # (a) the exponential alone scales, in some of its monomials, or together with kernels of the same degree
    for size in range(len(exponent), 0, -1):
        for chosen in combinations(range(len(exponent)), size):
            rows = [d for p in polys for d in _differences(p)]
            rows += [_vector(m) for m in exponent]
            right = [Fraction(0)] * (len(rows) - len(exponent))
            right += [Fraction(int(i in chosen)) for i in range(len(exponent))]
            w = particular(rows, right)
            if w is not None and any(w):
                yield tuple(w)
            count += 1
            if count > _MOST_DIRECTIONS:
                return
    # (b) one power of a sum scales in some of its monomials, or one kernel does
    for k, poly in enumerate(polys):
        others = [_vector(m) for m in exponent] + [d for i, p in enumerate(polys) if i != k for d in _differences(p)]
        sum_of_two = k < len(prod.sums)
        for size in range(1, len(poly)) if sum_of_two else (len(poly),):
            for chosen in combinations(range(1, len(poly)), size) if sum_of_two else (tuple(range(len(poly))),):
                if sum_of_two:
                    own = _differences(poly)
                    want = [Fraction(int(i + 1 in chosen)) for i in range(len(own))]
                else:
                    own = [_vector(m) for m in poly]
                    want = [Fraction(1)] * len(own)
                w = particular([*others, *own], [Fraction(0)] * len(others) + want)
                if w is not None and any(w):
                    yield tuple(w)
                count += 1
                if count > _MOST_DIRECTIONS:
                    return


Parts = dict[Expr, Polynomial]  # degree in y -> coefficient polynomial in the other variables
# the exponential (None), the exponent of a sum, or a kernel, with its parts
Moving = tuple[Special | Expr | None, Parts]


def _parts(poly: Polynomial, y: int, w: Direction) -> Parts:
    """The polynomial by degrees in the radius, after x_i -> y**(w_i/w_y)*x_i for the other variables."""
    found: dict[Expr, list[Monomial]] = {}
    for m in poly:
        degree = sum((a * b for a, b in zip(_vector(m), w, strict=True)), Fraction(0)) / w[y]
        left = tuple(e for i, e in enumerate(m.exponents) if i != y)
        found.setdefault(rational(degree), []).append(Monomial(m.coefficient, left))
    return {degree: collected(ms) for degree, ms in found.items()}


def _along(prod: Product, variables: Sequence[Symbol], facts: Facts, w: Direction, y: int) -> Reduction | None:
    n = len(prod.powers)
    power = sum((rational(w[i] / w[y]) * (prod.powers[i] + 1) for i in range(n)), S.Zero).expand()  # exponent + 1
    rest = Product(prod.coefficient, tuple(p for i, p in enumerate(prod.powers) if i != y), tilts=prod.tilts)
    others = tuple(x for i, x in enumerate(variables) if i != y)
    exponent = _parts(prod.exponent, y, w)
    rest = replace(rest, exponent=exponent.pop(S.Zero, ()))
    moving: list[Moving] = []
    if exponent:
        moving.append((None, exponent))
    for base, p in prod.sums:
        parts = _parts(base, y, w)
        if len(parts) == 1:
            (degree, inner), = parts.items()
            if degree is not S.Zero:
                power = (power - degree * p).expand()
            added = rest.with_power(inner, p, facts)
            if added is None:
                return None
            rest = added
        else:
            moving.append((p, parts))
    for special in prod.specials:
        parts = _parts(special.argument, y, w)
        if set(parts) == {S.Zero}:
            rest = replace(rest, specials=(*rest.specials, replace(special, argument=parts[S.Zero])))
        else:
            moving.append((special, parts))
    if not moving:
        return None
    told = " ".join(f"{x.name}**({rational(c / w[y])})" for x, c in zip(variables, w, strict=True) if c)
    if len(moving) == 1:
        return _single(moving[0], rest, power, others, facts, told)
    return _liouville(moving, rest, power, others, facts, told)


def _with_sum(rest: Product, poly: Polynomial, p: Expr, facts: Facts) -> Product | None:
    """Times ``poly**(-p)`` for a sum with positive terms, and any p."""
    if not all(c.is_extended_real and facts.sign(c) == 1 for c, _ in poly):
        return None
    return rest.with_power(poly, p, facts)


def _single(
    item: Moving, rest: Product, power: Expr, others: tuple[Symbol, ...], facts: Facts, told: str
) -> Reduction | None:
    """One factor scales."""
    data, parts = item
    booleans: list[Boolean] = []
    if isinstance(data, Expr):
        p = data
        if len(parts) != 2:
            return None
        (d0, low), (d1, high) = sorted(parts.items(), key=lambda part: part[0])
        # (y**d0*B + y**d1*A)**(-p) = y**(-d0*p)*B**(-p)*(1 + y**m*A/B)**(-p)
        m = d1 - d0
        beta = ((power - d0 * p) / m).expand()
        left = _with_sum(rest, high, beta, facts)
        left = None if left is None else _with_sum(left, low, (p - beta).expand(), facts)
        if left is None:
            return None
        positive = [real_part(beta), real_part((p - beta).expand())]
        factor = gamma(beta) * gamma((p - beta).expand()) / gamma(p) / m
        step = _step(told, "a power of a sum", power)
        return Reduction(left, others, factor, tuple(positive), (), step, "DLMF 5.12.3")
    if len(parts) != 1:
        return None
    ((m, inner),) = parts.items()
    if m is S.Zero:
        return None
    beta = (power / m).expand()
    size = m if m.is_positive else -m
    if data is None:
        if len(inner) == 1:
            c = inner[0].coefficient
            if facts.sign(c) is None and c.is_extended_real:
                booleans.append(c > 0)
                facts = Facts((*facts.given, c > 0))
        elif not all(c.is_extended_real and facts.sign(c) == 1 for c, _ in inner):
            condition = positive_trinomial(inner, facts)
            if condition is None:
                return None
            booleans.append(condition)
            if condition is S.false:
                return None
            added = _indefinite(rest, inner, beta)
            return Reduction(
                added, others, gamma(beta) / size, (real_part(beta),), tuple(booleans),
                _step(told, "an exponential", power), "DLMF 5.9.1",
            )  # fmt: skip
        left = _with_sum(rest, inner, beta, facts)
        if left is None:
            return None
        return Reduction(
            left, others, gamma(beta) / size, (real_part(beta),), tuple(booleans),
            _step(told, "an exponential", power), "DLMF 5.9.1",
        )  # fmt: skip
    special = data
    strip = special.strip()
    if strip is None or special.oscillates:
        return None
    left = _with_sum(rest, inner, beta, facts)
    if left is None:
        return None
    positive = [*above(beta, strip[0]), *below(beta, strip[1]), *special.conditions()]
    factor = special.product.at(beta) / size
    return Reduction(left, others, factor, tuple(positive), (), _step(told, special.name, power), special.source)


def _step(told: str, what: str, power: Expr) -> Step:
    return Step(f"{what} integrated along the direction {told}, power {power}", "Tonelli")


def _indefinite(rest: Product, poly: Polynomial, p: Expr) -> Product:
    """Times ``poly**(-p)`` for a sum that is positive for a reason of its own."""
    sums = (*rest.sums, (poly, p))
    return replace(rest, sums=sums)


# -- Liouville ------------------------------------------------------------------------------------------------


def _liouville(
    moving: Sequence[Moving],
    rest: Product,
    power: Expr,
    others: tuple[Symbol, ...],
    facts: Facts,
    told: str,
) -> Reduction | None:
    """Several factors are functions of ``r = y*A**(1/m)`` alone: a one-dimensional integral times a power of A."""
    degrees = sorted({d for _, parts in moving for d in parts if d is not S.Zero}, key=lambda d: (abs(d), d))
    m = degrees[0]
    shape = next(parts[m] for _, parts in moving if m in parts)
    head = shape[0].coefficient
    unit = tuple(Monomial(c / head, e) for c, e in shape)
    powers: dict[Expr, Polynomial] = {S.One: unit}
    r = Dummy("r", positive=True)
    factors = [Pow(r, power - 1)]
    for data, parts in moving:
        argument: list[Expr] = []
        for d, inner in sorted(parts.items(), key=lambda part: part[0]):
            if d is S.Zero:
                if len(inner) != 1 or not inner[0].constant:
                    return None
                argument.append(inner[0].coefficient)
                continue
            k = d / m
            c = _multiple(inner, unit, k, powers)
            if c is None:
                return None
            argument.append(c * r**d)
        total = Add(*argument)
        if data is None:
            factors.append(exp(-total))
        elif isinstance(data, Expr):
            factors.append(Pow(total, -data))
        else:
            if data.oscillates:
                return None
            factors.append(data.build(total))
    beta = (power / m).expand()
    left = _with_sum(rest, unit, beta, facts)
    if left is None:
        return None
    answer = attempt(Problem(Mul(*factors), r, facts=facts, depth=1))
    if not isinstance(answer, ClosedForm):
        return None
    step = Step(f"all factors are functions of one sum along the direction {told}", LIOUVILLE, answer.value)
    return Reduction(left, others, answer.value, (), (answer.condition,), step, LIOUVILLE)


def _multiple(inner: Polynomial, unit: Polynomial, k: Expr, powers: dict[Expr, Polynomial]) -> Expr | None:
    """c with ``inner = c*unit**k``, or None."""
    if k not in powers:
        if len(unit) == 1:
            powers[k] = (unit[0].power(k),)
        elif k.is_Integer and 1 < k <= 6:
            total = unit
            for _ in range(int(k) - 1):
                total = product(total, unit)
            powers[k] = total
        else:
            return None
    wanted = powers[k]
    if len(wanted) != len(inner):
        return None
    c = inner[0].coefficient / wanted[0].coefficient
    for (a, e), (b, f) in zip(inner, wanted, strict=True):
        if e != f or (a != c * b and (a - c * b).expand() is not S.Zero):
            return None
    return c


__all__ = ["LIOUVILLE", "Reduction", "reductions"]
