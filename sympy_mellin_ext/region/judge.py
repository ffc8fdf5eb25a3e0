"""Questions about signs, asked in the same words of the facts and of a region."""

from abc import ABC, abstractmethod

from sympy import And, Eq, Expr, Ge, Gt, Le, Lt, Ne, Not, Or
from sympy.assumptions import AppliedPredicate
from sympy.core.relational import Relational
from sympy.logic.boolalg import Boolean, BooleanFalse, BooleanTrue

from .signs import NEGATIVE, NOT_REAL, POSITIVE, ZERO

_DECIDED = {POSITIVE: 1, ZERO: 0, NEGATIVE: -1}
_PREDICATES = {
    "positive": Gt,
    "negative": Lt,
    "nonnegative": Ge,
    "nonpositive": Le,
    "zero": Eq,
    "nonzero": Ne,
}


class Judge(ABC):
    """What can say which signs an expression can have."""

    __slots__ = ()

    @abstractmethod
    def mask(self, expr: Expr) -> int:
        """Which of the cases negative, zero, positive, not real are possible (see ``signs``)."""

    def sign(self, expr: Expr) -> int | None:
        """The proved sign of a real expression: 1, 0 or -1, or None where it is not known.

        Examples
        ========

        >>> from sympy import Symbol
        >>> from sympy_mellin_ext.region import Facts
        >>> n = Symbol('n', integer=True, positive=True)
        >>> Facts().sign(2*n - 1), Facts().sign(n - 2)
        (1, None)
        """
        return _DECIDED.get(self.mask(expr))

    def nonzero(self, expr: Expr) -> bool | None:
        """Whether expr != 0, real or not; None where it is not known."""
        mask = self.mask(expr)
        return True if not mask & ZERO else False if mask == ZERO else None

    def real(self, expr: Expr) -> bool:
        """Whether the expression is known to be real."""
        return not self.mask(expr) & NOT_REAL

    def implies(self, boolean: Boolean | bool) -> bool | None:
        """True if the condition always holds, False if it never does, None if neither is known.

        Examples
        ========

        >>> from sympy import symbols
        >>> from sympy_mellin_ext.region import Facts
        >>> a, b, c = symbols('a b c', real=True)
        >>> facts = Facts([a > b, b > c])
        >>> facts.implies(a > c), facts.implies(c >= a), facts.implies(a > 0)
        (True, False, None)
        """
        if isinstance(boolean, (bool, BooleanTrue, BooleanFalse)):
            return bool(boolean)
        if isinstance(boolean, Not):
            inner = self.implies(boolean.args[0])
            return None if inner is None else not inner
        if isinstance(boolean, (And, Or)):
            answers = [self.implies(part) for part in boolean.args]
            decisive = isinstance(boolean, Or)
            return decisive if decisive in answers else None if None in answers else not decisive
        if isinstance(boolean, AppliedPredicate):
            relation = of_predicate(boolean)
            return None if relation is None else self.implies(relation)
        if isinstance(boolean, (Eq, Ne)):
            answer = self.nonzero(boolean.lhs - boolean.rhs)
            return answer if answer is None or isinstance(boolean, Ne) else not answer
        if isinstance(boolean, (Gt, Lt)):
            return mask_positive(self.mask(boolean.gts - boolean.lts))
        if isinstance(boolean, (Ge, Le)):
            return mask_nonnegative(self.mask(boolean.gts - boolean.lts))
        return None


def mask_positive(mask: int) -> bool | None:
    """Whether something with this mask is > 0."""
    return True if mask == POSITIVE else None if mask & (POSITIVE | NOT_REAL) else False


def mask_nonnegative(mask: int) -> bool | None:
    """Whether something with this mask is >= 0."""
    if mask & NOT_REAL:
        return None
    return True if not mask & NEGATIVE else False if mask == NEGATIVE else None


def of_predicate(predicate: AppliedPredicate) -> Relational | None:
    """``Q.positive(a)`` as ``a > 0``."""
    relation = _PREDICATES.get(str(predicate.function.name))
    return None if relation is None else relation(predicate.arguments[0], 0, evaluate=False)


def relations_of(element: Boolean) -> list[Relational]:
    """The relations in a conjunction; ValueError for what is no statement at all."""
    if isinstance(element, (bool, BooleanTrue, BooleanFalse)):
        return [] if element else [Gt(0, 1, evaluate=False)]
    if not isinstance(element, Boolean) or element.is_Symbol:
        raise ValueError(f"given: {element!r} is not a SymPy relation, such as a > 0")
    if isinstance(element, Not):
        # Not of a relation is the opposite relation: SymPy has turned it round already unless told not to.
        element = Not(element.args[0])
    if isinstance(element, And):
        return [relation for part in element.args for relation in relations_of(part)]
    if isinstance(element, AppliedPredicate):
        element = of_predicate(element)
    return [element] if isinstance(element, Relational) else []
