"""The whole line: normal densities, functions of exp(x), and the two halves."""

from __future__ import annotations

from sympy import (
    Add,
    Dummy,
    Expr,
    Mul,
    Poly,
    PolynomialError,
    Pow,
    S,
    Symbol,
    binomial,
    cos,
    cosh,
    coth,
    count_ops,
    csch,
    erf,
    erfc,
    exp,
    factorial2,
    log,
    oo,
    pi,
    preorder_traversal,
    sech,
    sin,
    sinh,
    sqrt,
    tanh,
)

from ...closed_form import ClosedForm, Step
from ...problem import Problem
from ...region import Region, real_part
from ...steps import ADDITIVITY, CHANGE, SYMMETRY
from .combined import added
from .finite import fresh, handed_on

NAME = "whole line"
_HYPERBOLIC = (sinh, cosh, tanh, coth, sech, csch)
_MOST_MOMENTS = 40


def on_line(problem: Problem) -> ClosedForm | None:
    """(-oo, oo)."""
    f, x = problem.integrand, problem.variable
    y = fresh(problem, real=True)
    f = f.xreplace({x: y})
    answer = gaussian(problem, f, y)
    if answer is not None:
        return answer
    changed = of_exponential(f, y)
    if changed is not None:
        t, inner = changed
        answer = handed_on(problem, inner, t)
        if answer is not None:
            return added(problem, [(S.One, answer)], Step("substitution t = exp(x)", CHANGE))
    centre = _centre(f, y)
    if centre is not None and centre is not S.Zero:
        f = _shifted(f, y, centre)
    return _halves(problem, f, y)


def on_left(problem: Problem) -> ClosedForm | None:
    """(-oo, b) by x -> -x."""
    f, x, b = problem.integrand, problem.variable, problem.upper
    y = fresh(problem, real=True)
    return handed_on(problem, f.xreplace({x: -y}), y, -b, oo)


def _halves(problem: Problem, f: Expr, y: Symbol) -> ClosedForm | None:
    """Both half lines by themselves; an even function once, an odd one only for its convergence."""
    t = fresh(problem, positive=True)
    flipped = f.xreplace({y: -y})
    right, left = f.xreplace({y: t}), flipped.xreplace({y: t})
    answer = handed_on(problem, right, t)
    if answer is None:
        return None
    if flipped == f or left == right:
        return added(problem, [(S(2), answer)], Step("even integrand: twice the half line", SYMMETRY))
    if flipped == -f or left == -right:
        return added(problem, [(S.Zero, answer)], Step("odd integrand", SYMMETRY))
    other = handed_on(problem, left, t)
    if other is None:
        return None
    return added(problem, [(S.One, answer), (S.One, other)], Step("two half lines", ADDITIVITY))


# -- exp(quadratic) times polynomials and waves --------------------------------------------------------------


def gaussian(problem: Problem, f: Expr, x: Symbol) -> ClosedForm | None:
    """``P(x)*exp(-a*x**2 + b*x + c)``, with cos and sin of linear arguments: complete the square.

    ``int x**n*exp(-a*x**2) dx = (n-1)!!*(2a)**(-n/2)*sqrt(pi/a)`` for even n (DLMF 5.9.1 with x**2).
    """
    if not any(type(node) is exp and node.has_free(x) for node in preorder_traversal(f)):
        return None
    parts = f.args if type(f) is Mul else (f,)
    exponent, waves, errors, rest, front = S.Zero, [], [], [], S.One
    for part in parts:
        kind = type(part)
        if not part.has_free(x):
            front = front * part
        elif kind is exp:
            exponent += part.args[0]
        elif kind is Pow and type(part.base) is exp and not part.exp.has_free(x):
            exponent += part.base.args[0] * part.exp
        elif kind in (cos, sin) and part.has_free(x):
            waves.append(part)
        elif kind in (erf, erfc) and part.has_free(x):
            errors.append(part)
        else:
            rest.append(part)
    if len(waves) > 2 or len(errors) > 1 or (waves and errors):
        return None
    quadratic = _coefficients(exponent, x, 2)
    if quadratic is None or quadratic[2] is S.Zero:
        if type(f) is Add or any(type(r) is Add and r.has(exp) for r in rest):
            return _gaussian_sum(problem, f, x)
        return None
    polynomial = _coefficients(Mul(*rest), x, _MOST_MOMENTS)
    if polynomial is None:
        return _gaussian_sum(problem, f, x) if any(type(r) is Add and r.has(exp) for r in rest) else None
    c, b, a = quadratic[0], quadratic[1], -quadratic[2]
    if problem.facts.sign(real_part(a)) in (0, -1):
        return problem.refuse("diverges", "the square does not decay")
    if errors:
        answer = _error_function(problem, polynomial, a, b, c, errors[0], x)
        return None if answer is None else answer.times(front)
    modes = [(S.One, S.Zero)]
    for wave in waves:
        linear = _coefficients(wave.args[0], x, 1)
        if linear is None or not (linear[0].is_real and linear[1].is_real):
            return None
        turn = S.ImaginaryUnit
        signs = ((S.Half, 1), (S.Half, -1)) if type(wave) is cos else ((-turn / 2, 1), (turn / 2, -1))
        modes = [(m * k * exp(s * turn * linear[0]), w + s * linear[1]) for m, w in modes for k, s in signs]
    if waves and a.is_real and b.is_real and len(waves) == 1:
        value = _one_wave(polynomial, a, b, c, waves[0], x)
    else:
        value = Add(*(m * _moments(polynomial, a, b + S.ImaginaryUnit * w, c) for m, w in modes))
    value = front * value
    condition = Region(problem.facts).positive(real_part(a)).to_boolean()
    return ClosedForm(
        value,
        condition,
        None,
        NAME,
        (Step("square completed", "DLMF 5.9.1 with x**2", value),),
        ("DLMF 5.9.1",),
    )


def _error_function(
    problem: Problem, polynomial: list[Expr], a: Expr, b: Expr, c: Expr, error: Expr, x: Symbol
) -> ClosedForm | None:
    """A normal density times erf(m*x + h): integrated derivative in h; moments are derivatives in b.

    ``int exp(-a*x**2 + b*x)*erf(m*x + h) dx = sqrt(pi/a)*exp(b**2/(4a))*erf((h + m*b/(2a))/sqrt(1 + m**2/a))``
    (DLMF 7.2.1 with 5.9.1).
    """
    linear = _coefficients(error.args[0], x, 1)
    if linear is None or not all(v.is_real for v in (a, b, *linear)):
        return None
    h, m = linear[0], linear[1]
    q = Dummy("q", real=True)
    plain = sqrt(pi) / sqrt(a) * exp(c + q**2 / (4 * a))
    mean = plain * erf((h + m * q / (2 * a)) * sqrt(a) / sqrt(a + m**2))
    if type(error) is erfc:
        mean = plain * erfc((h + m * q / (2 * a)) * sqrt(a) / sqrt(a + m**2))
    total: Expr = S.Zero
    for n, p in enumerate(polynomial):
        if n:
            mean = mean.diff(q)
        total += p * mean
    value = total.xreplace({q: b})
    condition = Region(problem.facts).positive(a).to_boolean()
    step = Step("normal density times an error function", "DLMF 7.2.1 with 5.9.1", value)
    return ClosedForm(value, condition, None, NAME, (step,), ("DLMF 7.2.1", "DLMF 5.9.1"))


def _gaussian_sum(problem: Problem, f: Expr, x: Symbol) -> ClosedForm | None:
    expanded = f.expand(func=False, trig=False, power_base=False, log=False)
    if type(expanded) is not Add or len(expanded.args) > _MOST_MOMENTS:
        return None
    answers = [gaussian(problem, term, x) for term in expanded.args]
    if any(a is None for a in answers):
        return None
    return added(problem, [(S.One, a) for a in answers if a is not None])


def _coefficients(expr: Expr, x: Symbol, degree: int) -> list[Expr] | None:
    """Coefficients of a polynomial in x, lowest first, padded to length 3."""
    try:
        poly = Poly(expr, x)
    except PolynomialError:
        return None
    if poly.degree() > degree or any(c.has_free(x) for c in poly.coeffs()):
        return None
    coefficients = poly.all_coeffs()[::-1]
    return coefficients + [S.Zero] * (3 - len(coefficients))


def _moments(polynomial: list[Expr], a: Expr, b: Expr, c: Expr) -> Expr:
    centre = b / (2 * a)
    total: list[Expr] = []
    for n, p in enumerate(polynomial):
        if p is S.Zero:
            continue
        total.append(
            p
            * Add(
                *(
                    binomial(n, k) * centre ** (n - k) * factorial2(k - 1) / (2 * a) ** (k // 2)
                    for k in range(0, n + 1, 2)
                )
            )
        )
    exponent = c + b**2 / (4 * a)
    if not exponent.is_number:
        exponent = exponent.expand() if exponent.expand().count_ops() < exponent.count_ops() else exponent
        exponent = exponent.cancel() if exponent.is_Add else exponent
    moments = Add(*total)
    if moments.is_Add:
        moments = min(moments, moments.expand(), key=count_ops)
    return sqrt(pi) / sqrt(a) * moments * exp(exponent)


def _one_wave(polynomial: list[Expr], a: Expr, b: Expr, c: Expr, wave: Expr, x: Symbol) -> Expr:
    """One real wave: the real or imaginary part of the complex square."""
    linear = _coefficients(wave.args[0], x, 1)
    assert linear is not None
    w, phase = linear[1], linear[0] + b * linear[1] / (2 * a)
    u = Dummy("u", real=True)
    # centre = b/(2a) + I*w/(2a); the moments are polynomials in it
    moments = Add(
        *(
            p * binomial(n, k) * u ** (n - k) * factorial2(k - 1) / (2 * a) ** (k // 2)
            for n, p in enumerate(polynomial)
            if p is not S.Zero
            for k in range(0, n + 1, 2)
        )
    )
    re_c, im_c = b / (2 * a), w / (2 * a)
    re_part, im_part = S.Zero, S.Zero
    for (n,), coefficient in Poly(moments, u).terms() if moments.has(u) else [((0,), moments)]:
        for k in range(n + 1):
            piece = coefficient * binomial(n, k) * re_c ** (n - k) * im_c**k
            if k % 2:
                im_part += (-1) ** (k // 2) * piece
            else:
                re_part += (-1) ** (k // 2) * piece
    if type(wave) is cos:
        total = re_part * cos(phase) - im_part * sin(phase)
    else:
        total = re_part * sin(phase) + im_part * cos(phase)
    return sqrt(pi) / sqrt(a) * exp(c + b**2 / (4 * a) - w**2 / (4 * a)) * total


# -- functions of exp(x) -------------------------------------------------------------------------------------


def of_exponential(f: Expr, x: Symbol) -> tuple[Symbol, Expr] | None:
    """``f(log t)/t`` where x occurs in ``exp(c*x)`` and as a factor or sum of powers; None elsewhere."""
    if not f.has(exp, *_HYPERBOLIC):
        return None
    f = f.replace(lambda n: isinstance(n, _HYPERBOLIC) and n.has_free(x), lambda n: n.rewrite(exp))
    if f.has(sin, cos):
        f = f.replace(lambda n: isinstance(n, (sin, cos)) and n.has_free(x), lambda n: n.rewrite(exp))
    t = Dummy("t", positive=True)
    changed = _exponentials(f, x, t)
    if changed is None:
        return None
    return t, changed / t


def _exponentials(f: Expr, x: Symbol, t: Symbol) -> Expr | None:
    """``exp(c*x + d)`` becomes ``exp(d)*t**c``; a bare x becomes log(t)."""
    if not f.has_free(x):
        return f
    if f == x:
        return log(t)
    if type(f) is exp:
        linear = _coefficients(f.args[0], x, 1)
        if linear is not None:
            return exp(linear[0]) * t ** linear[1]
        return _split_exponential(f.args[0], x, t)
    if type(f) is Pow and f.base.is_positive and not f.base.has_free(x):
        linear = _coefficients(f.exp, x, 1)
        if linear is not None:
            return f.base ** linear[0] * t ** (linear[1] * log(f.base))
    args = [_exponentials(a, x, t) for a in f.args]
    if any(a is None for a in args):
        return None
    return f.func(*args)


def _split_exponential(exponent: Expr, x: Symbol, t: Symbol) -> Expr | None:
    """``exp(a*x + g(exp(x)))``: the linear terms give a power of t."""
    front: Expr = S.One
    rest: Expr = S.Zero
    for part in exponent.args if type(exponent) is Add else (exponent,):
        linear = _coefficients(part, x, 1)
        if linear is not None:
            front = front * exp(linear[0]) * t ** linear[1]
            continue
        changed = _exponentials(part, x, t)
        if changed is None or changed.has(log(t)):
            return None
        rest = rest + changed
    return front * exp(rest)


# -- shifts --------------------------------------------------------------------------------------------------


def _centre(f: Expr, x: Symbol) -> Expr | None:
    """The c for which f depends on x - c only, as far as sums in f show it."""
    found: Expr | None = None
    for node in preorder_traversal(f):
        if type(node) is not Add or not node.has_free(x):
            continue
        coefficients = _coefficients(node, x, 2)
        if coefficients is None:
            continue
        c0, c1, c2 = coefficients[:3]
        here = -c0 / c1 if c2 is S.Zero else -c1 / (2 * c2)
        if found is None:
            found = here
        elif (found - here).expand() is not S.Zero:
            return None
    if found is None or not found.is_real:
        return None
    return found


def _shifted(f: Expr, x: Symbol, centre: Expr) -> Expr:
    """``f(x + centre)`` with quadratics in x multiplied out."""
    return f.xreplace({x: x + centre}).replace(
        lambda node: type(node) is Add and node.has_free(x) and _coefficients(node, x, 2) is not None,
        lambda node: Add(*(c * x**n for (n,), c in Poly(node, x).terms())),
    )
