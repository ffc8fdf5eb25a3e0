"""Expansions at 0 and at oo from the poles of the transform.

A pole of the transform at p, left of the strip, is a term ``x**(-p)`` of the expansion at 0, with powers of
log(x) where it is multiple; a pole to the right is one of the expansion at oo, with the sign changed.

Sources: R. B. Paris and D. Kaminski, Asymptotics and Mellin-Barnes Integrals (2001), ch. 3 and 4;
P. Flajolet, X. Gourdon, P. Dumas, Mellin transforms and asymptotics: harmonic sums, TCS 144 (1995),
theorem 4; DLMF 2.5.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import takewhile
from typing import TYPE_CHECKING, Any

from sympy import (
    Add,
    And,
    Dummy,
    Expr,
    Max,
    Min,
    Mul,
    O,
    S,
    Symbol,
    binomial,
    cos,
    exp,
    factorial,
    gamma,
    latex,
    log,
    oo,
    sympify,
)
from sympy.logic.boolalg import Boolean

from ..arguments import Given, expression, relations, symbol
from ..behaviour import components
from ..inverse.tidy import tidy
from ..matching import Kernel, Term, read_terms
from ..pieces import Piece
from ..region import Facts
from .arithmetic import NotMeromorphic, vanishes
from .parameter import named, ordered_sum
from .poles import decay, in_gammas, ladders, numeric_part, poles_of, principal_part

if TYPE_CHECKING:
    from ..closed_form import ClosedForm

_Terms = dict[tuple[Expr, int], Expr]  # (exponent, power of the logarithm) -> coefficient


@dataclass(frozen=True)
class Asymptotics:
    """An expansion in powers and logarithms, with what is smaller than all of its terms.

    Attributes
    ----------
    variable : Symbol
    at : Expr
        0 or oo.
    terms : tuple of (coefficient, exponent, logs)
        ``coefficient * variable**exponent * log(variable)**logs``, the largest first.
    order : Expr
        Terms up to ``variable**order`` at 0, or down to ``variable**(-order)`` at oo, are there; symbols in
        exponents count as nothing.
    beyond : tuple of Expr
        Shapes (without amplitude) of the parts that no power describes: exponentially small ones, and
        oscillating ones, whose size is that of their power.
    condition : Boolean
        What the parameters must satisfy.
    """

    variable: Symbol
    at: Expr
    terms: tuple[tuple[Expr, Expr, int], ...]
    order: Expr
    beyond: tuple[Expr, ...] = ()
    condition: Boolean = S.true

    def as_expr(self) -> Expr:
        """The sum of the terms."""
        x = self.variable
        return Add(*(c * x**p * log(x) ** k for c, p, k in self.terms))

    def __str__(self) -> str:
        small = "".join(f" + [{b}]" for b in self.beyond)
        sign = "" if self.at is S.Zero else "-"
        x = self.variable
        terms = ordered_sum([c * x**p * log(x) ** k for c, p, k in self.terms])
        return f"{terms} + o({x}**({sign}{self.order})){small}"

    def _repr_latex_(self) -> str:
        power = self.variable ** (self.order if self.at is S.Zero else -self.order)
        rest = latex(O(power, (self.variable, self.at))).replace("O", "o", 1)
        return rf"$\displaystyle {latex(self.as_expr())} + {rest}$"


def _checked(variable: Symbol, at: Any, order: Any, name: str = "x") -> tuple[int, Expr]:
    symbol(variable, name)
    at, order = sympify(at), sympify(order)
    if at not in (S.Zero, oo):
        raise ValueError(f"at must be 0 or oo, not {at}")
    if not order.is_Rational:
        raise ValueError(f"order must be a rational number, not {order}")
    return (1 if at is S.Zero else -1), order


def expansion(f: Any, x: Symbol, at: Any = 0, order: Any = 4, given: Given = ()) -> Asymptotics | None:
    """The expansion of a function at 0 or at oo, from the poles of its Mellin transform.

    Parameters
    ----------
    f : Expr
        A sum of products of powers, logarithms and functions of the kernel table; or any function whose
        transform is known and decays on vertical lines.
    x : Symbol
        Positive.
    at : 0 or oo
    order : rational number
        Terms up to ``x**order`` at 0, or ``x**(-order)`` at oo.
    given :
        As for :func:`closed_form`.

    Returns
    -------
    Asymptotics, or None where the behaviour is not known (or f grows exponentially).

    Raises
    ------
    TypeError, ValueError
        For malformed arguments.

    Examples
    --------
    >>> from sympy import besselk, exp, oo, symbols
    >>> from sympy_mellin_ext.expansions import expansion
    >>> x = symbols('x', positive=True)
    >>> print(expansion(1/(exp(x) - 1), x, 0, 3))
    1/x - 1/2 + x/12 - x**3/720 + o(x**(3))
    >>> expansion(besselk(0, x), x, oo, 5).beyond
    (exp(-x)/sqrt(x),)
    """
    f = expression(f, "f")
    end, order = _checked(x, at, order)
    facts = Facts(relations(given))
    found = _of_kernels(f, x, end, order, facts)
    if found is not None:
        return found
    from ..integrate import mellin

    s = Dummy("s")
    transform = mellin(f, x, s, given=given)
    return None if transform is None else of_transform(transform, x, s, end, order)


def of_closed_form(answer: ClosedForm, at: Any, order: Any) -> Asymptotics | None:
    """See :meth:`ClosedForm.expansion`."""
    if len(answer.limits) != 1 or answer.limits[0][1:] != (S.Zero, oo):
        raise ValueError("an expansion needs the transform of a function on the half line")
    x = answer.limits[0][0]
    powers = [p for p in Mul.make_args(answer.integrand) if p.as_base_exp()[0] == x]
    exponent = Add(*(p.as_base_exp()[1] for p in powers))
    names = [s for s in sorted(exponent.free_symbols, key=str) if exponent.coeff(s) == 1]
    for s in names:
        f = (answer.integrand * x ** (1 - s)).powsimp(force=True)
        if not f.has_free(s):
            end, order = _checked(x, at, order)
            found = _of_kernels(f, x, end, order, Facts(answer.given))
            return found if found is not None else of_transform(answer, x, s, end, order)
    raise ValueError("the integrand must be x**(s - 1)*f(x), with a symbol s that does not occur in f")


# -- a sum of products of kernels ------------------------------------------------------------------------------


def _of_kernels(f: Expr, x: Symbol, end: int, order: Expr, facts: Facts) -> Asymptotics | None:
    terms = read_terms(f, x, facts)
    if terms is None:
        return None
    total: _Terms = {}
    beyond: dict[Expr, None] = {}
    for term in terms:
        found = _of_term(term, end, order, beyond, x)
        if found is None:
            return None
        _add(total, found)
    return _finished(x, end, order, total, beyond)


def _of_term(term: Term, end: int, order: Expr, beyond: dict[Expr, None], x: Symbol) -> _Terms | None:
    waves: list[list[Expr]] = []
    for kernel in term.kernels:
        shapes = _shapes(kernel, end, x)
        if shapes is None:
            return None
        waves.append(shapes)
    if sum(bool(w) for w in waves) > 1 and any(w.has(cos) for shapes in waves for w in shapes):
        return None  # the product of two waves may hold powers again
    pieces = [_piece(k) for k in term.kernels]
    if any(k.product.constant == 0 and not _polynomial(k) for k in term.kernels):
        return None
    leads = [
        _lead(p, end) if k.product.constant != 0 else min(end * numeric_part(q) for q, _ in _binomial(k))
        for k, p in zip(term.kernels, pieces, strict=True)
    ]
    for shapes in waves:
        for shape in shapes:
            beyond[shape * x**term.power] = None
    if any(lead is None for lead in leads):
        return {}
    reach = end * numeric_part(term.power) + Add(*leads)
    total: _Terms = {(term.power, term.logs): term.coefficient}
    rest = Add(*leads)
    for kernel, piece, lead in zip(term.kernels, pieces, leads, strict=True):
        rest -= lead
        series = _powers(piece, end, order - reach + lead) if kernel.product.constant != 0 else _binomial(kernel)
        product: _Terms = {}
        for (p, k), c in total.items():
            for (q, l), d in series.items():
                key = ((p + q).expand(), k + l)
                if end * numeric_part(key[0]) + rest <= order:
                    product[key] = product.get(key, S.Zero) + c * d
        total = product
    return {key: c for key, c in total.items() if end * numeric_part(key[0]) <= order}


def _binomial(kernel: Kernel) -> _Terms:
    """A polynomial ``(1 + scale*x**ratio)**n``, whose transform vanishes."""
    n = int(-kernel.arguments[0])
    return {(kernel.ratio * k, 0): binomial(n, k) * kernel.product.scale**k for k in range(n + 1)}


def _polynomial(kernel: Kernel) -> bool:
    return kernel.name == "power" and kernel.wave is None and (-kernel.arguments[0]).is_Integer


def _piece(k: Kernel) -> Piece:
    poles = int(k.arguments[0]) if k.name == "pole" else 0
    return Piece(S.One, S.Zero, 0, k.product, k.ratio, k.wave, (), k.condition, k.inside, poles, k.tilt)


def _lead(piece: Piece, end: int) -> Expr | None:
    """The least exponent (by its numeric part, turned to the end); None without any power."""
    heads = [next(r, None) for r in piece.rungs(end)]
    found = [end * numeric_part(h) for h in heads if h is not None]
    return min(found) if found else None


def _powers(piece: Piece, end: int, order: Expr) -> _Terms:
    total: _Terms = {}
    exponents: dict[Expr, None] = {}
    for rung in piece.rungs(end):
        exponents.update(dict.fromkeys(takewhile(lambda e: end * numeric_part(e) <= order, rung)))
    for exponent in exponents:
        for k, c in enumerate(piece.coefficients(exponent, end)):
            if c is not S.Zero:
                total[exponent, k] = total.get((exponent, k), S.Zero) + c
    return total


def _shapes(kernel: Kernel, end: int, x: Symbol) -> list[Expr] | None:
    """The exponential part of a kernel at this end; None where it grows, or is not known."""
    delta = kernel.product.delta
    side = end if kernel.ratio.is_positive else -end
    if delta == 0 or (delta > 0) == (side > 0):
        return [] if end > 0 or kernel.condition is S.true or kernel.inside else None
    if kernel.product.lam > abs(delta) and kernel.wave is None:
        return []  # it stays inside the sector where the powers are all
    parts = components(kernel, end)
    if parts is None or (kernel.condition is not S.true and not kernel.inside):
        return None
    y = x if end < 0 else 1 / x
    shapes: dict[Expr, None] = {}
    for part in parts:
        if part.power is S.Zero:
            continue
        if part.rate.is_zero or part.rate.is_positive or part.decays:
            wave = cos(abs(part.frequency) * y**part.power) if part.frequency is not S.Zero else S.One
            shapes[y**part.exponent * exp(-part.rate * y**part.power) * wave] = None
        else:
            return None
    return list(shapes)


def _add(total: _Terms, more: _Terms) -> None:
    for key, c in more.items():
        total[key] = total.get(key, S.Zero) + c


def _finished(
    x: Symbol, end: int, order: Expr, total: _Terms, beyond: Iterable[Expr], condition: Boolean = S.true
) -> Asymptotics:
    found = []
    for (p, k), c in total.items():
        c = named(tidy(c) if c.has(gamma) else c)
        if not vanishes(c):
            found.append((c, p, k))
    found.sort(key=lambda t: (float(end * numeric_part(t[1])), -t[2], str(t[1])))
    return Asymptotics(x, S.Zero if end > 0 else oo, tuple(found), order, tuple(beyond), condition)


# -- a transform as a function of s ------------------------------------------------------------------------------


def of_transform(answer: ClosedForm, x: Symbol, s: Symbol, end: int, order: Expr) -> Asymptotics | None:
    """From a transform with its strip."""
    if answer.strip is None:
        return None
    parts = answer.condition.args if isinstance(answer.condition, And) else (answer.condition,)
    rest = And(*(c for c in parts if not c.has_free(s)))
    return _from_poles(answer.value, x, s, answer.strip, end, order, Facts(answer.given), rest)


def _from_poles(
    value: Expr, x: Symbol, s: Symbol, strip: tuple[Expr, Expr], end: int, order: Expr, facts: Facts,
    condition: Boolean = S.true,
) -> Asymptotics | None:  # fmt: skip
    try:
        value = in_gammas(value)
        beyond = _beyond(value, x, s, end)
        total: _Terms = {}

        def regular(pole: Expr) -> bool:
            return not principal_part(value, s, pole)

        for pole in poles_of(ladders(value, s), *strip, end, order, facts, regular):
            for j, c in enumerate(principal_part(value, s, pole)):
                _add(total, {(-pole, j): c * S.NegativeOne**j / factorial(j) * end})
    except NotMeromorphic:
        return None
    return _finished(x, end, order, total, beyond, condition)


def _beyond(value: Expr, x: Symbol, s: Symbol, end: int) -> Sequence[Expr]:
    """Parts besides the powers; NotMeromorphic where the contour may not be moved to this end."""
    from ..inverse_transform import gamma_product_of

    rate = decay(value, s)
    product = gamma_product_of(value, s)
    if product is None:
        if rate.is_positive:
            return ()
        raise NotMeromorphic("a transform that does not decay")
    if not (rate.is_positive or (rate.is_zero and product.scale.is_positive)):
        raise NotMeromorphic("a transform that does not decay")
    lam, delta = product.lam, product.delta
    if delta == 0 or (delta > 0) == (end > 0) or (lam > abs(delta) and rate.is_positive):
        return ()
    kernel = Kernel("transform", product, inside=bool(rate.is_positive))
    shapes = _shapes(kernel, end, x)
    if shapes is None:
        raise NotMeromorphic("an exponential that grows")
    return shapes


def expansion_of_integral(
    f: Any, g: Any, x: Symbol, parameter: Symbol, at: Any = 0, order: Any = 4, given: Given = ()
) -> Asymptotics | None:
    """The expansion of ``F(parameter) = int_0^oo f(x)*g(parameter*x) dx``.

    The transform of F is ``G(s)*F(1 - s)`` with those of f and g (DLMF 2.5.5).

    Parameters
    ----------
    f, g : Expr
        Functions of x, free of ``parameter``.
    x, parameter : Symbol
    at, order, given :
        As for :func:`expansion`.

    Examples
    --------
    >>> from sympy import exp, oo, symbols
    >>> from sympy_mellin_ext.expansions import expansion_of_integral
    >>> x, k = symbols('x k', positive=True)
    >>> print(expansion_of_integral(1/(1 + x), exp(-x), x, k, 0, 1))  # exp(k)*E1(k), DLMF 6.6.2
    -log(k) - EulerGamma - k*log(k) + k*(1 - EulerGamma) + o(k**(1))
    """
    from ..integrate import mellin

    f, g = expression(f, "f"), expression(g, "g")
    end, order = _checked(parameter, at, order, "parameter")
    if f.has_free(parameter) or g.has_free(parameter):
        raise ValueError(f"f and g are functions of {x}, without {parameter}: g is taken at {parameter}*{x}")
    s = Dummy("s")
    first, second = mellin(f, x, s, given=given), mellin(g, x, s, given=given)
    if first is None or second is None or first.strip is None or second.strip is None:
        return None
    facts = Facts(relations(given))
    turned = first.value.subs(s, 1 - s)
    lower = Max(second.strip[0], 1 - first.strip[1])
    upper = Min(second.strip[1], 1 - first.strip[0])
    if not _open(lower, upper, facts):
        return None
    return _from_poles(second.value * turned, parameter, s, (lower, upper), end, order, facts, _free(s, first, second))


def expansion_of_sum(
    coefficients: Any, s: Symbol, f: Any, x: Symbol, at: Any = 0, order: Any = 4, abscissa: Any = 1, given: Given = ()
) -> Asymptotics | None:
    """The expansion of the harmonic sum ``sum_k c_k*f(m_k*x)``.

    Its transform is that of f times the Dirichlet series (Flajolet, Gourdon, Dumas 1995, lemma 2).

    Parameters
    ----------
    coefficients : Expr
        The Dirichlet series ``sum_k c_k*m_k**(-s)`` as a function of s: ``zeta(s)`` for ``sum f(k*x)``.
    s : Symbol
    f : Expr
        Function of x.
    x : Symbol
    abscissa : Expr
        The series converges absolutely for ``Re s`` above it.
    at, order, given :
        As for :func:`expansion`.

    Examples
    --------
    >>> from sympy import exp, symbols, zeta
    >>> from sympy_mellin_ext.expansions import expansion_of_sum
    >>> x = symbols('x', positive=True)
    >>> s = symbols('s')
    >>> print(expansion_of_sum(zeta(2*s), s, exp(-x), x, 0, 5, abscissa=0.5))  # theta function, DLMF 20.7.32
    sqrt(pi)/(2*sqrt(x)) - 1/2 + o(x**(5))
    """
    from ..integrate import mellin

    coefficients, f = expression(coefficients, "coefficients"), expression(f, "f")
    end, order = _checked(x, at, order)
    symbol(s, "s")
    if f.has_free(s):
        raise ValueError(f"s = {s} must not occur in f")
    transform = mellin(f, x, s, given=given)
    if transform is None or transform.strip is None:
        return None
    facts = Facts(relations(given))
    lower = Max(transform.strip[0], sympify(abscissa, rational=True))
    if not _open(lower, transform.strip[1], facts):
        return None
    value, strip = coefficients * transform.value, (lower, transform.strip[1])
    return _from_poles(value, x, s, strip, end, order, facts, _free(s, transform))


def _open(lower: Expr, upper: Expr, facts: Facts) -> bool:
    return lower is S.NegativeInfinity or upper is S.Infinity or facts.sign(upper - lower) == 1


def _free(s: Symbol, *answers: ClosedForm) -> Boolean:
    parts = [c for a in answers for c in (a.condition.args if isinstance(a.condition, And) else (a.condition,))]
    return And(*(c for c in parts if not c.has_free(s)))
