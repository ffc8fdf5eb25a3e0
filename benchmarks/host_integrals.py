"""The definite integrals of SymPy's own tests, collected without integrating any of them."""
from __future__ import annotations

import ast
import importlib
import inspect
from collections.abc import Iterator
from typing import Any

from sympy import Dummy, Expr, Symbol, Tuple

MODULES = ("sympy.integrals.tests.test_integrals", "sympy.integrals.tests.test_meijerint")


def collect(modules: tuple[str, ...] = MODULES) -> list[tuple[Expr, tuple[Any, ...]]]:
    """(integrand, limit) of every call of ``integrate`` with one definite limit, each once, in order of the files.

    The statements of the tests are run one by one with ``integrate`` replaced by a recorder; a statement that
    fails for it (an assertion above all) is passed over.
    """
    found: dict[tuple[Any, ...], tuple[Expr, tuple[Any, ...]]] = {}

    def record(f: Any, *limits: Any, **hints: Any) -> Symbol:
        if len(limits) == 1 and isinstance(limits[0], (tuple, Tuple)) and len(limits[0]) == 3 and not hints:
            x, low, high = limits[0]
            if isinstance(f, Expr) and isinstance(x, Symbol) and f.has_free(x):
                found.setdefault((f, *limits[0]), (f, (x, low, high)))
        return Dummy("integral")

    for name in modules:
        module = importlib.import_module(name)
        for function in _tests(module):
            scope = dict(vars(module), integrate=record)
            for statement in function.body:
                code = compile(ast.Module([statement], []), name, "exec")
                try:
                    exec(code, scope)  # SymPy's own test source, as installed
                except Exception:
                    continue
    return list(found.values())


def _tests(module: Any) -> Iterator[ast.FunctionDef]:
    for node in ast.parse(inspect.getsource(module)).body:
        slow = isinstance(node, ast.FunctionDef) and any("slow" in ast.dump(d) for d in node.decorator_list)
        if isinstance(node, ast.FunctionDef) and node.name.startswith("test_") and not slow:
            yield node
