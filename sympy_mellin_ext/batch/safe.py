"""Expressions from text that nobody vouches for.

Python's own parser turns the text into a syntax tree (:mod:`.syntax`); nothing of it is ever run.  Nodes of a few
kinds are read, names only from the tables of :mod:`.names` and from the declared symbols, and no number is built
before it is known to be small.  Everything else is refused with its position.
"""
from __future__ import annotations

import ast
import time
from collections.abc import Mapping, Sequence
from difflib import get_close_matches
from fractions import Fraction
from keyword import iskeyword
from typing import Any
from unicodedata import normalize

from sympy import And, Expr, Integer, Not, Or, Piecewise, Pow, Rational, S, Sum, Symbol, hyper, meijerg, nan, oo, zoo
from sympy.core.function import Function
from sympy.core.relational import Relational
from sympy.logic.boolalg import Boolean, BooleanAtom

from .names import ASSUMPTIONS, CONSTANTS, FUNCTIONS, LARGE, LIGHT, LOGIC, RELATIONS, SIZED, STRUCTURED
from .syntax import MAX_DEPTH, InputError, syntax_tree

MAX_NODES = 3_000
MAX_CALLS = 8
MAX_STEEP = 2  # of functions that are slow to build
MAX_SECONDS = 1.0  # of processor time, between two steps
MAX_BITS = 8_192
MAX_EXPONENT = 1_000

_COMPARE: dict[type, str] = {
    ast.Lt: "Lt", ast.LtE: "Le", ast.Gt: "Gt", ast.GtE: "Ge", ast.Eq: "Eq", ast.NotEq: "Ne",
}  # fmt: skip
_PLAIN: dict[type, str] = {
    ast.Attribute: "attributes (a.b)", ast.ListComp: "comprehensions", ast.GeneratorExp: "comprehensions",
    ast.Lambda: "lambda", ast.Subscript: "subscripts (a[b])", ast.IfExp: "if ... else", ast.Await: "await",
    ast.NamedExpr: "assignments", ast.Starred: "starred arguments",
}  # fmt: skip


def read_expression(text: str, symbols: Mapping[str, Symbol] | None = None) -> Expr:
    """The expression that `text` writes.

    Parameters
    ----------
    text : str
        Python's notation for formulas, with SymPy's names; decimal numbers are read exactly.
    symbols : mapping
        The names that may occur besides functions and constants.

    Raises
    ------
    InputError
        If there is anything else in it.

    Examples
    --------
    >>> from sympy import Symbol
    >>> from sympy_mellin_ext.batch import InputError, read_expression
    >>> read_expression("exp(-0.5*x**2)", {"x": Symbol("x")})
    exp(-x**2/2)
    >>> try:
    ...     read_expression("gama(x)", {"x": Symbol("x")})
    ... except InputError as error:
    ...     print(error)
    unknown function gama; did you mean gamma? (at position 1)
    """
    value = _Reader(text, symbols or {}).read()
    if not isinstance(value, Expr):
        raise InputError("an expression is expected here, not a condition", text, 0)
    return value


def read_condition(text: str, symbols: Mapping[str, Symbol] | None = None) -> Boolean:
    """The relation, or combination of relations by ``&``, ``|``, ``~``, that `text` writes.

    Examples
    --------
    >>> from sympy import symbols
    >>> from sympy_mellin_ext.batch import read_condition
    >>> a, b = symbols("a b", real=True)
    >>> read_condition("0 < a < b", {"a": a, "b": b})
    (a > 0) & (a < b)
    """
    value = _Reader(text, symbols or {}).read()
    if not _is_condition(value):
        raise InputError("a relation such as a > b is expected here", text, 0)
    return value


def read_symbol(name: str, kind: str) -> Symbol:
    """A symbol with an assumption in a word (``positive``, ``real``, ``integer``, ``complex`` ...)."""
    if not isinstance(name, str) or not name.isidentifier() or len(name) > 50 or normalize("NFKC", name) != name:
        raise InputError(f"{str(name)[:60]!r} is not a name: letters, digits and underscores are expected")
    if iskeyword(name):
        raise InputError(f"{name} is a word of Python; take another name, such as {name[:3]}")
    if name.startswith("_") or "__" in name:
        raise InputError(f"{name[:60]}: names with leading or double underscores are refused")
    if name in CONSTANTS:
        raise InputError(f"{name} is a constant here; take another name for the symbol")
    if not isinstance(kind, str) or kind not in ASSUMPTIONS:
        raise InputError(f"{name}: unknown assumption {str(kind)[:60]!r}{suggestion(str(kind), ASSUMPTIONS)}; "
                         f"one of {', '.join(ASSUMPTIONS)} is expected")
    return Symbol(name, **ASSUMPTIONS[kind])


def suggestion(word: str, known: Any) -> str:
    """``; did you mean ...?`` where a known word is close."""
    close = get_close_matches(word[:60], [str(k) for k in known], n=1)
    return f"; did you mean {close[0]}?" if close else ""


class _Reader:
    def __init__(self, text: str, symbols: Mapping[str, Symbol]) -> None:
        self.text, self.symbols = text, symbols
        self.nodes = self.calls = self.steep = 0
        self.start = time.thread_time()
        self.flat, self.shift, self.tree = syntax_tree(text)

    def read(self) -> Any:
        value = self._node(self.tree, 0)
        if isinstance(value, tuple):
            raise self._error("one formula is expected, not several with commas between", self.tree)
        if isinstance(value, Expr) and value.has(nan, zoo):
            raise InputError("the expression is infinite or undefined", self.text)
        return value

    def _error(self, problem: str, node: ast.AST) -> InputError:
        # the syntax tree counts bytes of UTF-8
        column = len(self.flat.encode()[:getattr(node, "col_offset", 0)].decode(errors="ignore"))
        return InputError(problem, self.text, column + self.shift)

    def _node(self, node: ast.AST, depth: int) -> Any:
        self.nodes += 1
        if self.nodes > MAX_NODES:
            raise InputError(f"the expression has more than {MAX_NODES} parts", self.text)
        if depth > MAX_DEPTH:
            raise self._error(f"the expression is nested more than {MAX_DEPTH} deep", node)
        if isinstance(node, ast.Constant):
            return self._constant(node)
        if isinstance(node, ast.Name):
            return self._name(node)
        if isinstance(node, ast.BinOp):
            return self._operation(node, depth)
        if isinstance(node, ast.UnaryOp):
            return self._sign(node, depth)
        if isinstance(node, ast.Call):
            return self._nested(node, depth)
        if isinstance(node, ast.Compare):
            return self._comparison(node, depth)
        if isinstance(node, ast.BoolOp):
            parts = [self._condition(v, depth) for v in node.values]
            return (And if isinstance(node.op, ast.And) else Or)(*parts)
        if isinstance(node, (ast.Tuple, ast.List)):
            return tuple(self._node(item, depth + 1) for item in node.elts)
        raise self._error(f"{_PLAIN.get(type(node), type(node).__name__)} are not accepted in a formula", node)

    def _constant(self, node: ast.Constant) -> Any:
        value = node.value
        if isinstance(value, bool):
            return S.true if value else S.false
        if isinstance(value, int):
            return Integer(value)
        if isinstance(value, float):
            written = self.flat.encode()[node.col_offset:node.end_col_offset].decode().lower().partition("e")[0]
            if not (1e-60 <= value <= 1e60 or (value == 0 and not written.strip("0._"))):
                raise self._error("a decimal number must lie between 1e-60 and 1e60", node)
            # the shortest decimal that stands for the float is what was typed
            exact = Fraction(repr(value))
            return Rational(exact.numerator, exact.denominator)
        raise self._error("only whole and decimal numbers are accepted; the imaginary unit is I", node)

    def _name(self, node: ast.Name) -> Expr:
        name = node.id
        if name in self.symbols:
            return self.symbols[name]
        if name in CONSTANTS:
            return CONSTANTS[name]
        if name in FUNCTIONS or name in STRUCTURED or name in RELATIONS or name in LOGIC:
            raise self._error(f"{name} is a function: {name}(...) is expected", node)
        near = suggestion(name, [*self.symbols, *CONSTANTS])
        raise self._error(f"unknown name {name[:50]}{near}; symbols are declared with an assumption, "
                          f"such as {name[:50]} = positive", node)  # fmt: skip

    def _sign(self, node: ast.UnaryOp, depth: int) -> Any:
        if isinstance(node.op, (ast.Not, ast.Invert)):
            return Not(self._condition(node.operand, depth))
        value = self._number(node.operand, depth)
        return -value if isinstance(node.op, ast.USub) else value

    def _operation(self, node: ast.BinOp, depth: int) -> Any:
        # a long sum is a long left branch of the tree: walked, so that its length is no depth
        chain: list[ast.BinOp] = []
        left: ast.AST = node
        while isinstance(left, ast.BinOp) and not isinstance(left.op, ast.Pow):
            chain.append(left)
            left = left.left
        if not chain:
            return self._power(self._number(node.left, depth), self._number(node.right, depth), node)
        self.nodes += len(chain)
        if isinstance(chain[0].op, (ast.BitAnd, ast.BitOr)):
            pair = self._condition(node.left, depth), self._condition(node.right, depth)
            return (And if isinstance(node.op, ast.BitAnd) else Or)(*pair)
        value = self._number(left, depth)
        for step in reversed(chain):
            value = self._combined(value, self._number(step.right, depth), step)
        return value

    def _combined(self, left: Expr, right: Expr, node: ast.BinOp) -> Expr:
        if isinstance(node.op, ast.Add):
            value = left + right
        elif isinstance(node.op, ast.Sub):
            value = left - right
        elif isinstance(node.op, ast.Mult):
            value = left * right
        elif isinstance(node.op, ast.Div):
            value = left / right
        elif isinstance(node.op, (ast.BitAnd, ast.BitOr)):
            raise self._error("& and | join conditions; put each relation in brackets", node)
        else:
            raise self._error("of the operators, + - * / ** are accepted", node)
        self._bits(value, 1, node)
        return value

    def _bits(self, value: Expr, times: Any, node: ast.AST) -> None:
        number = value.as_coeff_Mul()[0] if value.is_Mul else value
        if isinstance(number, Rational):
            bits = max(int(number.p).bit_length(), int(number.q).bit_length())
            if bits > 1 and bits * abs(times) > MAX_BITS:
                raise self._error("a number grows too large", node)

    def _power(self, base: Expr, exponent: Expr, node: ast.AST) -> Expr:
        if exponent.is_number and exponent not in (oo, -oo):
            size = self._size(exponent, node)
            if size > MAX_EXPONENT:
                raise self._error(f"a numerical exponent is larger than {MAX_EXPONENT}", node)
            self._bits(base, size, node)
            if base.is_number and not base.is_Rational:
                self._size(base, node)
        return self._built(Pow, (base, exponent), node)

    def _size(self, number: Expr, node: ast.AST) -> Any:
        """The absolute value of a number that was built already, roughly."""
        if isinstance(number, Rational):
            return abs(number)
        if number.is_infinite:
            return S.Zero
        if not all(isinstance(f, SIZED) for f in number.atoms(Function)):
            raise self._error("a number made of special functions is not accepted here", node)
        try:
            return abs(complex(number.evalf(5)))
        except OverflowError:
            return oo
        except (TypeError, ValueError, ArithmeticError):
            raise self._error("the size of a number is not clear here", node) from None

    def _nested(self, node: ast.Call, depth: int) -> Any:
        steep = isinstance(node.func, ast.Name) and node.func.id not in LIGHT
        if self.calls == MAX_CALLS or (steep and self.steep == MAX_STEEP):
            most = MAX_CALLS if self.calls == MAX_CALLS else MAX_STEEP
            raise self._error(f"functions are nested more than {most} deep", node)
        if time.thread_time() - self.start > MAX_SECONDS:
            raise self._error("the expression takes too long to build", node)
        self.calls, self.steep = self.calls + 1, self.steep + steep
        value = self._call(node, depth)
        self.calls, self.steep = self.calls - 1, self.steep - steep
        return value

    def _call(self, node: ast.Call, depth: int) -> Any:
        if not isinstance(node.func, ast.Name):
            raise self._error("only functions from the list of functions may be called", node)
        name = node.func.id
        if node.keywords:
            raise self._error(f"{name[:50]}: keyword arguments are not accepted", node)
        if name in FUNCTIONS:
            return self._function(name, node, depth)
        if name == "Sum":
            return self._sum(node, depth)
        if name in STRUCTURED:
            arguments = [self._node(a, depth + 1) for a in node.args]
            return self._structured(name, arguments, node)
        if name in LOGIC:
            conditions = [self._condition(a, depth + 1) for a in node.args]
            if name == "Not" and len(conditions) != 1:
                raise self._error("Not takes one condition", node)
            return LOGIC[name](*conditions)
        if name in RELATIONS:
            if len(node.args) != 2:
                raise self._error(f"{name} takes two arguments", node)
            sides = [self._number(a, depth + 1) for a in node.args]
            return self._relation(name, sides, node)
        if name in self.symbols:
            raise self._error(f"{name} is a symbol, not a function; products are written with *", node)
        raise self._error(f"unknown function {name[:50]}{suggestion(name, [*FUNCTIONS, *STRUCTURED])}", node)

    def _function(self, name: str, node: ast.Call, depth: int) -> Expr:
        build, least, most, bound = FUNCTIONS[name]
        if not least <= len(node.args) <= most:
            count = str(least) if least == most else f"{least} to {most}"
            raise self._error(f"{name} takes {count} argument{'s' * (count != '1')}, not {len(node.args)}", node)
        arguments = [self._number(a, depth + 1) for a in node.args]
        for argument in arguments:
            if argument.is_number and self._size(argument, node) > bound:
                raise self._error(f"{name}: a number larger than {bound} is not accepted as an argument", node)
        return self._built(build, arguments, node)

    def _built(self, build: Any, arguments: Sequence[Any], node: ast.AST) -> Any:
        try:
            return build(*arguments)
        except Exception as error:  # whatever a constructor of SymPy raises is the fault of its arguments
            raise self._error(f"SymPy refuses this: {str(error)[:100]}", node) from None

    def _sum(self, node: ast.Call, depth: int) -> Expr:
        limits = node.args[1] if len(node.args) == 2 else None
        if not isinstance(limits, ast.Tuple) or len(limits.elts) != 3 or not isinstance(limits.elts[0], ast.Name):
            raise self._error("Sum takes a term and (n, first, last)", node)
        index = limits.elts[0].id
        if index in self.symbols:
            raise self._error(f"{index} is a symbol of the integral; the index of a Sum needs a name of its own", node)
        ends = [self._number(end, depth + 1) for end in limits.elts[1:]]
        # the index is known inside the term alone
        outside, self.symbols = self.symbols, {**self.symbols, index: read_symbol(index, "complex")}
        try:
            term = self._number(node.args[0], depth + 1)
            return self._built(Sum, (term, (self.symbols[index], *ends)), node)
        finally:
            self.symbols = outside

    def _structured(self, name: str, arguments: list[Any], node: ast.Call) -> Any:
        if name == "Piecewise":
            good = all(isinstance(a, tuple) and len(a) == 2 and isinstance(a[0], Expr)
                       and _is_condition(a[1]) for a in arguments)  # fmt: skip
            if not arguments or len(arguments) > 20 or not good:
                raise self._error("Piecewise takes pairs (value, condition)", node)
            return self._built(Piecewise, arguments, node)
        lists = arguments[:2]
        if len(arguments) != 3 or not all(isinstance(a, tuple) for a in lists) or not isinstance(arguments[2], Expr):
            raise self._error(f"{name} takes two lists of parameters and an argument", node)
        inner = [p for a in lists for p in a] if name == "hyper" else [p for a in lists for b in a for p in _list(b)]
        whole = name == "hyper" or all(len(a) == 2 and all(isinstance(b, tuple) for b in a) for a in lists)
        if not whole or len(inner) > 20 or not all(isinstance(p, Expr) for p in inner):
            raise self._error(f"{name}: the parameters are not of the expected form", node)
        for number in [*inner, arguments[2]]:
            if number.is_number and self._size(number, node) > LARGE:
                raise self._error(f"{name}: a number larger than {LARGE} is not accepted as an argument", node)
        return self._built(hyper if name == "hyper" else meijerg, arguments, node)

    def _comparison(self, node: ast.Compare, depth: int) -> Any:
        sides = [self._number(side, depth + 1) for side in [node.left, *node.comparators]]
        relations = []
        for operator, left, right in zip(node.ops, sides, sides[1:], strict=False):
            name = _COMPARE.get(type(operator))
            if name is None:
                raise self._error("of the comparisons, < <= > >= == != are accepted", node)
            relations.append(self._relation(name, [left, right], node))
        return And(*relations)

    def _relation(self, name: str, sides: list[Expr], node: ast.AST) -> Any:
        for side in sides:
            if side.is_number:
                self._size(side, node)
        relation = self._built(RELATIONS[name], sides, node)
        return relation.reversed if isinstance(relation, Relational) and relation.lhs.is_number else relation

    def _number(self, node: ast.AST, depth: int) -> Expr:
        value = self._node(node, depth + 1)
        if not isinstance(value, Expr):
            kind = "a list" if isinstance(value, tuple) else "a condition"
            raise self._error(f"a number or a formula is expected here, not {kind}", node)
        return value

    def _condition(self, node: ast.AST, depth: int) -> Any:
        value = self._node(node, depth + 1)
        if not _is_condition(value):
            raise self._error("a condition is expected here; put each relation in brackets", node)
        return value


def _is_condition(value: Any) -> bool:
    """Whether it is a condition; SymPy counts a symbol as one, too."""
    return isinstance(value, (Boolean, BooleanAtom)) and not isinstance(value, Expr)


def _list(item: Any) -> tuple[Any, ...]:
    return item if isinstance(item, tuple) else (item,)
