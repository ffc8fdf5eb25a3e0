"""Ranges of several variables that are an orthant, or a simplex that Cheng-Wu's substitution turns into one.

Sources: DLMF 5.14.1-2 and E. T. Whittaker and G. N. Watson, A Course of Modern Analysis (1927), section 12.5
(Dirichlet, Liouville); H. Cheng and T. T. Wu, Expanding Protons (1987),
for the freedom in the argument of the delta function.
"""
from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from math import prod

from sympy import (
    Add,
    DiracDelta,
    Dummy,
    Expr,
    Function,
    I,
    Mul,
    Pow,
    S,
    Symbol,
    atan,
    besselk,
    cosh,
    coth,
    csch,
    erf,
    erfc,
    exp,
    expand,
    expint,
    gamma,
    log,
    oo,
    polylog,
    sech,
    sinh,
    tanh,
    uppergamma,
)

from ..closed_form import ClosedForm, Step
from ..problem import Diagnosis, Problem
from ..region import Facts, Region, real_part
from ..strategies.registry import attempt
from ..strategies.tidy import tidy
from .elimination import LIOUVILLE
from .iterated import iterated
from .polynomial import read_monomial, read_polynomial
from .reader import read_products
from .strategy import NAME, integrate_orthant
from .system import unbounded

_CHENG_WU = "Cheng and Wu, Expanding Protons (1987)"
Limits = Sequence[tuple[Symbol, Expr, Expr]]


def solve_several(
    f: Expr, limits: Limits, facts: Facts, diagnosis: Diagnosis | None = None
) -> ClosedForm | None:
    """The integral of ``f`` over several variables, innermost limits first, or None.

    What is shown to diverge is noted in ``diagnosis``.

    Examples
    --------
    >>> from sympy import symbols
    >>> from sympy_mellin_ext.orthant import solve_several
    >>> from sympy_mellin_ext.region import Facts
    >>> x, y, a, b, c = symbols('x y a b c', positive=True)
    >>> solve_several(x**(a - 1)*y**(b - 1)*(1 - x - y)**(c - 1), [(y, 0, 1 - x), (x, 0, 1)], Facts()).value
    gamma(a)*gamma(b)*gamma(c)/gamma(a + b + c)
    """
    names = [x for x, _, _ in limits]
    if len(set(names)) != len(names) or not f.is_commutative:
        return None
    limits = [(x, S(a), S(b)) for x, a, b in limits]
    answer = _positive_ranges(f, limits, facts)
    if answer is not None or f.has(DiracDelta):
        return answer
    if all(a is S.Zero and b is oo for _, a, b in limits):
        products = read_products(f, names, facts)
        if products:  # whatever one variable after another gives has been tried
            infinity = unbounded(products, facts)
            if infinity is not None and diagnosis is not None:
                question = Problem(f, names[0], facts=facts, diagnosis=diagnosis)
                question.diverges("its growth in some direction", infinity)
            return None
    return iterated(f, limits, facts)


def _positive_ranges(f: Expr, limits: Limits, facts: Facts) -> ClosedForm | None:
    """An orthant or a simplex."""
    if any(a is not S.Zero for _, a, _ in limits):
        return None
    change = {x: Dummy(x.name, positive=True) for x, _, _ in limits}
    uppers = [b.xreplace(change) for _, _, b in limits]
    names = list(change.values())
    inside = f.xreplace(change)
    deltas = [a for a in Mul.make_args(inside) if type(a) is DiracDelta]
    if deltas:
        if len(deltas) > 1 or len(deltas[0].args) != 1:
            return None
        rest = Mul(*(a for a in Mul.make_args(inside) if a is not deltas[0]))
        answer = _delta(rest, deltas[0].args[0], names, uppers, facts)
    elif all(b is oo for b in uppers):
        answer = integrate_orthant(inside, names, facts) or _dirichlet(inside, names, oo, facts)
    else:
        answer = _simplex(inside, names, uppers, facts)
    if answer is None or answer.value.has(*names) or answer.condition.has(*names):
        return None
    return answer


# -- the simplex -----------------------------------------------------------------------------------------------


def _simplex(f: Expr, names: Sequence[Symbol], uppers: Sequence[Expr], facts: Facts) -> ClosedForm | None:
    """``sum_i k_i*x_i**p_i < 1`` as nested limits, innermost first."""
    weights = _weights(names, uppers, facts)
    if weights is None:
        return None
    # t_i = k_i*x_i**p_i
    t = [Dummy(f"t{i}", positive=True) for i in range(len(names))]
    moved = {x: Pow(u / k, 1 / p) for x, u, (k, p) in zip(names, t, weights, strict=True)}
    front = Mul(*(Pow(k, -1 / p) / p for k, p in weights))
    g = _split_powers(f.xreplace(moved)) * Mul(*(Pow(u, 1 / p - 1) for u, (_, p) in zip(t, weights, strict=True)))
    answer = _dirichlet(g, t, S.One, facts) or _projective(g, t, [*t], facts, inside=True)
    return None if answer is None else answer.times(front)


def _weights(names: Sequence[Symbol], uppers: Sequence[Expr], facts: Facts) -> list[tuple[Expr, Expr]] | None:
    """``(k_i, p_i)`` of the simplex, or None if the limits are none."""
    factors = Mul.make_args(uppers[0])
    rest = [a for a in factors if a.has_free(*names)]
    if len(rest) != 1:
        return None
    base, e = rest[0].as_base_exp()
    scale = Mul(*(a for a in factors if a is not rest[0]))
    if not (e.is_Rational and e > 0) or facts.sign(scale) != 1:
        return None
    poly = read_polynomial(base, names)
    if poly is None or len(poly) != len(names):
        return None
    found: dict[int, tuple[Expr, Expr]] = {}
    one = S.Zero
    for c, exponents in poly:
        moving = [i for i, a in enumerate(exponents) if a is not S.Zero]
        if not moving:
            one = c
            continue
        place, p = moving[0], exponents[moving[0]]
        if len(moving) > 1 or not (p.is_Rational and p > 0) or place in found:
            return None
        found[place] = (-c, p)
    if len(found) != len(names) - 1 or 0 in found or facts.sign(one) != 1:
        return None
    if any(facts.sign(k) != 1 for k, _ in found.values()):
        return None
    # the other limits must be those of the same simplex
    bound = base
    for x, b in zip(names[1:], uppers[1:], strict=True):
        if expand(bound.subs(x, b)) is not S.Zero:
            return None
        bound = bound.subs(x, 0)
    result = [(Pow(scale, -1 / e) / one, 1 / e)]
    result += [(found[i][0] / one, found[i][1]) for i in range(1, len(names))]
    return result


def _split_powers(f: Expr) -> Expr:
    """Powers of products of positive quantities taken apart."""
    return f.replace(lambda a: a.is_Pow and a.base.is_Mul, lambda a: Mul(*(Pow(b, a.exp) for b in a.base.args)))


def _dirichlet(f: Expr, t: Sequence[Symbol], upper: Expr, facts: Facts) -> ClosedForm | None:
    """``prod t_i**(a_i - 1) * g(sum t_i)`` over ``sum t_i < upper``: Liouville's extension of Dirichlet's integral."""
    powers = [S.Zero] * len(t)
    others: list[Expr] = []
    coefficient: Expr = S.One
    for a in Mul.make_args(f):
        single = read_monomial(a, t)
        if single is None:
            others.append(a)
        else:
            coefficient = coefficient * single.coefficient
            powers = [p + e for p, e in zip(powers, single.exponents, strict=True)]
    tau = Dummy("tau", positive=True)
    g = Mul(*others).subs(t[-1], tau - Add(*t[:-1]))
    if g.has_free(*t) or not _steady(g):
        return None
    alphas = [(p + 1).expand() for p in powers]
    total = Add(*alphas).expand()
    inner = attempt(Problem(tau ** (total - 1) * g, tau, S.Zero, upper, facts, depth=1))
    if inner is None:
        return None
    region = Region(facts).positive(*(real_part(a) for a in alphas)).holds(inner.condition)
    if region.empty:
        return None
    front = coefficient * Mul(*(gamma(a) for a in alphas)) / gamma(total)
    step = Step("Dirichlet's integral: a function of the sum of the variables", LIOUVILLE)
    answer = inner.times(front)
    return replace(
        answer, value=tidy(answer.value), condition=region.to_boolean(), strip=None, strategy=NAME,
        steps=(step, *inner.steps), sources=(LIOUVILLE, *inner.sources),
    )  # fmt: skip


# Functions that, with real arguments, do not oscillate at either end: an integral of them converges absolutely.
_STEADY = (exp, log, sinh, cosh, tanh, coth, sech, csch, besselk, erf, erfc, expint, uppergamma, atan, polylog)


def _steady(g: Expr) -> bool:
    """Whether a function of one positive variable keeps its sign near both ends of its range."""
    if g.has(I):
        return False
    return all(isinstance(node, _STEADY) for node in g.atoms(Function))


def _projective(
    f: Expr, t: Sequence[Symbol], variables: Sequence[Symbol], facts: Facts, inside: bool
) -> ClosedForm | None:
    """The integral over the simplex of ``t`` as one over an orthant.

    ``inside``: over ``sum t_i < 1``; otherwise over ``sum t_i = 1`` with the delta function.  With
    ``t_i = y_i/Y``, Y the sum of all y_i and one y fixed at 1, ``d^n t = Y**(-n-1) d^n y``.
    """
    y = {u: Dummy(u.name, positive=True) for u in t}
    fixed: Expr = S.One
    if not inside:
        y[t[-1]] = fixed
    total = Add(*y.values(), *([fixed] if inside else []))
    moved = _homogenised(f, t, y, total)
    if moved is None:
        return None
    dimension = len(t) + 1 if inside else len(t)
    moved = _joined(moved * Pow(total, -dimension, evaluate=False), total)
    left = [y.get(v, v) for v in variables]
    answer = integrate_orthant(moved, [v for v in left if v is not fixed], facts)
    if answer is None:
        return None
    step = Step(f"simplex in {len(t)} variables turned into an orthant, one variable fixed at 1", _CHENG_WU)
    return replace(answer, steps=(step, *answer.steps), sources=(*answer.sources, _CHENG_WU))


def _homogenised(f: Expr, t: Sequence[Symbol], y: dict[Symbol, Expr], total: Expr) -> Expr | None:
    """``f(y/total)`` with every sum made homogeneous, so that the totals stand alone."""
    if not f.has_free(*t):
        return f
    if f.is_Symbol:
        return Mul(y[f], Pow(total, -1))
    if f.is_Add:
        poly = read_polynomial(f, t)
        if poly is None:
            return _mapped(f, t, y, total)
        degrees = [Add(*e) for _, e in poly]
        if not all(d.is_Integer and d >= 0 for d in degrees):
            lowest = degrees[0]
            if any(d != lowest for d in degrees):
                return None
        highest = max(degrees)
        terms = [
            Mul(c, *(Pow(y[u], a) for u, a in zip(t, e, strict=True)), Pow(total, highest - d))
            for (c, e), d in zip(poly, degrees, strict=True)
        ]
        return Mul(expand(Add(*terms)), Pow(total, -highest))
    if f.is_Pow and f.exp.has_free(*t):
        return None
    return _mapped(f, t, y, total)


def _mapped(f: Expr, t: Sequence[Symbol], y: dict[Symbol, Expr], total: Expr) -> Expr | None:
    args = []
    for a in f.args:
        part = _homogenised(a, t, y, total)
        if part is None:
            return None
        args.append(part)
    return f.func(*args)


def _joined(f: Expr, total: Expr) -> Expr:
    """Powers of the total gathered from products under powers."""
    exponent: Expr = S.Zero
    rest: list[Expr] = []
    for a in Mul.make_args(f):
        base, e = a.as_base_exp()
        for b in Mul.make_args(base):
            inner, k = b.as_base_exp()
            if inner == total:
                exponent += k * e
            else:
                rest.append(Pow(b, e))
    exponent = exponent.expand()
    return Mul(*rest) * Pow(total, exponent)


def _delta(f: Expr, argument: Expr, names: Sequence[Symbol], uppers: Sequence[Expr], facts: Facts) -> ClosedForm | None:
    """``DiracDelta(h - sum k_i*x_i)`` over the orthant."""
    poly = read_polynomial(argument, names)
    if poly is None:
        return None
    level: Expr = S.Zero
    weights: dict[int, Expr] = {}
    for c, e in poly:
        moving = [i for i, a in enumerate(e) if a is not S.Zero]
        if not moving:
            level = c
        elif len(moving) == 1 and e[moving[0]] is S.One:
            weights[moving[0]] = c
        else:
            return None
    sign = facts.sign(level)
    if sign not in (1, -1) or any(facts.sign(k) != -sign for k in weights.values()):
        return None
    h = level * sign
    shares = {i: h / (-sign * k) for i, k in weights.items()}  # x_i = shares[i]*t_i
    for i, b in enumerate(uppers):
        if b is not oo and (i not in shares or (b - shares[i]).expand() is not S.Zero):
            return None
    t = {i: Dummy(f"t{i}", positive=True) for i in sorted(weights)}
    g = _split_powers(f.xreplace({names[i]: shares[i] * u for i, u in t.items()}))
    front = prod((shares[i] for i in t), start=S.One) / h
    rest = [x for i, x in enumerate(names) if i not in t]
    if len(t) == 1:
        (u,) = t.values()
        g = g.subs(u, 1)
        if not rest:
            return None
        if len(rest) > 1:
            answer = integrate_orthant(g, rest, facts)
        else:
            answer = attempt(Problem(g, rest[0], facts=facts, depth=1))
    else:
        answer = _projective(g, list(t.values()), [*t.values(), *rest], facts, inside=False)
    return None if answer is None else answer.times(front)


__all__ = ["solve_several"]
