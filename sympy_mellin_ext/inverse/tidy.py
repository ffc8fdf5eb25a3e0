"""Last touches: Gammas and powers of a product collected, terms of a sum gathered by their function.

Only identities that hold exactly are used; no general simplifier runs here.
"""

from __future__ import annotations

from typing import Any

from sympy import (
    Add,
    Integer,
    Mul,
    Pow,
    atanh,
    cancel,
    erf,
    erfc,
    factor,
    factor_terms,
    fraction,
    gamma,
    log,
    together,
)
from sympy.core.sorting import default_sort_key

from ..gamma.shortest import collect_powers, shortest_quotient
from .signature import is_nonpositive_int, power, spread


def _inverse_tangents(expr: Any) -> Any:
    """``atanh(w)`` beside ``log(1 - w**2)``: both in ``log(1 + w)`` and ``log(1 - w)``, DLMF 4.37.24."""
    arguments = [a.args[0] for a in sorted(expr.atoms(atanh), key=default_sort_key)]
    partners = {log(1 - w**2): w for w in arguments}
    found = {node: w for node, w in partners.items() if expr.has(node)}
    if not found:
        return expr
    split: dict[Any, Any] = {node: log(1 + w) + log(1 - w) for node, w in found.items()}
    split |= {atanh(w): (log(1 + w) - log(1 - w)) / 2 for w in found.values()}
    return expr.xreplace(split)


def tidy(expr: Any) -> Any:
    """The form in which F(z) is returned."""
    expr = _inverse_tangents(expr)
    terms = Add.make_args(spread(expr))
    if len(terms) == 1:
        coefficient, rest = _parted(_product(terms[0]))
        return _product(_gathered([coefficient]) * rest)
    groups: dict[Any, list[Any]] = {}
    for term in terms:
        coefficient, rest = _parted(_product(term))
        groups.setdefault(rest, []).append(coefficient)
    sums = {rest: _gathered(parts) for rest, parts in groups.items()}
    _complement(sums)
    total = Add(*(_product(coefficient * rest) for rest, coefficient in sums.items()))
    return factor_terms(total) if total.is_Add and len(total.args) < 12 else total


def _product(term: Any) -> Any:
    """One product: each Gamma once, each base once."""
    up: list[Any] = []
    down: list[Any] = []
    rest: list[Any] = []
    for f in Mul.make_args(term):
        base, e = f.as_base_exp()
        if isinstance(base, gamma) and e.is_Integer:
            (up if e > 0 else down).extend([base.args[0]] * abs(int(e)))
        elif base.is_Add and f.is_Pow:
            rest.append(_power_of_sum(base, e))
        else:
            rest.append(f)
    if up or down:
        if any(is_nonpositive_int(a) for a in up):
            return term
        for f in list(rest):  # gamma(b + 1)/b
            if f.is_Pow and f.exp == -1 and f.base + 1 in up:
                rest.remove(f)
                up[up.index(f.base + 1)] = f.base
        rest.append(shortest_quotient(up, down))
    return collect_powers(Mul(*rest))


def _power_of_sum(base: Any, e: Any) -> Any:
    """``(1/2 + u/2)**e`` as ``2**(-e)*(1 + u)**e``, ``(1 + 1/z)**e`` as ``z**(-e)*(1 + z)**e`` for z > 0."""
    number, base = base.as_content_primitive()
    top, bottom = fraction(together(base))
    if bottom != 1 and bottom.is_positive:
        return power(number, e) * power(bottom, -e) * Pow(top, e)
    return power(number, e) * Pow(base, e)


def _parted(term: Any) -> tuple[Any, Any]:
    """Algebraic coefficient and the rest of a product."""
    inside: list[Any] = []
    outside: list[Any] = []
    for f in Mul.make_args(term):
        base, e = f.as_base_exp()
        algebraic = f.is_Rational or (e.is_Rational and (base.is_Symbol or base.is_Add) and not f.is_Function)
        (inside if algebraic else outside).append(f)
    return Mul(*inside), Mul(*outside)


def _gathered(parts: list[Any]) -> Any:
    total = Add(*parts)
    size = total.count_ops()
    if size > 250 or not any(p.base.is_Add for p in total.atoms(Pow)):
        return total
    if _nothing_to_gather(total):
        return total
    top, bottom = fraction(cancel(together(total)))
    bottom = factor(bottom)
    radicals = _radicals(total)
    best = total
    for candidate in (factor_terms(top) / bottom, factor(top) / bottom):
        # a split radical, sqrt(1 - z**2) as sqrt(1 - z)*sqrt(1 + z), would change its branch for z > 1
        if candidate.count_ops() <= size and _radicals(candidate) <= radicals:
            best, size = candidate, candidate.count_ops()
    return best


def _nothing_to_gather(total: Any) -> bool:
    """Whether there is only one sum in radicals, in one term beside numbers: fractions have nothing to share."""
    terms = [t for t in Add.make_args(total) if not t.is_number]
    if len(terms) != 1:
        return False
    sums = 0
    for part in Mul.make_args(terms[0]):
        base, exponent = part.as_base_exp()
        if base.is_Add:
            plain = all(a.is_Atom or (a.is_Pow and a.base.is_Symbol and a.exp.is_Integer) for a in base.args)
            if not plain or exponent.is_Integer:
                return False
            sums += 1
        elif not base.is_Atom:
            return False
    return sums == 1


def _radicals(expr: Any) -> set[Any]:
    return {p.base for p in expr.atoms(Pow) if p.base.is_Add and not p.exp.is_Integer}


def _complement(sums: dict[Any, Any]) -> None:
    """``c*erf(x)*g - c*g`` is ``-c*erfc(x)*g`` (DLMF 7.2.2)."""
    for rest in list(sums):
        for f in Mul.make_args(rest):
            if isinstance(f, erf):
                bare = rest / f
                if bare in sums and sums[bare] == -sums[rest]:
                    c = sums.pop(rest)
                    del sums[bare]
                    key = bare * erfc(f.args[0])
                    sums[key] = sums.get(key, Integer(0)) - c
                break



