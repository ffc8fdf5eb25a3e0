"""What is known about the parameters: assumptions on the symbols, and relations that the caller vouches for."""

from collections.abc import Iterable, Sequence
from fractions import Fraction

from sympy import (
    Abs,
    And,
    Eq,
    Expr,
    Ge,
    Gt,
    I,
    Integer,
    Le,
    Lt,
    Max,
    Min,
    Mul,
    Ne,
    Not,
    cos,
    cosh,
    exp,
    im,
    log,
    re,
    sin,
    tanh,
)
from sympy.assumptions import AppliedPredicate
from sympy.core.relational import Relational
from sympy.logic.boolalg import Boolean, BooleanFalse, BooleanTrue

from . import signs
from .form import ONE, Form, Monomial, expression, form_of, monomial, scaled, times
from .judge import Judge, mask_nonnegative, mask_positive, of_predicate
from .linear import System, integral
from .reduce import divided, split
from .signs import ANY, NEGATIVE, NON_NEGATIVE, NON_POSITIVE, NOT_REAL, POSITIVE, PRODUCT, REAL, SUM, ZERO

Known = tuple[Form, bool]

_DECIDED = {POSITIVE: 1, ZERO: 0, NEGATIVE: -1}
_DIGITS = 30
_TINY = Fraction(1, 10**25)


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

    Monomials count as independent of each other, but for their signs; what follows by linear algebra is found exactly.
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

    def __init__(self, given: Iterable[Boolean] = ()) -> None:
        if isinstance(given, (Boolean, bool)):
            given = (given,)
        self.given = tuple(given)
        self._rows: list[Known] = []
        self._about: dict[Expr, list[Known]] = {}
        self._mentioned: frozenset[Expr] = frozenset()
        self._nonzero: list[Form] = []
        self._real: frozenset[Expr] = frozenset()
        self._forget()
        if self.given:
            self._learn()

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Facts) and self.given == other.given

    def __hash__(self) -> int:
        return hash((Facts, self.given))

    def __repr__(self) -> str:
        return f"Facts({list(self.given)})" if self.given else "Facts()"

    def __reduce__(self) -> tuple[type["Facts"], tuple[tuple[Boolean, ...]]]:
        return Facts, (self.given,)

    # -- questions -----------------------------------------------------------------------------------------------

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

    def form_mask(self, form: Form) -> int:
        """Which signs a form can have."""
        mask = self._sum_mask(form)
        if mask & NOT_REAL or mask in (POSITIVE, ZERO, NEGATIVE):
            return mask
        form = divided(form, self)
        mask &= self._sum_mask(form)
        if mask not in (POSITIVE, ZERO, NEGATIVE) and (self._rows or len(form) > 1):
            mask &= self._proved(form)
        if mask & ZERO and self._nonzero and self._is_told_nonzero(form):
            mask &= ~ZERO
        return mask

    def _sum_mask(self, form: Form) -> int:
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
        form = integral(divided(form, self))
        return form in self._nonzero or scaled(form, -1) in self._nonzero

    # -- rows for linear algebra -----------------------------------------------------------------------------------

    def form(self, expr: Expr) -> Form:
        """The expression as a linear form over monomials, in the light of what is known."""
        return form_of(expr, self._rewritten)

    def system(self, forms: Iterable[Form], rows: Sequence[Known] = ()) -> System:
        """The given rows, followed by all that is known of the monomials in them and in ``forms``."""
        monomials = {key: None for form in forms for key in form}
        for form, _ in rows:
            monomials.update(dict.fromkeys(form))
        return System([*rows, *self._rows, *self._known_of(monomials)], ONE)

    def _known_of(self, monomials: Iterable[Monomial]) -> list[Known]:
        pending = [*monomials]
        for form, _ in self._rows:
            pending.extend(form)
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
        """The sign of a monomial; and what is known of each factor, multiplied by the others if their sign is known."""
        rows: list[Known] = []
        mask = self.monomial_mask(key)
        if not mask & NOT_REAL:
            if not mask & NEGATIVE:
                rows.append(({key: 1}, not mask & ZERO))
            if not mask & POSITIVE:
                rows.append(({key: -1}, not mask & ZERO))
        constants = {atom: e for atom, e in key if not atom.free_symbols}
        if constants:
            rest = tuple(pair for pair in key if pair[0] not in constants)
            rows.extend(self._multiplied(_enclosure(monomial(constants)[1]), rest))
        for atom, exponent in key:
            if atom not in constants and exponent >= 1:
                about = self._rows_of_atom(atom)
                if about:
                    rest = monomial({a: e if a != atom else e - 1 for a, e in key})[1]
                    rows.extend(self._multiplied(about, rest))
        return rows

    def _multiplied(self, rows: Iterable[Known], rest: Monomial) -> list[Known]:
        if not rest:
            return list(rows)
        mask = self.monomial_mask(rest)
        if mask & NOT_REAL or (mask & NEGATIVE and mask & POSITIVE):
            return []
        sign = -1 if mask & NEGATIVE else 1
        result: list[Known] = []
        for row, strict in rows:
            multiplied: Form = {}
            for key, value in row.items():
                coefficient, together = times(key, rest)
                multiplied[together] = sign * value * coefficient
            result.append((multiplied, strict and not mask & ZERO))
        return result

    def _rows_of_atom(self, atom: Expr) -> list[Known]:
        known = self._atom_rows.get(atom)
        if known is None:
            known = self._atom_rows[atom] = [*self._about.get(atom, ()), *self._bounds(atom)]
        return known

    def _bounds(self, atom: Expr) -> list[Known]:
        """Inequalities that hold for an atom by its nature, besides its sign."""
        one: Monomial = ((atom, 1),)
        if atom.is_Symbol:
            if atom.assumptions0.get("integer"):
                mask = self.mask(atom)
                if mask == POSITIVE:
                    return [({one: 1, ONE: -1}, False)]
                if mask == NEGATIVE:
                    return [({one: -1, ONE: -1}, False)]
            return []
        kind = type(atom)
        if kind is Abs and self.real(atom.args[0]):
            inside = self.form(atom.args[0])
            return [(_difference({one: 1}, inside, sign), False) for sign in (1, -1)]
        if kind in (Max, Min):
            sign = 1 if kind is Max else -1
            return [
                (scaled(_difference({one: 1}, self.form(part), 1), sign), False)
                for part in atom.args
                if self.real(part)
            ]
        if kind in (cos, sin, tanh) and self.real(atom.args[0]):
            return [({one: 1, ONE: 1}, kind is tanh), ({one: -1, ONE: 1}, kind is tanh)]
        if kind is cosh and self.real(atom.args[0]):
            return [({one: 1, ONE: -1}, False)]
        if kind is exp:
            sign_inside = self.sign(atom.args[0])
            if sign_inside:
                return [({one: sign_inside, ONE: -sign_inside}, True)]
        return []

    # -- signs of the pieces ---------------------------------------------------------------------------------------

    def mask(self, expr: Expr) -> int:
        """Which of the cases negative, zero, positive, not real are possible (see ``signs``)."""
        if expr.is_Rational:
            return POSITIVE if expr.p > 0 else NEGATIVE if expr.p < 0 else ZERO
        known = self._masks.get(expr)
        if known is None:
            known = self._masks[expr] = self._mask(expr)
        return known

    def monomial_mask(self, key: Monomial) -> int:
        """Which signs a monomial can have."""
        mask = POSITIVE
        for atom, exponent in key:
            base = self.mask(atom)
            mask = PRODUCT[mask][base if exponent == 1 else signs.power(base, exponent)]
        return mask

    def _mask(self, expr: Expr) -> int:
        if expr.is_Symbol:
            mask = signs.of_symbol(expr)
            if expr in self._real:
                mask &= REAL
        elif expr.is_Add:
            return self._mask_of_sum(expr)
        elif expr.is_Mul:
            mask = POSITIVE
            for factor in expr.args:
                mask = PRODUCT[mask][self.mask(factor)]
        elif expr.is_Pow:
            mask = self._mask_of_power(expr)
        elif expr.is_number:
            mask = _mask_of_number(expr)
        else:
            mask = self._mask_of_function(expr)
        if expr in self._mentioned and mask not in _DECIDED and not mask & NOT_REAL:
            # Until the relations have been asked, the answer is what the assumptions say: it may be needed meanwhile.
            self._masks[expr] = mask
            mask &= self._proved({((expr, 1),): 1})
            if mask & ZERO and self._is_told_nonzero({((expr, 1),): 1}):
                mask &= ~ZERO
        return mask

    def _mask_of_sum(self, expr: Expr) -> int:
        mask = ZERO
        for term in expr.args:
            mask = SUM[mask][self.mask(term)]
        if mask in _DECIDED or mask & NOT_REAL:
            if mask == ANY and expr.is_number:
                return _mask_of_number(expr)
            return mask
        return mask & self.form_mask(self.form(expr))

    def _mask_of_power(self, expr: Expr) -> int:
        base, exponent = expr.args
        mask = self.mask(base)
        if exponent.is_Rational:
            return signs.power(mask, Fraction(exponent.p, exponent.q))
        if self.mask(exponent) & NOT_REAL:
            return ANY if mask & ZERO else ANY - ZERO
        if mask in (POSITIVE, NON_NEGATIVE):
            return mask
        if not mask & NOT_REAL and exponent.is_integer:
            even = exponent.is_even
            return (POSITIVE if even else POSITIVE | NEGATIVE) | (mask & ZERO)
        return ANY

    def _mask_of_function(self, expr: Expr) -> int:
        kind = type(expr)
        if kind in signs.ALWAYS_REAL:
            return self.mask(expr.args[0]) if kind is re and self.real(expr.args[0]) else REAL
        if kind is Abs:
            return NON_NEGATIVE if self.nonzero(expr.args[0]) is not True else POSITIVE
        masks = [self.mask(argument) for argument in expr.args]
        if not any(mask & NOT_REAL for mask in masks):
            if kind in signs.POSITIVE_OF_REAL:
                return POSITIVE
            if kind in signs.ODD_INCREASING:
                return masks[0]
            if kind in signs.REAL_OF_REAL:
                return REAL
            if kind in signs.POSITIVE_OF_POSITIVE and masks[0] == POSITIVE:
                return POSITIVE
            if kind is log and masks[0] == POSITIVE:
                return self.mask(expr.args[0] - 1)
            if kind in (Max, Min):
                return _mask_of_extremum(masks, kind is Max)
            if kind is signs.BESSEL_K and masks[1] == POSITIVE:
                return POSITIVE
            if kind is signs.BESSEL_I and masks[1] == POSITIVE and not masks[0] & NEGATIVE:
                return POSITIVE
            if kind is signs.ZETA and len(masks) == 1 and self.mask(expr.args[0] - 1) == POSITIVE:
                return POSITIVE
        return signs.of_assumptions(expr)

    def _rewritten(self, atom: Expr) -> Expr | None:
        kind = type(atom)
        if kind is Abs:
            mask = self.mask(atom.args[0])
            if not mask & (NEGATIVE | NOT_REAL):
                return atom.args[0]
            if not mask & (POSITIVE | NOT_REAL):
                return -atom.args[0]
        elif kind is re:
            part = real_part(atom.args[0], self)
            return None if part == atom else part
        return None

    # -- reading the given relations ---------------------------------------------------------------------------------

    def _forget(self) -> None:
        self._masks: dict[Expr, int] = {}
        self._monomial_rows: dict[Monomial, list[Known]] = {}
        self._atom_rows: dict[Expr, list[Known]] = {}

    def _learn(self) -> None:
        relations = [relation for element in self.given for relation in _relations(element)]
        ordering = [r for r in relations if isinstance(r, (Gt, Ge, Lt, Le))]
        # Only real numbers are ordered: a symbol that stands alone on one side is one.
        self._real = frozenset(side for r in ordering for side in r.args if side.is_Symbol)
        rows: list[Known] = []
        for relation in relations:
            if isinstance(relation, (Eq, Ne)):
                form = self.form(relation.lhs - relation.rhs)
                if isinstance(relation, Ne):
                    self._nonzero.append(form)
                elif form:
                    rows += [(form, False), (scaled(form, -1), False)]
            else:
                rows += [
                    (piece, isinstance(relation, (Gt, Lt)))
                    for piece in split(self.form(relation.gts - relation.lts), self)
                ]
        # What speaks of one atom alone goes first: signs of atoms decide how the others are divided.
        simple = [row for row in rows if len(row[0].keys() - {ONE}) == 1]
        self._take(simple)
        self._take([row for row in rows if row not in simple])
        self._nonzero = [integral(divided(form, self)) for form in self._nonzero]
        for form in self._nonzero:
            for one in (form, scaled(form, -1)):
                if (one, False) in self._rows:
                    self._rows.append((one, True))
        self._forget()

    def _take(self, rows: Iterable[Known]) -> None:
        taken: list[Known] = []
        for form, strict in rows:
            reduced = divided(form, self)
            if any(self.monomial_mask(key) & NOT_REAL for key in reduced):
                continue
            reduced = integral(reduced)
            taken.append((reduced, strict))
            symbolic = [key for key in reduced if key]
            if len(symbolic) == 1 and len(symbolic[0]) == 1 and symbolic[0][0][1] == 1:
                atom = symbolic[0][0][0]
                self._about.setdefault(atom, []).append(self._tightened(atom, reduced, strict))
        self._rows = [*self._rows, *taken]
        self._mentioned = frozenset(
            key[0][0] for form, _ in self._rows for key in form if len(key) == 1 and key[0][1] == 1
        )
        self._forget()

    def _tightened(self, atom: Expr, form: Form, strict: bool) -> Known:
        """n > 3/2 is n >= 2 for an integer n."""
        slope, constant = form[((atom, 1),)], form.get(ONE, 0)
        if not (atom.is_Symbol and atom.assumptions0.get("integer")):
            return form, strict
        step = 1 if slope > 0 else -1
        bound = Fraction(constant, abs(slope))
        whole = bound.numerator // bound.denominator
        if strict and whole == bound:
            whole -= 1
        return {((atom, 1),): step, ONE: whole} if whole else {((atom, 1),): step}, False


def real_part(expr: Expr, facts: Facts | None = None) -> Expr:
    """The real part, split over sums and real coefficients; what is real stays, and other symbols become ``re(s)``.

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
        return Integer(0) if expr.is_imaginary else re(expr, evaluate=False)
    if expr.is_Add:
        return expr.func(*[real_part(term, facts) for term in expr.args])
    if expr is I:
        return Integer(0)
    if not expr.is_Mul:
        return re(expr, evaluate=False)
    real = [factor for factor in expr.args if facts.real(factor)]
    rest = [factor for factor in expr.args if factor not in real]
    if len(rest) == 1:
        return Mul(*real, real_part(rest[0], facts))
    if I in rest:
        rest.remove(I)
        return -Mul(*real, im(Mul(*rest)))
    return Mul(*real, re(Mul(*rest), evaluate=False))


def _difference(left: Form, right: Form, sign: int) -> Form:
    result = dict(left)
    for key, value in right.items():
        result[key] = result.get(key, 0) - sign * value
    return {key: value for key, value in result.items() if value}


def _mask_of_extremum(masks: Sequence[int], largest: bool) -> int:
    """The mask of Max or Min of real things."""
    order = (POSITIVE, ZERO, NEGATIVE) if largest else (NEGATIVE, ZERO, POSITIVE)
    mask = 0
    for case in order:
        mask |= case if any(m & case for m in masks) else 0
        if any(not m & ~mask for m in masks):
            # One argument is sure to reach what has been found, so that the extremum goes no further.
            break
    return mask


def _mask_of_number(expr: Expr) -> int:
    value = expr.evalf(_DIGITS)
    real, imaginary = value.as_real_imag()
    if not (real.is_Float or real.is_Rational) or not (imaginary.is_Float or imaginary.is_Rational):
        return signs.of_assumptions(expr)
    if abs(imaginary) > 1e-20:
        return NOT_REAL
    if imaginary != 0 and expr.is_extended_real is not True:
        return ANY
    return POSITIVE if real > 1e-20 else NEGATIVE if real < -1e-20 else signs.of_assumptions(expr)


def _enclosure(key: Monomial) -> list[Known]:
    """Rational bounds of a constant such as pi."""
    value = expression({key: 1}).evalf(_DIGITS)
    if not value.is_Float:
        return []
    centre = Fraction(str(value))
    radius = abs(centre) * _TINY
    return [({key: 1, ONE: radius - centre}, True), ({key: -1, ONE: centre + radius}, True)]


def _relations(element: Boolean) -> list[Boolean]:
    """The relations in a conjunction; ValueError for what is no statement at all."""
    if isinstance(element, (bool, BooleanTrue, BooleanFalse)):
        return [] if element else [Gt(0, 1, evaluate=False)]
    if not isinstance(element, Boolean) or element.is_Symbol:
        raise ValueError(f"given: {element!r} is not a SymPy relation, such as a > 0")
    if isinstance(element, And):
        return [relation for part in element.args for relation in _relations(part)]
    if isinstance(element, Not):
        element = Not(element.args[0])
    if isinstance(element, AppliedPredicate):
        element = of_predicate(element)
    return [element] if isinstance(element, Relational) else []
