"""Quotients of Gammas at concrete arguments, written as short as the classical identities allow.

Sources: DLMF 5.5.1 (recurrence), 5.5.3 (reflection), 5.5.5 (duplication), 5.5.6 (multiplication).
"""
from __future__ import annotations

from collections.abc import Sequence

from sympy import Add, Expr, Integer, Mul, Pow, S, cos, factorial, gamma, pi, sin, sqrt

from ..expanding import expanded

# Integer differences up to this size become a polynomial; beyond it two Gammas are shorter.
_LONGEST_POLYNOMIAL = 4


def positive_power(base: Expr, exponent: Expr) -> Expr:
    """Principal ``base**exponent``, with ``(1/b)**e`` written as ``b**(-e)``.

    Valid where ``abs(arg(base)) < pi``, which the regions of the scales guarantee.
    """
    if base.is_Pow and (
        (base.exp.is_Rational and -1 <= base.exp <= 1) or (base.base.is_positive and base.exp.is_real)
    ):
        return Pow(base.base, expanded(base.exp * exponent))
    if base.is_Mul and base.args[0].is_Rational and base.args[0].is_positive:
        number, rest = base.args[0], Mul(*base.args[1:])
        return Pow(number.p, exponent) * Pow(number.q, -exponent) * positive_power(rest, exponent)
    if base.is_Mul and base.is_positive and all(a.is_positive for a in base.args):
        return Mul(*(positive_power(a, exponent) for a in base.args))
    if base.is_Rational and base.p == 1 and base.q > 1:
        return Pow(base.q, -exponent)
    if base.is_Mul and not base.is_positive:
        positive = [a for a in base.args if a.is_positive]
        if positive:
            rest = Mul(*(a for a in base.args if not a.is_positive))
            return Mul(*(Pow(a, exponent) for a in positive), positive_power(rest, exponent))
    return Pow(base, exponent)


def shortest_quotient(up: Sequence[Expr], down: Sequence[Expr]) -> Expr:
    """``prod gamma(up) / prod gamma(down)`` in the shortest form found.

    Parameters
    ----------
    up, down : sequence of Expr
        Arguments of the Gammas, none of those in ``up`` a non-positive integer.

    Examples
    --------
    >>> from sympy import symbols
    >>> from sympy_mellin_ext.gamma import shortest_quotient
    >>> s = symbols('s')
    >>> shortest_quotient([s, 1 - s], [])
    pi/sin(pi*s)
    >>> shortest_quotient([s], [s + 1])
    1/s
    >>> shortest_quotient([s, s + S.Half], [])
    2**(1 - 2*s)*sqrt(pi)*gamma(2*s)
    """
    ups, downs = list(up), list(down)
    for argument in downs:
        if argument.is_Integer and argument.is_nonpositive:
            return S.Zero
    outside: list[Expr] = []
    _cancel_integer_differences(ups, downs, outside)
    _duplicate(ups, downs, outside)
    _reflect(downs, -1, outside, (1,))
    _cosine(ups, downs, outside)
    _reflect(ups, 1, outside)
    _reflect(downs, -1, outside)
    _cancel_integer_differences(ups, downs, outside)
    _absorb_linear(ups, downs, outside)
    return Mul(*outside, *(_gamma(a) for a in ups), *(1 / _gamma(a) for a in downs))


def collect_powers(expr: Expr) -> Expr:
    """Add the exponents of equal bases in a product (or in each product of a sum).

    SymPy itself adds only like exponents: ``b**(1 - c)*b**(c + k)`` stays as it is.

    Examples
    --------
    >>> from sympy import symbols
    >>> from sympy_mellin_ext.gamma.shortest import collect_powers
    >>> b, c, k = symbols('b c k', positive=True)
    >>> collect_powers(b**(1 - c)*b**(c + k)/b)
    b**k
    """
    if expr.is_Add:
        return Add(*(collect_powers(a) for a in expr.args))
    if not expr.is_Mul:
        return expr
    exponents: dict[Expr, list[Expr]] = {}
    number: Expr = S.One
    rest: list[Expr] = []
    for a in expr.args:
        if a.is_Rational:
            number = number * a
        elif a.is_Pow or a.is_Symbol:
            base, exponent = a.as_base_exp()
            if base.is_Rational and base.p == 1:
                base, exponent = Integer(base.q), -exponent
            exponents.setdefault(base, []).append(exponent)
        else:
            rest.append(a)
    for base, powers in exponents.items():
        if base.is_Integer and base > 1 and not all(p.is_Rational for p in powers):
            while number.p % base.p == 0 and number is not S.Zero:
                number, powers = number / base, [*powers, S.One]
            while number.q % base.p == 0:
                number, powers = number * base, [*powers, S.NegativeOne]
            exponents[base] = powers
    if number is S.One and all(len(p) == 1 for p in exponents.values()):
        return expr
    return Mul(number, *(Pow(b, Add(*p)) for b, p in exponents.items()), *rest)


def _gamma(argument: Expr) -> Expr:
    if not argument.is_Integer and _may_be_integer(argument) and argument.is_integer and (argument - 1).is_nonnegative:
        return factorial(argument - 1)
    if argument.is_Rational and argument.q > 2:
        # one Gamma a residue class: gamma(7/3) = (4/3)*(1/3)*gamma(1/3)
        whole = argument.p // argument.q
        rest = argument - whole
        if whole > 0:
            return Mul(*(rest + k for k in range(whole))) * gamma(rest)
        return gamma(rest) / Mul(*(rest - k for k in range(1, 1 - whole)))
    return gamma(argument)


def _may_be_integer(argument: Expr) -> bool:
    """False where a term of a sum is no known integer: SymPy's own query would say so too, but slowly."""
    for term in argument.args if argument.is_Add else (argument,):
        if term.is_Mul and len(term.args) == 2 and term.args[0].is_Rational:
            term = term.args[1]
        if (term.is_Symbol or term.is_Rational) and not term.is_integer:
            return False
    return True


def _difference(a: Expr, b: Expr) -> Expr:
    difference = a - b
    if difference.is_Add or difference.is_Mul:
        difference = expanded(difference)
    return difference


def _cancel_integer_differences(ups: list[Expr], downs: list[Expr], outside: list[Expr]) -> None:
    for a in list(ups):
        best: tuple[int, Expr] | None = None
        for b in downs:
            k = _difference(a, b)
            if k.is_Integer and (best is None or abs(k) < abs(best[0])):
                best = (int(k), b)
        if best is None or (abs(best[0]) > _LONGEST_POLYNOMIAL and not a.is_Rational):
            continue
        k, b = best
        ups.remove(a)
        downs.remove(b)
        if k >= 0:
            outside.extend(b + j for j in range(k))
        else:
            outside.extend(1 / (a + j) for j in range(-k))


def _duplicate(ups: list[Expr], downs: list[Expr], outside: list[Expr]) -> None:
    """Gamma(x) Gamma(x+1/2) on one side; Gamma(2x) over Gamma(x) or Gamma(x+1/2) across."""
    for side, sign in ((ups, 1), (downs, -1)):
        again = True
        while again:
            again = False
            for i, a in enumerate(side):
                for b in side[i + 1 :]:
                    d = _difference(b, a)
                    if (d is S.Half or d == -S.Half) and not (a.is_Number or b.is_Number):
                        x = a if d is S.Half else b
                        side.remove(a)
                        side.remove(b)
                        side.append(expanded(2 * x))
                        outside.append((Pow(2, expanded(1 - 2 * x)) * sqrt(pi)) ** Integer(sign))
                        again = True
                        break
                if again:
                    break
    for above, below, sign in ((ups, downs, 1), (downs, ups, -1)):
        for a in list(above):
            if a.is_Number:
                continue
            half = expanded(a / 2)
            for b in list(below):
                d = _difference(b, half)
                if d is S.Zero or d is S.Half:
                    above.remove(a)
                    below.remove(b)
                    above.append(half + S.Half if d is S.Zero else half)
                    outside.append((Pow(2, expanded(a - 1)) / sqrt(pi)) ** Integer(sign))
                    break


def _reflect(side: list[Expr], sign: int, outside: list[Expr], totals: Sequence[int] = ()) -> None:
    """Gamma(x) Gamma(1-x) = pi/sin(pi x); other integer sums only where the quotient stays regular.

    With ``totals``, pairs of such a sum only.
    """
    again = True
    while again:
        again = False
        for i, a in enumerate(side):
            for b in side[i + 1 :]:
                if a.is_Integer or b.is_Integer:
                    continue
                total = a + b
                if not total.is_Number:
                    total = expanded(total)
                if not total.is_Integer or (totals and total not in totals):
                    continue
                if total != 1 and not (a.is_Number or total == 0 or (sign < 0 and 0 <= total <= 2)):
                    continue
                x, n = _sine_argument(a, b), int(total)
                side.remove(a)
                side.remove(b)
                # Gamma(y) = Gamma(1-x) * (1-x)_(n-1) with y = n - x
                if n >= 1:
                    factor = Mul(*(1 - x + j for j in range(n - 1)))
                else:
                    factor = 1 / Mul(*(n - x + j for j in range(1 - n)))
                outside.append((factor * pi / sin(expanded(pi * x))) ** Integer(sign))
                again = True
                break
            if again:
                break


def _cosine(ups: list[Expr], downs: list[Expr], outside: list[Expr]) -> None:
    """Gamma(x)/Gamma(1/2-x) = 2**(1-2x)*cos(pi x)*Gamma(2x)/sqrt(pi), regular where Gamma(x) is."""
    for a in list(ups):
        for b in downs:
            if a.is_Number or b.is_Number:
                continue
            if expanded(a + b) is S.Half and a.has_free(*b.free_symbols):
                ups.remove(a)
                downs.remove(b)
                double = expanded(2 * a)
                ups.append(double)
                outside.append(Pow(2, 1 - double) * cos(expanded(pi * a)) / sqrt(pi))
                break


def _sine_argument(a: Expr, b: Expr) -> Expr:
    """The argument whose sine reads better: no leading minus."""
    return b if a.could_extract_minus_sign() and not b.could_extract_minus_sign() else a


def _absorb_linear(ups: list[Expr], downs: list[Expr], outside: list[Expr]) -> None:
    """``x*Gamma(x) -> Gamma(x+1)`` and ``Gamma(x+1)/x -> Gamma(x)`` (and the same below the line)."""
    for side, sign in ((ups, 1), (downs, -1)):
        for i, a in enumerate(side):
            if a.is_Number:
                continue
            changed = True
            while changed:
                changed = False
                for j, factor in enumerate(outside):
                    number, rest = factor.as_coeff_Mul()
                    if number is S.NegativeOne and rest is not S.One:
                        outside[j : j + 1] = [number, rest]
                        changed = True
                        break
                    linear, power = factor.as_base_exp()
                    if power * sign == 1 and linear == a:
                        side[i] = a = a + 1
                    elif power * sign == 1 and linear == -a:
                        side[i] = a = a + 1
                        outside.append(S.NegativeOne)
                    elif power * sign == -1 and linear == a - 1:
                        side[i] = a = a - 1
                    elif power * sign == -1 and linear == 1 - a:
                        side[i] = a = a - 1
                        outside.append(S.NegativeOne)
                    else:
                        continue
                    del outside[j]
                    changed = True
                    break
        if sign < 0:
            return


