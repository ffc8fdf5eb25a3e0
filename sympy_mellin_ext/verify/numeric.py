"""Numbers from SymPy expressions: branches are chosen first, then mpmath evaluates what is left."""
from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

from mpmath import mp
from mpmath.libmp.libhyper import NoConvergence
from sympy import (
    ITE,
    And,
    Basic,
    Derivative,
    Dummy,
    Expr,
    Function,
    Integral,
    Limit,
    Not,
    Or,
    Piecewise,
    Rational,
    S,
    Subs,
    Symbol,
    Tuple,
    lambdify,
    nan,
    oo,
    sympify,
    zoo,
)
from sympy.core.function import AppliedUndef
from sympy.core.relational import Equality, Relational, Unequality
from sympy.functions.elementary.exponential import exp_polar

from .functions import TABLE, Number

# what mpmath and SymPy raise at poles, on missing functions and where a series does not converge
NUMERIC_ERRORS = (ArithmeticError, ValueError, TypeError, NotImplementedError, NoConvergence, AttributeError,
                  KeyError, RecursionError, NameError)


class Unevaluated(ValueError):
    """The expression claims no number: an integral, a limit, a free symbol or an open condition is left."""


class Undefined(ValueError):
    """The expression is infinite or undefined at the point."""


def as_number(value: Any) -> Number:
    """A SymPy or Python number as an mpmath number at the working precision (rationals rounded once)."""
    if isinstance(value, int):
        return mp.mpf(value)
    if not isinstance(value, Basic):
        return mp.mpmathify(value)
    if isinstance(value, Rational):
        return mp.mpf(value.p) / value.q
    real, imag = value.as_real_imag()
    if imag == 0:
        return mp.mpf(real.p) / real.q if isinstance(real, Rational) else mp.mpmathify(real.evalf(mp.dps + 5))
    return mp.mpc(as_number(real), as_number(imag))


def compiled(expr: Expr, symbols: Sequence[Symbol]) -> Callable[..., Number]:
    """`expr` as a function of `symbols`, evaluated at mpmath's working precision at the time of the call."""
    table: dict[str, Callable[..., Number]] = {}
    for node in expr.atoms(Function):
        name = type(node).__name__
        if name in TABLE:
            table[name] = TABLE[name]
        elif not hasattr(mp, name) and not isinstance(node, AppliedUndef) and not isinstance(node, Piecewise):
            table[name] = _by_evalf(type(node))
    # dummies, for two symbols of one name may differ in their assumptions
    return lambdify(list(symbols), expr, modules=[table, "mpmath"], dummify=True, cse=False)


def _by_evalf(function: type) -> Callable[..., Number]:
    def value(*args: Number) -> Number:
        result = function(*[sympify(a) for a in args]).evalf(mp.dps)
        if not result.is_number or result.has(function):
            raise NotImplementedError(f"no numerical value of {function.__name__}")
        return mp.mpmathify(result)
    return value


def holds(condition: Any, point: Mapping[Symbol, Any]) -> bool | None:
    """Truth of a SymPy Boolean at a point; None where undecided (complex numbers have no order)."""
    condition = sympify(condition)
    if condition in (S.true, S.false):
        return bool(condition)
    if isinstance(condition, (And, Or)):
        parts = [holds(a, point) for a in condition.args]
        absorbing = isinstance(condition, Or)
        if absorbing in parts:
            return absorbing
        return None if None in parts else not absorbing
    if isinstance(condition, Not):
        part = holds(condition.args[0], point)
        return None if part is None else not part
    if isinstance(condition, ITE):
        part = holds(condition.args[0], point)
        return None if part is None else holds(condition.args[1 if part else 2], point)
    if isinstance(condition, Relational):
        return _relation(condition, point)
    try:
        value = condition.subs(dict(point))
    except NUMERIC_ERRORS:
        return None
    return bool(value) if value in (S.true, S.false) else None


def _relation(relation: Relational, point: Mapping[Symbol, Any]) -> bool | None:
    try:
        left, right = evaluate(relation.lhs, point), evaluate(relation.rhs, point)
    except (Undefined, Unevaluated):
        try:
            value = relation.subs(dict(point))
        except NUMERIC_ERRORS:
            return None
        return bool(value) if value in (S.true, S.false) else None
    difference = left - right
    small = 1e-12 * max(abs(left), abs(right), 1e-12)
    if isinstance(relation, (Equality, Unequality)):
        return (abs(difference) <= small) is isinstance(relation, Equality)
    if abs(mp.im(difference)) > small:
        return None
    real = mp.re(difference)
    if abs(real) <= small:
        return relation.rel_op in ("<=", ">=")
    return (real > 0) is (relation.rel_op in (">", ">="))


def resolve(expr: Expr, point: dict[Symbol, Any]) -> Expr:
    """`expr` with the branch of each Piecewise that holds at `point`, and derivatives turned into numbers.

    Numbers so computed are entered in `point` under new dummies.
    """
    if isinstance(expr, Piecewise):
        for branch, condition in expr.args:
            truth = holds(condition, point)
            if truth is None:
                raise Unevaluated(f"condition {condition} cannot be decided")
            if truth:
                return resolve(branch, point)
        return nan
    if isinstance(expr, Derivative):
        return _derivative(expr, point)
    if isinstance(expr, Subs):
        inner = dict(point)
        for name, value in zip(expr.variables, expr.point, strict=True):
            inner[name] = evaluate(value, point, mp.dps)
        return _entered(evaluate(expr.expr, inner, mp.dps), point)
    if isinstance(expr, (Integral, Limit)):
        raise Unevaluated(f"{type(expr).__name__} left")
    if not expr.args or not expr.has(Piecewise, Derivative, Subs, Integral, Limit):
        return expr
    return expr.func(*[resolve(a, point) if isinstance(a, (Expr, Tuple)) else a for a in expr.args])


def _entered(value: Number, point: dict[Symbol, Any]) -> Expr:
    name = Dummy("number")
    point[name] = value
    return name


def _derivative(expr: Derivative, point: dict[Symbol, Any]) -> Expr:
    if len(expr.variable_count) != 1 or expr.variable_count[0][0] not in point:
        raise Unevaluated("Derivative left")
    variable, order = expr.variable_count[0]
    inner = expr.expr

    def value(t: Number) -> Number:
        return evaluate(inner, {**point, variable: t}, mp.dps)

    with mp.workdps(mp.dps + 10):
        return _entered(mp.diff(value, as_number(point[variable]), int(order)), point)


def evaluate(expr: Any, point: Mapping[Symbol, Any], digits: int = 15) -> Number:
    """Value of `expr` at `point` to about `digits` digits.

    Parameters
    ==========
    expr : Expr
        The expression; `Piecewise`, `Derivative` and `Subs` are resolved at the point.
    point : mapping
        Symbol -> number (SymPy, Python or mpmath).
    digits : int
        Digits wanted; the working precision is raised until two precisions agree.

    Returns
    =======
    mpf or mpc

    Raises
    ======
    Unevaluated
        The expression claims no number there (an `Integral` is left, a symbol has no value).
    Undefined
        It is infinite or undefined there.

    Examples
    ========
    >>> from sympy import gamma, Rational
    >>> from sympy.abc import s
    >>> from sympy_mellin_ext.verify.numeric import evaluate
    >>> print(evaluate(gamma(s)**2, {s: Rational(1, 2)}))
    3.14159265358979
    """
    expr = sympify(expr)
    if expr.has(zoo, nan, oo, -oo) and not expr.args:
        raise Undefined(str(expr))
    given = dict(point)
    with mp.workdps(digits + 15):
        expr = resolve(expr, given)
    if expr.has(nan, zoo) or expr in (oo, -oo):
        raise Undefined(str(expr))
    free = sorted(expr.free_symbols, key=str)
    missing = [str(v) for v in free if v not in given]
    if missing:
        raise Unevaluated(f"no value for {', '.join(missing)}")
    if expr.has(exp_polar):
        return _through_evalf(expr, given, digits)
    try:
        function = compiled(expr, free)
        return _stable(function, [given[v] for v in free], digits)
    except NUMERIC_ERRORS as error:
        try:
            return _through_evalf(expr, given, digits)
        except NUMERIC_ERRORS:
            raise Undefined(f"{type(error).__name__}: {error}") from None


def _stable(function: Callable[..., Number], arguments: Sequence[Any], digits: int) -> Number:
    before = None
    for dps in (digits + 12, digits + 25, 2 * digits + 60, 4 * digits + 200):
        with mp.workdps(dps):
            value = mp.mpmathify(function(*[as_number(a) for a in arguments]))
        if not mp.isfinite(value):
            raise Undefined(str(value))
        if before is not None and abs(value - before) <= mp.mpf(10) ** (-digits - 2) * abs(value):
            return value
        if before is not None and max(abs(value), abs(before)) < mp.mpf(10) ** (-digits - 8):
            return value  # a sum that cancels to zero
        before = value
    raise Undefined("the value does not settle with growing precision")


def _through_evalf(expr: Expr, point: Mapping[Symbol, Any], digits: int) -> Number:
    exact = {k: v if isinstance(v, Basic) else sympify(v) for k, v in point.items()}
    value = expr.subs(exact).evalf(digits + 10)
    if not value.is_number or value.has(nan, zoo, oo) or value.atoms(Function):
        raise Undefined(str(value))
    return as_number(value)
