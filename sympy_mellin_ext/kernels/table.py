"""What a row of the table is, and the look-up by function class."""
from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

from sympy import Expr, Function, Rational, S

from ..gamma import GammaProduct
from ..plugins import ROW_GROUP, plug_ins, report

if TYPE_CHECKING:
    from .pairs import Pair


@dataclass(frozen=True)
class Row:
    """One function and its Mellin transform, as the handbook gives it.

    Attributes
    ----------
    function : type
        SymPy's class of the function.
    transform : callable
        Orders -> GammaProduct of ``z -> f(orders, sign*z)`` for z > 0; a Gamma of positive slope has its
        poles left of the strip, one of negative slope right of it.
    source : str
        Publication and equation.
    argument : int
        Position of ``z`` among the arguments.
    sign : int
        -1 for a function that is tabulated at ``-z`` (Ei).
    parity : int
        +1 for an even, -1 for an odd function of ``z``, 0 for neither.
    turn : Rational
        The transform is that of a function at ``exp(I*pi*turn)*z``: the scale is turned by pi*turn.
    domain : callable
        Orders -> expressions that must be positive for the row to hold (beyond the strip).
    """

    function: type[Function]
    transform: Callable[..., GammaProduct]
    source: str
    argument: int = -1
    sign: int = 1
    parity: int = 0
    turn: Rational = S.Zero
    domain: Callable[..., tuple[Expr, ...]] = lambda *orders: ()

    @property
    def name(self) -> str:
        return self.function.__name__


@cache
def pair_rows() -> dict[tuple[str, str], tuple[Pair, ...]]:
    """The rows for products of two functions of one argument, by their names."""
    from .pairs import PAIRS

    found: dict[tuple[str, str], tuple[Pair, ...]] = {}
    for pair in PAIRS:
        found[pair.names] = (*found.get(pair.names, ()), pair)
    return found


_rows: dict[type, Row] | None = None
_lock = threading.RLock()


def rows() -> dict[type, Row]:
    """The rows by function class: the built-in ones, those of installed plug-ins, those registered."""
    return _rows if _rows is not None else _load()


def _load() -> dict[type, Row]:
    """Read the table on first use; built-in rows stand before those of plug-ins."""
    global _rows
    with _lock:
        if _rows is None:
            from . import bessel, elementary, integrals

            table = {row.function: row for module in (elementary, integrals, bessel) for row in module.ROWS}
            for name, found in plug_ins(ROW_GROUP):
                for row in found if isinstance(found, (list, tuple)) else (found,):
                    if not isinstance(row, Row):
                        report(f"plug-in {name!r}", TypeError(f"{row!r} is not a Row"))
                    elif row.function in table:
                        report(f"plug-in {name!r}", ValueError(_taken(row)))
                    else:
                        table[row.function] = row
            _rows = table
        return _rows


def _taken(row: Row) -> str:
    return f"a row for {row.name} is in the table already; unregister it first"


def register_kernel(row: Row) -> None:
    """Add a function to the table.

    Raises
    ------
    TypeError
        If ``row`` is not a Row.
    ValueError
        If the table has a row for this function already.

    Examples
    --------
    The incomplete Bessel-type integral ``K(z) = int_0^oo exp(-t - z/t) dt`` as a function of its own:

    >>> from sympy import Function, gamma, oo, symbols
    >>> from sympy_mellin_ext import closed_form, register_kernel, unregister_kernel
    >>> from sympy_mellin_ext.gamma import GammaProduct
    >>> from sympy_mellin_ext.kernels import Row
    >>> class K(Function):
    ...     pass
    >>> register_kernel(Row(K, lambda: GammaProduct.of(up=[(0, 1), (1, 1)]), "DLMF 10.32.10 with 10.43.19"))
    >>> x, a = symbols('x a', positive=True)
    >>> closed_form(x*K(a*x), (x, 0, oo)).value
    2/a**2
    >>> unregister_kernel(K)
    """
    global _rows
    if not isinstance(row, Row):
        raise TypeError(f"row must be a sympy_mellin_ext.kernels.Row, not {row!r}")
    with _lock:
        table = rows()
        if row.function in table:
            raise ValueError(_taken(row))
        _rows = {**table, row.function: row}  # readers in other threads keep the table that they have


def unregister_kernel(function: type[Function]) -> None:
    """Remove the row of this function; ValueError if there is none."""
    global _rows
    with _lock:
        table = rows()
        if function not in table:
            raise ValueError(f"the table has no row for {getattr(function, '__name__', function)}")
        _rows = {f: row for f, row in table.items() if f is not function}
