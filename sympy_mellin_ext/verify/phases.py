"""How an integrand oscillates at infinity: the phases c*x**r of its terms, read off the expression.

The phases of the functions are those of their asymptotic expansions: DLMF 6.12 (Ci, Si), 7.12 (Fresnel),
9.7 (Airy), 10.17 (Bessel), 16.11 (hypergeometric).
"""
from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from mpmath import mp
from sympy import (
    Add,
    Ci,
    E,
    Expr,
    I,
    Mul,
    Pow,
    Rational,
    S,
    Si,
    Symbol,
    airyai,
    airyaiprime,
    airybi,
    airybiprime,
    besselj,
    bessely,
    cos,
    erfc,
    exp,
    expand,
    expint,
    fresnelc,
    fresnels,
    gamma,
    hankel1,
    hankel2,
    hyper,
    pi,
    sin,
    sinc,
    sqrt,
)
from sympy.functions.special.bessel import jn, yn

from .functions import Number
from .numeric import NUMERIC_ERRORS, as_number, compiled

# a phase is the sum of c*x**r, as ((r, c), ...) with falling r; the empty tuple does not oscillate
Phase = tuple[tuple[float, float], ...]
_STEADY: Phase = ()
_MANY = 64


class Phases:
    """Phases of expressions in `variable` at given parameters."""

    def __init__(self, variable: Symbol, point: Mapping[Symbol, Any]) -> None:
        self.variable, self.point = variable, point
        self.wild = False  # a periodic function of something that grows faster than any power
        self.opaque = False  # a periodic function inside another: its harmonics are not listed

    def growth(self, argument: Expr) -> tuple[Number, float] | None:
        """(c, r) with argument ~ c*x**r at infinity; None if it is bounded or no power."""
        names = sorted(argument.free_symbols - {self.variable}, key=str)
        with mp.workdps(60):
            try:
                f = compiled(argument, [self.variable, *names])
                values = [as_number(self.point[n]) for n in names]
                first, second, third = (mp.mpmathify(f(mp.mpf(10) ** k, *values)) for k in (24, 30, 36))
            except NUMERIC_ERRORS:
                return None
            if not all(mp.isfinite(v) for v in (first, second, third)):
                return None
            if first == 0 or second == 0 or third == 0:
                return None
            r = mp.log10(abs(third / second)) / 6
            if r > 100:
                self.wild = True
                return None
            if r < 0.01 or abs(mp.log10(abs(second / first)) / 6 - r) > 1e-3:
                return None
            close = Rational(int(mp.nint(r * 12)), 12)
            r = float(close) if abs(r - float(close)) < 1e-9 else float(r)
            return third / mp.mpf(10) ** (36 * r), r

    def of(self, expr: Expr) -> set[Phase]:
        if not expr.has(self.variable):
            return {_STEADY}
        if isinstance(expr, Add):
            return set().union(*[self.of(a) for a in expr.args])
        if isinstance(expr, Mul):
            result: set[Phase] = {_STEADY}
            for factor in expr.args:
                result = self._product(result, self.of(factor))
            return result
        if isinstance(expr, exp) or (isinstance(expr, Pow) and expr.base is E):
            return self._exponential(expr.exp if isinstance(expr, Pow) else expr.args[0])
        if isinstance(expr, Pow):
            inner = self.of(expr.base)
            if inner == {_STEADY} or not expr.exp.is_Integer or not 0 < expr.exp < 12:
                return self._harmonics(inner | self.of(expr.exp))
            result = {_STEADY}
            for _ in range(int(expr.exp)):
                result = self._product(result, inner)
            return result
        rule = _RULES.get(type(expr))
        if rule is not None:
            return rule(self, expr)
        inside = [self.of(a) for a in expr.args if isinstance(a, Expr)]
        return self._harmonics({_STEADY}.union(*inside))

    def _product(self, left: set[Phase], right: set[Phase]) -> set[Phase]:
        if len(left) * len(right) > _MANY**2:
            self.opaque = True
            return left | right
        return {_sum(p, q) for p in left for q in right}

    def _harmonics(self, inner: set[Phase]) -> set[Phase]:
        if inner != {_STEADY}:
            self.opaque = True
            inner = inner | {_STEADY}
        return inner

    def both(self, argument: Expr, factor: float = 1, power: float = 1, steady: bool = False) -> set[Phase]:
        """Phases +p and -p with p = factor*argument**power, where the argument is real and unbounded."""
        found = self.growth(argument)
        extra = {_STEADY} if steady else set()
        if found is None or abs(mp.im(found[0])) > 1e-12 * abs(found[0]):
            return {_STEADY}
        c, r = float(factor * abs(found[0]) ** power), found[1] * power
        return {((r, c),), ((r, -c),)} | extra

    def _exponential(self, argument: Expr) -> set[Phase]:
        if not argument.has(I) and all(self.point.get(v, v).is_real for v in argument.free_symbols):
            return {_STEADY}
        result: Phase = _STEADY
        for term in Add.make_args(expand(argument)):
            if self.of(term) != {_STEADY}:
                self.opaque = True
            found = self.growth(term)
            if found is not None and abs(mp.im(found[0])) > 1e-12 * abs(found[0]):
                result = _sum(result, ((found[1], float(mp.im(found[0]))),))
        return {result}

    def one_sided(self, argument: Expr, turn: Number, factor: float = 1, power: float = 1) -> set[Phase]:
        """The phase factor*(argument/turn)**power of a function that behaves like exp(i*phase)."""
        found = self.growth(argument)
        if found is None:
            return {_STEADY}
        c = (mp.mpmathify(found[0]) / turn) ** power * factor
        if abs(mp.im(c)) > 1e-9 * abs(c):
            return {_STEADY}
        return {((found[1] * power, float(mp.re(c))),)}


def _sum(p: Phase, q: Phase) -> Phase:
    total: dict[float, float] = dict(p)
    for r, c in q:
        total[r] = total.get(r, 0.0) + c
        if abs(total[r]) < 1e-11 * max(abs(c), 1e-300):
            del total[r]
    return tuple(sorted(total.items(), reverse=True))


def _hyper(phases: Phases, node: Expr) -> set[Phase]:
    upper, lower, argument = node.args
    found = phases.growth(argument)
    order = len(lower) + 1 - len(upper)
    if found is None or order < 2 or not mp.re(found[0]) < 0:
        return {_STEADY}
    if order > 2:
        return {_STEADY}
    return phases.both(-argument, 2, 0.5, steady=len(upper) > 0)


def _airy(phases: Phases, node: Expr) -> set[Phase]:
    found = phases.growth(node.args[0])
    if found is None or not mp.re(found[0]) < 0:
        return {_STEADY}
    return phases.both(-node.args[0], 2 / 3, 1.5)


def _expint(phases: Phases, node: Expr) -> set[Phase]:
    found = phases.growth(node.args[1])
    if found is None or abs(mp.re(found[0])) > 1e-12 * abs(found[0]):
        return {_STEADY}
    return phases.one_sided(node.args[1], mp.mpc(0, -1))


def _erfc(phases: Phases, node: Expr) -> set[Phase]:
    found = phases.growth(node.args[0])
    if found is None or abs(mp.re((found[0]) ** 2)) > 1e-12 * abs(found[0]) ** 2:
        return {_STEADY}
    # exp(-z**2)
    square = -(found[0] ** 2)
    return {((2 * found[1], float(mp.im(square))),)}


_RULES: dict[type, Callable[[Phases, Any], set[Phase]]] = {
    sin: lambda p, f: p.both(f.args[0]),
    cos: lambda p, f: p.both(f.args[0]),
    sinc: lambda p, f: p.both(f.args[0]),
    besselj: lambda p, f: p.both(f.args[1]),
    bessely: lambda p, f: p.both(f.args[1]),
    jn: lambda p, f: p.both(f.args[1]),
    yn: lambda p, f: p.both(f.args[1]),
    hankel1: lambda p, f: p.one_sided(f.args[1], mp.one),
    hankel2: lambda p, f: p.one_sided(f.args[1], -mp.one),
    Ci: lambda p, f: p.both(f.args[0]),
    Si: lambda p, f: p.both(f.args[0], steady=True),
    fresnels: lambda p, f: p.both(f.args[0], float(mp.pi / 2), 2, steady=True),
    fresnelc: lambda p, f: p.both(f.args[0], float(mp.pi / 2), 2, steady=True),
    airyai: _airy,
    airybi: _airy,
    airyaiprime: _airy,
    airybiprime: _airy,
    hyper: _hyper,
    expint: _expint,
    erfc: _erfc,
}


def _ai_minus(z: Expr) -> Expr:
    zeta = Rational(2, 3) * z ** Rational(3, 2)
    return sqrt(z / 3) / 2 * (exp(I * pi / 6) * hankel1(Rational(1, 3), zeta)
                              + exp(-I * pi / 6) * hankel2(Rational(1, 3), zeta))


def one_phase_each(expr: Expr) -> Expr:
    """`expr` as a sum of terms with one phase each (DLMF 6.5.5-6, 7.5.8, 9.6.6, 10.4.4, 10.16.9)."""
    def hankels(nu: Expr, z: Expr, sign: int) -> Expr:
        if sign > 0:
            return (hankel1(nu, z) + hankel2(nu, z)) / 2
        return (hankel1(nu, z) - hankel2(nu, z)) / (2 * I)

    def fresnel(z: Expr, sign: int) -> Expr:
        plus = (1 + I) / 2 * (1 - erfc(sqrt(pi) * (1 - I) * z / 2))
        minus = (1 - I) / 2 * (1 - erfc(sqrt(pi) * (1 + I) * z / 2))
        return (plus + minus) / 2 if sign > 0 else (plus - minus) / (2 * I)

    def airy(node: Expr) -> Expr:
        z = -node.args[0]
        return _ai_minus(z) if z.could_extract_minus_sign() is False and node.args[0].is_negative else node

    def bessel_zero(node: Expr) -> Expr:
        upper, lower, z = node.args
        if len(upper) or len(lower) != 1 or not z.is_negative:
            return node
        b = lower[0]
        return gamma(b) * (-z) ** ((1 - b) / 2) * hankels(b - 1, 2 * sqrt(-z), 1)

    rules: list[tuple[type, Callable[[Expr], Expr]]] = [
        (hyper, bessel_zero),
        (airyai, airy),
        (sinc, lambda f: sin(f.args[0]) / f.args[0]),
        (jn, lambda f: sqrt(pi / (2 * f.args[1])) * besselj(f.args[0] + S.Half, f.args[1])),
        (yn, lambda f: sqrt(pi / (2 * f.args[1])) * bessely(f.args[0] + S.Half, f.args[1])),
        (besselj, lambda f: hankels(f.args[0], f.args[1], 1)),
        (bessely, lambda f: hankels(f.args[0], f.args[1], -1)),
        (Ci, lambda f: -(expint(1, I * f.args[0]) + expint(1, -I * f.args[0])) / 2),
        (Si, lambda f: pi / 2 + (expint(1, I * f.args[0]) - expint(1, -I * f.args[0])) / (2 * I)),
        (fresnelc, lambda f: fresnel(f.args[0], 1)),
        (fresnels, lambda f: fresnel(f.args[0], -1)),
        (sin, lambda f: (exp(I * f.args[0]) - exp(-I * f.args[0])) / (2 * I)),
        (cos, lambda f: (exp(I * f.args[0]) + exp(-I * f.args[0])) / 2),
    ]
    for kind, rule in rules:
        for node in sorted(expr.atoms(kind), key=str):
            expr = expr.xreplace({node: rule(node)})
    return expand(expr)
