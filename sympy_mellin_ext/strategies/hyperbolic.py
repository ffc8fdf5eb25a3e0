"""Even functions of exp(x), such as ``exp(-a*cosh(x))*cosh(nu*x)``: the half line doubled, then y = exp(x).

Source: DLMF 10.32.9 is the model (Bessel's K).
"""
from __future__ import annotations

from sympy import Expr, S, Symbol, cosh, exp, sinh, tanh

from ..closed_form import ClosedForm, Step
from ..problem import Problem
from .registry import attempt


class EvenExponentials:
    """``int_0^oo f(x) dx = int_0^oo f(log(y))/(2*y) dy`` for an even f that is a function of exp(x)."""

    name = "even function of exp(x)"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        f, x = problem.integrand, problem.variable
        if not problem.half_line or not f.has(cosh, sinh, tanh):
            return None
        if not any(h.args[0].has_free(x) for node in f.atoms(exp) for h in node.atoms(cosh, sinh)):
            return None  # the exponential series know the others
        if f.xreplace({x: -x}) != f:
            return None
        changed = _in_powers(f, x)
        if changed is None:
            return None
        inner = attempt(problem.changed(changed / (2 * x)))
        if inner is None:
            return None
        step = Step("f is even: the half line doubled, y = exp(x)", "substitution", changed / (2 * x))
        return ClosedForm(
            inner.value, inner.condition, None, self.name, (step, *inner.steps), inner.sources, inner.special
        )


def _in_powers(f: Expr, y: Symbol) -> Expr | None:
    """f(log(y)), or None where x stands outside of exponentials and hyperbolic functions."""
    if not f.has_free(y):
        return f
    if isinstance(f, (cosh, sinh, tanh)):
        rate = f.args[0].expand().coeff(y)
        if (f.args[0] - rate * y).expand() is S.Zero and not rate.has_free(y):
            up, down = y**rate, y ** (-rate)
            return {cosh: (up + down) / 2, sinh: (up - down) / 2, tanh: (up - down) / (up + down)}[type(f)]
        return None
    if isinstance(f, exp):
        inner = _in_powers(f.args[0], y)
        return None if inner is None else exp(inner)
    if f.is_Add or f.is_Mul or f.is_Pow:
        parts = [_in_powers(a, y) for a in f.args]
        return None if any(p is None for p in parts) else f.func(*parts)
    return None


STRATEGIES = (EvenExponentials(),)
