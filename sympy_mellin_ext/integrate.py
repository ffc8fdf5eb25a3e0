"""The public calls: a drop-in ``integrate``, ``closed_form`` without a fallback, and the transform itself."""
from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any, NamedTuple

import sympy
from sympy import Expr, Integral, Interval, Piecewise, S, Symbol, Tuple, sympify

from .arguments import Given, expression, relations, symbol
from .closed_form import ClosedForm
from .fallback import has_plain_antiderivative, refused
from .plugins import report
from .problem import Diagnosis, Problem
from .region import Facts
from .strategies import attempt

# Any of these, forced by the caller, asks for one of SymPy's own methods.
STOCK_METHODS = ("meijerg", "risch", "heurisch", "manual")


def integrate(f: Any, *limits: Any, given: Given = (), **hints: Any) -> Any:
    """Drop-in for :func:`sympy.integrate` that tries the master theorem first.

    Parameters
    ----------
    f, *limits, **hints :
        As for SymPy: ``conds='piecewise'|'separate'|'none'``, ``meijerg``, ``risch``, ``heurisch``,
        ``manual``.  A forced method goes to SymPy unchanged, and so does all that is not ours.
    given : relation or iterable of relations
        What the parameters are known to satisfy, such as ``a > b``; never passed on.
    certify : bool
        Among the hints, never passed on: the closed form, ours or SymPy's, is returned only if quadrature
        confirms it at points inside its region; else the unevaluated Integral.

    Returns
    -------
    Expr
        The bare closed form where the assumptions imply the region, else
        ``Piecewise((value, region), (Integral(...), True))``.  With ``conds='none'`` the value alone, with
        ``conds='separate'`` the pair (value, region).

    Examples
    --------
    >>> from sympy import Symbol, besselj, oo, symbols
    >>> from sympy_mellin_ext import integrate
    >>> x, a = symbols('x a', positive=True)
    >>> integrate(1/(x**2 + a**2)**3, (x, 0, oo))
    3*pi/(16*a**5)
    >>> integrate(1/(x**2 + a**2)**3, (x, 0, oo), certify=True)
    3*pi/(16*a**5)
    """
    if "certify" in hints:
        certify = hints.pop("certify")
        if not isinstance(certify, bool):
            raise TypeError(f"certify: True or False is accepted, not {certify!r}")
        if certify:
            return _certified(f, limits, given, hints)
    if all(name == "conds" or name in STOCK_METHODS for name in hints):
        outcome = try_strategies(f, limits, given, hints)
        if outcome.settled:
            return outcome.answer
        if outcome.question is not None:
            with refused(*outcome.question):
                return outcome.judged(sympy.integrate(f, *limits, **hints))
    return sympy.integrate(f, *limits, **hints)


def _certified(f: Any, limits: tuple[Any, ...], given: Given, hints: dict[str, Any]) -> Any:
    """The answer to a call, if quadrature confirms it.

    Under ``conds='none'`` the conditions are asked for all the same, and the answer is held against those.
    """
    from .verify.certify import holds_up

    answer = integrate(f, *limits, given=given, **hints)
    judged = answer
    if hints.get("conds") == "none":
        judged = integrate(f, *limits, given=given, **{**hints, "conds": "piecewise"})
    if holds_up(judged, f, limits, Facts(relations(given)).given):
        return answer
    return Integral(f, *limits)


class Outcome(NamedTuple):
    """What the strategies made of one call.

    Attributes
    ----------
    closed : ClosedForm, or None
    answer :
        The closed form as ``conds`` asks for it, or the infinity.
    settled : bool
        Whether SymPy need not be asked.
    question : tuple (f, limits), or None
        The integral as it was understood; None if it was not one of ours to begin with.
    divergent : bool
        Whether the integral was shown to diverge.
    infinity : oo or -oo, where it diverges to that.
    diagnosis : Diagnosis, or None
        Why there is no closed form.
    """

    closed: ClosedForm | None = None
    answer: Any = None
    settled: bool = False
    question: tuple[Expr, tuple[Tuple, ...]] | None = None
    divergent: bool = False
    infinity: Expr | None = None
    diagnosis: Diagnosis | None = None

    def judged(self, stock: Any) -> Any:
        """SymPy's result or ours, for a question that was not settled.

        A finite value of an integral that we know to diverge is not passed on: SymPy may step over a pole.
        An answer of ours that holds for some values of the ends only yields to one without conditions.
        """
        if self.closed is not None:
            return self.answer if not isinstance(stock, Expr) or stock.has(Integral, Piecewise) else stock
        if not self.divergent or self.question is None:
            return stock
        value = stock[0] if isinstance(stock, tuple) else stock
        if isinstance(value, Integral) or (
            isinstance(value, Expr)
            and value.has(S.Infinity, S.NegativeInfinity, S.ComplexInfinity, S.NaN)
            and not value.has(Integral)
        ):
            return stock
        f, limits = self.question
        return Integral(f, *limits)


def try_strategies(
    f: Any, limits: tuple[Any, ...], given: Given, hints: Mapping[str, Any], nested: bool = False
) -> Outcome:
    """Our answer to a call of ``integrate``; what is malformed or forced is left to SymPy."""
    conds = hints.get("conds", "piecewise")
    if conds not in ("piecewise", "separate", "none") or any(hints.get(name) for name in STOCK_METHODS):
        return Outcome()
    if hints.get("meijerg") is False:  # no definite integration by transforms: the caller wants an antiderivative
        return Outcome()
    if len(limits) > 1:
        return _try_several(f, limits, Facts(relations(given)), conds)
    integral = _read(f, limits)
    if integral is None:
        return Outcome()
    diagnosis = Diagnosis()
    f, x, lower, upper = integral
    question = (f, (Tuple(x, lower, upper),))
    facts = Facts(relations(given))
    try:
        answer = _solve(*integral, facts, diagnosis)
    except RecursionError:  # SymPy may have a shallower way
        answer = None
    if answer is None:
        infinity = diagnosis.infinity
        return Outcome(None, infinity, infinity is not None, question, diagnosis.divergent, infinity, diagnosis)
    if conds == "piecewise":
        hangs_on_ends = not answer.condition.free_symbols.isdisjoint(lower.free_symbols | upper.free_symbols)
        settled = not (hangs_on_ends and has_plain_antiderivative(f, x))
        return Outcome(answer, answer.as_piecewise(nested), settled, question)
    bare = answer.value if conds == "none" else (answer.value, answer.condition)
    return Outcome(answer, bare, True, question)


def _try_several(f: Any, limits: tuple[Any, ...], facts: Facts, conds: str) -> Outcome:
    """Several variables; SymPy accepts no ``conds='separate'`` there, and nor do we."""
    integrals = [_read(f, (limit,)) for limit in limits]
    if conds == "separate" or any(i is None for i in integrals):
        return Outcome()
    diagnosis = Diagnosis()
    try:
        answer = _solve_several(f, [i[1:] for i in integrals if i is not None], facts, diagnosis)
    except RecursionError:
        answer = None
    except Exception as error:  # as with the strategies for one variable: the host goes on
        report("strategy 'orthant'", error)
        answer = None
    if answer is None:
        infinity = diagnosis.infinity
        if infinity is None:
            return Outcome()
        question = (f, tuple(Tuple(*i[1:]) for i in integrals if i is not None))
        return Outcome(None, infinity, True, question, True, infinity, diagnosis)
    return Outcome(answer, answer.value if conds == "none" else answer.as_piecewise(), True)


def _solve_several(
    f: Expr, limits: list[tuple[Symbol, Expr, Expr]], facts: Facts, diagnosis: Diagnosis | None
) -> ClosedForm | None:
    from .orthant import solve_several

    answer = solve_several(f, limits, facts, diagnosis)
    return None if answer is None else replace(answer, integrand=f, limits=tuple(limits), given=facts.given)


def _read(f: Any, limits: tuple[Any, ...]) -> tuple[Expr, Symbol, Expr, Expr] | None:
    if len(limits) != 1 or not isinstance(f, Expr):
        return None
    limit = limits[0]
    if not isinstance(limit, (tuple, list, Tuple)):
        return None
    if len(limit) == 2 and isinstance(limit[1], Interval):
        limit = (limit[0], limit[1].inf, limit[1].sup)
    if len(limit) != 3 or not isinstance(limit[0], Symbol):
        return None
    lower, upper = limit[1], limit[2]
    if isinstance(lower, str) or isinstance(upper, str):
        return None
    lower, upper = sympify(lower), sympify(upper)
    if not isinstance(lower, Expr) or not isinstance(upper, Expr):
        return None
    if not f.is_commutative or not f.has_free(limit[0]):
        return None
    if lower.has_free(limit[0]) or upper.has_free(limit[0]):
        return None
    return f, limit[0], lower, upper


def _solve(
    f: Expr, x: Symbol, lower: Expr, upper: Expr, facts: Facts, diagnosis: Diagnosis | None,
    reference: Expr | None = None, principal: bool = False,
) -> ClosedForm | None:  # fmt: skip
    answer = attempt(Problem(f, x, lower, upper, facts, diagnosis, 0, reference, principal))
    if answer is None:
        return None
    return replace(answer, integrand=f, limits=((x, lower, upper),), given=facts.given)


def closed_form(f: Any, *limits: Any, given: Given = (), strict: bool = False) -> ClosedForm | None:
    """The closed form of a definite integral with its region, or None; SymPy is not asked.

    Parameters
    ----------
    f : Expr
        The integrand.
    *limits : tuple (x, lower, upper)
        Several of them, innermost first, for an integral over an orthant or a simplex.
    given : relation or iterable of relations
        What the parameters are known to satisfy.
    strict : bool
        Raise :class:`Refusal`, which says why, instead of returning None.

    Raises
    ------
    TypeError, ValueError
        If an argument is not of the form above.
    Refusal
        Under ``strict``.

    Examples
    --------
    >>> from sympy import exp, oo, symbols
    >>> from sympy_mellin_ext import Refusal, closed_form
    >>> x, a = symbols('x a', positive=True)
    >>> print(closed_form(x**2*exp(-a*x), (x, 0, oo)))
    2/a**3  [master theorem]
    >>> try:
    ...     closed_form(exp(-x)/x**2, (x, 0, oo), strict=True)
    ... except Refusal as refusal:
    ...     print(refusal.reason)
    diverges
    """
    diagnosis = Diagnosis() if strict else None
    if len(limits) > 1:
        integrals = [_checked(f, (limit,)) for limit in limits]
        answer = _solve_several(integrals[0][0], [i[1:] for i in integrals], Facts(relations(given)), diagnosis)
    else:
        answer = _solve(*_checked(f, limits), Facts(relations(given)), diagnosis)
    if answer is None and diagnosis is not None:
        raise diagnosis.refusal()
    return answer


def _checked(f: Any, limits: tuple[Any, ...]) -> tuple[Expr, Symbol, Expr, Expr]:
    """The integrand and the limits, or an error that names the argument and what is accepted."""
    f = expression(f, "f")
    if len(limits) != 1:
        raise ValueError(f"limits must be one tuple (x, lower, upper), not {len(limits)} arguments")
    (limit,) = limits
    if not isinstance(limit, (tuple, list, Tuple)) or len(limit) != 3:
        raise ValueError(f"limits must be a tuple (x, lower, upper), not {limit!r}")
    x = symbol(limit[0], "the variable in limits")
    return f, x, expression(limit[1], "lower"), expression(limit[2], "upper")


def principal_value(f: Any, *limits: Any, given: Given = (), strict: bool = False) -> ClosedForm | None:
    """Cauchy's principal value of an integral with simple poles on its range; `integrate` never gives one.

    Parameters and errors are those of :func:`closed_form`.

    Examples
    --------
    >>> from sympy import oo, symbols
    >>> from sympy_mellin_ext import closed_form, principal_value
    >>> x, a = symbols('x a', positive=True)
    >>> print(closed_form(x/(x**3 - a**3), (x, 0, oo)))
    None
    >>> principal_value(x/(x**3 - a**3), (x, 0, oo)).value
    sqrt(3)*pi/(9*a)
    """
    f, x, lower, upper = _checked(f, limits)
    diagnosis = Diagnosis() if strict else None
    facts = Facts(relations(given))
    if lower == -upper and upper != 0:
        # the poles at +-p fold onto one another, and the even part carries the whole value
        answer = _solve(f + f.subs(x, -x), x, S.Zero, upper, facts, diagnosis, None, True)
    else:
        answer = _solve(f, x, lower, upper, facts, diagnosis, None, True)
    if answer is None:
        if diagnosis is not None:
            raise diagnosis.refusal()
        return None
    strategy = f"principal value, {answer.strategy}"
    return replace(answer, integrand=f, limits=((x, lower, upper),), strategy=strategy)


def mellin(f: Any, x: Symbol, s: Symbol, given: Given = (), strict: bool = False) -> ClosedForm | None:
    """Mellin transform ``int_0^oo x**(s-1) f(x) dx`` with its fundamental strip, or None.

    Parameters
    ----------
    f : Expr
    x, s : Symbol
        ``s`` needs no assumptions: it is complex.
    given, strict :
        As for :func:`closed_form`.

    Examples
    --------
    >>> from sympy import Symbol, sin, symbols
    >>> from sympy_mellin_ext import mellin
    >>> x, s = symbols('x s')
    >>> answer = mellin(sin(x), x, s)
    >>> answer.value
    2**(s - 1)*sqrt(pi)*gamma(s/2 + 1/2)/gamma(1 - s/2)
    >>> answer.strip
    (-1, 1)
    """
    f = expression(f, "f")
    symbol(x, "x"), symbol(s, "s")
    if x == s or f.has_free(s):
        raise ValueError(f"s = {s} must differ from the variable and must not occur in f")
    diagnosis = Diagnosis() if strict else None
    integrand = x ** (s - 1) * f
    answer = _solve(integrand, x, S.Zero, sympy.oo, Facts(relations(given)), diagnosis, s - 1)
    if answer is None and diagnosis is not None:
        raise diagnosis.refusal()
    return answer
