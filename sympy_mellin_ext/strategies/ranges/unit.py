"""The interval (0, 1): sums of Beta type, and one further kernel against a truncated power."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from math import lcm

from sympy import (
    Add,
    Dummy,
    Eq,
    Expr,
    Function,
    Piecewise,
    Poly,
    Pow,
    Rational,
    S,
    Shi,
    Si,
    Symbol,
    asin,
    asinh,
    atan,
    atanh,
    besseli,
    besselj,
    cos,
    cosh,
    erf,
    erfi,
    exp,
    gamma,
    hyper,
    log,
    meijerg,
    sin,
    sinh,
    sqrt,
)
from sympy.logic.boolalg import Boolean

from ...closed_form import ClosedForm, Step
from ...inverse import inverse_mellin, named_pfq
from ...inverse.pfq import put
from ...inverse.residues import left_series
from ...inverse.signature import normalise, power
from ...kernels.elementary import COS, EXP, SIN
from ...kernels.truncated import STEP, unit_power
from ...matching.term import Kernel
from ...matching.waves import Draft
from ...pieces import Piece
from ...problem import Problem
from ...region import Facts, Region, real_part
from ..master_theorem import closed_form_of_pieces
from ..tidy import tidy as shortened
from .beta import BetaTerm, convergence, total_value
from .combined import BAD
from .constants import tidy
from .unit_reader import UnitReader

NAME = "range (0, 1)"
_BETA_SOURCE = "DLMF 5.12.1 with derivatives in both parameters"
_SERIES_SOURCE = "DLMF 16.5.2"
_MOST_FACTORS = 24
_ALONE = ("unit acos", "unit asech")


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
    for fractions in (False, True):
        drafts = UnitReader(x, problem.facts, fractions).read(integrand)
        if drafts is None:
            return problem.refuse("no kernel", f"a factor of {integrand} is not in the table on (0, 1)")
        sorted_terms = [_sorted(draft, problem.facts) for draft in drafts]
        if all(terms is not None for terms in sorted_terms):
            return _sum(problem, [t for terms in sorted_terms if terms is not None for t in terms])
    return problem.refuse("too many kernels", "a term has more than one kernel on (0, 1)")


def _lone_kernels(terms: Sequence[_Term]) -> list[Piece] | None:
    """The terms as pieces of a sum with index 0, where every one holds one truncated kernel and no log(1-x)."""
    pieces: list[Piece] = []
    for term in terms:
        kernels = [k for k in term.foreign if k.name in _ALONE and not term.minus]
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


def _sum(problem: Problem, terms: Sequence[_Term]) -> ClosedForm | None:
    if any(t.foreign for t in terms):
        pieces = _lone_kernels(terms)
        if pieces is not None:
            return closed_form_of_pieces(problem, pieces, NAME, (_BETA_SOURCE,))
    sums: dict[Expr, list[BetaTerm]] = {}
    others: list[_Term] = []
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
        here = convergence(_merged(parts), problem.facts)
        if here is None or here.empty:
            if len(sums) == 1 and not others and here is not None and _certain(parts):
                return problem.diverges("at 0 or at 1")
            return problem.refuse("diverges", "at 0 or at 1")
        region = region.meet(here)
        values.append(total_value(_merged(parts)))
    special: dict[Boolean, list[tuple[Expr, Expr]]] = {}
    for term in others:
        found_joint = _joint(term, problem.facts)
        if found_joint is None:
            return problem.refuse("no kernel", "no form of the integral against a truncated power")
        value, conditions, positive, at_zero = found_joint
        region = region.holds(*conditions).positive(*positive)
        values.append(tidy(value))
        if at_zero is not None:
            special.setdefault(at_zero[0], []).append((values[-1], at_zero[1]))
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


def _sorted(draft: Draft, facts: Facts) -> list[_Term] | None:
    if draft.series:
        return None
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
        BetaTerm(front * c, start + int(m) * step, exponent + 1, term.logs, j) for (m,), c in sorted(polynomial.terms())
    ]
    return ratio, found


_Joint = tuple[Expr, list[Boolean], list[Expr], tuple[Boolean, Expr] | None]


# -- one further kernel ------------------------------------------------------------------------------------


def _joint(term: _Term, facts: Facts) -> _Joint | None:
    """Value, conditions, what must be positive, and a removable point, for a truncated power against one kernel."""
    (kernel,) = term.foreign
    if len(term.minus) > 1 or kernel.wave is not None:
        return None
    q, p = kernel.ratio, term.power
    r, e = next(iter(term.minus.items()), (S.One, S.Zero)) if term.minus else (S.One, S.Zero)
    b = e + 1
    if kernel.name in _ALONE:
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
        value = _inverse(rows, scale, facts)
        return None if value is None else (front * value, conditions, positive, None)
    if slope < 0:
        return None
    found = _entire(rows, scale, known)
    if found is None:
        return None
    value, limit = found
    if limit is not None:
        return front * value, conditions, positive, (limit[0], front * limit[1])
    return front * value, conditions, positive, None


def _argument(kernel: Kernel) -> Expr:
    """The scale, up to what the row keeps in it; rows with Delta = 0 keep nothing."""
    return kernel.product.scale


def _inverse(rows: list[tuple[Expr, Rational, int]], scale: Expr, facts: Facts) -> Expr | None:
    """The inverse transform at a positive scale; at a number by the formula for every scale where it has a name."""
    if scale.is_number:
        w = Dummy("w", positive=True)
        general = inverse_mellin(rows, w, facts)
        if general is not None and not general.has(hyper, meijerg, Piecewise):
            there = general.subs(w, scale)
            if not there.has(*BAD):
                return there
    return inverse_mellin(rows, scale, facts)


def _lone(kernel: Kernel, term: _Term) -> _Joint:
    u = ((term.power + 1) / kernel.ratio).expand()
    value = term.coefficient / kernel.ratio * kernel.product.at(u)
    return value, [], [real_part(term.power + 1)], None


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


def _entire(
    rows: list[tuple[Expr, Rational, int]], scale: Expr, known: int | None
) -> tuple[Expr, tuple[Boolean, Expr] | None] | None:
    """The series at 0, which converges for every scale that the reader lets pass (DLMF 16.5.2).

    With the value at scale 0 where the closed form reads 0/0 there.
    """
    norm = normalise(rows)
    w = Dummy("w", positive=True)
    series = left_series(norm.signature, w)
    if series is None or series.head is not S.Zero:
        return None
    total: list[Expr] = []
    limits: list[Expr] = []
    removable = False
    for tail in series.tails:
        degree = (tail.exponent * norm.power).expand()
        if not degree.is_Integer and not (known is None and degree.is_integer):
            return None
        argument = tail.sign * norm.scale * scale**norm.power
        upper, lower = _short(tail.upper, tail.lower)
        front = tail.coefficient * power(norm.scale, tail.exponent) * scale**degree
        f, smooth = _series_function(upper, lower, argument, known)
        removable = removable or not smooth
        total.append(front * f)
        limits.append(front if degree is S.Zero else S.Zero)
    special = None
    if removable:
        symbol = next(a for a in sorted(scale.free_symbols, key=str) if not a.is_positive)
        special = (Eq(symbol, 0), norm.constant * Add(*limits))
    return norm.constant * Add(*total), special


def _series_function(
    upper: Sequence[Expr], lower: Sequence[Expr], argument: Expr, known: int | None
) -> tuple[Expr, bool]:
    """The series by name where that holds for every argument allowed; whether the form is defined at argument 0."""
    plain = hyper(upper, lower, argument)
    if len(upper) == 1 and not lower:
        return (1 - argument).cancel() ** (-upper[0]), True
    if known == -1:
        f = named_pfq(upper, lower, argument)
        return (plain if f is None else f), True
    c, symbol, degree = _monomial_scale(argument)
    if c is None or (degree == 2 and not symbol.is_real):
        return plain, True
    y = Dummy("y", positive=True)
    if degree == 1:
        # exp, log and sqrt of 1 + y continue to y < 0 as they stand
        f = named_pfq(upper, lower, -y)
        if f is None or not all(type(node) in _CONTINUED for node in f.atoms(Function)):
            return plain, True
        if not all(_continues(node, y) for node in f.atoms(Pow)) or (f.has(log) and not symbol.is_real):
            return plain, True
        return put(f, y, S.One, -argument, S.One), f.subs(y, 0) == 1
    # c*symbol**2: the root of y = abs(c)*symbol**2 may have either sign, for the series is one in y
    f = named_pfq(upper, lower, y if c.is_positive else -y)
    if f is None or not all(type(node) in _EVEN for node in f.atoms(Function)):
        return plain, True
    if any(not n.args[0].is_Integer for n in f.atoms(besselj, besseli)):
        return plain, True
    root = Dummy("t", positive=True)
    form = put(f, y, S.One, root**2, S.One)
    smooth = form.subs(root, 0) == 1
    return shortened(form.xreplace({root: sqrt(c if c.is_positive else -c) * symbol})), smooth


_CONTINUED = (exp, log)
_EVEN = (exp, log, sin, cos, sinh, cosh, Si, Shi, erf, erfi, atan, atanh, asin, asinh, besselj, besseli)


def _continues(node: Pow, y: Symbol) -> bool:
    """Integer powers of y, and powers of 1 + y, which is positive."""
    base, exponent = node.args
    if not node.has(y) or base is S.Exp1:
        return True
    if base == y:
        return bool(exponent.is_Integer)
    return base == 1 + y and bool(exponent.is_real)


def _monomial_scale(argument: Expr) -> tuple[Expr | None, Expr, int]:
    """``argument = c*symbol**degree`` with real c != 0 and one symbol of unknown sign, degree 1 or 2."""
    unknown = [a for a in argument.free_symbols if not a.is_positive]
    if len(unknown) == 1:
        c, rest = argument.as_independent(unknown[0], as_Add=False)
        base, degree = rest.as_base_exp()
        if base == unknown[0] and degree in (1, 2) and (c.is_positive or c.is_negative):
            return c, base, int(degree)
    return None, S.Zero, 0


def _short(upper: Sequence[Expr], lower: Sequence[Expr]) -> tuple[list[Expr], list[Expr]]:
    """Equal parameters cancelled."""
    ups, downs = [a.expand() for a in upper], [c.expand() for c in lower]
    for a in list(ups):
        if a in downs:
            ups.remove(a)
            downs.remove(a)
    return ups, downs


__all__ = ["NAME", "solve_unit"]
