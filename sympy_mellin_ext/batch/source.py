"""Python source of a closed form as a numerical function."""
from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from mpmath import mp
from sympy import Expr, Function, Piecewise, S
from sympy.logic.boolalg import Boolean
from sympy.printing.pycode import MpmathPrinter

from ..verify.functions import TABLE
from .entry import Entry

MODULE_HEAD = '''"""{title}: one numerical function an integral.

Each takes its parameters and the digits wanted, raises ValueError outside its region, and raises its working
precision until two precisions agree, so that it keeps its digits next to removable singularities too.
"""
import mpmath
from mpmath import mp
from sympy_mellin_ext.verify.functions import TABLE as special


def _settled(function, arguments, digits):
    before = None
    for extra in (10, 25, 60, 150, 400):
        with mp.workdps(digits + extra):
            value = mp.mpmathify(function(*map(mp.mpmathify, arguments)))
        if before is not None and abs(value - before) <= mp.mpf(10) ** (-digits - 1) * abs(value):
            return value
        before = value
    raise ArithmeticError("the value does not settle with growing precision")
'''


class _Printer(MpmathPrinter):
    """mpmath's names, and ours where the two packages differ in arguments or definition."""

    def _print_Function(self, expr: Any) -> str:
        name = type(expr).__name__
        arguments = ", ".join(self._print(a) for a in expr.args)
        if name in TABLE:
            return f"special[{name!r}]({arguments})"
        if hasattr(mp, name):
            return f"mpmath.{name}({arguments})"
        text: str = super()._print_Function(expr)
        return text

    def _print_TupleArg(self, expr: Any) -> str:
        return "(" + "".join(f"{self._print(item)}, " for item in expr) + ")"


for _name in [*TABLE, "erf", "erfc", "loggamma", "gamma", "zeta", "Si", "fresnels", "fresnelc"]:
    # the host's printer has methods for some of them, which differ
    setattr(_Printer, f"_print_{_name}", _Printer._print_Function)


def expression_source(expr: Expr | Boolean) -> str:
    """One Python expression in ``mpmath``, ``mp`` and ``special``.

    Examples
    --------
    >>> from sympy import exp
    >>> from sympy.abc import x
    >>> from sympy_mellin_ext.batch.source import expression_source
    >>> expression_source(exp(-x)/2)
    '(mpmath.mpf(1)/mpmath.mpf(2))*mpmath.exp(-x)'
    """
    text: str = _Printer({"fully_qualified_modules": True, "strict": False}).doprint(expr)
    return text


def function_source(
    name: str, entry: Entry, value: Expr, condition: Any, special: Sequence[tuple[Any, Expr]]
) -> str:
    """A function of the parameters of an entry."""
    used = {type(f).__name__ for e in (value, *(v for _, v in special)) for f in e.atoms(Function)
            if not isinstance(f, Piecewise)}  # fmt: skip
    unknown = sorted(f for f in used if f not in TABLE and not hasattr(mp, f))
    if unknown:
        return f"# {entry.name}: no function, for there are no numerical values of {', '.join(unknown)}\n"
    parameters = [s.name for s in entry.parameters]
    ranges = ", ".join(f"{x} from {low} to {high}" for x, low, high in entry.limits)
    region = "" if condition is S.true else f", for {condition}"
    lines = [
        f"def {name}({', '.join([*parameters, 'digits=15'])}):",
        f'    """Integral of {entry.integrand} over {ranges}{region}."""',
        f"    def value({', '.join(parameters)}):",
    ]
    if condition is not S.true:
        lines += [f"        if not ({expression_source(condition)}):",
                  f"            raise ValueError({f'outside the region {condition}'!r})"]
    for where, at in special:
        lines += [f"        if {expression_source(where)}:", f"            return {expression_source(at)}"]
    lines += [f"        return {expression_source(value)}", ""]
    lines += [f"    return _settled(value, [{', '.join(parameters)}], digits)", ""]
    return "\n".join(lines)
