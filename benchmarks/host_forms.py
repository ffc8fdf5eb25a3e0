"""Assertions of a test module relaxed: the sides of ``==`` may differ in form if they agree numerically."""
from __future__ import annotations

import ast
import inspect
import random
from types import ModuleType
from typing import Any

from sympy import Basic, Expr, I, Rational, S, Symbol, sympify
from sympy.core.sorting import default_sort_key
from sympy.logic.boolalg import Boolean

POINTS = 5
DIFFERENCES = "_differences"
_TRIES = 60


class _Relax(ast.NodeTransformer):
    def visit_Assert(self, node: ast.Assert) -> ast.AST:
        test = node.test
        if isinstance(test, ast.Compare) and all(isinstance(op, ast.Eq) for op in test.ops):
            sides = [test.left, *test.comparators]
            calls = [
                ast.Call(ast.Name("_same_value", ast.Load()), [left, right], [])
                for left, right in zip(sides, sides[1:], strict=False)
            ]
            same: ast.expr = calls[0] if len(calls) == 1 else ast.BoolOp(ast.And(), calls)
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
    """Whether two results have the same value at `POINTS` sampled values of their symbols."""
    if isinstance(left, tuple) and isinstance(right, tuple):
        return len(left) == len(right) and all(agree(a, b) for a, b in zip(left, right, strict=True))
    left, right = sympify(left), sympify(right)
    if left == right:
        return True
    symbols = sorted(left.free_symbols | right.free_symbols, key=default_sort_key)
    draw = random.Random(1)
    compared = 0
    for _ in range(_TRIES if symbols else 1):
        point = {s: _value(s, draw) for s in symbols}
        a, b = _at(left, point), _at(right, point)
        if a is None or b is None:
            continue
        if isinstance(a, bool) or isinstance(b, bool):
            if a != b:
                return False
        elif abs(a - b) > 1e-9 * (1 + abs(b)):
            return False
        compared += 1
        if compared == POINTS or not symbols:
            return True
    return False


def _value(symbol: Symbol, draw: random.Random) -> Expr:
    if symbol.is_integer:
        return sympify(draw.randint(1, 5) if symbol.is_nonnegative else draw.randint(-4, 5))
    value = Rational(draw.randint(20, 300), 101)
    if symbol.is_nonnegative:
        return value
    if symbol.is_negative:
        return -value
    value = value * draw.choice((-1, 1))
    if symbol.is_real or draw.random() < 0.5:
        return value
    return value + I * Rational(draw.randint(-200, 200), 101)


def _at(side: Basic, point: dict[Symbol, Expr]) -> complex | bool | None:
    """The number or the truth value at a point; None where there is none."""
    there = side.subs(point, simultaneous=True)
    if isinstance(there, Boolean):
        return bool(there) if there in (S.true, S.false) else None
    try:
        return complex(there.evalf(20)) if isinstance(there, Expr) else None
    except (TypeError, ValueError):
        return None
