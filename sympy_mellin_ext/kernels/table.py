"""What a row of the table is, and the look-up by function class."""
from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

from sympy import Expr, Function, Rational, S

from ..gamma import GammaProduct

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
def pairs() -> dict[tuple[str, str], tuple[Pair, ...]]:
    """The rows for products of two functions of one argument, by their names."""
    from .pairs import PAIRS

    found: dict[tuple[str, str], tuple[Pair, ...]] = {}
    for pair in PAIRS:
        found[pair.names] = (*found.get(pair.names, ()), pair)
    return found


@cache
def rows() -> dict[type, Row]:
    """The rows by function class."""
    from . import bessel, elementary, integrals

    return {row.function: row for module in (elementary, integrals, bessel) for row in module.ROWS}
