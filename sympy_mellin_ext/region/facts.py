"""What is known about the parameters: assumptions of symbols, and relations the caller vouches for."""

from collections.abc import Iterable, Sequence

from sympy import Abs, Eq, Expr, Ge, Gt, I, Integer, Le, Lt, Mul, Ne, im, re
from sympy.logic.boolalg import Boolean

from . import signs
from .atoms import bounds, enclosure, mask_of_function, mask_of_number, mask_of_power, tightened
from .form import ONE, Form, Known, Monomial, add_to, constant, form_of, monomial, primitive, scaled, times
from .judge import Judge, mask_nonnegative, mask_positive, relations_of
from .linear import System
from .reduce import divided, split
from .signs import ANY, NEGATIVE, NON_NEGATIVE, NON_POSITIVE, NOT_REAL, POSITIVE, PRODUCT, REAL, SUM, ZERO

_DECIDED = frozenset((POSITIVE, ZERO, NEGATIVE))
_MOST_PRODUCTS = 60


class Facts(Judge):
    """What the assumptions of symbols, and ``given``, imply about signs. Immutable.

    Parameters
    ==========

    given : sequence of SymPy relations
        Relations that the caller vouches for, such as ``a > b``. What cannot be used is ignored.

    Raises
    ======

    ValueError
        if an element of ``given`` is not a SymPy relation or other Boolean.

    Notes
    =====

    Monomials count as independent of each other, but for their signs, the bounds of their factors, and known
    inequalities multiplied by a factor of known sign; what follows from that by linear algebra is found.
    Other consequences may be missed: then the answer is None, never a guess.

    Examples
    ========

    >>> from sympy import symbols
    >>> from sympy_mellin_ext.region import Facts
    >>> a, b = symbols('a b', positive=True)
    >>> Facts().sign(a + b), Facts().sign(a - b), Facts([a > b]).sign(a**2 - b**2)
    (1, None, 1)
    """

    __slots__ = (
        "_about",
        "_atom_rows",
        "_masks",
        "_mentioned",
        "_monomial_rows",
        "_nonzero",
        "_real",
        "_rows",
        "given",
    )

    given: tuple[Boolean, ...]

    def __init__(self, given: Iterable[Boolean] | Boolean = ()) -> None:
        self.given = (given,) if isinstance(given, (Boolean, bool)) else tuple(given)
        self._rows: list[Known] = []
        self._about: dict[Expr, list[Known]] = {}
        self._mentioned: dict[Expr, None] = {}
        self._nonzero: list[Form] = []
        self._real: frozenset[Expr] = frozenset()
        self._forget()
        if self.given:
            self._learn()

    def _forget(self) -> None:
        """Empty the memory of what was found out, when there is something new to know."""
        self._masks: dict[Expr, int] = {}
        self._monomial_rows: dict[Monomial, list[Known]] = {}
        self._atom_rows: dict[Expr, list[Known]] = {}

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Facts) and self.given == other.given

    def __hash__(self) -> int:
        return hash((Facts, self.given))

    def __repr__(self) -> str:
        return f"Facts({list(self.given)})" if self.given else "Facts()"

    def __reduce__(self) -> tuple[type["Facts"], tuple[tuple[Boolean, ...]]]:
        return Facts, (self.given,)

    # Questions; those about signs and relations in general are in the base class.

    @property
    def consistent(self) -> bool:
        """False if the given relations provably contradict each other or the assumptions."""
        return not self._rows or self.system(()).consistent()

    def positive(self, expr: Expr) -> bool | None:
        """Whether expr > 0; None where it is not known."""
        return mask_positive(self.mask(expr))

    def nonnegative(self, expr: Expr) -> bool | None:
        """Whether expr >= 0; None where it is not known."""
        return mask_nonnegative(self.mask(expr))

    def nonzero(self, expr: Expr) -> bool | None:
        """Whether expr != 0, real or not; None where it is not known."""
        answer = super().nonzero(expr)
        if answer is None and self._nonzero and self._is_told_nonzero(self.form(expr)):
            return True
        return answer

    def mask(self, expr: Expr) -> int:
        """Which of the cases negative, zero, positive, not real are possible (see ``signs``)."""
        if expr.is_Rational:
            return POSITIVE if expr.p > 0 else NEGATIVE if expr.p < 0 else ZERO
        known = self._masks.get(expr)
        if known is None:
            known = self._masks[expr] = self._mask(expr)
        return known

    # Signs of expressions, monomials and forms.

    def _mask(self, expr: Expr) -> int:
        if expr.is_Add:
            return self._mask_of_sum(expr)
        if expr.is_Symbol:
            mask = signs.of_symbol(expr)
            if expr in self._real:
                mask &= REAL
        elif expr.is_Mul:
            mask = POSITIVE
            for factor in expr.args:
                mask = PRODUCT[mask][self.mask(factor)]
        elif expr.is_Pow:
            mask = mask_of_power(expr.base, expr.exp, self)
        elif expr.is_number:
            mask = mask_of_number(expr)
        elif isinstance(expr, re) and self.real(expr.args[0]):
            return self.mask(expr.args[0])
        else:
            mask = mask_of_function(expr, self)
        if expr in self._mentioned and mask not in _DECIDED and not mask & NOT_REAL:
            # The answer of the assumptions stands until the relations are asked: it is needed on the way.
            self._masks[expr] = mask
            one: Form = {((expr, 1),): 1}
            mask &= self._proved(one)
            if mask & ZERO and self._is_told_nonzero(one):
                mask &= ~ZERO
        return mask

    def _mask_of_sum(self, expr: Expr) -> int:
        mask = ZERO
        for term in expr.args:
            mask = SUM[mask][self.mask(term)]
        if mask == ANY and expr.is_number:
            return mask_of_number(expr)
        if mask in _DECIDED or mask & NOT_REAL:
            return mask
        return mask & self.form_mask(self.form(expr))

    def monomial_mask(self, key: Monomial) -> int:
        """Which signs a monomial can have."""
        mask = POSITIVE
        for atom, exponent in key:
            base = self.mask(atom)
            mask = PRODUCT[mask][base if exponent == 1 else signs.power(base, exponent)]
        return mask

    def form_mask(self, form: Form) -> int:
        """Which signs a form can have."""
        mask = self._termwise(form)
        if mask & NOT_REAL or mask in _DECIDED:
            return mask
        form = divided(form, self)
        mask &= self._termwise(form)
        if mask not in _DECIDED and (self._rows or len(form) > 1):
            mask &= self._proved(form)
        if mask & ZERO and self._nonzero and self._is_told_nonzero(form):
            mask &= ~ZERO
        return mask

    def _termwise(self, form: Form) -> int:
        mask = ZERO
        for key, value in form.items():
            term = self.monomial_mask(key)
            mask = SUM[mask][term if value > 0 else signs.negated(term)]
        return mask

    def _proved(self, form: Form) -> int:
        system = self.system([form])
        if system.proves(form, True):
            return POSITIVE
        opposite = scaled(form, -1)
        if system.proves(opposite, True):
            return NEGATIVE
        mask = REAL
        if system.proves(form, False):
            mask &= NON_NEGATIVE
        if system.proves(opposite, False):
            mask &= NON_POSITIVE
        return mask

    def _is_told_nonzero(self, form: Form) -> bool:
        form = primitive(divided(form, self))
        return form in self._nonzero or scaled(form, -1) in self._nonzero

    # Linear algebra: forms, and all that is known of the monomials in them.

    def form(self, expr: Expr) -> Form:
        """The expression as a linear form over monomials, in the light of what is known."""
        return form_of(expr, self._rewritten)

    def difference(self, left: Expr, right: Expr) -> Form:
        """left - right as a form, without making the expression."""
        form = self.form(left)
        add_to(form, self.form(right), -1)
        return form

    def _rewritten(self, atom: Expr) -> Expr | None:
        if isinstance(atom, Abs):
            mask = self.mask(atom.args[0])
            if not mask & (NEGATIVE | NOT_REAL):
                return atom.args[0]
            if not mask & (POSITIVE | NOT_REAL):
                return -atom.args[0]
        elif isinstance(atom, re):
            part = real_part(atom.args[0], self)
            return None if part == atom else part
        return None

    def system(self, forms: Iterable[Form], rows: Sequence[Known] = ()) -> System[Monomial]:
        """The given rows, followed by all that is known of the monomials in them and in ``forms``."""
        known = [*rows, *self._rows]
        monomials = {key: None for form in forms for key in form}
        for form, _ in known:
            monomials.update(dict.fromkeys(form))
        derived: dict[int, list[int]] = {}
        for source, row in self._products(known, list(monomials)):
            derived.setdefault(source, []).append(len(known))
            known.append(row)
            monomials.update(dict.fromkeys(row[0]))
        known.extend(self._known_of(monomials))
        return System(known, ONE, derived)

    def _products(self, rows: Sequence[Known], monomials: Sequence[Monomial]) -> list[tuple[int, Known]]:
        """Rows times a factor of known sign that turns one of their terms into another one that occurs."""
        products: dict[tuple[int, Monomial], Known] = {}
        for target in monomials:
            if len(target) < 2 and (not target or target[0][1] == 1):
                continue
            wanted = dict(target)
            for number, row in enumerate(rows):
                for key in row[0]:
                    rest = dict(wanted)
                    for atom, exponent in key:
                        rest[atom] = rest.get(atom, 0) - exponent
                    factor = monomial(rest)[1]
                    if not key or not factor or any(exponent < 0 for _, exponent in factor):
                        continue
                    if (number, factor) not in products and len(products) < _MOST_PRODUCTS:
                        for product in self._multiplied([row], factor):
                            products[number, factor] = product
        return [(number, row) for (number, _), row in products.items()]

    def _known_of(self, monomials: Iterable[Monomial]) -> list[Known]:
        pending = list(monomials)
        seen: set[Monomial] = {ONE}
        known: list[Known] = []
        while pending:
            key = pending.pop()
            if key in seen:
                continue
            seen.add(key)
            rows = self._monomial_rows.get(key)
            if rows is None:
                rows = self._monomial_rows[key] = self._rows_of_monomial(key)
            for row in rows:
                known.append(row)
                pending.extend(row[0])
        return known

    def _rows_of_monomial(self, key: Monomial) -> list[Known]:
        """Its sign; and the bounds of each factor, multiplied by the other factors if their sign is known."""
        rows: list[Known] = []
        mask = self.monomial_mask(key)
        if not mask & NOT_REAL:
            if not mask & NEGATIVE:
                rows.append(({key: 1}, not mask & ZERO))
            if not mask & POSITIVE:
                rows.append(({key: -1}, not mask & ZERO))
        number = tuple(pair for pair in key if constant((pair,)))
        if number:
            rest = tuple(pair for pair in key if pair not in number)
            rows.extend(self._multiplied(enclosure(number), rest))
        for atom, exponent in key:
            if exponent >= 1 and (atom, exponent) not in number:
                about = self._atom_rows.get(atom)
                if about is None:
                    about = self._atom_rows[atom] = [*self._about.get(atom, ()), *bounds(atom, self)]
                if about:
                    rest = monomial({a: e if a != atom else e - 1 for a, e in key})[1]
                    rows.extend(self._multiplied(about, rest))
        return rows

    def _multiplied(self, rows: Sequence[Known], factor: Monomial) -> Sequence[Known]:
        """The rows times a factor, if the sign of that is known; else none."""
        if not factor or not rows:
            return rows
        mask = self.monomial_mask(factor)
        if mask & NOT_REAL or (mask & NEGATIVE and mask & POSITIVE):
            return ()
        sign = -1 if mask & NEGATIVE else 1
        result: list[Known] = []
        for row, strict in rows:
            multiplied: Form = {}
            for key, value in row.items():
                coefficient, together = times(key, factor)
                multiplied[together] = sign * value * coefficient
            result.append((multiplied, strict and not mask & ZERO))
        return result

    # Reading the given relations.

    def _learn(self) -> None:
        relations = [relation for element in self.given for relation in relations_of(element)]
        ordering = [r for r in relations if isinstance(r, (Gt, Ge, Lt, Le))]
        # Only real numbers are ordered: a symbol that stands alone on one side is one.
        self._real = frozenset(side for r in ordering for side in r.args if side.is_Symbol)
        rows: list[Known] = []
        unequal: list[Form] = []
        for relation in relations:
            if isinstance(relation, (Eq, Ne)):
                form = self.difference(relation.lhs, relation.rhs)
                if isinstance(relation, Ne):
                    unequal.append(form)
                elif form:
                    rows += [(form, False), (scaled(form, -1), False)]
            else:
                pieces = split(self.difference(relation.gts, relation.lts), self)
                rows += [(piece, isinstance(relation, (Gt, Lt))) for piece in pieces]
        # What speaks of one atom alone goes first: signs of atoms decide how the others are divided.
        simple = [row for row in rows if len(row[0].keys() - {ONE}) == 1]
        self._take(simple)
        self._take([row for row in rows if row not in simple])
        self._nonzero = [primitive(divided(form, self)) for form in unequal]
        for form in self._nonzero:
            self._rows += [
                (one, True) for one in (form, primitive(scaled(form, -1))) if (one, False) in self._rows
            ]
        self._forget()
        # Signs that were found while others were still unknown may be improved: keep them, and look again.
        masks = {atom: self.mask(atom) for atom in self._mentioned}
        self._forget()
        self._masks.update(masks)

    def _take(self, rows: Iterable[Known]) -> None:
        for form, strict in rows:
            reduced = primitive(divided(form, self))
            if any(self.monomial_mask(key) & NOT_REAL for key in reduced):
                continue
            self._rows.append((reduced, strict))
            symbolic = [key for key in reduced if not constant(key)]
            for key in symbolic:
                if len(key) == 1 and key[0][1] == 1:
                    self._mentioned[key[0][0]] = None
                    if len(symbolic) == 1 and len(reduced) <= 1 + (ONE in reduced):
                        about = self._about.setdefault(key[0][0], [])
                        about.append(tightened(key[0][0], reduced, strict))
        self._forget()


def real_part(expr: Expr, facts: Facts | None = None) -> Expr:
    """The real part, split over sums and real coefficients.

    What is real stays, other symbols become ``re(s)``, and whatever is not split ``re(...)``.

    Parameters
    ==========

    expr : Expr
    facts : Facts, optional
        What is known besides the assumptions of the symbols.

    Examples
    ========

    >>> from sympy import I, Symbol
    >>> from sympy_mellin_ext.region import real_part
    >>> s, a = Symbol('s'), Symbol('a', positive=True)
    >>> real_part(2*a*s + a/3 + I*a - 1)
    2*a*re(s) + a/3 - 1
    """
    if facts is None:
        facts = Facts()
    if expr.is_Rational or facts.real(expr):
        return expr
    if expr.is_Symbol:
        return Integer(0) if expr.assumptions0.get("imaginary") else re(expr, evaluate=False)
    if expr.is_Add:
        return expr.func(*[real_part(term, facts) for term in expr.args])
    if expr is I:
        return Integer(0)
    if not expr.is_Mul:
        return re(expr, evaluate=False)
    real = [factor for factor in expr.args if facts.real(factor)]
    rest = [factor for factor in expr.args if not facts.real(factor)]
    if len(rest) == 1 and real:
        return Mul(*real, real_part(rest[0], facts))
    if I in rest:
        rest.remove(I)
        return -Mul(*real, im(Mul(*rest)))
    return Mul(*real, re(Mul(*rest), evaluate=False))
