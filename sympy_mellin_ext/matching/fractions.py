"""Products of several binomials and trinomials below the line: partial fractions in a power of x.

Every fraction that comes out has one binomial, with a real or a complex scale, and is a kernel of the table:
``int x**(u-1)/(x + m*exp(I*t))**i dx = m**(u-i)*exp(I*t*(u-i))*Gamma(u)*Gamma(i-u)/Gamma(i)`` (Beta integral,
DLMF 5.12.3, for abs(t) < pi); conjugate pairs are added to real waves.
"""
from __future__ import annotations

from dataclasses import dataclass, replace

from sympy import (
    Add,
    Dummy,
    Expr,
    Integer,
    Mul,
    Poly,
    S,
    Symbol,
    acos,
    cos,
    factor_list,
    gcd,
    gcdex,
    pi,
    sin,
    sqrt,
)
from sympy.logic.boolalg import Boolean
from sympy.polys.polyerrors import PolynomialError

from ..kernels.elementary import power as power_transform
from ..region import Facts
from .monomials import monomials
from .term import Kernel, Wave
from .waves import Draft

_MAX_DEGREE = 12
_SOURCE = "DLMF 5.12.3"


@dataclass(frozen=True)
class Denominator:
    """``polynomial(x**ratio)**multiplicity``."""

    polynomial: Poly
    multiplicity: int


def common_ratio(bases: list[list[tuple[Expr, Expr]]]) -> Expr | None:
    """The r such that every exponent of every base is a whole multiple of r, lowest exponents being 0."""
    exponents = [p for base in bases for _, p in base if not p.is_zero]
    if not exponents:
        return None
    first = exponents[0]
    multiples = [(p / first) for p in exponents]
    if not all(m.is_Rational for m in multiples):
        return None
    unit = multiples[0]
    for m in multiples[1:]:
        unit = gcd(unit, m)
    return first * unit


def split(factors: list[tuple[Expr, int]], x: Symbol, facts: Facts) -> list[Draft] | None:
    """``prod base**(-n)`` as a sum of drafts with one kernel each, or None.

    Parameters
    ----------
    factors : list of (base, n)
        Bases are sums of monomials in x, n positive integers.
    """
    bases = []
    front_power: Expr = S.Zero
    for base, n in factors:
        parts = monomials(base, x)
        if parts is None or len(parts) < 2:
            return None
        lowest = parts[0][1]
        for _, p in parts[1:]:
            known = facts.sign(p - lowest)
            if known is None:
                return None
            lowest = p if known == -1 else lowest
        front_power -= n * lowest
        bases.append([(c, (p - lowest).expand()) for c, p in parts])
    ratio = common_ratio(bases)
    if ratio is None or facts.sign(ratio) is None:
        return None
    drafts = _simple(bases, [n for _, n in factors], ratio, facts)
    if drafts is not None:
        return [d.times(Draft(power=front_power)) for d in drafts]
    y = Dummy("y")  # never leaves this module: polynomials are read back by their coefficients
    try:
        factored = _factored(bases, [n for _, n in factors], ratio, y)
    except PolynomialError:
        return None
    if factored is None:
        return None
    constant, denominators = factored
    drafts = []
    for numerator, den in _partial_fractions(denominators, y):
        part = _one_fraction(numerator, den, ratio, facts, y)
        if part is None:
            return None
        drafts.extend(part)
    front = Draft(coefficient=1 / constant, power=front_power)
    return [d.times(front) for d in drafts]


def _simple(
    bases: list[list[tuple[Expr, Expr]]], powers: list[int], ratio: Expr, facts: Facts
) -> list[Draft] | None:
    """``1/prod (c_i + y)`` with different constants: ``sum 1/(prod_(j != i) (c_j - c_i)) / (c_i + y)``."""
    if any(n != 1 for n in powers) or not all(len(b) == 2 and ratio in (b[0][1], b[1][1]) for b in bases):
        return None
    front: Expr = S.One
    constants: list[Expr] = []
    for base in bases:
        (c0, p0), (c1, _) = base
        if not p0.is_zero:
            c0, c1 = c1, c0
        front, constants = front / c1, [*constants, c0 / c1]
    if len(set(constants)) < len(constants):
        return None
    drafts: list[Draft] = []
    for i, c in enumerate(constants):
        weight = front / Mul(*(other - c for j, other in enumerate(constants) if j != i))
        part = _binomial([(0, weight)], 1, c, 1, ratio, facts)
        if part is None:
            return None
        drafts.extend(part)
    return drafts


def _factored(
    bases: list[list[tuple[Expr, Expr]]], powers: list[int], ratio: Expr, y: Symbol
) -> tuple[Expr, list[Denominator]] | None:
    """Denominators with coprime polynomials of degree 1, binomials, or quadratics; constants apart."""
    found: dict[Poly, int] = {}
    constant: Expr = S.One
    for base, n in zip(bases, powers, strict=True):
        expr = Add(*(c * y ** (p / ratio) for c, p in base))
        poly = Poly(expr, y, field=True)
        if poly.degree() > _MAX_DEGREE:
            return None
        pieces = [(poly, 1)]
        if len(poly.terms()) > 2 or poly.LC().is_number:
            content, factors = factor_list(expr, y)
            if factors:
                constant = constant * content**n
                pieces = [(Poly(f, y, field=True), k) for f, k in factors]
        for piece, k in pieces:
            lead = piece.LC()
            constant = constant * lead ** (k * n)
            monic = piece.monic()
            if monic == Poly(y, y, field=True):
                return None
            found[monic] = found.get(monic, 0) + k * n
    return constant, [Denominator(p, n) for p, n in found.items()]


def _partial_fractions(denominators: list[Denominator], y: Symbol) -> list[tuple[Poly, Denominator]]:
    """``1/prod f_i**n_i = sum N_ij/f_i**j`` by Bezout's identity, then f-adic digits of the numerators."""
    result = []
    for den in denominators:
        own = den.polynomial**den.multiplicity
        others = Poly(1, y, field=True)
        for other in denominators:
            if other is not den:
                others = others * other.polynomial**other.multiplicity
        if others.degree() == 0:
            numerator = Poly(1, y, field=True)
        else:
            # s*others + t*own = g, a constant: 1/(own*others) = s/(g*own) + ...
            numerator, _, g = gcdex(others, own)
            numerator = numerator.rem(own).quo_ground(g.LC())
        digits = []
        rest = numerator
        for _ in range(den.multiplicity):
            rest, digit = rest.div(den.polynomial)
            digits.append(digit)
        for k, digit in enumerate(digits):
            if not digit.is_zero:
                result.append((digit, Denominator(den.polynomial, den.multiplicity - k)))
    return result


def _one_fraction(numerator: Poly, den: Denominator, ratio: Expr, facts: Facts, y: Symbol) -> list[Draft] | None:
    poly, n = den.polynomial, den.multiplicity
    terms = poly.terms()
    coefficients = [(m[0], c) for m, c in numerator.terms()]
    if len(terms) == 2 and terms[1][0][0] == 0:
        degree, c0 = terms[0][0][0], terms[1][1]
        return _binomial(coefficients, degree, c0, n, ratio, facts)
    if poly.degree() == 2 and len(terms) == 3:
        return _quadratic(numerator, terms[1][1], terms[2][1], n, ratio, facts, y)
    return None


def _binomial(
    numerator: list[tuple[int, Expr]], degree: int, c0: Expr, n: int, ratio: Expr, facts: Facts
) -> list[Draft] | None:
    """``numerator/(c0 + y**degree)**n``."""
    known = facts.sign(c0)
    if known == -1:
        kernel = pole_kernel(n, -1 / c0, degree * ratio)
    elif known == 1:
        product = power_transform(Integer(n)).with_scale(1 / c0)
        kernel = Kernel("power", product, degree * ratio, None, S.true, True, _SOURCE, (Integer(n),))
    else:
        return None
    return [Draft(coefficient=c * c0**-n, power=m * ratio, kernels=(kernel,)) for m, c in numerator]


def pole_kernel(n: int, scale: Expr, ratio: Expr) -> Kernel:
    """``(1 - scale*x**ratio)**(-n)`` in the sense of the mean of both sides of its pole.

    Only a sum in which the poles cancel, or a principal value, may use it.
    """
    product = power_transform(Integer(n)).with_scale(scale)
    return Kernel("pole", product, ratio, Wave(pi, S.Zero, True), S.true, False, _SOURCE, (Integer(n),))


def _quadratic(
    numerator: Poly, b: Expr, c: Expr, n: int, ratio: Expr, facts: Facts, y: Symbol
) -> list[Draft] | None:
    """``numerator/(y**2 + b*y + c)**n`` with c > 0 and b > -2*sqrt(c): roots -m*exp(-+I*t), cos(t) = b/(2m)."""
    if facts.sign(c) != 1:
        return _real_roots(numerator, b, c, n, ratio, facts, y)
    discriminant = (b**2 - 4 * c).expand()
    if facts.sign(discriminant) == 1 and n == 1:
        return _real_roots(numerator, b, c, n, ratio, facts, y)
    m = sqrt(c)
    cosine = b / (2 * m)
    angle, sine, condition = turn_of(cosine, facts)
    if condition == False:  # noqa: E712 - SymPy Boolean
        return None
    # residues at rho = -m*exp(-I*t), with e = exp(-I*t) kept as a symbol: complex numbers as pairs
    drafts = []
    for i, (even, odd) in enumerate(_residues(numerator, m, cosine, sine, n, y), start=1):
        product = power_transform(Integer(i)).with_scale(1 / m)
        for weight, phase in ((2 * even, -i * angle), (2 * odd, -i * angle - pi / 2)):
            if weight is S.Zero:
                continue
            wave = Wave(angle, phase, True)
            kernel = Kernel("power", product, ratio, wave, condition, True, _SOURCE, (Integer(i),))
            drafts.append(Draft(coefficient=weight * m**-i, kernels=(kernel,)))
    return drafts


def turn_of(cosine: Expr, facts: Facts) -> tuple[Expr, Expr, Boolean]:
    """The angle t with this cosine, its sine, and the condition for ``abs(t) < pi`` (and analytic beyond)."""
    if isinstance(cosine, cos) and cosine.args[0].is_real:
        t = cosine.args[0]
        return t, sin(t), S.true if facts.implies(abs(t) < pi) else abs(t) < pi
    sine = sqrt((1 - cosine**2).expand()) if cosine.is_number else sqrt(1 - cosine) * sqrt(1 + cosine)
    condition = S.true if facts.sign(cosine) == 1 or facts.sign(cosine + 1) == 1 else cosine + 1 > 0
    return acos(cosine), sine, condition


def _residues(numerator: Poly, m: Expr, cosine: Expr, sine: Expr, n: int, y: Symbol) -> list[tuple[Expr, Expr]]:
    """Real and imaginary part of K_i, i = 1..n, in ``sum K_i/(y - rho)**i`` at ``rho = -m*exp(-I*t)``.

    The expansion of N(y)*(y - conj(rho))**(-n) at rho, with complex numbers as pairs of real expressions.
    """

    def times(p: tuple[Expr, Expr], q: tuple[Expr, Expr]) -> tuple[Expr, Expr]:
        return (p[0] * q[0] - p[1] * q[1]).expand(), (p[0] * q[1] + p[1] * q[0]).expand()

    rho = (-m * cosine, m * sine)
    # Taylor digits of N at rho
    derivatives = []
    poly = numerator
    factor = S.One
    for k in range(n):
        value: tuple[Expr, Expr] = (S.Zero, S.Zero)
        for coefficient in poly.all_coeffs():
            value = times(value, rho)
            value = (value[0] + coefficient, value[1])
        derivatives.append((value[0] / factor, value[1] / factor))
        poly, factor = poly.diff(y), factor * (k + 1)
    # (y - conj(rho))**(-n) = sum_k binom(-n, k) * d**(-n-k) * (y - rho)**k with d = rho - conj(rho) = 2*I*m*sine
    d = 2 * m * sine
    binomials: list[tuple[Expr, Expr]] = []
    choose = S.One
    for k in range(n):
        # I**(-n-k)
        turn = ((1, 0), (0, -1), (-1, 0), (0, 1))[(n + k) % 4]
        binomials.append((choose * turn[0] / d ** (n + k), choose * turn[1] / d ** (n + k)))
        choose = choose * (-n - k) / (k + 1)
    result: list[tuple[Expr, Expr]] = []
    for i in range(1, n + 1):
        total_re, total_im = S.Zero, S.Zero
        for k in range(n - i + 1):
            re, im = times(derivatives[k], binomials[n - i - k])
            total_re, total_im = total_re + re, total_im + im
        result.append((total_re, total_im))
    return result


def _real_roots(
    numerator: Poly, b: Expr, c: Expr, n: int, ratio: Expr, facts: Facts, y: Symbol
) -> list[Draft] | None:
    """``numerator/(y**2 + b*y + c)`` with two different real roots."""
    discriminant = (b**2 - 4 * c).expand()
    if n != 1 or facts.sign(discriminant) != 1:
        return None
    root = sqrt(discriminant)
    drafts: list[Draft] = []
    for sign in (1, -1):
        rho, other = (-b + sign * root) / 2, (-b - sign * root) / 2
        weight = (numerator.eval(rho) * sign * root / discriminant).expand()
        part = _binomial([(0, weight)], 1, -rho, 1, ratio, facts)
        if part is not None and c.is_number:
            # 1/rho = other/c keeps surds out of the denominators
            inverse = (-other / c).expand()
            kernel = replace(part[0].kernels[0], product=power_transform(S.One).with_scale(inverse))
            if kernel.name == "power":
                part = [Draft(coefficient=(weight * inverse).expand(), power=part[0].power, kernels=(kernel,))]
        if part is None:
            return None
        drafts.extend(part)
    return drafts
