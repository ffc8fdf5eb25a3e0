"""Ramanujan's master theorem for a coefficient function given by the user."""
from __future__ import annotations

from typing import Any

from sympy import Dummy, Expr, S, Sum, Symbol, factorial, gamma, oo

from .arguments import Given, expression, relations, symbol
from .closed_form import ClosedForm, Step
from .gamma.shortest import collect_powers
from .matching.reader import sector
from .pieces import Piece
from .problem import Refusal
from .region import Facts, real_part
from .series import Growth, SeriesTransform, phi_transform
from .strategies.finite_part import Divergence, converge
from .strategies.master_theorem import strip_of

_SOURCE = "Hardy, Ramanujan: Twelve Lectures (1940), ch. XI"


def master_theorem(
    phi: Any, n: Symbol, s: Symbol, given: Given = (), strict: bool = False
) -> ClosedForm | None:
    """``int_0^oo x**(s-1) f(x) dx = Gamma(s)*phi(-s)`` for ``f(x) = sum phi(n)*(-x)**n/n!``.

    Parameters
    ----------
    phi : Expr
        Coefficient function: powers, Gammas with rational or positive symbolic slope, factorials,
        binomials, Pochhammer symbols, rational functions, trigonometric functions, zeta and polygamma in n.
    n, s : Symbol
    given, strict :
        As for :func:`closed_form`.

    Returns
    -------
    ClosedForm, or None where phi grows too fast for the theorem (or cannot be read).

    Raises
    ------
    Refusal
        Under ``strict``; its detail names the factor that grows too fast.
    TypeError, ValueError
        For malformed arguments.

    Notes
    -----
    The coefficients alone do not determine f unless phi is of exponential type less than pi on a half plane
    (Carlson's theorem); Hardy's form of the theorem asks for just that.

    References
    ----------
    G. H. Hardy, Ramanujan: Twelve Lectures (1940), ch. XI.

    Examples
    --------
    >>> from sympy import S, gamma, symbols
    >>> from sympy_mellin_ext import master_theorem
    >>> n, s = symbols('n s')
    >>> a = symbols('a', positive=True)
    >>> master_theorem(gamma(n + a)/gamma(a), n, s).value  # (1 + x)**(-a)
    gamma(s)*gamma(a - s)/gamma(a)
    >>> print(master_theorem(gamma(n + S.Half)/gamma(-n), n, s))
    None
    """
    phi = expression(phi, "phi")
    symbol(n, "n"), symbol(s, "s")
    if n == s or phi.has_free(s):
        raise ValueError(f"s = {s} must differ from n and must not occur in phi")
    facts = Facts(relations(given))
    outcome = phi_transform(phi, n, facts.sign)
    if isinstance(outcome, Growth) or outcome.growth.ok is False:
        growth = outcome if isinstance(outcome, Growth) else outcome.growth
        if not strict:
            return None
        if isinstance(outcome, Growth) and not (growth.culprit and growth.culprit.has(gamma)):
            raise Refusal("no kernel", f"the factor {growth.culprit} of phi is not known as a function of {n}")
        raise Refusal("growth", f"the factor {growth.culprit} of phi grows too fast off the real axis")
    answer = _closed(outcome, phi, n, s, facts)
    if answer is None and strict:
        raise Refusal("empty region", "no value of s makes the integral converge")
    return answer


def _closed(transform: SeriesTransform, phi: Expr, n: Symbol, s: Symbol, facts: Facts) -> ClosedForm | None:
    product = transform.product
    positive = facts.sign(product.scale) == 1 if product.scale.is_extended_real else False
    condition = S.true if positive else sector(product.scale, product.lam)
    piece = Piece(S.One, s - 1, product=product, condition=condition, inside=True)
    if positive and transform.growth.ok and not transform.extras:
        piece = Piece(S.One, s - 1, product=product, inside=not product.lam.is_nonpositive)
    outcome = converge([piece], facts)
    if isinstance(outcome, Divergence):
        return None
    region, at_zero, at_infinity = outcome
    for need in transform.growth.needs:
        region = region.positive(need)
    for bound in transform.right:
        region = region.positive(real_part(bound) - real_part(s))
    condition = region.to_boolean()
    if region.empty or condition is S.false:
        return None
    at_infinity.survivors += [s - 1 - bound for bound in transform.right]
    value = collect_powers(product.at(s) * transform.extra_at(n, s))
    x = Symbol("x", positive=True)
    if phi.has_free(x):
        x = Dummy("x", positive=True)
    series = Sum(phi * (-x) ** n / factorial(n), (n, 0, oo))
    steps = (
        Step("coefficient function", "Hardy: f(x) = sum phi(n)*(-x)**n/n!", phi, transform.product),
        Step("phi is of exponential type less than pi on a half plane", "Hardy's condition; Carlson's theorem"),
        Step("master theorem", _SOURCE, value),
    )
    return ClosedForm(
        value, condition, strip_of(at_zero, at_infinity, s - 1), "master theorem", steps, (_SOURCE,),
        integrand=x ** (s - 1) * series, limits=((x, S.Zero, oo),), given=facts.given,
    )  # fmt: skip

