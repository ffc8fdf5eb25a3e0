"""Elimination of quantities from linear inequalities."""

from collections.abc import Iterable, Sequence

from sympy import Expr, Gt, Lt, S
from sympy.core.relational import Relational

from .facts import Facts
from .form import ONE, Form, Known, Monomial, add_to, expression, primitive, product, scaled
from .linear import System
from .reduce import divided, split
from .relation import row_key
from .signs import NEGATIVE, POSITIVE

FALSE: Known = ({ONE: -1}, True)
_MOST_INEQUALITIES = 3000
_PRUNE_ABOVE = 8


def irredundant(rows: Sequence[Known], system: System[Monomial]) -> list[Known]:
    """The rows that do not follow from the others; those at the end are the first to go.

    The system must begin with the rows, in this order; what comes after them in it is taken for granted.
    """
    dropped: set[int] = set()
    for position in reversed(range(len(rows))):
        if system.proves(*rows[position], without={*dropped, position}):
            dropped.add(position)
    return [row for position, row in enumerate(rows) if position not in dropped]


def project(inequalities: Iterable[Expr | Relational], eliminate: Iterable[Expr], facts: Facts) -> list[Expr]:
    """What linear strict inequalities say once some atoms are eliminated (Fourier-Motzkin).

    Parameters
    ==========

    inequalities : expressions, each meant to be > 0, or strict relations
    eliminate : the atoms to eliminate, in which the inequalities are linear with coefficients of known sign
    facts : Facts

    Returns
    =======

    list of Expr
        Expressions without those atoms. All of them are > 0 iff there are values of the atoms for which the
        given ones are. None is redundant; a system that cannot hold gives ``[-1]``.

    Raises
    ======

    ValueError
        if an atom occurs not linearly, if the sign of its coefficient is not known, or if there are too many
        inequalities.

    Notes
    =====

    Schrijver, *Theory of Linear and Integer Programming*, 12.2.

    Examples
    ========

    >>> from sympy import symbols
    >>> from sympy_mellin_ext.region import Facts, project
    >>> s, c, a = symbols('s c a', real=True)
    >>> project([c, s - c, a - s + c, 1 - c], [c], Facts())
    [a, s, a - s + 1]
    """
    rows: list[Known] = []
    for inequality in inequalities:
        if isinstance(inequality, Relational):
            if not isinstance(inequality, (Gt, Lt)):
                raise ValueError(f"not a strict inequality: {inequality}")
            inequality = inequality.gts - inequality.lts
        rows.extend(_reduced(piece, facts) for piece in split(facts.form(S(inequality)), facts))
    pending = list(eliminate)
    while pending:
        parted = {atom: _parted(rows, atom, facts) for atom in pending}
        # The atom that leaves the fewest inequalities goes first.
        atom = min(pending, key=lambda one: _growth(*parted[one]))
        pending.remove(atom)
        above, below, rows = parted[atom]
        if len(above) * len(below) + len(rows) > _MOST_INEQUALITIES:
            raise ValueError(f"too many inequalities in the elimination of {atom}")
        for slope, rest in above:
            for other_slope, other_rest in below:
                form = product(slope, other_rest)
                add_to(form, product(other_slope, rest))
                row = _reduced(form, facts)
                if row not in rows:
                    rows.append(row)
        if len(rows) > _PRUNE_ABOVE:
            rows = _pruned(rows, facts)
    return [expression(form) for form, _ in _pruned(rows, facts)]


def _reduced(form: Form, facts: Facts) -> Known:
    return (primitive(divided(form, facts)), True) if form else FALSE


_Side = list[tuple[Form, Form]]


def _growth(above: _Side, below: _Side, free: Sequence[Known]) -> int:
    return len(above) * len(below) - len(above) - len(below)


def _pruned(rows: list[Known], facts: Facts) -> list[Known]:
    rows = sorted(rows, key=row_key)
    system = facts.system((), rows)
    return irredundant(rows, system) if system.consistent() else [FALSE]


def _parted(rows: Sequence[Known], atom: Expr, facts: Facts) -> tuple[_Side, _Side, list[Known]]:
    """Rows slope*atom + rest > 0, rows -slope*atom + rest > 0 (slope > 0), and rows without the atom."""
    above: _Side = []
    below: _Side = []
    free: list[Known] = []
    for row in rows:
        slope: Form = {}
        rest: Form = {}
        for key, value in row[0].items():
            exponents = dict(key)
            exponent = exponents.pop(atom, 0)
            if exponent not in (0, 1) or any(other.has(atom) for other in exponents):
                raise ValueError(f"not linear in {atom}: {expression(row[0])}")
            (slope if exponent else rest)[tuple(exponents.items())] = value
        if not slope:
            free.append(row)
            continue
        mask = facts.form_mask(slope)
        if mask not in (POSITIVE, NEGATIVE):
            raise ValueError(f"the coefficient of {atom} has no known sign: {expression(slope)}")
        if mask == POSITIVE:
            above.append((slope, rest))
        else:
            below.append((scaled(slope, -1), rest))
    return above, below, free
