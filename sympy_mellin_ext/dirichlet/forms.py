"""Short forms of values of exponential series."""

from __future__ import annotations

from sympy import (
    Add,
    Expr,
    I,
    Mul,
    Rational,
    S,
    cos,
    cosh,
    cot,
    count_ops,
    expand_log,
    expand_mul,
    factor_terms,
    gamma,
    log,
    loggamma,
    pi,
    polygamma,
    sin,
    sinh,
    stieltjes,
    tan,
)

from ..gamma.shortest import collect_powers

# Sums of more terms are left alone.
_MOST_TERMS = 30


def shortest(value: Expr) -> Expr:
    """Imaginary units multiplied out where that removes them, powers of one base collected.

    Examples
    --------
    >>> from sympy import I, coth, pi, symbols
    >>> from sympy_mellin_ext.dirichlet.forms import shortest
    >>> b = symbols('b', positive=True)
    >>> shortest(-I*(I*pi*coth(pi*b) - I/b)/2)
    pi*coth(pi*b)/2 - 1/(2*b)
    """
    if value.has(I):
        expanded = expand_mul(value)
        if len(Add.make_args(expanded)) <= _MOST_TERMS:
            expanded = _conjugates_joined(expanded)
            if not expanded.has(I) or count_ops(expanded) < count_ops(value):
                value = expanded
    if value.has(loggamma):
        value = _reflected(expand_mul(value))
    if value.has(stieltjes):
        value = _first_stieltjes(expand_mul(value))
    if value.is_number and value.is_Add and value.has(log):
        value = expand_mul(expand_log(value, factor=True))
    value = collect_powers(value)
    if value.is_Add and value.has(polygamma):
        expanded = expand_mul(value)
        value = min(value, expanded, factor_terms(expanded, sign=True), key=count_ops)
    return value


def _reflected(total: Expr) -> Expr:
    """``log Gamma(a) + log Gamma(1-a)``, a rational or with real part 1/2 (or 1): DLMF 5.4.3-4, 5.5.3."""
    weights: dict[Expr, Expr] = {}
    rest: list[Expr] = []
    for term in Add.make_args(total):
        c, function = term.as_independent(loggamma)
        if isinstance(function, loggamma):
            a = function.args[0]
            weights[a] = weights.get(a, S.Zero) + c
        else:
            rest.append(term)
    sines: dict[Expr, Expr] = {}
    while weights:
        a, c = weights.popitem()
        if c is S.Zero:
            continue
        other = next((b for b, w in weights.items() if w == c and _mirrors(a, b)), None)
        if other is None:
            rest.append(c * (log(pi) / 2 if a is S.Half else loggamma(a)))
            continue
        del weights[other]
        if a.is_Rational:
            sines[min(a, other)] = c
        else:
            y = ((a - other) / (2 * I)).expand()
            y = -y if y.could_extract_minus_sign() else y
            half = (a + other).expand() is S.One
            rest.append(c * log(pi / cosh(pi * y) if half else pi * y / sinh(pi * y)))
    for a, c in sines.items():
        opposite = S.Half - a
        if sines.get(opposite) == -c:
            rest.append(c * log(cot(pi * a)) if a < opposite else S.Zero)
        else:
            rest.append(c * (log(pi) - log(sin(pi * a))))
    return Add(*rest)


def _mirrors(a: Expr, b: Expr) -> bool:
    """Whether a + b = 1 for rational numbers in (0, 1), or a and b are conjugates on Re = 1/2 or Re = 1."""
    total = (a + b).expand()
    if a.is_Rational:
        return total is S.One and 0 < a < 1
    return total in (1, 2) and bool(((a - b) / I).expand().is_extended_real)


def _first_stieltjes(total: Expr) -> Expr:
    """``gamma_1(m/n) - gamma_1(1 - m/n)``: I. V. Blagouchine, J. Number Theory 148 (2015), eq. (37)-type."""
    weights: dict[Expr, Expr] = {}
    rest: list[Expr] = []
    for term in Add.make_args(total):
        c, function = term.as_independent(stieltjes)
        if isinstance(function, stieltjes) and len(function.args) == 2 and function.args[0] is S.One:
            a = function.args[1]
            if a.is_Rational and 0 < a < 1:
                weights[a] = weights.get(a, S.Zero) + c
                continue
        rest.append(term)
    for a in sorted(weights):
        c, mirror = weights[a], weights.get(1 - a)
        if mirror is not None and mirror == -c and a < S.Half:
            n = a.q
            logs = Add(*(sin(2 * pi * a * k) * log(gamma(Rational(k, n))) for k in range(1, n)))
            rest.append(c * (2 * pi * logs - pi * (S.EulerGamma + log(2 * pi * n)) * cot(pi * a)))
        elif mirror is None or mirror != -c or a is S.Half:
            rest.append(c * stieltjes(1, a))
    return expand_mul(Add(*rest))


def _conjugates_joined(total: Expr) -> Expr:
    """``f(A + I*B) +- f(A - I*B)`` in real functions, for 1/cos, 1/sin, tan, cot: DLMF 4.21.37-40, 4.35.2."""
    items: list[tuple[Expr, type, Expr]] = []
    rest: list[Expr] = []
    for term in Add.make_args(total):
        found = [f for f in Mul.make_args(term) if _complex_trigonometric(f)]
        if len(found) != 1:
            rest.append(term)
            continue
        node = found[0].base if found[0].is_Pow else found[0]
        items.append((term / found[0], type(node), node.args[0]))
    while items:
        c, kind, argument = items.pop(0)
        a, b = _real_imaginary(argument)
        for other in items:
            if other[1] is kind and (other[2] - a + I * b).expand() is S.Zero and (other[0] in (c, -c)):
                items.remove(other)
                rest.append(c * _joined(kind, a, b, 1 if other[0] == c else -1))
                break
        else:
            value = kind(argument)
            rest.append(c / value if kind in (sin, cos) else c * value)
    return Add(*rest)


def _complex_trigonometric(factor: Expr) -> bool:
    node = factor.base if factor.is_Pow and factor.exp is S.NegativeOne else factor
    if (factor.is_Pow and not isinstance(node, (sin, cos))) or (
        not factor.is_Pow and not isinstance(node, (tan, cot))
    ):
        return False
    return node.args[0].has(I)


def _real_imaginary(argument: Expr) -> tuple[Expr, Expr]:
    """Parts of a sum whose terms are real or I times real."""
    imaginary = [t for t in Add.make_args(argument.expand()) if t.has(I)]
    b = (Add(*imaginary) / I).expand()
    return (argument - I * b).expand(), b


def _joined(kind: type, a: Expr, b: Expr, sign: int) -> Expr:
    below = cosh(2 * b) + cos(2 * a) if kind in (cos, tan) else cosh(2 * b) - cos(2 * a)
    if kind is tan:
        above = 2 * sin(2 * a) if sign == 1 else 2 * I * sinh(2 * b)
    elif kind is cot:
        above = 2 * sin(2 * a) if sign == 1 else -2 * I * sinh(2 * b)
    elif kind is cos:
        above = 4 * cos(a) * cosh(b) if sign == 1 else 4 * I * sin(a) * sinh(b)
    else:
        above = 4 * sin(a) * cosh(b) if sign == 1 else -4 * I * cos(a) * sinh(b)
    return above / below


__all__ = ["shortest"]
