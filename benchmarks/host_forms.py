"""Assertions of a test module relaxed: the sides of ``==`` may differ in form if they agree numerically."""
from __future__ import annotations

import ast
import inspect
import random
from cmath import isfinite
from itertools import pairwise
from types import ModuleType
from typing import Any

from sympy import (
    Basic,
    Complement,
    Expr,
    FiniteSet,
    I,
    Integral,
    Intersection,
    Rational,
    S,
    Symbol,
    Tuple,
    erfinv,
    oo,
    re,
    sympify,
)
from sympy.core.sorting import default_sort_key
from sympy.logic.boolalg import Boolean

POINTS = 5
DIFFERENCES = "_differences"
_TRIES = 400
_S = Symbol("s")  # the variable of every transform in SymPy's tests


class _Relax(ast.NodeTransformer):
    def visit_Assert(self, node: ast.Assert) -> ast.AST:
        test = node.test
        if isinstance(test, ast.Compare) and all(isinstance(op, ast.Eq) for op in test.ops):
            sides = [test.left, *test.comparators]
            calls: list[ast.expr] = [
                ast.Call(ast.Name("_same_value", ast.Load()), [left, right], [])
                for left, right in pairwise(sides)
            ]
            same = calls[0] if len(calls) == 1 else ast.BoolOp(ast.And(), calls)
            return ast.copy_location(ast.Assert(same, node.msg), node)
        return node


def relaxed(module: ModuleType) -> ModuleType:
    """A copy of a test module whose equalities compare values; it collects the sides that differ."""
    tree = ast.fix_missing_locations(_Relax().visit(ast.parse(inspect.getsource(module))))
    copy = ModuleType(module.__name__)
    differences: list[str] = []

    def same_value(left: Any, right: Any) -> bool:
        if left == right:
            return True
        differences.append(f"{left}  |  {right}")
        return agree(left, right)

    vars(copy).update({"__file__": module.__file__, "_same_value": same_value, DIFFERENCES: differences})
    exec(compile(tree, str(module.__file__), "exec"), vars(copy))
    return copy


def agree(left: Any, right: Any) -> bool:
    """Whether two results agree at `POINTS` sampled values of their symbols.

    Of two transforms (value, plane or strip, condition), and of two pairs (value, condition), ours (the left
    one) must hold wherever the other claims to.
    """
    ours, host = sympify(left), sympify(right)
    named = {_S} if isinstance(host, Tuple) else set()
    symbols = sorted(ours.free_symbols | host.free_symbols | named, key=default_sort_key)
    draw = random.Random(1)
    compared = 0
    for _ in range(_TRIES if symbols else 1):
        point = {s: _value(s, draw) for s in symbols}
        theirs = _at(host, point)
        mine = _at(ours, point) if theirs is not None else None
        if theirs is None or (mine is None and not isinstance(host, Tuple)):
            continue
        if mine is None or not _close(mine, theirs):
            return False
        compared += 1
        if compared == POINTS:
            return True
    return compared > 0 and not symbols


def _close(a: Any, b: Any) -> bool:
    if isinstance(a, frozenset):
        return len(a) == len(b) and all(any(_close(v, w) for w in b) for v in a)
    if isinstance(a, bool) or isinstance(b, bool):
        return bool(a == b)
    return bool(abs(a - b) <= 1e-9 * (1 + abs(b)))


def _value(symbol: Symbol, draw: random.Random) -> Expr:
    if symbol.is_integer:
        return sympify(draw.randint(1, 5) if symbol.is_nonnegative else draw.randint(-4, 5))
    value = Rational(draw.randint(20, 300), draw.choice((101, 307, 1009)))
    if symbol.is_nonnegative:
        return value
    if symbol.is_negative:
        return -value
    value = value * draw.choice((-1, 1, 1))
    if symbol.is_real or draw.random() < 0.6:
        return value
    return value + I * Rational(draw.randint(-200, 200), 307)


def _at(side: Basic, point: dict[Symbol, Expr]) -> Any:
    """The number, the truth value or the set at a point; None where there is none, or where nothing is claimed."""
    try:
        if isinstance(side, Tuple):
            values = [c for c in side if isinstance(c, Expr)][:1]
            claims = [c for c in side if c not in values]
            if not all(_claimed(c.subs(point, simultaneous=True), point[_S]) for c in claims):
                return None
            return _at(values[0], point) if values else True
        there = side.subs(point, simultaneous=True)
        if there.has(Integral):
            return None
        if isinstance(there, Boolean):
            return bool(there) if there in (S.true, S.false) else None
        while isinstance(there, (Complement, Intersection)):
            there = next((a for a in there.args if isinstance(a, FiniteSet)), there.args[0])
        if isinstance(there, FiniteSet):
            # SymPy evaluates the inverse of erf, not of erfc
            return frozenset(complex(v.rewrite(erfinv).evalf(20)) for v in there)
        number = complex(there.evalf(20)) if isinstance(there, Expr) else None
        return number if number is not None and isfinite(number) else None
    except (ArithmeticError, TypeError, ValueError):
        return None


def _claimed(claim: Basic, s: Expr) -> bool:
    """Whether a condition, a half plane or a strip of a transform holds at this ``s``."""
    if isinstance(claim, Boolean):
        return bool(claim == S.true)
    lower, upper = claim if isinstance(claim, Tuple) else (claim, oo)
    return bool((lower < re(s)) == S.true and (re(s) < upper) == S.true)
