"""Changes of variable on the half line, tried after everything that reads the integrand as it stands."""

from __future__ import annotations

from sympy import Add, Expr, Pow, S, Symbol, exp, log, preorder_traversal, sin, sinc, sqrt

from ...closed_form import ClosedForm, Step
from ...matching.monomials import monomials
from ...problem import Problem
from ...steps import ADDITIVITY, CHANGE
from ..registry import MAX_DEPTH
from .combined import added
from .finite import fresh, handed_on
from .split import BROKEN, broken
from .whole import gaussian, of_exponential


class HalfLineChanges:
    """Break points, logarithms as the variable, and square roots of sums of squares."""

    name = "change of variable"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line or problem.depth >= MAX_DEPTH:
            return None
        f, x = problem.integrand, problem.variable
        if f.has(sinc):
            return plain_sinc(problem)
        if f.has(*BROKEN):
            return split(problem)
        if not f.has(exp):
            return None
        return self._lognormal(problem, f, x) or self._nested(problem, f, x) or self._root(problem, f, x)

    @staticmethod
    def _lognormal(problem: Problem, f: Expr, x: Symbol) -> ClosedForm | None:
        """``x = exp(t)`` where the exponent holds a square of the logarithm."""
        if not any(type(n) is exp and n.args[0].has(log) and n.has_free(x) for n in preorder_traversal(f)):
            return None
        t, p = fresh(problem, real=True), fresh(problem, positive=True)
        inner = _logarithms_plain(f.xreplace({x: p}), p).xreplace({log(p): t}).xreplace({p: exp(t)}) * exp(t)
        answer = gaussian(problem, inner, t)
        return None if answer is None else added(problem, [(S.One, answer)], Step("substitution x = exp(t)", CHANGE))

    @staticmethod
    def _nested(problem: Problem, f: Expr, x: Symbol) -> ClosedForm | None:
        """``t = exp(x)`` on (1, oo) where an exponential stands in an exponent (Gompertz' law of mortality)."""
        if not any(type(n) is exp and n.args[0].has(exp) and n.has_free(x) for n in preorder_traversal(f)):
            return None
        changed = of_exponential(f, x)
        if changed is None:
            return None
        t, inner = changed
        answer = handed_on(problem, inner, t, S.One)
        return None if answer is None else added(problem, [(S.One, answer)], Step("substitution t = exp(x)", CHANGE))

    @staticmethod
    def _root(problem: Problem, f: Expr, x: Symbol) -> ClosedForm | None:
        """``u = sqrt(a**2 + x**2)``: ``x*dx = u*du`` on (a, oo), where f holds an exponential of u."""
        roots = [
            n for n in preorder_traversal(f)
            if type(n) is Pow and n.exp.is_Rational and n.exp.q == 2 and type(n.base) is Add and n.base.has_free(x)
        ]  # fmt: skip
        if not roots or len({n.base for n in roots}) != 1:
            return None
        if not any(type(n) is exp and n.args[0].has(roots[0].base) for n in preorder_traversal(f)):
            return None
        parts = monomials(roots[0].base, x)
        if parts is None or len(parts) != 2 or not any(p.is_zero for _, p in parts):
            return None
        (c, p), (d, _) = parts if parts[1][1].is_zero else parts[::-1]
        facts = problem.facts
        if facts.sign(c) != 1 or facts.sign(d) != 1:
            return None
        # u**2 = c*x**p + d with p > 0: x = ((u**2 - d)/c)**(1/p), dx = x*2*u/(p*(u**2 - d)) du
        if facts.sign(p) != 1:
            return None
        base = roots[0].base
        u, z = fresh(problem, positive=True), fresh(problem, positive=True)
        inner = f.replace(lambda n: n.is_Pow and n.base == base, lambda n: u ** (2 * n.exp)).xreplace({base: u**2})
        inner = inner.xreplace({x: z}) * z
        # powers of x = z: (u**2 - d)**(1/p) as a power of a sum
        inner = inner.replace(lambda n: n.is_Pow and n.base == z, lambda n: ((u**2 - d) / c) ** (n.exp / p)).xreplace(
            {z: ((u**2 - d) / c) ** (1 / p)}
        )
        inner = inner * (2 / p) * u * (u**2 - d) ** -1
        lower = sqrt(d)
        answer = handed_on(problem, inner, u, lower)
        return (
            None
            if answer is None
            else added(
                problem,
                [(S.One, answer)],
                Step("substitution u = " + str(sqrt(base.xreplace({x: Symbol(x.name)}))), CHANGE),
            )
        )


def _logarithms_plain(f: Expr, p: Symbol) -> Expr:
    """``log(c*p**r)`` as ``log(c) + r*log(p)`` for positive c."""

    def rule(node: Expr) -> Expr:
        inner = node.args[0]
        c, rest = inner.as_independent(p, as_Add=False)
        base, r = rest.as_base_exp()
        if base == p and not r.has_free(p) and (c.is_positive or c is S.One):
            return log(c) + r * log(p)
        return node

    return f.replace(lambda node: type(node) is log and node.has_free(p), rule)


def plain_sinc(problem: Problem) -> ClosedForm | None:
    """sinc written out."""
    return handed_on(
        problem, problem.integrand.replace(sinc, lambda z: sin(z) / z), problem.variable, problem.lower, problem.upper
    )


def split(problem: Problem) -> ClosedForm | None:
    """The parts between the break points, added."""
    f, x = problem.integrand, problem.variable
    parts = broken(f, x, problem.lower, problem.upper, problem.facts)
    if parts is None:
        return problem.refuse("range", "a break point that cannot be placed")
    if any(part == f for part, _, _ in parts):
        return None
    answers: list[tuple[Expr, ClosedForm]] = []
    for part, lower, upper in parts:
        if part is S.Zero:
            continue
        if not part.has_free(x):
            found = constant(problem, part, lower, upper)
        else:
            found = handed_on(problem, part, x, lower, upper)
        if found is None:
            return None
        answers.append((S.One, found))
    if not answers:
        return ClosedForm(S.Zero, strategy=HalfLineChanges.name)
    return added(problem, answers, Step("range split at the break points", ADDITIVITY))


def constant(problem: Problem, c: Expr, lower: Expr, upper: Expr) -> ClosedForm | None:
    """The integral of a constant."""
    length = upper - lower
    if length.is_infinite or (length.is_infinite is None and length.has(S.Infinity, S.NegativeInfinity)):
        return problem.refuse("diverges", "a constant over an infinite range")
    return ClosedForm(c * length, strategy=HalfLineChanges.name)
