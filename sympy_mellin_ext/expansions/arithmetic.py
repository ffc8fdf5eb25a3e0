"""Laurent series of expressions in one small quantity, by arithmetic on truncated series; no limits are taken.

The functions are those that closed forms consist of: powers, exponentials and logarithms, Gamma and its
logarithmic derivatives, zeta functions, trigonometric functions, and any analytic function of which SymPy
knows all derivatives.

Sources: DLMF 5.7 and 5.15 (Gamma near its poles), 25.2.4 and 25.11 (zeta functions), 4.19 (trigonometric
functions); D. E. Knuth, The Art of Computer Programming 2 (1997), section 4.7 (powers of series).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

from sympy import (
    Abs,
    Add,
    Derivative,
    Dummy,
    Expr,
    Function,
    Integer,
    Mul,
    Piecewise,
    Pow,
    Rational,
    S,
    Subs,
    Symbol,
    beta,
    binomial,
    cos,
    cosh,
    cot,
    coth,
    csc,
    csch,
    dirichlet_eta,
    exp,
    factorial,
    ff,
    gamma,
    harmonic,
    log,
    loggamma,
    meijerg,
    polygamma,
    rf,
    sec,
    sech,
    sin,
    sinh,
    tan,
    tanh,
    zeta,
)

from ..dirichlet import NoClosedForm
from ..dirichlet.functions import eta_series, hurwitz_series
from ..gamma.laurent import Series, exponential, gamma_series, multiply
from ..gamma.shortest import positive_power

_BAD = (S.NaN, S.ComplexInfinity, S.Infinity, S.NegativeInfinity)
# analytic on both sides of nothing: an expansion would depend on the direction
_DISCONTINUOUS = ("re", "im", "arg", "conjugate", "sign", "Heaviside", "floor", "ceiling", "frac", "Max", "Min")


class NotMeromorphic(ValueError):
    """An expression that has no Laurent series here, or none that can be written in named functions."""


class TooFewTerms(NotMeromorphic):
    """Nothing is known of a quantity but that it is small: more terms are needed."""


def vanishes(c: Expr) -> bool:
    """Zero test of a coefficient: exact where it says yes; a number at a sample point is enough to say no."""
    from ..strategies.finite_part import vanishes as exactly

    if c.is_Number or c.is_Symbol:
        return bool(c.is_zero)
    return not _nonzero_somewhere(c) and exactly(c)


def _nonzero_somewhere(c: Expr) -> bool:
    point = {}
    for n, s in enumerate(sorted(c.free_symbols, key=str)):
        size = Rational(137 + 61 * n, 101)
        point[s] = -size if s.is_negative else size if not s.is_integer else Integer(n + (3 if s.is_odd else 2))
    try:
        value = c.xreplace(point).evalf(8)
    except (ValueError, TypeError, ArithmeticError, NotImplementedError):  # no number for one of its functions
        return False
    # a Float of one bit is what is left of a cancellation
    parts = value.as_real_imag()
    return all(p.is_Number for p in parts) and any(p.is_Float and p._prec > 1 and p != 0 for p in parts)


def series_of(expr: Expr, eps: Dummy, terms: int) -> Series:
    """Laurent series of ``expr`` at ``eps = 0``, with at most ``terms`` coefficients.

    Cancellation costs coefficients: the result may have fewer, and none where nothing is known but that it
    is of the order of its valuation.

    Raises
    ------
    NotMeromorphic
    """
    return _Expansion(eps, terms).of(expr)


class _Expansion:
    def __init__(self, eps: Dummy, terms: int) -> None:
        self.eps = eps
        self.terms = terms
        self.known: dict[Expr, Series] = {}

    def of(self, expr: Expr) -> Series:
        found = self.known.get(expr)
        if found is None:
            found = self.known[expr] = self._of(expr)
        return found

    def _of(self, expr: Expr) -> Series:
        if not expr.has_free(self.eps):
            if expr.has(*_BAD):
                raise NotMeromorphic(f"{expr} is not finite")
            return self.constant(expr)
        if expr == self.eps:
            return Series(1, self.padded([S.One]))
        if expr.is_Add:
            return self.sum([self.of(a) for a in expr.args])
        if expr.is_Mul:
            return self.product([self.of(a) for a in expr.args])
        if isinstance(expr, exp):
            return self.exponential(self.of(expr.args[0]), exp)
        if expr.is_Pow:
            return self.power(expr.base, expr.exp)
        if isinstance(expr, Function):
            return self.function(expr)
        raise NotMeromorphic(f"no series of {type(expr).__name__}")

    def constant(self, c: Expr) -> Series:
        return Series(0, self.padded([S.One]), c)

    def padded(self, coefficients: Sequence[Expr]) -> tuple[Expr, ...]:
        return (*coefficients, *[S.Zero] * (self.terms - len(coefficients)))[: self.terms]

    # -- arithmetic ------------------------------------------------------------------------------------------

    def sum(self, parts: Sequence[Series]) -> Series:
        parts = [p for p in parts if p.head is not S.Zero]
        if not parts:
            return self.constant(S.Zero)
        low = min(p.valuation for p in parts)
        top = min(p.valuation + len(p.coefficients) for p in parts)
        columns = [Add(*(p.coefficient(k) for p in parts)) for k in range(low, top)]
        while columns and vanishes(columns[0]):
            del columns[0]
            low += 1
        return Series(low, tuple(columns))

    def product(self, parts: Sequence[Series]) -> Series:
        result = parts[0]
        for p in parts[1:]:
            result = multiply(result, p, min(len(result.coefficients), len(p.coefficients)))
        return result

    def split(self, series: Series) -> tuple[Expr, Series]:
        """Value at 0 and the rest, a series of positive valuation."""
        if series.valuation < 0:
            raise NotMeromorphic("an essential singularity")
        if series.valuation > 0:
            return S.Zero, series
        if not series.coefficients:
            raise TooFewTerms("a value that nothing is known of")
        value = series.coefficient(0)
        rest = Series(1, series.coefficients[1:], series.head)
        while rest.coefficients and rest.coefficients[0] is S.Zero and len(rest.coefficients) > 1:
            rest = Series(rest.valuation + 1, rest.coefficients[1:], rest.head)
        return value.expand() if not value.is_Number else value, rest

    def compose(self, outer: Series, inner: Series) -> Series:
        """``outer`` in the small quantity ``inner``."""
        if not inner.coefficients:
            # nothing but its order is known
            if outer.valuation < 0:
                raise TooFewTerms("a pole in what may be zero")
            return Series(outer.valuation * inner.valuation, outer.coefficients[: not outer.valuation], outer.head)
        if not outer.coefficients:
            return Series(outer.valuation * inner.valuation, ())
        if inner.valuation == 1 and all(c is S.Zero for c in inner.coefficients[1:]):
            rate = inner.head * inner.coefficients[0]
            known = len(inner.coefficients) + (outer.valuation == 0)
            scaled = tuple(c * rate**k for k, c in enumerate(outer.coefficients[:known]))
            return Series(outer.valuation, scaled, outer.head * rate**outer.valuation)
        parts = []
        n = len(outer.coefficients)
        step = self.whole_power(inner, outer.valuation) if outer.valuation else self.constant(S.One)
        for k, c in enumerate(outer.coefficients):
            if c is not S.Zero:
                parts.append(step.times(c * outer.head))
            if k < n - 1:
                step = self.product([step, inner])
        first = outer.valuation * inner.valuation
        reach = first + n * inner.valuation  # what the truncation of the outer series leaves
        total = self.sum(parts)
        return Series(total.valuation, total.coefficients[: max(reach - total.valuation, 0)], total.head)

    def whole_power(self, series: Series, n: int) -> Series:
        if not series.coefficients:
            raise TooFewTerms("a power of what may be zero")
        head = series.head * series.coefficients[0]
        return Series(series.valuation * n, self.binomial_powers(series, Integer(n)), head ** Integer(n))

    def binomial_powers(self, series: Series, exponent: Expr) -> tuple[Expr, ...]:
        """Coefficients of ``(series/leading term)**exponent``, by Euler's recurrence."""
        lead = series.coefficients[0]
        a = [(c / lead).expand() if lead is not S.One else c for c in series.coefficients]
        b: list[Expr] = [S.One]
        for k in range(1, len(a)):
            total = Add(*((exponent * j - k + j) * a[j] * b[k - j] for j in range(1, k + 1)))
            b.append((total / k).expand())
        return tuple(b)

    # -- elementary functions --------------------------------------------------------------------------------

    def exponential(self, argument: Series, power_of: Callable[[Expr], Expr]) -> Series:
        """``power_of(argument)``, where ``power_of`` is exp or a like map of the value at 0."""
        value, rest = self.split(argument)
        n = rest.valuation - 1 + len(rest.coefficients)
        exponents = [rest.coefficient(k) for k in range(1, n + 1)]
        return Series(0, exponential(exponents, min(n + 1, self.terms)), power_of(value))

    def power(self, base: Expr, exponent: Expr) -> Series:
        if not base.has_free(self.eps):
            if base.is_zero:
                raise NotMeromorphic("a power of zero")
            argument = self.of(exponent)
            value, _ = self.split(argument)
            raised = self.exponential(argument.times(log(base)), exp)
            return raised._replace(head=positive_power(base, value))
        series = self.of(base)
        if not series.coefficients:
            raise TooFewTerms("a power of what may be zero")
        if exponent.is_Integer:
            return self.whole_power(series, int(exponent))
        if series.valuation:
            raise NotMeromorphic(f"a branch point of {base**exponent}")
        lead = series.coefficient(0)
        if not exponent.has_free(self.eps):
            return Series(0, self.binomial_powers(series, exponent), positive_power(lead, exponent))
        value, _ = self.split(self.of(exponent))
        raised = self.exponential(self.product([self.of(exponent), self.logarithm(series)]), exp)
        return raised._replace(head=positive_power(lead, value))

    def logarithm(self, series: Series) -> Series:
        if not series.coefficients:
            raise TooFewTerms("a logarithm of what may be zero")
        if series.valuation:
            raise NotMeromorphic("a branch point of a logarithm")
        lead = series.coefficients[0]
        a = [(c / lead).expand() for c in series.coefficients]
        logs: list[Expr] = [log(series.head * lead)]
        for k in range(1, len(a)):
            logs.append((a[k] - Add(*(j * logs[j] * a[k - j] for j in range(1, k))) / k).expand())
        return self.sum([Series(0, tuple(logs))])

    # -- functions -------------------------------------------------------------------------------------------

    def function(self, f: Function) -> Series:
        rewritten = _in_basic_functions(f)
        if rewritten is not None:
            return self.of(rewritten)
        kind = type(f)
        if kind is log:
            return self.logarithm(self.of(f.args[0]))
        if kind is gamma:
            value, rest = self.split(self.of(f.args[0]))
            return self.compose(gamma_series(_decided(value), S.One, 1, self.terms), rest)
        if kind is loggamma:
            value, rest = self.split(self.of(f.args[0]))
            if not _regular(value):
                raise NotMeromorphic("a branch point of loggamma")
            logs = [loggamma(value)] + [polygamma(k - 1, value) / factorial(k) for k in range(1, self.terms)]
            return self.compose(Series(0, tuple(logs)), rest)
        if kind is polygamma and f.args[0].is_Integer and f.args[0] >= 0:
            value, rest = self.split(self.of(f.args[1]))
            return self.compose(_polygamma_series(int(f.args[0]), _decided(value), self.terms), rest)
        if kind in (zeta, dirichlet_eta):
            found = self.zeta(f)
            if found is not None:
                return found
        if kind is Piecewise:
            return self.piecewise(f)
        if kind is Abs:
            return self.absolute(f)
        return self.analytic(f)

    def zeta(self, f: Function) -> Series | None:
        w, *parameter = f.args
        a = parameter[0] if parameter else S.One
        if a.has_free(self.eps):
            if w.has_free(self.eps):
                return None
            value, rest = self.split(self.of(a))
            if not _regular(value):
                raise NotMeromorphic("a pole of the Hurwitz zeta function in its parameter")
            # DLMF 25.11.17
            taylor = [(-1) ** k * rf(w, k) / factorial(k) * zeta(w + k, value) for k in range(self.terms)]
            return self.compose(Series(0, tuple(taylor)), rest)
        value, rest = self.split(self.of(w))
        if isinstance(f, dirichlet_eta):
            try:
                outer = eta_series(value, S.One, self.terms)
            except NoClosedForm:
                return self.of((1 - 2 ** (1 - w)) * zeta(w))
        elif value is S.One:
            outer = hurwitz_series(value, S.One, a, self.terms)
        else:
            outer = Series(0, tuple(_zeta_coefficient(k, value, a) for k in range(self.terms)))
        return self.compose(outer, rest)

    def piecewise(self, f: Piecewise) -> Series:
        """The branch that holds near, but not at, ``eps = 0``."""
        for value, condition in f.args:
            near = condition.xreplace({self.eps: S.Zero}) if condition not in (True, False) else condition
            if condition == True or (near == True and not condition.has(self.eps)):  # noqa: E712
                return self.of(value)
            if condition == False or (condition.is_Relational and condition.rel_op == "=="):  # noqa: E712
                continue
            if condition.is_Relational and condition.rel_op in ("<", ">") and near in (True, False):
                if near == True:  # noqa: E712
                    return self.of(value)
                if (condition.lhs - condition.rhs).xreplace({self.eps: S.Zero}).is_nonzero:
                    continue
            raise NotMeromorphic("a Piecewise whose branch cannot be decided")
        raise NotMeromorphic("a Piecewise without a branch")

    def absolute(self, f: Abs) -> Series:
        series = self.of(f.args[0])
        if not series.coefficients:
            raise TooFewTerms("an absolute value of what may be zero")
        if series.valuation:
            raise NotMeromorphic("an absolute value of zero")
        lead = series.coefficient(0)
        if lead.is_positive or lead.is_negative:
            return series if lead.is_positive else series.times(S.NegativeOne)
        raise NotMeromorphic("an absolute value of unknown sign")

    def analytic(self, f: Function) -> Series:
        """Taylor's series of a function of which one argument moves, from SymPy's derivatives."""
        moving = [i for i, a in enumerate(f.args) if isinstance(a, Expr) and a.has_free(self.eps)]
        if len(moving) != 1 or type(f).__name__ in _DISCONTINUOUS:
            raise NotMeromorphic(f"no series of {type(f).__name__} in these arguments")
        value, rest = self.split(self.of(f.args[moving[0]]))
        if isinstance(f, meijerg) and value.is_zero:
            raise NotMeromorphic("a branch point of meijerg")
        t = Dummy("t")
        arguments = list(f.args)
        arguments[moving[0]] = t
        derivative = f.func(*arguments)
        taylor = []
        for k in range(self.terms):
            at_value = derivative.subs(t, value)
            if at_value.has(*_BAD, Derivative, Subs) or any(p.base.is_zero for p in at_value.atoms(Pow)):
                raise NotMeromorphic(f"no Taylor series of {type(f).__name__} at {value}")
            taylor.append(at_value / factorial(k))
            derivative = derivative.diff(t)
        return self.compose(self.sum([Series(0, tuple(taylor))]), rest)


def _in_basic_functions(f: Function) -> Expr | None:
    """Functions that are quotients of others, so that poles come out of the division."""
    kind, z = type(f), f.args[0]
    quotients = {
        tan: (sin, cos), cot: (cos, sin), tanh: (sinh, cosh), coth: (cosh, sinh),
        sec: (None, cos), csc: (None, sin), sech: (None, cosh), csch: (None, sinh),
    }  # fmt: skip
    if kind in quotients:
        above, below = quotients[kind]
        return (S.One if above is None else above(z)) / below(z)
    if kind is factorial:
        return gamma(z + 1)
    if kind is harmonic and len(f.args) == 1:
        return polygamma(0, z + 1) + S.EulerGamma
    if kind is beta:
        b = f.args[1]
        return Mul(gamma(z), gamma(b), 1 / gamma(z + b))
    if kind is binomial:
        k = f.args[1]
        return gamma(z + 1) / (gamma(k + 1) * gamma(z - k + 1))
    if kind is rf:
        return gamma(z + f.args[1]) / gamma(z)
    if kind is ff:
        return gamma(z + 1) / gamma(z + 1 - f.args[1])
    return None


def _decided(z: Expr) -> Expr:
    """``z``, if it is known whether Gamma has a pole there."""
    if z.is_integer and not z.is_Integer and not z.is_positive:
        raise NotMeromorphic(f"Gamma at {z}, which may be a pole")
    return z


def _regular(z: Expr) -> bool:
    return not (_decided(z).is_Integer and z <= 0)


def _polygamma_series(m: int, z: Expr, terms: int) -> Series:
    """``polygamma(m, z + delta)``; at a pole from ``log Gamma`` there, DLMF 5.7.3 and 5.15.1."""
    if not (z.is_Integer and z <= 0):
        return Series(0, tuple(polygamma(m + k, z) / factorial(k) for k in range(terms)))
    n = -z
    coefficients: list[Expr] = [S.NegativeOne ** (m + 1) * factorial(m)] + [S.Zero] * m
    for k in range(m + 1, terms + m + 1):
        log_derivative = -S.EulerGamma + harmonic(n) if k == 1 else (-1) ** k * zeta(k) + harmonic(n, k)
        coefficients.append(log_derivative * ff(k - 1, m))
    return Series(-m - 1, tuple(coefficients[:terms]))


def _zeta_coefficient(k: int, w: Expr, a: Expr) -> Expr:
    """The k-th Taylor coefficient of ``zeta(w, a)`` in w, as a derivative where it has no other name."""
    try:
        return hurwitz_series(w, S.One, a, k + 1).coefficient(k)
    except NoClosedForm:
        t = unused_symbol("t", w, a)
        return Subs(Derivative(zeta(t) if a is S.One else zeta(t, a), (t, k)), t, w) / factorial(k)


def unused_symbol(name: str, *exprs: Expr) -> Symbol:
    """A symbol of this name, or a longer one, that does not occur in the expressions."""
    taken = {str(s) for e in exprs for s in e.free_symbols}
    while name in taken:
        name += "_"
    return Symbol(name)
