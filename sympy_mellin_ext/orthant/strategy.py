"""The orthant strategy: reductions first, then the linear system of the Mellin variables."""
from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from sympy import Add, Dummy, Expr, S, Symbol

from ..closed_form import ClosedForm, Step
from ..gamma.shortest import collect_powers
from ..problem import Problem
from ..region import Facts, Region
from ..strategies.registry import attempt
from ..strategies.tidy import tidy
from .contour import contour, fragile
from .elimination import reductions
from .integrand import Product
from .order import region_in_order
from .outcome import BAD, Outcome
from .polynomial import whole_power
from .reader import read_products
from .trinomial import narrower, trinomial

NAME = "orthant"
_SOURCE = "DLMF 1.14.39"
_MOST_STATES = 24


@dataclass
class Search:
    """One search; ``states`` bounds how many products are looked at."""

    facts: Facts
    states: int = 0
    seen: dict[object, Outcome | None] = field(default_factory=dict)

    def solve(self, product: Product, variables: tuple[Symbol, ...]) -> Outcome | None:
        """The integral of a product over the orthant, or None."""
        if not variables:
            return Outcome(product.coefficient)
        if not all(product.occurs(i) for i in range(len(variables))):
            return None  # a pure power has no integral over the half line
        key = (replace(product, coefficient=S.One), len(variables))
        if key in self.seen:
            found = self.seen[key]
            return None if found is None else found.under(product.coefficient, ())
        self.states += 1
        if self.states > _MOST_STATES:
            return None
        found = self._found(replace(product, coefficient=S.One), variables)
        self.seen[key] = found
        return None if found is None else found.under(product.coefficient, ())

    def _found(self, product: Product, variables: tuple[Symbol, ...]) -> Outcome | None:
        if product.index == 0:
            found = contour(product, self.facts)
            if found is not None:
                return found
        if len(variables) == 1 and product.tame():
            found = self.one_variable(product, variables[0])
            if found is not None:
                return found
        if product.rational() and len(variables) > 1:
            options = sorted(reductions(product, variables, self.facts), key=lambda r: r.rest.index)
            for option in options:
                inner = self.solve(option.rest, option.variables)
                if inner is not None:
                    return option.complete(inner)
        found = self.multiplied_out(product, variables)
        return found if found is not None else contour(product, self.facts)

    def one_variable(self, product: Product, x: Symbol) -> Outcome | None:
        """The last integral, by the strategies for one variable."""
        answer = attempt(Problem(product.as_expr((x,)), x, facts=self.facts, depth=1))
        general = trinomial(product, self.facts)
        if answer is None or (general is not None and narrower(answer.condition, general, self.facts)):
            return general
        if fragile(answer.value, Region(self.facts).holds(answer.condition)):
            found = contour(product, self.facts)
            if found is not None:
                return found
        return Outcome(answer.value, (), (answer.condition,), answer.steps, answer.sources, answer.special)

    def multiplied_out(self, product: Product, variables: tuple[Symbol, ...]) -> Outcome | None:
        """A whole positive power of a sum, term by term."""
        for base, p in product.sums:
            if not (p.is_Integer and p.is_negative):
                continue
            power = whole_power(base, int(-p))
            if power is None:
                continue
            rest = replace(product, sums=tuple(s for s in product.sums if s[0] != base))
            parts = []
            for c, e in power:
                powers = tuple(a + b for a, b in zip(rest.powers, e, strict=True))
                part = self.solve(replace(rest, coefficient=c, powers=powers), variables)
                if part is None:
                    return None
                parts.append(part)
            return added(parts)
        return None


def _in_order(product: Product, facts: Facts) -> Outcome | None:
    """Oscillating kernels at index 0: the wider region of the iterated integral, in the order given."""
    if product.tame() or product.index != 0 or product.tilts:
        return None
    condition = region_in_order(product, facts)
    return None if condition is None else contour(product, facts, condition)


def added(parts: Sequence[Outcome]) -> Outcome:
    """The sum of outcomes, where all of them hold."""
    if len(parts) == 1:
        return parts[0]
    return Outcome(
        Add(*(p.value for p in parts)),
        tuple(dict.fromkeys(c for p in parts for c in p.positive)),
        tuple(dict.fromkeys(b for p in parts for b in p.booleans)),
        tuple(s for p in parts for s in p.steps),
        tuple(s for p in parts for s in p.sources),
    )


def _untilted(outcome: Outcome, tilts: Sequence[tuple[Symbol, int]]) -> Outcome | None:
    """Powers of logarithms: derivatives in the exponents that stand for them."""
    if not tilts:
        return outcome
    value = outcome.value
    for eps, k in tilts:
        value = value.diff(eps, k)
    at = {eps: S.Zero for eps, _ in tilts}
    value = value.subs(at)
    if value.has(*BAD) or value.has(*at):
        return None
    return replace(
        outcome,
        value=value,
        positive=tuple(p.subs(at) for p in outcome.positive),
        booleans=tuple(b.subs(at) for b in outcome.booleans),
        special=(),
    )


def integrate_orthant(f: Expr, variables: Sequence[Symbol], facts: Facts) -> ClosedForm | None:
    """The integral of ``f`` over all positive values of the variables, or None.

    Parameters
    ----------
    f : Expr
    variables : sequence of Symbol
    facts : Facts

    Examples
    --------
    >>> from sympy import exp, symbols
    >>> from sympy_mellin_ext.orthant import integrate_orthant
    >>> from sympy_mellin_ext.region import Facts
    >>> x, y = symbols('x y', positive=True)
    >>> a, b = symbols('a b', real=True)
    >>> answer = integrate_orthant(x**(a - 1)*y**(b - 1)*exp(-x**2*y - x), (x, y), Facts())
    >>> answer.value, answer.condition
    (gamma(b)*gamma(a - 2*b), (b > 0) & (a > 2*b))
    """
    names = [x if x.is_positive else Dummy(x.name, positive=True) for x in variables]
    change = {x: n for x, n in zip(variables, names, strict=True) if x is not n}
    if change:
        f = f.subs(change)
    products = read_products(f, names, facts)
    if not products:
        return None
    search = Search(facts)
    parts = []
    for product in products:
        found = _in_order(product, facts) or search.solve(product, tuple(names))
        found = None if found is None else _untilted(found, product.tilts)
        if found is None:
            return None
        parts.append(found)
    return finished(added(parts), facts, names)


def finished(total: Outcome, facts: Facts, names: Sequence[Symbol] = ()) -> ClosedForm | None:
    """The closed form of an outcome; None where its conditions contradict one another."""
    region = Region(facts).positive(*total.positive).holds(*total.booleans)
    if region.empty:
        return None
    condition = region.to_boolean()
    value = tidy(collect_powers(total.value)) if total.value.is_Mul or total.value.is_Add else total.value
    if condition is S.false or value.has(*BAD) or value.has(*names) or condition.has(*names):
        return None
    return ClosedForm(
        value,
        condition,
        None,
        NAME,
        (*total.steps, Step("integral over the orthant", _SOURCE, value)),
        tuple(dict.fromkeys((*total.sources, _SOURCE))),
        total.special,
    )


__all__ = ["NAME", "integrate_orthant"]
