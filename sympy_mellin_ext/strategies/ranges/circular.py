"""Trigonometric integrands over multiples of a quarter turn: ``t = sin(x)**2``, ``u = tan(x)``, ``u = tan(x/2)``.

Source: DLMF 5.12.2 (powers of sine and cosine), 4.21.2 and 4.21.22-24 (multiple and half angles).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import gcd, lcm

from sympy import (
    Add,
    Dummy,
    Expr,
    Pow,
    Rational,
    S,
    Symbol,
    asin,
    cancel,
    chebyshevt,
    chebyshevu,
    collect,
    cos,
    cot,
    csc,
    factor,
    log,
    pi,
    preorder_traversal,
    sec,
    sin,
    sqrt,
    tan,
    together,
)
from sympy.core.sorting import default_sort_key
from sympy.logic.boolalg import Boolean

from ...closed_form import ClosedForm, Step
from ...problem import Problem
from ...region import Facts, Region
from ...steps import SYMMETRY
from .combined import added
from .finite import fresh, handed_on, shown_divergent
from .unit import solve_unit

CIRCULAR = (sin, cos, tan, cot, sec, csc)
_MOST_QUARTERS = 8
_LARGEST_MULTIPLE = 12
_LONGEST_SYMMETRIC = 30


def _is_angle(node: Expr, x: Symbol) -> bool:
    """A trigonometric function of a linear angle."""
    if not isinstance(node, CIRCULAR) or not node.has_free(x):
        return False
    slope = node.args[0].diff(x)
    return not slope.has_free(x) and slope.is_zero is not True


def is_circular(f: Expr, x: Symbol) -> bool:
    """Whether x occurs, and only inside trigonometric functions of linear angles."""
    seen = False
    stack = [f]
    while stack:
        node = stack.pop()
        if not node.has_free(x):
            continue
        if node == x:
            return False
        if _is_angle(node, x):
            seen = True
            continue
        stack.extend(node.args)
    return seen


def on_quarters(problem: Problem) -> ClosedForm | None:
    """A range of whole quarter turns of the smallest angle in the integrand."""
    f, x = problem.integrand, problem.variable
    moment = f.is_Mul and x in f.args
    if moment:
        f = f / x
    if not is_circular(f, x):
        return None
    for rate in _rates(f, x):
        if problem.facts.sign(rate) != 1:
            continue
        first, last = (_whole(rate * end / (pi / 2)) for end in (problem.lower, problem.upper))
        if first is None or last is None or not 0 < last - first <= _MOST_QUARTERS:
            continue
        g = _algebraic(f, x, rate, (first, last) == (0, 1))
        if g is None:
            return problem.refuse("range", "not a function of sin and cos of one angle")
        if moment:
            return _first_moment(problem, g, first, last, rate)
        return _solved(problem, g, first, last, rate)
    return problem.refuse("range", "not a whole number of quarter turns")


def _solved(problem: Problem, g: Expr, first: int, last: int, rate: Expr) -> ClosedForm | None:
    if last - first == 4 and not g.has(_COSINE):
        g = g.xreplace({_SINE: _COSINE})  # a full turn may start anywhere
    routes = [_logarithmic, _by_quarters, _by_halves]
    sums = [n.base for n in preorder_traversal(g) if type(n) is Pow and type(n.base) is Add]
    if any(_is_odd(total, problem.facts) for total in sums):
        routes = [_logarithmic, _by_halves, _by_quarters]
    for route in routes:
        answer = route(problem, g, first, last, rate)
        if answer is not None or shown_divergent(problem):
            return answer
    return None


def _is_odd(total: Expr, facts: Facts) -> bool:
    """Whether a sum holds a known multiple of the cosine itself, which ``t = sin(x)**2`` turns into a root."""
    slope = total.coeff(_COSINE, 1)
    return slope is not S.Zero and facts.sign(slope) is not None


def _logarithmic(problem: Problem, g: Expr, first: int, last: int, rate: Expr) -> ClosedForm | None:
    """Logarithms of ``A + B*cos``: half angles, where A + B and A - B are positive."""
    facts = problem.facts
    assumed: list[Boolean] = []
    found = False
    for node in sorted(g.atoms(log), key=default_sort_key):
        inner = node.args[0]
        if type(inner) is Add and inner.has(_COSINE) and not inner.has(_SINE):
            slope = inner.diff(_COSINE)
            if slope.has(_COSINE):
                return None
            found = True
            ends = [factor(inner.xreplace({_COSINE: S(turn)})) for turn in (1, -1)]
            assumed.extend(end > 0 for end in ends if facts.sign(end) != 1)
    if not found or any(condition is S.false for condition in assumed):
        return None
    inner_problem = replace(problem, facts=Facts((*facts.given, *assumed))) if assumed else problem
    answer = _by_halves(inner_problem, g, first, last, rate)
    if answer is None or not assumed:
        return answer
    return replace(answer, condition=Region(facts).holds(answer.condition, *assumed).to_boolean())


def _first_moment(problem: Problem, g: Expr, first: int, last: int, rate: Expr) -> ClosedForm | None:
    """``x*g(x)`` with g symmetric about the centre of the range: the centre times the integral of g."""
    quarters = [_quarter(g, q) for q in range(first, last)]
    if (first + last) % 2 or quarters != quarters[::-1]:
        return None
    answer = _solved(problem, g, first, last, rate)
    centre = (problem.lower + problem.upper) / 2
    return None if answer is None else added(problem, [(centre, answer)], Step("reflection about the centre", SYMMETRY))


def _whole(turns: Expr) -> int | None:
    turns = turns if turns.is_number else turns.cancel()
    return int(turns) if turns.is_Integer else None


def _rates(f: Expr, x: Symbol) -> list[Expr]:
    """For every class of commensurable angles the greatest w with all of them of the form ``n*w*x + constant``."""
    classes: list[list[Expr]] = []
    for node in preorder_traversal(f):
        if _is_angle(node, x):
            slope = node.args[0].diff(x)
            for members in classes:
                if (slope / members[0]).cancel().is_Rational:
                    members.append(slope)
                    break
            else:
                classes.append([slope])
    rates = []
    for members in classes:
        ratios = [(s / members[0]).cancel() for s in members]
        den = lcm(*(int(r.q) for r in ratios))
        num = gcd(*(abs(int(r * den)) for r in ratios))
        rate = members[0] * Rational(num, den)
        rates.append(-rate if rate.could_extract_minus_sign() else rate)
    return rates


# sin and cos of the angle anywhere, and as they are in the first quarter
_SINE, _COSINE = Dummy("sin", real=True), Dummy("cos", real=True)
_SIN, _COS = Dummy("sin", positive=True), Dummy("cos", positive=True)


def _algebraic(f: Expr, x: Symbol, rate: Expr, first_quarter: bool) -> Expr | None:
    """``f`` in ``sin(rate*x)`` and ``cos(rate*x)``.

    In the first quarter another angle may occur as a multiple of ``asin(sin(rate*x))``.
    """
    sn, cs = _SINE, _COSINE
    if not f.has_free(x):
        return f
    if _is_angle(f, x):
        angle = f.args[0]
        n = (angle.diff(x) / rate).cancel()
        shift = angle.subs(x, 0)
        if not n.is_Integer or abs(n) > _LARGEST_MULTIPLE:
            if first_quarter and shift is S.Zero and isinstance(f, (sin, cos)):
                return f.func(n * asin(sn))
            return None
        m = abs(int(n))
        c: Expr = chebyshevt(m, cs)
        s: Expr = sn * chebyshevu(m - 1, cs) * (1 if n > 0 else -1)
        if m == 2:
            c = cs**2 - sn**2
        if shift is not S.Zero:
            s, c = (s * cos(shift) + c * sin(shift)), (c * cos(shift) - s * sin(shift))
        return {sin: s, cos: c, tan: s / c, cot: c / s, sec: 1 / c, csc: 1 / s}[type(f)]
    args = [_algebraic(a, x, rate, first_quarter) for a in f.args]
    if any(a is None for a in args):
        return None
    return f.func(*args)


def _quarter(g: Expr, q: int) -> Expr:
    """``g`` on quarter number q as a function of the angle in (0, pi/2), run through in either direction."""
    s, c = ((1, 1), (1, -1), (-1, -1), (-1, 1))[q % 4]
    return g.xreplace({_SINE: s * _SIN, _COSINE: c * _COS})


def _by_quarters(problem: Problem, g: Expr, first: int, last: int, rate: Expr) -> ClosedForm | None:
    quarters = [_quarter(g, q) for q in range(first, last)]
    parts = _counted(quarters, lambda part: _first_quarter(problem, part), rate)
    return None if parts is None else added(problem, parts, Step("quarter turns, t = sin(x)**2", "DLMF 5.12.2"))


def _counted(
    integrands: list[Expr], solve: Callable[[Expr], ClosedForm | None], rate: Expr
) -> list[tuple[Expr, ClosedForm]] | None:
    """Equal and opposite integrands solved once; opposite ones only for their convergence."""
    counted: dict[Expr, int] = {}
    for integrand in integrands:
        counted[integrand] = counted.get(integrand, 0) + 1
    parts: list[tuple[Expr, ClosedForm]] = []
    while counted:
        integrand, count = next(iter(counted.items()))
        del counted[integrand]
        opposite = counted.pop(-integrand, 0)
        answer = solve(integrand)
        if answer is None:
            return None
        parts.append(((count - opposite) / rate, answer))
    return parts


def _first_quarter(problem: Problem, g: Expr) -> ClosedForm | None:
    """(0, pi/2): ``t = sin(x)**2`` with ``dx = dt/(2*sqrt(t*(1-t)))``, or ``u = tan(x)``."""
    t = fresh(problem, positive=True)
    a, b = _SIN, _COS
    symmetric = _complementary(problem, g)
    if symmetric is not None:
        return symmetric
    for first, second in ((a, b), (b, a)):
        inner = g.xreplace({first: sqrt(t), second: sqrt(1 - t)}) / (2 * sqrt(t) * sqrt(1 - t))
        answer = solve_unit(problem, inner, t)
        if answer is not None or shown_divergent(problem):
            return answer
    u = fresh(problem, positive=True)
    inner = g.xreplace({a: u / sqrt(1 + u**2), b: 1 / sqrt(1 + u**2)})
    return handed_on(problem, _joined(inner / (1 + u**2), u), u)


def _complementary(problem: Problem, g: Expr) -> ClosedForm | None:
    """``g(x) + g(pi/2 - x)`` constant with both positive: the constant times pi/4."""
    if not g.is_positive or not g.has(tan, Pow) or g.count_ops() > _LONGEST_SYMMETRIC:
        return None
    total = cancel(together(g + g.xreplace({_SIN: _COS, _COS: _SIN})))
    if total.has(_SIN, _COS):
        return None
    return ClosedForm(total * pi / 4, S.true, None, "ranges", (Step("reflection x -> pi/2 - x", SYMMETRY),))


def _by_halves(problem: Problem, g: Expr, first: int, last: int, rate: Expr) -> ClosedForm | None:
    """Half turns: ``u = tan(x/2)`` on (0, pi) and, mirrored, on (pi, 2*pi)."""
    if first % 2 or last % 2:
        return None
    u = fresh(problem, positive=True)
    halves = []
    for half in range(first // 2, last // 2):
        turn = 1 if half % 2 == 0 else -1
        inner = g.xreplace({_SINE: turn * 2 * u / (1 + u**2), _COSINE: (1 - u**2) / (1 + u**2)})
        halves.append(_joined(inner * 2 / (1 + u**2), u))
    parts = _counted(halves, lambda part: handed_on(problem, part, u), rate)
    return None if parts is None else added(problem, parts, Step("u = tan(x/2)", "from memory: Weierstrass"))


def _joined(expr: Expr, u: Symbol) -> Expr:
    """Sums inside powers and logarithms over one denominator, numerators by powers of u, so that they can be read."""

    def over_one(total: Expr) -> Expr:
        above, below = together(total).as_numer_denom()
        return collect(above.expand(), u, factor) / below

    def rule(node: Expr) -> Expr:
        return Pow(over_one(node.base), node.exp) if type(node) is Pow else log(over_one(node.args[0]))

    return expr.replace(
        lambda node: type(node) is log or (type(node) is Pow and type(node.base) is Add and node.has_free(u)), rule
    )
