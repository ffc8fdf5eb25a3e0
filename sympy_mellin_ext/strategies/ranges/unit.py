"""The interval (0, 1): sums of Beta type, and one further kernel against a truncated power."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from math import lcm

from sympy import Add, Dummy, Expr, Poly, Rational, S, Symbol, gamma, hyper
from sympy.logic.boolalg import Boolean

from ...closed_form import ClosedForm, Step
from ...inverse import inverse_mellin, named_pfq
from ...inverse.residues import left_series
from ...inverse.signature import normalise, power
from ...kernels.elementary import COS, EXP, SIN
from ...matching.term import Kernel
from ...matching.waves import Draft
from ...pieces import Piece
from ...problem import Problem
from ...region import Facts, Region, real_part
from .beta import BetaTerm, convergence, total_value
from .combined import BAD
from .unit_reader import UnitReader

NAME = "range (0, 1)"
_BETA_SOURCE = "DLMF 5.12.1 with derivatives in both parameters"
_SERIES_SOURCE = "DLMF 16.5.2"
_MOST_FACTORS = 24


@dataclass
class _Term:
    """A draft sorted: ``coefficient*x**power*log(x)**logs * prod (1-x**r)**e * prod log(1-x**r)**n * foreign``."""

    coefficient: Expr
    power: Expr
    logs: int
    minus: dict[Expr, Expr] = field(default_factory=dict)
    unit_logs: dict[Expr, int] = field(default_factory=dict)
    foreign: list[Kernel] = field(default_factory=list)


def solve_unit(problem: Problem, integrand: Expr, x: Symbol) -> ClosedForm | None:
    """``int integrand dx`` over (0, 1), ``x`` positive."""
    drafts = UnitReader(x, problem.facts).read(integrand)
    if drafts is None:
        return problem.refuse("no kernel", f"a factor of {integrand} is not in the table on (0, 1)")
    sums: dict[Expr, list[BetaTerm]] = {}
    others: list[_Term] = []
    for draft in drafts:
        terms = _sorted(draft, problem.facts)
        if terms is None:
            return problem.refuse("too many kernels", "a term has more than one kernel on (0, 1)")
        for term in terms:
            if term.foreign:
                others.append(term)
                continue
            found = _beta_terms(term, problem.facts)
            if found is None:
                return problem.refuse("too many kernels", "several powers of 1 - x**r")
            ratio, parts = found
            sums.setdefault(ratio, []).extend(parts)
    region = Region(problem.facts)
    values: list[Expr] = []
    for parts in sums.values():
        parts = _merged(parts)
        here = convergence(parts, problem.facts)
        if here is None:
            return problem.refuse("diverges", "at 0 or at 1")
        region = region.meet(here)
        values.append(total_value(parts))
    for term in others:
        value = _joint(term, problem.facts)
        if value is None:
            return problem.refuse("no kernel", "no form of the integral against a truncated power")
        found_value, conditions, positive = value
        region = region.holds(*conditions).positive(*positive)
        values.append(found_value)
    total = Add(*values)
    if total.has(*BAD):
        return problem.refuse("diverges", "the formula is not finite")
    condition = region.to_boolean()
    if condition is S.false:
        return problem.refuse("diverges", "the conditions contradict one another")
    source = _SERIES_SOURCE if others else _BETA_SOURCE
    sources = [k.source for t in others for k in t.foreign if k.source]
    return ClosedForm(
        total, condition, None, NAME,
        (Step("terms integrated over (0, 1)", source, total),), tuple(dict.fromkeys([*sources, source])),
    )  # fmt: skip


# -- sorting -----------------------------------------------------------------------------------------------


def _sorted(draft: Draft, facts: Facts) -> list[_Term] | None:
    term = _Term(draft.coefficient, draft.power, draft.logs)
    for kernel in draft.kernels:
        if kernel.name == "unit power":
            e = term.minus.get(kernel.ratio, S.Zero) + kernel.arguments[0]
            term.minus[kernel.ratio] = e
        elif kernel.name == "unit log":
            term.unit_logs[kernel.ratio] = term.unit_logs.get(kernel.ratio, 0) + 1
        elif kernel.name == "power" and _is_plain(kernel) and kernel.arguments[0].is_Integer:
            # 1 + y = (1 - y**2)/(1 - y)
            e, r = -kernel.arguments[0], kernel.ratio
            term.minus[2 * r] = term.minus.get(2 * r, S.Zero) + e
            term.minus[r] = term.minus.get(r, S.Zero) - e
        else:
            term.foreign.append(kernel)
    term.minus = {r: e for r, e in term.minus.items() if e is not S.Zero}
    terms = [term]
    logs = [k for k in term.foreign if k.name == "log1p" and _is_plain(k)]
    if len(logs) == 1 and not term.unit_logs and not draft.exponents and not draft.trig:
        # log(1 + y) = log(1 - y**2) - log(1 - y)
        rest = [k for k in term.foreign if k is not logs[0]]
        r = logs[0].ratio
        terms = [
            _Term(sign * term.coefficient, term.power, term.logs, dict(term.minus), {m * r: 1}, rest)
            for sign, m in ((1, 2), (-1, 1))
        ]
    waves = _waves(draft)
    if waves is None:
        return None
    for t in terms:
        t.foreign.extend(waves)
        if len(t.foreign) > 1 or (t.foreign and (t.logs or t.unit_logs)):
            return None
    return terms


def _is_plain(kernel: Kernel) -> bool:
    """Whether the scale is 1, so that the kernel is a function of ``1 + x**ratio``."""
    return kernel.product.scale is S.One and kernel.wave is None and bool(kernel.ratio.is_positive)


def _waves(draft: Draft) -> list[Kernel] | None:
    """Exponentials and trigonometric functions as kernels whose scale may have any argument."""
    rates: dict[Expr, Expr] = {}
    for ratio, c in draft.exponents:
        rates[ratio] = rates.get(ratio, S.Zero) + c
    kernels = [
        Kernel("exp", EXP.with_scale(-c), r, None, S.true, True, "DLMF 5.9.1")
        for r, c in rates.items()
        if c is not S.Zero
    ]
    for kind, c, ratio in draft.trig:
        if kind not in ("cos", "sin"):
            return None
        product = COS if kind == "cos" else SIN
        kernels.append(Kernel(kind, product.with_scale(c), ratio, None, S.true, False, "DLMF 5.9.6, 5.9.7"))
    return kernels


def _merged(terms: Sequence[BetaTerm]) -> list[BetaTerm]:
    groups: dict[tuple[Expr, Expr, int, int], list[Expr]] = {}
    for t in terms:
        groups.setdefault((t.s.expand(), t.b.expand(), t.k, t.j), []).append(t.coefficient)
    return [BetaTerm(total, *key) for key, c in groups.items() if (total := Add(*c)) is not S.Zero]


def _beta_terms(term: _Term, facts: Facts) -> tuple[Expr, list[BetaTerm]] | None:
    """The term in ``y = x**ratio``, all factors brought to ``1 - y``."""
    ratios = list(dict.fromkeys([*term.minus, *term.unit_logs]))
    if not ratios:
        ratios = [S.One]
    base = ratios[0]
    multiples = []
    for r in ratios:
        m = (r / base).cancel() if not (r / base).is_Rational else r / base
        if not m.is_Rational or not m.is_positive:
            return None
        multiples.append(m)
    unit = Rational(1, lcm(*(int(m.q) for m in multiples)))
    whole = [int(m / unit) for m in multiples]
    top = lcm(*whole)
    y = Dummy("y", positive=True)
    # in z = x**(base*unit): prod (1 - z**n)**e, brought to (1 - z**top)**E * polynomial(z)
    exponent: Expr = S.Zero
    polynomial = Poly(1, y)
    for r, n in zip(ratios, whole, strict=True):
        e = term.minus.get(r, S.Zero)
        if n == top:
            exponent = exponent + e
        elif not e.is_Integer or abs(e) > _MOST_FACTORS:
            return None
        elif e > 0:
            polynomial *= Poly(1 - y**n, y) ** int(e)
        else:
            polynomial *= Poly(Add(*(y ** (n * i) for i in range(top // n))), y) ** int(-e)
            exponent = exponent + e
        if term.unit_logs.get(r) and n != top:
            return None
    if polynomial.length() > 200:
        return None
    j = sum(term.unit_logs.values())
    ratio = base * unit * top
    front = term.coefficient / ratio ** (term.logs + 1)
    step = Rational(1, top)
    start = (term.power + 1) / ratio
    found = [
        BetaTerm(front * c, start + int(m) * step, exponent + 1, term.logs, j)
        for (m,), c in sorted(polynomial.terms())
    ]
    return ratio, found


# -- one further kernel ------------------------------------------------------------------------------------


def _joint(term: _Term, facts: Facts) -> tuple[Expr, list[Boolean], list[Expr]] | None:
    """Value, conditions, and what must be positive, for a truncated power against one kernel."""
    (kernel,) = term.foreign
    if len(term.minus) > 1 or kernel.wave is not None:
        return None
    q, p = kernel.ratio, term.power
    r, e = next(iter(term.minus.items()), (S.One, S.Zero)) if term.minus else (S.One, S.Zero)
    b = e + 1
    if kernel.name == "unit acos":
        return None if term.minus else _lone(kernel, term)
    slope = q / r
    if not slope.is_Rational:
        slope = slope.cancel()
    if not slope.is_Rational:
        if term.minus:
            return None
        r, slope = q if q.is_positive else -q, S.One if q.is_positive else S.NegativeOne
    conditions: list[Boolean] = [kernel.condition]
    positive = _edge(kernel, p)
    if positive is None:
        return None
    scale = kernel.product.scale
    known = facts.sign(scale) if scale.is_extended_real else None
    at_end = S.Zero
    if kernel.product.delta == 0 and known == -1 and facts.sign(1 + _argument(kernel)) == 0:
        kappa = kernel.product.kappa(S.Zero)
        at_end = -kappa - 1
    positive.append(real_part(b))
    if at_end is not S.Zero:
        positive.append(real_part(b) + at_end)
    start = ((p + 1) / r).expand()
    rows = [*kernel.product.factors, (start, -slope, 1), (start + b, -slope, -1)]
    front = term.coefficient * kernel.product.constant * gamma(b) / r
    if known == 1:
        value = inverse_mellin(rows, scale, facts)
    elif slope > 0:
        value = _entire(rows, scale, known)
    else:
        return None
    if value is None:
        return None
    return front * value, conditions, positive


def _argument(kernel: Kernel) -> Expr:
    """The scale, up to what the row keeps in it; rows with Delta = 0 keep nothing."""
    return kernel.product.scale


def _lone(kernel: Kernel, term: _Term) -> tuple[Expr, list[Boolean], list[Expr]]:
    u = ((term.power + 1) / kernel.ratio).expand()
    value = term.coefficient / kernel.ratio * kernel.product.at(u)
    return value, [], [real_part(term.power + 1)]


def _edge(kernel: Kernel, p: Expr) -> list[Expr] | None:
    """What must be positive for convergence at x = 0."""
    bare = Kernel(kernel.name, kernel.product, kernel.ratio, None, kernel.condition, True)
    piece = Piece(S.One, p, 0, bare.product, bare.ratio, None, (), S.true, False)
    positive = []
    for ladder in piece.rungs(1):
        exponent = next(ladder, None)
        if exponent is not None:
            positive.append(real_part(exponent) + 1)
    if kernel.ratio.is_negative:
        growth = piece.growth()
        if growth is None or growth.positive is not None:
            return None
        if growth.conditional is not None:
            end, exponent = growth.conditional
            if end != 1:
                return None
            positive.append(exponent + 1)
    return positive


def _entire(rows: list[tuple[Expr, Rational, int]], scale: Expr, known: int | None) -> Expr | None:
    """The series at 0, which converges for every scale that the reader lets pass (DLMF 16.5.2)."""
    norm = normalise(rows)
    w = Dummy("w", positive=True)
    series = left_series(norm.signature, w)
    if series is None or series.head is not S.Zero:
        return None
    total: list[Expr] = []
    for tail in series.tails:
        degree = (tail.exponent * norm.power).expand()
        if not degree.is_Integer and not (known is None and degree.is_integer):
            return None
        argument = tail.sign * norm.scale * scale**norm.power
        upper, lower = _short(tail.upper, tail.lower)
        f = named_pfq(upper, lower, argument) if known == -1 else None
        if f is None:
            f = hyper(upper, lower, argument)
        total.append(tail.coefficient * power(norm.scale, tail.exponent) * scale**degree * f)
    return norm.constant * Add(*total)


def _short(upper: Sequence[Expr], lower: Sequence[Expr]) -> tuple[list[Expr], list[Expr]]:
    """Equal parameters cancelled."""
    ups, downs = [a.expand() for a in upper], [c.expand() for c in lower]
    for a in list(ups):
        if a in downs:
            ups.remove(a)
            downs.remove(a)
    return ups, downs


__all__ = ["NAME", "solve_unit"]
