"""Functions of a binomial, ``x**p * g(eta*(c0 + c1*x**m)**r)``: one contour integral over Beta integrals.

With G the transform of g and w = r*u - q,

    int x**p B**q g(B**r) dx = 1/(2*pi*I) int G(u) int x**p B**(-w) dx du,
    int x**p (c0 + c1*x**m)**(-w) dx = c0**(k-w) c1**(-k) Gamma(k) Gamma(w - k)/(m Gamma(w)),  k = (p + 1)/m.

Sources: DLMF 1.14.39 (Parseval's formula) and 5.12.3 (Beta integral).
"""
from __future__ import annotations

from sympy import Add, Dummy, Expr, Function, Mul, Pow, S, Symbol, gamma, oo, preorder_traversal
from sympy.logic.boolalg import Boolean

from ..behaviour import INFINITE_END, Convergence, restrict_kernels
from ..closed_form import ClosedForm, Step
from ..gamma import Factor
from ..gamma.product import cancel
from ..gamma.shortest import positive_power
from ..inverse import inverse_mellin
from ..matching import Term, read_terms
from ..matching.monomials import monomial, monomials
from ..problem import Problem
from ..region import Facts, Region, real_part
from .tidy import tidy

_SOURCES = ("DLMF 1.14.39", "DLMF 5.12.3")


class FunctionOfBinomial:
    """A kernel whose argument is a power of a binomial, such as ``exp(-b*sqrt(x**2 + a**2))``."""

    name = "function of a binomial"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line:
            return None
        x, facts = problem.variable, problem.facts
        base = _base(problem.integrand, x)
        if base is None:
            return None
        parts = monomials(base, x)
        if parts is None or len(parts) != 2:
            return None
        (c0, zero), (c1, m) = sorted(parts, key=lambda part: not part[1].is_zero)
        if not zero.is_zero or any(facts.sign(c) != 1 for c in (c0, c1, m)):
            return None
        y = Dummy("y", positive=True)
        inside = problem.integrand.xreplace({base: y})
        powers = [f for f in Mul.make_args(inside) if f.has(x)]
        single = monomial(Mul(*powers), x)
        if single is None or single[0].has(y):
            return None
        rest = Mul(single[0], *(f for f in Mul.make_args(inside) if not f.has(x)))
        terms = read_terms(rest, y, facts)
        if not terms or any(len(t.kernels) > 1 or t.logs for t in terms):
            return None
        return _closed_form(problem, terms, (single[1] + 1) / m, c0, c1, m)


def _base(expr: Expr, x: Symbol) -> Expr | None:
    """The only sum under a fractional power inside a function."""
    found: set[Expr] = set()
    for function in preorder_traversal(expr):
        if isinstance(function, Function) and function.has(x):
            for node in preorder_traversal(function):
                if node.is_Pow and node.base.is_Add and node.base.has(x) and not node.exp.is_Integer:
                    found.add(node.base)
    return found.pop() if len(found) == 1 else None


def _closed_form(
    problem: Problem, terms: list[Term], k: Expr, c0: Expr, c1: Expr, m: Expr
) -> ClosedForm | None:
    facts = problem.facts
    found = Convergence(Region(facts).positive(real_part(k)))
    values = []
    for term in terms:
        q = term.power
        # near oo the binomial serves as the variable: x**p dx = const*B**(k-1) dB*(1 + O(1/B))
        outer = Term(term.coefficient, (q + k - 1).expand(), 0, term.kernels)
        reason = restrict_kernels(found, outer, facts, ends=(INFINITE_END,))
        if reason is None and not term.kernels:
            found.region = found.region.positive(real_part(-q - k))
        if reason is not None or found.region.empty:
            return problem.refuse("diverges" if reason is None else reason, "a function of a binomial at oo")
        value = _value(term, k, c0, c1, m, facts)
        if value is None:
            return problem.refuse("too many kernels", "no closed form of the contour integral")
        values.append(value)
    total = tidy(Add(*values))
    condition: Boolean = found.region.to_boolean()
    if condition is S.false or total.has(S.NaN, S.ComplexInfinity):
        return None
    sources = tuple(dict.fromkeys(t.source for term in terms for t in term.kernels if t.source))
    return ClosedForm(
        total,
        condition,
        _strip(problem, k, m, found),
        FunctionOfBinomial.name,
        (Step("Beta integral under the contour integral of the kernel", _SOURCES[0], total),),
        (*sources, *_SOURCES),
    )


def _value(term: Term, k: Expr, c0: Expr, c1: Expr, m: Expr, facts: Facts) -> Expr | None:
    q = term.power
    front = term.coefficient * gamma(k) * positive_power(c0, (q + k).expand()) * positive_power(c1, -k) / m
    if not term.kernels:
        return front * gamma(-q - k) / gamma(-q)
    (kernel,) = term.kernels
    product, r = kernel.product, kernel.ratio
    if kernel.wave is not None or kernel.tilt is not None or not r.is_Rational:
        return None
    if facts.sign(product.scale) != 1 or product.lam == product.delta == 0:
        return None
    rows = (*product.factors, Factor((-q - k).expand(), r, 1), Factor((-q).expand(), r, -1))
    value = inverse_mellin(cancel(rows), product.scale * Pow(c0, r), facts)
    return None if value is None else tidy(front * product.constant * value)


def _strip(problem: Problem, k: Expr, m: Expr, found: Convergence) -> tuple[Expr, Expr] | None:
    """Bounds of Re s in ``x**(s - 1)``, where k = (s + shift)/m."""
    from sympy import Min

    if problem.reference is None:
        return None
    shift = (k * m - problem.reference - 1).expand()
    upper = [real_part((-m * (e + 1) + k * m - shift).expand()) for e in found.at_infinity]
    return real_part(-shift), Min(*upper) if upper else oo


__all__ = ["FunctionOfBinomial"]

STRATEGIES = (FunctionOfBinomial(),)
