"""The coefficient formula, and when it is true.

Source: G. H. Hardy, Ramanujan: Twelve Lectures on Subjects Suggested by His Life and Work (1940), ch. XI
(master theorem, growth of phi); E. C. Titchmarsh, The Theory of Functions (1939), 5.81 (Carlson's theorem).
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import NamedTuple

from sympy import Abs, Add, Expr, Mul, Pow, S, Symbol, arg, gamma, sympify

from ..gamma import Factor, GammaProduct
from ..gamma.product import cancel
from .coefficients import CoefficientForm, Extra, form_or_culprit

Sign = Callable[[Expr], int | None]


def assumed_sign(expr: Expr) -> int | None:
    """Sign of a real expression by SymPy's assumptions alone."""
    if expr.is_positive:
        return 1
    if expr.is_negative:
        return -1
    return 0 if expr.is_zero else None


class Growth(NamedTuple):
    """Verdict on a coefficient function.

    ``ok`` is None where the parameters decide: it is true if all of ``needs`` are positive.
    ``culprit`` is the factor of phi that grows too fast.
    """

    ok: bool | None
    needs: tuple[Expr, ...] = ()
    culprit: Expr | None = None


def angle_of(scale: Expr) -> Expr:
    """``abs(arg(scale))``."""
    if scale.is_positive:
        return S.Zero
    return S.Pi if scale.is_negative else Abs(arg(scale))


def growth_ok(
    factors: Iterable[Factor],
    angle: Expr = S.Zero,
    extra_type: Expr = S.Zero,
    sign: Sign = assumed_sign,
    n: Symbol | None = None,
) -> Growth:
    """Whether ``Gamma(s)*phi(-s)`` is the transform of the series that phi generates.

    Parameters
    ----------
    factors : iterable of Factor
        Gammas in ``s`` of the whole product, the first ``Gamma(s)`` included.
    angle : Expr
        ``abs(arg(eta))`` of the scale.
    extra_type : Expr
        Exponential type of the other factors of phi in the imaginary direction.
    sign : callable
        Sign of a real expression, or None.
    n : Symbol, optional
        Variable in which the culprit is written.

    Returns
    -------
    Growth

    Examples
    --------
    >>> from sympy import symbols
    >>> from sympy_mellin_ext.gamma import Factor
    >>> from sympy_mellin_ext.series import growth_ok
    >>> growth_ok([Factor(0, 1, 1)]).ok                              # exp(-x)
    True
    >>> n = symbols('n')
    >>> growth_ok([Factor(0, 1, 1), Factor(1, -1, -1), Factor(1, -1, -1)], n=n)     # 0F2
    Growth(ok=False, needs=(), culprit=1/gamma(n + 1))
    """
    factors = tuple(Factor(sympify(a), sympify(A), e) for a, A, e in factors)
    room = S.Pi / 2 * Add(*(e * abs(A) for _, A, e in factors)) - angle - extra_type
    delta = Add(*(e * A for _, A, e in factors))
    inside, converges = sign(room), sign(delta)
    if converges == -1 or inside == -1 or (inside == 0 and converges == 0):
        return Growth(False, (), _culprit(factors, n or Symbol("n"), converges == -1))
    if inside == 1 and converges is not None:
        return Growth(True)
    if inside == 0 and converges == 1:
        return Growth(True)
    needs = tuple(e for e, known in ((room, inside), (delta, converges)) if known is None)
    return Growth(None, needs if inside != 0 else (delta,))


def _culprit(factors: tuple[Factor, ...], n: Symbol, diverges: bool) -> Expr | None:
    """The factor of phi to blame: one that falls with n, else the steepest of the wrong kind."""
    phi = [Factor(a, -A, e) for a, A, e in factors]
    falling = [f for f in phi if f.slope.is_negative and f.power < 0]
    wrong = falling or [f for f in phi if f.power == (1 if diverges else -1)]
    if not wrong:
        return None
    worst = max(wrong, key=lambda f: (float(abs(f.slope)) if f.slope.is_number else 1.0, str(f.shift)))
    return Pow(gamma(worst.shift + worst.slope * n), worst.power)


@dataclass(frozen=True)
class SeriesTransform:
    """A Mellin transform by the master theorem: ``product(s) * prod extras at n = -s``.

    ``right`` holds upper bounds of ``Re s`` that the extras add to the strip of the product.
    """

    product: GammaProduct
    extras: tuple[Extra, ...]
    growth: Growth

    @property
    def right(self) -> tuple[Expr, ...]:
        return tuple(e.right for e in self.extras if e.right is not None)

    def extra_at(self, n: Symbol, s: Expr) -> Expr:
        """The factors beside the Gammas, at ``n = -s``."""
        return Mul(*(e.value.xreplace({n: -s}) for e in self.extras))


def _transform(
    form: CoefficientForm, n: Symbol, scale: Expr, lead: tuple[Factor, ...], sign: Sign
) -> SeriesTransform:
    factors = cancel(lead + tuple(Factor(a, -A, e) for a, A, e in form.factors))
    product = GammaProduct(form.constant, scale, factors)
    type_ = Add(*(e.type for e in form.extras))
    # the culprit is looked for in phi and Gamma(s), before anything cancels
    whole = (Factor(S.Zero, S.One, 1), *lead[1:], *(Factor(a, -A, e) for a, A, e in form.factors))
    growth = growth_ok(factors, angle_of(scale), type_, sign, n)
    if growth.ok is False:
        if growth_ok(factors, S.Zero, type_, sign).ok:
            culprit: Expr | None = Pow(scale, n)
        else:
            culprit = growth_ok(whole, angle_of(scale), type_, sign, n).culprit
        growth = growth._replace(culprit=culprit)
    return SeriesTransform(product, form.extras, growth)


def phi_transform(phi: Expr, n: Symbol, sign: Sign = assumed_sign) -> SeriesTransform | Growth:
    """Transform of ``sum phi(n)*(-x)**n/n!``, that is ``Gamma(s)*phi(-s)``, or the reason against it.

    Parameters
    ----------
    phi : Expr
    n : Symbol
    sign : callable
        Sign of a real expression, or None.

    Returns
    -------
    SeriesTransform or Growth
        A ``Growth`` with ``ok=False`` if phi cannot be read (culprit None) or has no admissible
        continuation; look at ``.growth`` of a transform before using it.

    Examples
    --------
    >>> from sympy import gamma, symbols, S
    >>> from sympy_mellin_ext.series import phi_transform
    >>> n, s = symbols('n s')
    >>> phi_transform(gamma(n + S.Half), n).product.at(s)
    gamma(s)*gamma(1/2 - s)
    >>> phi_transform(gamma(n + S.Half)/gamma(-n), n).culprit
    1/gamma(-n)
    """
    form, culprit = form_or_culprit(phi, n)
    if form is None:
        return Growth(False, (), culprit)
    return _transform(form, n, form.base, (Factor(S.Zero, S.One, 1),), sign)


def coefficient_transform(c: Expr, n: Symbol, sign: Sign = assumed_sign) -> SeriesTransform | Growth:
    """Transform of ``sum c(n)*x**n``: as `phi_transform` with ``phi(n) = (-1)**n*n!*c(n)``.

    Examples
    --------
    >>> from sympy import factorial, symbols
    >>> from sympy_mellin_ext.series import coefficient_transform
    >>> n, s = symbols('n s')
    >>> coefficient_transform((-1)**n/factorial(n)**2, n).product.at(s)
    gamma(s)/gamma(1 - s)
    """
    form, culprit = form_or_culprit(c, n)
    if form is None:
        return Growth(False, (), culprit)
    lead = (Factor(S.Zero, S.One, 1), Factor(S.One, -S.One, 1))
    return _transform(form, n, _negative(form.base), lead, sign)


def _negative(base: Expr) -> Expr:
    return -base if not base.is_Add else (-base).expand()
