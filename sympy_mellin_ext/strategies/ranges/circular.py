"""Trigonometric integrands over multiples of a quarter turn: ``t = sin(x)**2``, ``u = tan(x)``, ``u = tan(x/2)``.

Source: DLMF 5.12.2 (powers of sine and cosine), 4.21.2 and 4.21.22-24 (multiple and half angles).
"""

from __future__ import annotations

from math import gcd, lcm

from sympy import (
    Add,
    Dummy,
    Expr,
    Integer,
    Pow,
    Rational,
    S,
    Symbol,
    chebyshevt,
    chebyshevu,
    cos,
    cot,
    csc,
    log,
    pi,
    preorder_traversal,
    sec,
    sin,
    sqrt,
    tan,
    together,
)

from ...closed_form import ClosedForm, Step
from ...problem import Problem
from .combined import added
from .finite import fresh, handed_on
from .unit import solve_unit

CIRCULAR = (sin, cos, tan, cot, sec, csc)
_MOST_QUARTERS = 8
_LARGEST_MULTIPLE = 12


def is_circular(f: Expr, x: Symbol) -> bool:
    """Whether x occurs, and only inside trigonometric functions."""
    seen = False
    stack = [f]
    while stack:
        node = stack.pop()
        if not node.has_free(x):
            continue
        if node == x:
            return False
        if isinstance(node, CIRCULAR):
            seen = True
            continue
        stack.extend(node.args)
    return seen


def on_quarters(problem: Problem) -> ClosedForm | None:
    """A range of whole quarter turns of the smallest angle in the integrand."""
    f, x = problem.integrand, problem.variable
    rate = _rate(f, x)
    if rate is None or problem.facts.sign(rate) != 1:
        return None
    first, last = (rate * problem.lower / (pi / 2)), (rate * problem.upper / (pi / 2))
    first, last = (
        first.cancel() if not first.is_number else first,
        last.cancel() if not last.is_number else last,
    )
    if not first.is_Integer or not last.is_Integer or not 0 < last - first <= _MOST_QUARTERS:
        return None
    sn, cs = Dummy("sn"), Dummy("cs")
    g = _algebraic(f, x, rate, sn, cs)
    if g is None:
        return problem.refuse("range", "not a function of sin and cos of one angle")
    quarters = [_quarter(g, q, sn, cs) for q in range(int(first), int(last))]
    counted: dict[Expr, int] = {}
    for quarter in quarters:
        counted[quarter] = counted.get(quarter, 0) + 1
    return _by_quarters(problem, counted, sn, cs, rate) or _by_halves(
        problem, g, int(first), int(last), sn, cs, rate
    )


def _rate(f: Expr, x: Symbol) -> Expr | None:
    """The greatest w with every angle of the form ``n*w*x + constant``."""
    slopes: list[Expr] = []
    for node in preorder_traversal(f):
        if isinstance(node, CIRCULAR) and node.has_free(x):
            slope = node.args[0].diff(x)
            if slope.has_free(x) or slope.is_zero:
                return None
            slopes.append(slope)
    if not slopes:
        return None
    first = slopes[0]
    ratios = [(s / first).cancel() for s in slopes]
    if not all(r.is_Rational for r in ratios):
        return None
    den = lcm(*(int(r.q) for r in ratios))
    num = gcd(*(abs(int(r * den)) for r in ratios))
    rate = first * Rational(num, den)
    return -rate if rate.could_extract_minus_sign() else rate


def _algebraic(f: Expr, x: Symbol, rate: Expr, sn: Symbol, cs: Symbol) -> Expr | None:
    """``f`` in ``sn = sin(rate*x)`` and ``cs = cos(rate*x)``."""
    if not f.has_free(x):
        return f
    if isinstance(f, CIRCULAR):
        angle = f.args[0]
        n = (angle.diff(x) / rate).cancel()
        shift = angle.subs(x, 0)
        if not n.is_Integer or abs(n) > _LARGEST_MULTIPLE:
            return None
        m = abs(int(n))
        c: Expr = chebyshevt(m, cs)
        s: Expr = sn * chebyshevu(m - 1, cs) * (1 if n > 0 else -1)
        if m == 2:
            c = cs**2 - sn**2
        if shift is not S.Zero:
            s, c = (s * cos(shift) + c * sin(shift)), (c * cos(shift) - s * sin(shift))
        return {sin: s, cos: c, tan: s / c, cot: c / s, sec: 1 / c, csc: 1 / s}[type(f)]
    args = [_algebraic(a, x, rate, sn, cs) for a in f.args]
    if any(a is None for a in args):
        return None
    return f.func(*args)


def _quarter(g: Expr, q: int, sn: Symbol, cs: Symbol) -> Expr:
    """``g`` on quarter number q as a function of the angle in (0, pi/2), run through in either direction."""
    s, c = ((1, 1), (1, -1), (-1, -1), (-1, 1))[q % 4]
    a, b = Dummy("a", positive=True), Dummy("b", positive=True)
    table = {sn: s * a, cs: c * b}
    return g.xreplace(table).xreplace({a: _POSITIVE[0], b: _POSITIVE[1]})


_POSITIVE = (Dummy("sin", positive=True), Dummy("cos", positive=True))


def _by_quarters(
    problem: Problem, counted: dict[Expr, int], sn: Symbol, cs: Symbol, rate: Expr
) -> ClosedForm | None:
    parts: list[tuple[Expr, ClosedForm]] = []
    todo = dict(counted)
    while todo:
        integrand, count = next(iter(todo.items()))
        del todo[integrand]
        opposite = todo.pop(-integrand, 0)
        answer = _first_quarter(problem, integrand)
        if answer is None:
            return None
        parts.append(((count - opposite) / rate, answer))
    return added(problem, parts, Step("quarter turns, t = sin(x)**2", "DLMF 5.12.2"))


def _first_quarter(problem: Problem, g: Expr) -> ClosedForm | None:
    """(0, pi/2): ``t = sin(x)**2`` with ``dx = dt/(2*sqrt(t*(1-t)))``, or ``u = tan(x)``."""
    t = fresh(problem, positive=True)
    a, b = _POSITIVE
    answer = solve_unit(problem, g.xreplace({a: sqrt(t), b: sqrt(1 - t)}) / (2 * sqrt(t) * sqrt(1 - t)), t)
    if answer is not None:
        return answer
    u = fresh(problem, positive=True)
    inner = g.xreplace({a: u / sqrt(1 + u**2), b: 1 / sqrt(1 + u**2)})
    return handed_on(problem, _joined(inner / (1 + u**2)), u)


def _by_halves(
    problem: Problem, g: Expr, first: int, last: int, sn: Symbol, cs: Symbol, rate: Expr
) -> ClosedForm | None:
    """Half turns: ``u = tan(x/2)`` on (0, pi) and, mirrored, on (pi, 2*pi)."""
    if first % 2 or last % 2:
        return None
    u = fresh(problem, positive=True)
    counted: dict[Expr, int] = {}
    for half in range(first // 2, last // 2):
        turn = 1 if half % 2 == 0 else -1
        table = {sn: turn * 2 * u / (1 + u**2), cs: (1 - u**2) / (1 + u**2)}
        inner = _joined(g.xreplace(table) * 2 / (1 + u**2))
        counted[inner] = counted.get(inner, 0) + 1
    parts: list[tuple[Expr, ClosedForm]] = []
    while counted:
        inner, count = next(iter(counted.items()))
        del counted[inner]
        opposite = counted.pop(-inner, 0)
        answer = handed_on(problem, inner, u)
        if answer is None:
            return None
        parts.append((Integer(count - opposite) / rate, answer))
    return added(problem, parts, Step("u = tan(x/2)", "DLMF 4.21.31-33-type"))


def _joined(expr: Expr) -> Expr:
    """Sums inside powers and logarithms over one denominator, so that they can be read."""

    def rule(node: Expr) -> Expr:
        if type(node) is Pow and type(node.base) is Add:
            return Pow(_over_one(node.base), node.exp)
        return log(_over_one(node.args[0])) if type(node) is log else node

    return expr.replace(
        lambda node: type(node) is log or (type(node) is Pow and type(node.base) is Add), rule
    )


def _over_one(expr: Expr) -> Expr:
    fraction = together(expr)
    number, bottom = fraction.as_numer_denom()
    number = number.expand()
    return number / bottom
