"""The interval (0, 1): sums of Beta type, and one further kernel against a truncated power."""

from __future__ import annotations

from collections.abc import Sequence
from math import lcm

from sympy import (
    Add,
    Dummy,
    Expr,
    Poly,
    Rational,
    S,
    Symbol,
)
from sympy.logic.boolalg import Boolean

from ...closed_form import ClosedForm, Step
from ...kernels.elementary import COS, EXP, SIN
from ...kernels.truncated import STEP, unit_power
from ...matching.term import Kernel
from ...matching.waves import Draft
from ...pieces import Piece
from ...problem import Problem
from ...region import Facts, Region
from ..master_theorem import closed_form_of_pieces
from ..tidy import tidy as shortened
from .beta import BetaTerm, convergence, total_value
from .cancelling import cancelling
from .combined import BAD
from .constants import tidy
from .joint import ALONE, UnitTerm, at_zero, joint
from .unit_reader import UnitReader

NAME = "range (0, 1)"
_BETA_SOURCE = "DLMF 5.12.1 with derivatives in both parameters"
_SERIES_SOURCE = "DLMF 16.5.2"
_MOST_FACTORS = 24


def solve_unit(problem: Problem, integrand: Expr, x: Symbol) -> ClosedForm | None:
    """``int integrand dx`` over (0, 1), ``x`` positive."""
    for fractions in (False, True):
        drafts = UnitReader(x, problem.facts, fractions).read(integrand)
        if drafts is None:
            return problem.refuse("no kernel", "a factor of {} is not in the table on (0, 1)", integrand)
        sorted_terms = [_sorted(draft, problem.facts) for draft in drafts]
        if all(terms is not None for terms in sorted_terms):
            return _sum(problem, [t for terms in sorted_terms if terms is not None for t in terms])
    return problem.refuse("too many kernels", "a term has more than one kernel on (0, 1)")


def _lone_kernels(terms: Sequence[UnitTerm]) -> list[Piece] | None:
    """The terms as pieces of a sum with index 0, where every one holds one truncated kernel and no log(1-x)."""
    pieces: list[Piece] = []
    for term in terms:
        kernels = [k for k in term.foreign if k.name in ALONE and not term.minus]
        if term.unit_logs or len(term.minus) > 1 or len(kernels) != len(term.foreign):
            return None
        if kernels:
            product, ratio = kernels[0].product, kernels[0].ratio
        elif term.minus:
            ((ratio, e),) = term.minus.items()
            product = unit_power(e + 1)
        else:
            product, ratio = STEP, S.One
        pieces.append(Piece(term.coefficient, term.power, term.logs, product, ratio))
    return pieces


def _sum(problem: Problem, terms: Sequence[UnitTerm]) -> ClosedForm | None:
    if any(t.foreign for t in terms):
        pieces = _lone_kernels(terms)
        if pieces is not None:
            return closed_form_of_pieces(problem, pieces, NAME, (_BETA_SOURCE,))
    sums: dict[Expr, list[BetaTerm]] = {}
    others: list[UnitTerm] = []
    for term in terms:
        if term.foreign:
            others.append(term)
            continue
        found = _beta_terms(term, problem.facts)
        if found is None:
            return problem.refuse("too many kernels", "several powers of 1 - x**r")
        ratio, parts = found
        sums.setdefault(ratio, []).extend(parts)
    if others and any(problem.facts.sign(e) in (0, -1) for t in others for e in at_zero(t)):
        return cancelling(problem, terms, NAME)
    region = Region(problem.facts)
    values: list[Expr] = []
    for parts in sums.values():
        here = convergence(_merged(parts), problem.facts)
        if here is None or here.empty:
            if len(sums) == 1 and not others and here is not None and _certain(parts):
                return problem.diverges("at 0 or at 1")
            return problem.refuse("diverges", "at 0 or at 1")
        region = region.meet(here)
        values.append(total_value(_merged(parts)))
    special: dict[Boolean, list[tuple[Expr, Expr]]] = {}
    for term in others:
        found_joint = joint(term, problem.facts)
        if found_joint is None:
            return problem.refuse("no kernel", "no form of the integral against a truncated power")
        value, conditions, positive, removable = found_joint
        region = region.holds(*conditions).positive(*positive)
        values.append(tidy(value))
        if removable is not None and removable[0] is not S.false:
            special.setdefault(removable[0], []).append((values[-1], removable[1]))
    total = Add(*values)
    if total.has(*BAD):
        return problem.refuse("diverges", "the formula is not finite")
    if region.empty:
        if len(terms) == 1:
            return problem.diverges("at 0 or at 1")
        return problem.refuse("diverges", "the conditions contradict one another")
    limits = [(where, _replaced(total, where, pairs)) for where, pairs in special.items()]
    source = _SERIES_SOURCE if others else _BETA_SOURCE
    sources = [k.source for t in others for k in t.foreign if k.source]
    return ClosedForm(
        shortened(total),
        region.to_boolean(),
        None,
        NAME,
        (Step("terms integrated over (0, 1)", source, total),),
        tuple(dict.fromkeys([*sources, source])),
        tuple((where, limit) for where, limit in limits if not limit.has(*BAD)),
    )


def _certain(parts: Sequence[BetaTerm]) -> bool:
    """Whether nothing but what was seen can cancel: one term, or numbers throughout."""
    return len(_merged(parts)) == 1 or not any(v.free_symbols for t in parts for v in (t.coefficient, t.s, t.b))


def _replaced(total: Expr, where: Boolean, pairs: Sequence[tuple[Expr, Expr]]) -> Expr:
    """The total with single values replaced by their limits, at a point where they read 0/0."""
    rest = total - Add(*(value for value, _ in pairs))
    return (rest.subs(where.lhs, where.rhs) + Add(*(limit for _, limit in pairs))).expand()


# -- sorting -----------------------------------------------------------------------------------------------


def _sorted(draft: Draft, facts: Facts) -> list[UnitTerm] | None:
    if draft.series:
        return None
    term = UnitTerm(draft.coefficient, draft.power, draft.logs)
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
        elif kernel.name == "pole" or kernel.wave is not None or kernel.tilt is not None:
            return None
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
            UnitTerm(sign * term.coefficient, term.power, term.logs, dict(term.minus), {m * r: 1}, rest)
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


def _beta_terms(term: UnitTerm, facts: Facts) -> tuple[Expr, list[BetaTerm]] | None:
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
        BetaTerm(front * c, start + int(m) * step, exponent + 1, term.logs, j) for (m,), c in sorted(polynomial.terms())
    ]
    return ratio, found


__all__ = ["NAME", "solve_unit"]
