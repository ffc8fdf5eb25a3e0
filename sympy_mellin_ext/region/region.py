"""A region of parameters: a conjunction of inequalities and other conditions."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from sympy import And, Eq, Expr, Ge, Gt, Le, Lt, Mul, Ne, Or, S
from sympy.logic.boolalg import Boolean

from .facts import Facts, real_part
from .form import Form, Known, Monomial, expression, primitive, scaled
from .judge import Judge
from .linear import System
from .projection import FALSE, irredundant
from .reduce import divided, split, strict
from .relation import merged, relation_of, row_key, sides
from .signs import NEGATIVE, NON_NEGATIVE, NOT_REAL, POSITIVE, ZERO, negated


class Region(Judge):
    """A conjunction of polynomial inequalities and other Booleans, over what the facts say. Immutable.

    Parameters
    ==========

    facts : Facts, optional

    Examples
    ========

    >>> from sympy import symbols
    >>> from sympy_mellin_ext.region import Region
    >>> c = symbols('c', positive=True)
    >>> s, k, nu = symbols('s k nu', real=True)
    >>> Region().positive(s, s + 1, 1 - s, c).to_boolean()
    (s > 0) & (s < 1)
    >>> Region().positive(1 + k/c).to_boolean()
    k > -c
    >>> Region().positive(s - nu, s + nu).to_boolean()
    s > Abs(nu)
    >>> Region().positive(s, -1 - s).empty
    True
    """

    __slots__ = ("_boolean", "_empty", "_others", "_rows", "_system", "facts")

    def __init__(self, facts: Facts | None = None) -> None:
        self.facts = Facts() if facts is None else facts
        self._rows: tuple[Known, ...] = ()
        self._others: tuple[Boolean, ...] = ()
        self._system: System | None = None
        self._empty: bool | None = None
        self._boolean: Boolean | None = None

    def __repr__(self) -> str:
        return f"Region({self.to_boolean()})"

    def _with(self, rows: Iterable[Known] = (), others: Iterable[Boolean] = ()) -> Region:
        new = Region(self.facts)
        kept = list(self._rows)
        kept.extend(row for row in rows if row not in kept)
        new._rows = tuple(kept)
        conditions = list(self._others)
        conditions.extend(other for other in others if other not in conditions)
        new._others = tuple(conditions)
        return new

    def positive(self, *exprs: Expr) -> Region:
        """The part of the region where every expression is > 0.

        Parameters
        ==========

        exprs : real expressions; ``oo`` and ``-oo`` stand for open and for impossible bounds

        Raises
        ======

        ValueError
            for an undefined expression (nan, zoo).
        """
        rows: list[Known] = []
        others: list[Boolean] = []
        for expr in exprs:
            self._restrict(S(expr), True, rows, others)
        return self._with(rows, others)

    def holds(self, *booleans: Boolean) -> Region:
        """The part of the region where the conditions hold."""
        region = self
        for boolean in booleans:
            rows: list[Known] = []
            others: list[Boolean] = []
            self._require(S(boolean), rows, others)
            region = region._with(rows, others)
        return region

    def meet(self, other: Region) -> Region:
        """The intersection with another region of the same facts."""
        return self._with(other._rows, other._others)

    def _require(self, boolean: Boolean, rows: list[Known], others: list[Boolean]) -> None:
        if isinstance(boolean, And):
            for part in boolean.args:
                self._require(part, rows, others)
        elif boolean is S.false:
            rows.append(FALSE)
        elif isinstance(boolean, (Gt, Lt, Ge, Le)):
            self._restrict(boolean.gts - boolean.lts, isinstance(boolean, (Gt, Lt)), rows, others)
        elif boolean is not S.true:
            others.append(boolean)

    def _restrict(self, expr: Expr, strictly: bool, rows: list[Known], others: list[Boolean]) -> None:
        """expr > 0, or expr >= 0."""
        terms = expr.args if expr.is_Add else (expr,)
        if expr is S.NaN or expr is S.ComplexInfinity:
            raise ValueError(f"{expr} has no sign")
        if any(term is S.NegativeInfinity for term in terms):
            rows.append(FALSE)
            return
        if any(term is S.Infinity for term in terms):
            return
        facts = self.facts
        sign = 1
        unknown: list[Expr] = []
        for factor in expr.args if expr.is_Mul else (expr,):
            mask = facts.mask(factor)
            if mask == NEGATIVE:
                sign = -sign
            elif mask != POSITIVE:
                if strictly and mask == NON_NEGATIVE and factor.is_Pow and factor.exp.is_even:
                    others.append(Ne(factor.base, 0, evaluate=False))
                else:
                    unknown.append(factor)
        form = facts.form(unknown[0] if len(unknown) == 1 else Mul(*unknown))
        if sign < 0:
            form = scaled(form, -1)
        for piece in split(form, facts):
            nonzero: list[Expr] = []
            if strictly:
                piece, nonzero = strict(piece, facts)
            else:
                piece = divided(piece, facts)
            mask = facts.form_mask(piece)
            if not mask & (NOT_REAL | ZERO | POSITIVE) or (mask == ZERO and strictly):
                rows.append(FALSE)
            elif mask & (NEGATIVE | NOT_REAL) or (mask & ZERO and strictly):
                rows.append((piece, strictly))
            others.extend(Ne(atom, 0, evaluate=False) for atom in nonzero)

    @property
    def empty(self) -> bool:
        """Whether the conditions provably contradict each other, or the facts."""
        if self._empty is None:
            self._empty = FALSE in self._rows or bool(
                (self._rows or self._others)
                and (
                    not self._together().consistent()
                    or any(self.implies(other) is False for other in self._others)
                )
            )
        return self._empty

    def mask(self, expr: Expr) -> int:
        """Which signs an expression can have in the region (see ``signs``)."""
        return self._form_mask(self.facts.form(expr)) & self.facts.mask(expr)

    def nonzero(self, expr: Expr) -> bool | None:
        """Whether expr != 0, real or not; None where it is not known."""
        answer = super().nonzero(expr)
        if answer is None:
            answer = self.facts.nonzero(expr)
        if answer is None and not self.facts.real(expr) and super().nonzero(real_part(expr, self.facts)):
            return True
        return answer

    def _form_mask(self, form: Form) -> int:
        form = divided(form, self.facts)
        mask = self.facts.form_mask(form)
        if mask & NOT_REAL or mask in (POSITIVE, NEGATIVE, ZERO) or not (self._rows or self._others):
            return mask
        system = self.facts.system([form], self._all_rows())
        for sign, other in ((1, NEGATIVE), (-1, POSITIVE)):
            if system.proves(scaled(form, sign), True):
                return negated(other)
            if system.proves(scaled(form, sign), False):
                mask &= ~other
        return mask

    def contains(self, point: Mapping[Expr, Any]) -> bool:
        """Whether a point with numbers for all parameters lies in the region (a numeric check, for tests).

        Examples
        ========

        >>> from sympy import symbols
        >>> s, nu = symbols('s nu', real=True)
        >>> region = Region().positive(s - nu, s + nu)
        >>> region.contains({s: 2, nu: -1}), region.contains({s: 1, nu: -2})
        (True, False)
        """
        for form, strictly in self._rows:
            value = expression(form).subs(point).evalf()
            if not (value > 0 or (value == 0 and not strictly)):
                return False
        return all(other.subs(point) == S.true for other in self._others)

    def _ordered(self) -> list[Known]:
        """The inequalities, the simplest first."""
        return sorted(self._rows, key=row_key)

    def _all_rows(self) -> list[Known]:
        """The inequalities, followed by the equations as pairs of inequalities."""
        rows = self._ordered()
        for other in self._others:
            if isinstance(other, Eq):
                form = self.facts.form(other.lhs - other.rhs)
                if not self.facts.form_mask(form) & NOT_REAL:
                    rows += [(form, False), (scaled(form, -1), False)]
        return rows

    def _together(self) -> System[Monomial]:
        if self._system is None:
            self._system = self.facts.system((), self._all_rows())
        return self._system

    def to_boolean(self) -> Boolean:
        """The region as a SymPy Boolean: the fewest inequalities, without what the facts already say.

        Examples
        ========

        >>> from sympy import symbols
        >>> a, b = symbols('a b', positive=True)
        >>> s = symbols('s', real=True)
        >>> Region(Facts([a < b])).positive(s, a - s, b - s, a + b).to_boolean()
        (s > 0) & (s < a)
        """
        if self._boolean is None:
            self._boolean = self._booleans()
        return self._boolean

    def _booleans(self) -> Boolean:
        if self.empty:
            return S.false
        rows = merged(irredundant(self._ordered(), self._together()), self.facts) if self._rows else []
        relations: list[Boolean] = [relation_of(row, self.facts) for row in sorted(rows, key=row_key)]
        for other in self._others:
            relations.extend(self._remaining(other))
        return relations[0] if len(relations) == 1 else And(*relations)

    def _remaining(self, other: Boolean) -> list[Boolean]:
        """What is left of a condition that the inequalities may decide in part."""
        answer = self.facts.implies(other) if isinstance(other, Eq) else self.implies(other)
        if answer:
            return []
        if isinstance(other, Or):
            return [Or(*[part for part in other.args if self.implies(part) is not False])]
        if isinstance(other, Ne):
            form = divided(self.facts.form(other.lhs - other.rhs), self.facts)
            return [Ne(*sides(primitive(form), self.facts)[:2], evaluate=False)]
        return [other]
