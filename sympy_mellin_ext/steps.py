"""Steps of a derivation, as data: what a strategy did, by which theorem, on what, to what result.

A step only points at what the strategy had in hand.  Formulas are built when somebody reads them, so that
keeping a derivation costs an integral next to nothing.
"""
from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any, Protocol

from sympy import Basic, Expr, Symbol
from sympy.logic.boolalg import Boolean

# Theorems that steps of many strategies use.
CHANGE = "change of variable"
SYMMETRY = "symmetry of the integrand"
ADDITIVITY = "additivity of the integral in its range"

if TYPE_CHECKING:
    from .matching import Term
    from .pieces import Piece
    from .strategies.finite_part import Edge


class Transform(Protocol):
    """A function of ``s`` that is written out on demand: a Gamma product, for example."""

    def as_expr(self, s: Symbol) -> Expr:
        """The function at ``s``."""


@dataclass(frozen=True)
class SeriesTransform:
    """Transform of a piece with a Dirichlet series: its Gamma product times the series."""

    piece: Piece

    def as_expr(self, s: Symbol) -> Expr:
        """The function at ``s``."""
        assert self.piece.product is not None
        value = self.piece.constant * self.piece.product.as_expr(s)
        for factor in self.piece.dirichlet:
            value = value * factor.at(s)
        return value


@dataclass(frozen=True)
class Total:
    """Finite parts of a sum of pieces, with what survives and what cancels at 0 and at oo.

    ``reference`` is the exponent of x that counts as ``s - 1``.
    """

    pieces: tuple[Piece, ...]
    at_zero: Edge
    at_infinity: Edge
    reference: Expr

    def __hash__(self) -> int:
        return hash((len(self.pieces), self.reference))  # the edges are lists


@dataclass(frozen=True)
class Contour:
    """Terms with two kernels each, whose integrals are contour integrals of two transforms."""

    terms: tuple[Term, ...]


@dataclass(frozen=True)
class Question:
    """An integral that was handed on after a change of variable or of range."""

    integrand: Expr
    limits: tuple[Symbol, Expr, Expr]


@dataclass(frozen=True)
class Step:
    """One step of the derivation: what was done, by which theorem, to what result.

    Attributes
    ----------
    action : str
    theorem : str
        The theorem or the formula used, with its published source.
    result : Expr, Boolean, Matrix, Transform or None
        A transform is kept as the Gamma product that it is, and written out only when somebody reads it.
    subject :
        What the step was about: a kernel, a :class:`Total`, a :class:`Contour`, a :class:`Question`, or None.
    where : tuple of (Expr, Expr)
        Replacements of auxiliary symbols, done on reading.

    Examples
    --------
    >>> from sympy import oo, symbols, besselj
    >>> from sympy_mellin_ext import closed_form
    >>> x, a = symbols('x a', positive=True)
    >>> s, nu = symbols('s nu', real=True)
    >>> step = closed_form(x**(s - 1)*besselj(nu, a*x), (x, 0, oo)).steps[0]
    >>> step.formula
    gamma(nu/2 + s/2)/(2*(a/2)**s*gamma(nu/2 - s/2 + 1))
    >>> step.data['phi(n)'], step.data['Lambda'], step.data['Delta']
    ((a/2)**(2*n + nu)/gamma(n + nu + 1), 0, 1)
    """

    action: str
    theorem: str = ""
    result: Any = None
    subject: Any = None
    where: tuple[tuple[Expr, Expr], ...] = field(default=())

    @property
    def formula(self) -> Expr | Boolean | None:
        """The result as a SymPy object, a transform as a function of ``s``."""
        if self.result is None or isinstance(self.result, Basic):
            return self.replaced(self.result)
        if hasattr(self.result, "as_expr"):
            return self.replaced(self.result.as_expr(Symbol("s")))
        return self.result

    @property
    def data(self) -> dict[str, Any]:
        """What was matched and found in this step, by name: kernel, term ratio, phi, growth numbers, strip, ..."""
        from .derivation.details import details

        return {d.name: d.value for d in details(self)}

    def replaced(self, value: Any) -> Any:
        """A SymPy object with the auxiliary symbols of this step written out."""
        for old, new in self.where:
            value = value.xreplace({old: new}) if isinstance(value, Basic) else value
        return value

    def with_replaced(self, old: Expr, new: Expr) -> Step:
        """The step with an auxiliary symbol written out (when it is read)."""
        return replace(self, where=(*self.where, (old, new)))

    def __str__(self) -> str:
        theorem = f" [{self.theorem}]" if self.theorem else ""
        formula = self.formula
        result = f": {formula}" if formula is not None else ""
        return f"{self.action}{theorem}{result}"
