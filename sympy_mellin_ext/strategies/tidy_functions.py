"""Logarithms added up, and Bessel functions of half-integer order written out."""
from __future__ import annotations

from sympy import (
    Add,
    Expr,
    Mul,
    Pow,
    Rational,
    S,
    atanh,
    besseli,
    besselj,
    besselk,
    bessely,
    cos,
    cosh,
    exp,
    factorint,
    igcd,
    log,
    pi,
    sin,
    sinh,
)


def over_common_denominator(total: Expr) -> Expr:
    """A sum as its numerator times powers of positive atoms, where the terms have such denominators."""
    lowest: dict[Expr, Expr] = {}
    number = 1
    for term in total.args:
        c, rest = term.as_coeff_Mul()
        if c.is_Rational:
            number = number * c.q // int(igcd(number, c.q))
        for factor in Mul.make_args(rest):
            base, exponent = factor.as_base_exp()
            if exponent.is_Rational and exponent.is_negative and base.is_positive and not base.is_Rational:
                lowest[base] = min(lowest.get(base, S.Zero), exponent)
    if not lowest and number == 1:
        return total
    common = Mul(number, *(Pow(b, -e) for b, e in lowest.items()))
    return Mul(Add(*(t * common for t in total.args)), 1 / common, evaluate=True)


# -- logarithms ------------------------------------------------------------------------------------------

# base -> coefficient of log(base)
Logs = dict[Expr, Expr]


def joined_logarithms(total: Expr) -> Expr:
    """Logarithms of positive quotients added up; with ``atanh(y) = log((1 + y)/(1 - y))/2`` where that helps.

    Source: DLMF 4.37.24 and 4.8.1-4.8.2, for positive arguments.
    """
    groups: dict[Expr, Logs] = {}
    inverse: dict[Expr, list[tuple[Rational, Expr]]] = {}
    others: list[Expr] = []
    count = 0
    for term in total.args:
        number, rest = term.as_coeff_Mul()
        found = [f for f in Mul.make_args(rest) if isinstance(f, log | atanh)]
        if len(found) != 1 or not number.is_Rational:
            others.append(term)
            continue
        front = Mul(*(f for f in Mul.make_args(rest) if f is not found[0]))
        count += 1
        if isinstance(found[0], atanh):
            inverse.setdefault(front, []).append((number, found[0].args[0]))
            continue
        logs = groups.setdefault(front, {})
        for base, exponent in _logs_of(found[0].args[0]).items():
            logs[base] = logs.get(base, S.Zero) + number * exponent
    if count < 2:
        return total
    for front, terms in inverse.items():
        for number, y in terms:
            if not _absorbed(groups.get(front, {}), number, y):
                others.append(number * front * atanh(y))
    written = Add(*others, *(front * _written(logs) for front, logs in groups.items()))
    return written if written.count_ops() <= total.count_ops() else total


def _logs_of(argument: Expr) -> Logs:
    result: Logs = {}
    for factor in Mul.make_args(over_common_denominator(argument) if argument.is_Add else argument):
        base, exponent = factor.as_base_exp()
        if factor.is_Rational and factor.is_positive and max(factor.p, factor.q) < 10**6:
            for n, sign in ((factor.p, 1), (factor.q, -1)):
                for prime, k in factorint(n).items():
                    result[S(prime)] = result.get(S(prime), S.Zero) + sign * k
        elif base.is_positive and exponent.is_Rational:
            # a large number is its own base: it stays whole
            inside = base != factor and (base.is_Rational or base.is_Mul)
            for b, e in _logs_of(base).items() if inside else ((base, S.One),):
                result[b] = result.get(b, S.Zero) + e * exponent
        else:
            result[factor] = result.get(factor, S.Zero) + 1
    return result


def _absorbed(logs: Logs, number: Rational, y: Expr) -> bool:
    """Join ``number*atanh(top/bottom)`` with a ``log(bottom**2 - top**2)`` of half that weight."""
    top, bottom = y.as_numer_denom()
    for base, weight in logs.items():
        if not base.is_Add or abs(weight) * 2 != abs(number):
            continue
        if (base - bottom**2 + top**2).expand() is S.Zero:
            del logs[base]
            sign = 1 if weight * number > 0 else -1
            joined = bottom + sign * top
            logs[joined] = logs.get(joined, S.Zero) + 2 * weight
            return True
    return False


def _written(logs: Logs) -> Expr:
    """The fewest logarithms: bases of equal weight share one."""
    by_weight: dict[Expr, list[Expr]] = {}
    for base, weight in logs.items():
        if weight is not S.Zero:
            size = abs(weight)
            by_weight.setdefault(size, []).append(base if weight == size else 1 / base)
    terms = []
    for size, bases in by_weight.items():
        argument = Mul(*bases)
        if argument.could_extract_minus_sign() or (1 / argument).count_ops() < argument.count_ops():
            terms.append(-size * log(1 / argument))
        else:
            terms.append(size * log(argument))
    return Add(*terms)


# -- roots -----------------------------------------------------------------------------------------------


def joined_roots(total: Expr) -> Expr:
    """``a**2/sqrt(a**2 + b**2) + b**2/sqrt(a**2 + b**2)`` as ``sqrt(a**2 + b**2)``."""
    groups: dict[tuple[Expr, Expr], list[tuple[Expr, Expr]]] = {}
    for term in total.args:
        for factor in Mul.make_args(term):
            if factor.is_Pow and factor.base.is_Add and factor.exp.is_Rational and factor.exp.is_negative:
                groups.setdefault((factor.base, factor.exp), []).append((term, term / factor))
    for (base, exponent), members in groups.items():
        if len(members) < 2:
            continue
        numerator = Add(*(c for _, c in members)).expand()
        first = base.args[0]
        quotient = next(
            (t / first for t in Add.make_args(numerator) if (numerator - t / first * base).expand() is S.Zero), None
        )
        if quotient is not None:
            gone = {term for term, _ in members}
            rest = [term for term in total.args if term not in gone]
            return Add(*rest, quotient * Pow(base, exponent + 1))
    return total


# -- Bessel functions ------------------------------------------------------------------------------------


def half_integer_bessel(factors: list[Expr]) -> list[Expr]:
    """Bessel functions of order +-1/2 in a product by their elementary forms, DLMF 10.16.1 and 10.39.1-2."""
    if not any(isinstance(f, besseli | besselj | besselk | bessely) and abs(f.args[0]) == S.Half for f in factors):
        return factors
    exponent = Add(*(f.args[0] for f in factors if isinstance(f, exp)))
    result: list[Expr] = []
    for f in factors:
        if isinstance(f, exp):
            continue
        if not isinstance(f, besseli | besselj | besselk | bessely) or abs(f.args[0]) != S.Half:
            result.append(f)
            continue
        half, z = f.args
        front = (pi / 2 if isinstance(f, besselk) else 2 / pi) / z
        result.extend(Pow(b, S.Half) for b in Mul.make_args(front))
        up = half.is_positive
        if isinstance(f, besselk):
            exponent = exponent - z
        elif isinstance(f, besselj):
            result.append(sin(z) if up else cos(z))
        elif isinstance(f, bessely):
            result.append(-cos(z) if up else sin(z))
        elif exponent in (z, -z):
            sign = -1 if up else 1
            result.append((1 + sign * exp(-2 * z)) / 2 if exponent == -z else (exp(2 * z) + sign) / 2)
            exponent = S.Zero
        else:
            result.append(sinh(z) if up else cosh(z))
    return [*result, exp(exponent)]


__all__ = ["half_integer_bessel", "joined_logarithms", "joined_roots", "over_common_denominator"]
