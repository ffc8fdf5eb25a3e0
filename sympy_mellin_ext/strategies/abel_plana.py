"""Rational kernels times exponential series: Binet's and Hermite's formulas.

``x/(x**2 + z**2)``, ``1/(x**2 + z**2)``, ``atan(x/z)`` and ``log(1 + x**2/z**2)`` are Laplace transforms of
sines and cosines in x.  The inner integral over x is then a Fourier integral of an exponential series, the
outer one a Laplace integral of hyperbolic functions.  The order of integration may be changed because the
double integral converges absolutely: the series of exponentials keeps its sign at both ends and is
integrable against x (or 1).

Sources: DLMF 5.9.10-13 (Binet), 1.14.31-type (table of Laplace transforms), 25.11.29 (Hermite).
"""

from __future__ import annotations

from dataclasses import replace

from sympy import Add, Dummy, Expr, I, Mul, Pow, S, Symbol, atan, cos, exp, log, sin, sqrt

from ..closed_form import ClosedForm, Step
from ..dirichlet.reader import has_exponential_series
from ..matching.monomials import monomials
from ..problem import Problem
from ..region import Facts
from .registry import attempt

_SOURCE = "DLMF 5.9.10-13, 25.11.29"
_SINE, _COSINE, _ARC, _LOGARITHM = "sine", "cosine", "arc", "logarithm"


class AbelPlana:
    """``atan(x/z)/(exp(2*pi*x) - 1)``, ``1/((x**2 + z**2)*cosh(x))`` and their like."""

    name = "Abel-Plana kernel"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        x = problem.variable
        if not problem.half_line or type(problem.integrand) is not Mul or problem.depth > 1:
            return None
        rest = list(problem.integrand.args)
        kernels = [(a, found) for a in rest if (found := _kernel(a, x, problem.facts)) is not None]
        if not kernels:
            return None
        factor, (kind, front, z) = kernels[0]
        rest.remove(factor)
        f = Mul(*rest)
        if not has_exponential_series(f, x) or f.has(I, sin, cos):
            return None
        if kind == _COSINE and (f / x).has_free(x) and x in Mul.make_args(f):
            kind, f = _SINE, f / x
        return self._swapped(problem, kind, front, z, f)

    def _swapped(self, problem: Problem, kind: str, front: Expr, z: Expr, f: Expr) -> ClosedForm | None:
        x = problem.variable
        weight = S.One if kind == _COSINE else x
        bound = attempt(problem.changed(weight * f))
        if bound is None or bound.condition is not S.true:
            return None
        t = Dummy("t", positive=True)
        wave = {_SINE: sin(t * x), _COSINE: cos(t * x), _ARC: sin(t * x), _LOGARITHM: 1 - cos(t * x)}[kind]
        inner = attempt(problem.changed(f * wave))
        if inner is None or inner.condition is not S.true or inner.value.has(I):
            return None
        outer = {_SINE: S.One, _COSINE: 1 / z, _ARC: 1 / t, _LOGARITHM: 2 / t}[kind]
        laplace = replace(problem.changed(exp(-z * t) * outer * inner.value), variable=t, reference=None)
        answer = attempt(laplace)
        if answer is None or answer.condition is not S.true or answer.value.has(t):
            return None
        value = front * answer.value
        steps = (
            Step("the kernel as a Laplace transform of a wave, order of integration changed", _SOURCE),
            Step("both integrals", _SOURCE, value),
        )
        special = tuple((where, front * v) for where, v in answer.special)
        return ClosedForm(value, S.true, None, self.name, steps, (_SOURCE,), special)


def _kernel(factor: Expr, x: Symbol, facts: Facts) -> tuple[str, Expr, Expr] | None:
    """(kind, constant in front, z) of one of the four kernels."""
    kind = type(factor)
    if kind is Pow and factor.exp is S.NegativeOne and type(factor.base) is Add:
        square = _square(factor.base, x, facts)
        return None if square is None else (_COSINE, 1 / square[0], square[1])
    if kind is atan:
        argument = factor.args[0] / x
        if not argument.has_free(x) and facts.sign(argument) == 1:
            return _ARC, S.One, 1 / argument
        return None
    if kind is log and type(factor.args[0]) is Add:
        square = _square(factor.args[0], x, facts)
        if square is not None and (square[0] * square[1] ** 2 - 1).expand() is S.Zero:
            return _LOGARITHM, S.One, square[1]
    return None


def _square(base: Expr, x: Symbol, facts: Facts) -> tuple[Expr, Expr] | None:
    """``c*(x**2 + z**2)`` with c, z > 0."""
    parts = monomials(base, x)
    if parts is None or len(parts) != 2:
        return None
    by_power = {p: c for c, p in parts}
    c, c0 = by_power.get(S(2)), by_power.get(S.Zero)
    if c is None or c0 is None or facts.sign(c) != 1 or facts.sign(c0) != 1:
        return None
    return c, sqrt(c0 / c)


STRATEGIES = (AbelPlana(),)
