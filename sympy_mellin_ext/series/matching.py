"""From a two-term equation and the leading coefficients to the one Gamma product that has both.

The exponents of ``f`` at 0 say which Gammas have poles left of the strip; the growth of the product and its
residues single out the rest.

Sources: DLMF 5.5 (functional relations of Gamma); R. B. Paris and D. Kaminski, Asymptotics and Mellin-Barnes
Integrals (2001), 2.2 and 2.4 (residues and growth).
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import product as choices

import mpmath
from sympy import Expr, Integer, Mul, Pow, Rational, S, Symbol, pi, sin
from sympy import gamma as gamma_function

from ..gamma import Factor, GammaProduct, shortest_quotient
from ..gamma.product import cancel
from .growth import Sign, growth_ok
from .recurrence import Recurrence

_DIGITS = 30
# Values for parameters where a candidate is tried; nothing special happens at them.
_SAMPLES = (
    ("0.8414709848", "1.3774920541", "0.6180339887", "1.1283791671", "0.9159655942"),
    ("1.2020569031", "0.7390851332", "1.4513692348", "0.5671432904", "1.0823232337"),
)

# The exponents that the equation allows, each with the coefficient of the function there.
Leading = list[tuple[Expr, Expr]]


def matching_product(recurrence: Recurrence, leading: Leading, sign: Sign) -> GammaProduct | None:
    """The one candidate whose residues are the leading coefficients."""
    present = ladder_heads(leading, recurrence.step)
    if not present:
        return None
    involved = [*(e for pair in leading for e in pair), *recurrence.right, recurrence.ratio]
    symbols = sorted({symbol for e in involved for symbol in e.free_symbols}, key=str)
    if len(symbols) > len(_SAMPLES[0]):
        return None
    samples = [dict(zip(symbols, (Rational(v) for v in values), strict=False)) for values in _SAMPLES]
    for product in _candidates(recurrence, present, sign):
        on_ladder = [(r, c) for r, c in leading if _on_ladder(r, present, recurrence.step)]
        if not _agrees(product, on_ladder, present[0], samples[0]):
            continue
        constant = _constant(product, dict(leading)[present[0]], present[0])
        if constant is None:
            return None
        complete = GammaProduct(constant, product.scale, product.factors)
        if all(_same(complete, root, c, samples) for root, c in on_ladder):
            return gathered(complete)
    return None


def _on_ladder(root: Expr, heads: list[Expr], step: int) -> bool:
    """Whether the left poles pass the place of this exponent."""
    gaps = ((root - head).expand() / step for head in heads)
    return any(gap.is_Integer and gap >= 0 for gap in gaps)


def ladder_heads(leading: Leading, step: int) -> list[Expr]:
    """The exponents from which series of ``f`` start: the smallest one of each residue class."""
    heads: list[Expr] = []
    for root, c in leading:
        if c is S.Zero or root in heads:
            continue
        for i, other in enumerate(heads):
            gap = (root - other).expand() / step
            if gap.is_Integer:
                heads[i] = root if gap < 0 else other
                break
        else:
            heads.append(root)
    return heads


def _candidates(recurrence: Recurrence, present: list[Expr], sign: Sign) -> Iterator[GammaProduct]:
    """Solutions of the difference equation with exactly the left poles asked for, growing slowly enough."""
    m = Integer(recurrence.step)
    unit = 1 / m
    rest = list(present)
    left: list[Factor] = []
    absent = 0
    for root in recurrence.left:
        if root in rest:
            rest.remove(root)
            left.append(Factor(root / m, unit, 1))
        else:
            absent += 1
            left.append(Factor(1 - root / m, -unit, -1))
    degrees = len(recurrence.left), len(recurrence.right)
    bare = (
        -recurrence.ratio
        * S.NegativeOne ** (degrees[0] + degrees[1] + absent)
        * m ** (degrees[0] - degrees[1])
    )
    for sides in choices((False, True), repeat=degrees[1]):
        power = bare * S.NegativeOne ** sum(sides)
        if sign(power) != 1:
            continue
        right = [
            Factor(-root / m, -unit, 1) if there else Factor(1 + root / m, unit, -1)
            for root, there in zip(recurrence.right, sides, strict=True)
        ]
        factors = cancel((*left, *right))
        if (
            all(f in factors for f in left if f.power > 0)
            and _separated(factors)
            and growth_ok(factors, sign=sign).ok
        ):
            yield GammaProduct(S.One, _root(power, recurrence.step), factors)


def _separated(factors: tuple[Factor, ...]) -> bool:
    """Whether the numeric left poles lie left of the numeric right ones."""
    heads: dict[bool, list[Expr]] = {True: [], False: []}
    for a, A, e in factors:
        if e > 0 and a.is_Rational:
            heads[A > 0].append(-a / A)
    return not heads[True] or not heads[False] or max(heads[True]) < min(heads[False])


def gathered(product: GammaProduct) -> GammaProduct:
    """Gauss' multiplication formula applied where at most one of its Gammas is missing.

    Source: DLMF 5.5.6.
    """
    constant, scale, factors = product.constant, product.scale, list(product.factors)
    for m in (6, 5, 4, 3, 2):
        for first in list(factors):
            group = _group(first, m, factors)
            if group is None:
                continue
            for f in group:
                if f in factors:
                    factors.remove(f)
                else:
                    factors.append(Factor(f.shift, f.slope, -f.power))
            # prod Gamma(z + j/m) = (2*pi)**((m-1)/2) * m**(1/2 - m*z) * Gamma(m*z)
            (a, A, e), base = group[0], Integer(m)
            factors.append(Factor((base * a).expand(), base * A, e))
            constant *= ((2 * pi) ** Rational(m - 1, 2) * base ** (S.Half - base * a).expand()) ** Integer(e)
            scale *= base ** (e * base * A)
    return GammaProduct(constant_form(constant), scale, cancel(tuple(factors)))


def _group(first: Factor, m: int, factors: list[Factor]) -> list[Factor] | None:
    """The Gammas ``z + j/m`` around one of them, of which at most one is missing (none for m = 2).

    Of two such groups the one is taken whose missing Gamma meets its reflection.
    """
    if first not in factors:
        return None
    found = None
    for start in (0, -1):
        group = [
            Factor((first.shift + Rational(j, m)).expand(), first.slope, first.power)
            for j in range(start, start + m)
        ]
        missing = [f for f in group if f not in factors]
        if not missing:
            return group
        if len(missing) == 1 and m > 2:
            shift, slope, power = missing[0]
            if Factor((1 - shift).expand(), -slope, -power) in factors:
                return group
            found = found or group
    return found


def _root(power: Expr, m: int) -> Expr:
    """``power**(-1/m)`` for positive power, each factor by itself."""
    parts = []
    for factor in Mul.make_args(power):
        base, exponent = factor.as_base_exp()
        parts.append(Pow(base, -exponent / m))
    return Mul(*parts)


def _number(c: Expr, sample: dict[Symbol, Expr]) -> mpmath.mpc:
    value = c.xreplace(sample).evalf(2 * _DIGITS + 30)
    re_part, im_part = value.as_real_imag()
    return mpmath.mpc(str(re_part), str(im_part))


def _residue(product: GammaProduct, root: Expr, sample: dict[Symbol, Expr]) -> mpmath.mpc:
    """Residue at ``s = -root``, numerically, from just beside the pole."""
    with mpmath.workdps(2 * _DIGITS + 30):
        step = mpmath.mpf(10) ** (-_DIGITS - 5)
        s = -_number(root, sample) + step
        value = step * _number(product.constant, sample) * _number(product.scale, sample) ** (-s)
        for a, A, e in product.factors:
            argument = _number(a, sample) + mpmath.mpf(int(A.p)) / int(A.q) * s
            value *= mpmath.gamma(argument) if e > 0 else mpmath.rgamma(argument)
        return value


def _agrees(product: GammaProduct, leading: Leading, head: Expr, sample: dict[Symbol, Expr]) -> bool:
    """Whether the residues are proportional to the leading coefficients."""
    first = _residue(product, head, sample)
    with mpmath.workdps(_DIGITS):
        if not mpmath.isfinite(first) or abs(first) < mpmath.mpf(10) ** (-_DIGITS // 2):
            return False
        scale = _number(dict(leading)[head], sample) / first
        for root, c in leading:
            wanted = _number(c, sample)
            gap = abs(scale * _residue(product, root, sample) - wanted)
            if not gap <= mpmath.mpf(10) ** (8 - _DIGITS) * (1 + abs(wanted)):
                return False
    return True


def _constant(product: GammaProduct, c: Expr, head: Expr) -> Expr | None:
    """What makes the residue at ``-head`` equal to ``c``."""
    lead = product.laurent(-head, 1)
    if lead.valuation != -1:
        return None
    return constant_form(c / lead.coefficient(-1))


def _same(product: GammaProduct, root: Expr, c: Expr, samples: list[dict[Symbol, Expr]]) -> bool:
    """Whether they are equal: exactly where they reduce, else to 20 digits at two parameter values."""
    series = product.laurent(-root, 1)
    if series.valuation > -1:
        return c is S.Zero
    if series.valuation < -1:
        return False
    value = series.coefficient(-1)
    if c is not S.Zero and constant_form(value / c) is S.One:
        return True
    with mpmath.workdps(_DIGITS):
        return all(
            abs(_number(value, sample) - _number(c, sample))
            <= mpmath.mpf(10) ** -20 * (1 + abs(_number(c, sample)))
            for sample in samples
        )


def constant_form(c: Expr) -> Expr:
    """A product of Gammas, sines and powers with the Gammas brought together.

    Examples
    --------
    >>> from sympy import gamma, pi, sin, symbols
    >>> from sympy_mellin_ext.series.matching import constant_form
    >>> nu = symbols('nu')
    >>> constant_form(pi/(2*sin(pi*nu)*gamma(1 - nu)*gamma(1 + nu)))
    1/(2*nu)
    """
    up: list[Expr] = []
    down: list[Expr] = []
    rest: list[Expr] = []
    for factor in Mul.make_args(c):
        base, e = factor.as_base_exp()
        if isinstance(base, gamma_function) and e.is_Integer:
            (up if e > 0 else down).extend([base.args[0]] * abs(int(e)))
        elif isinstance(base, sin) and e.is_Integer and not base.is_number:
            x = (base.args[0] / pi).expand()
            rest.append(pi**e)
            (down if e > 0 else up).extend([x, 1 - x] * abs(int(e)))
        else:
            rest.append(factor)
    value = Mul(*rest, shortest_quotient(up, down)) if up or down else c
    # powers of one base with symbolic exponents meet only when the exponents are added up
    bases: dict[Expr, list[Expr]] = {}
    for factor in Mul.make_args(value):
        base, e = factor.as_base_exp()
        bases.setdefault(base, []).append(e)
    return Mul(*(Pow(base, sum(e, S.Zero).expand()) for base, e in bases.items()))
