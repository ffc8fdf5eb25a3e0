"""Regions of parameters: signs, emptiness, the fewest inequalities, elimination.

The expected regions are common practice (conditions as handbooks print them); the property tests compare with
exact arithmetic at rational points and with an elimination written out here.
"""

import pickle
import subprocess
import sys
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy import (
    Abs,
    And,
    I,
    Max,
    Min,
    Mul,
    Ne,
    Not,
    Or,
    Q,
    Rational,
    S,
    Symbol,
    arg,
    cos,
    cosh,
    exp,
    gamma,
    im,
    log,
    nan,
    oo,
    pi,
    re,
    sqrt,
    symbols,
)

from sympy_mellin_ext.region import Facts, Region, project, real_part

s, t, nu, mu, k, m = symbols("s t nu mu k m", real=True)
a, b, c, d = symbols("a b c d", positive=True)
z, w = symbols("z w")
n = Symbol("n", integer=True, positive=True)
half = Rational(1, 2)


def test_real_part_splits_linear_forms():
    assert real_part(s) == s
    assert real_part(z) == re(z)
    assert real_part(2 * z + a * w / 3 - half) == 2 * re(z) + a * re(w) / 3 - half
    assert real_part(z * w) == re(z * w)
    assert real_part(nu * (z + I * a)) == nu * re(z)
    assert real_part(I * z) == -im(z)
    assert real_part(3 * I) == 0
    assert real_part(z, Facts([z > 0])) == z


@pytest.mark.parametrize(
    ("expr", "sign"),
    [
        (a + b, 1),
        (a * b, 1),
        (-a / b, -1),
        (nu**2 + 1, 1),
        (nu**2, None),
        (a - b, None),
        (1 + a / c, 1),
        (1 + nu / c, None),
        (2 * n + 1, 1),
        (2 * n - 1, 1),
        (half - n, -1),
        (n - 2, None),
        (n * a - a / 2, 1),
        (sqrt(a), 1),
        (exp(s), 1),
        (exp(z), None),
        (exp(-a) - 1, -1),
        (Abs(s) + 1, 1),
        (cosh(s) - half, 1),
        (cos(s) + 2, 1),
        (gamma(a + 1), 1),
        (log(1 + a), 1),
        (a**z, None),
        (a**s, 1),
        (pi - 3, 1),
        (sqrt(2) - Rational(3, 2), -1),
        (pi * a - 3 * a, 1),
        (Max(a, s), 1),
        (Min(-a, s), -1),
        (Min(a, s), None),
        ((nu - 1) ** 2 + a, 1),
        (S.Zero, 0),
        (z, None),
        (I * a, None),
    ],
)
def test_sign_from_assumptions(expr, sign):
    assert Facts().sign(expr) == sign


def test_sign_from_relations():
    assert Facts([a > b]).sign(a - b) == 1
    assert Facts([a > b]).sign(b**2 - a**2) == -1
    assert Facts([a > b]).sign(a * c - b * c) == 1
    assert Facts([a > b]).sign(sqrt(a**2 - b**2)) == 1
    assert Facts([s > t, t > 1]).sign(s) == 1
    assert Facts([s > t, t > 1]).sign(s - 2) is None
    assert Facts([z > 0]).sign(z + 1) == 1
    assert Facts([re(z) > 1]).sign(re(z) - half) == 1
    assert Facts([s >= 0, Ne(s, 0)]).sign(s) == 1
    assert Facts([Q.positive(s), And(t > s, nu > t)]).sign(nu) == 1
    assert Facts([n > Rational(3, 2)]).nonnegative(n - 2) is True
    assert Facts([Ne(a, b)]).nonzero(2 * a - 2 * b) is True
    assert Facts([Ne(z, 0)]).nonzero(z) is True
    assert Facts([s > Abs(t)]).sign(s + t) == 1


def test_questions_have_three_answers():
    facts = Facts([s > 0])
    assert (facts.positive(s), facts.positive(-s), facts.positive(t)) == (True, False, None)
    assert (facts.nonnegative(s), facts.nonnegative(-s), facts.nonnegative(z)) == (True, False, None)
    assert (facts.nonzero(s), facts.nonzero(s - s), facts.nonzero(t)) == (True, False, None)
    assert facts.implies(Or(t > 0, s > -1)) is True
    assert facts.implies(And(t > 0, s < -1)) is False
    assert facts.implies(Not(s > t, evaluate=False)) is None
    assert facts.implies(S.true) is True


@pytest.mark.parametrize("bad", [s, "a > 0", 3, None])
def test_given_must_be_relations(bad):
    with pytest.raises(ValueError, match="not a SymPy relation"):
        Facts([a > 0, bad, s > 0])


def test_facts_are_values():
    assert Facts([s > t]) == Facts((s > t,)) != Facts()
    assert len({Facts([s > t]), Facts([s > t]), Facts()}) == 2
    assert pickle.loads(pickle.dumps(Facts([s > t]))) == Facts([s > t])
    assert pickle.loads(pickle.dumps(Region().positive(s))).to_boolean() == (s > 0)
    assert Facts([s > t, t > s]).consistent is False
    assert Facts([s > t]).consistent is True


@pytest.mark.parametrize(
    ("inequalities", "expected"),
    [
        ([s, s + 1, 1 - s, a], "(s > 0) & (s < 1)"),
        ([1 + k / c], "k > -c"),
        ([k / c], "k > 0"),
        ([s - nu, s + nu, Rational(3, 2) - s], "(s < 3/2) & (s > Abs(nu))"),
        ([s - mu - nu, s - mu + nu, s + mu - nu, s + mu + nu], "s > Abs(mu) + Abs(nu)"),
        ([2 * t - nu, 2 * t + nu, s - t], "(s > t) & (t > Abs(nu)/2)"),
        ([re(z) - nu, re(z) + nu], "re(z) > Abs(nu)"),
        ([s, s + 2 * nu, 1 - s], "(s > 0) & (s < 1) & (2*nu + s > 0)"),
        ([nu + 1, a - b * nu], "(nu > -1) & (a > b*nu)"),
        ([nu + 1, 2 * m + Rational(3, 2) - nu], "(nu > -1) & (nu < 2*m + 3/2)"),
        ([mu, a * (n + 1) - mu, 2 * a - mu], "(mu > 0) & (mu < 2*a)"),
        ([mu + nu, half - mu], "(mu < 1/2) & (mu + nu > 0)"),
        ([s, b / 2 + Rational(1, 4) - s], "(s > 0) & (s < b/2 + 1/4)"),
        ([s, a - s, b - s], "(s > 0) & (s < a) & (s < b)"),
        ([s, b - a - s], "(s > 0) & (s < -a + b)"),
        ([a + b - s - t, t - s - half], "(s < t - 1/2) & (a + b > s + t)"),
        ([k - a], "k > a"),
        ([d - c], "c < d"),
        ([a + b - c / 2], "c < 2*a + 2*b"),
        ([m + c, c * k - m], "(m > -c) & (m < c*k)"),
        ([s, s * c + 1], "s > 0"),
        ([a**2 * b - a * c], "c < a*b"),
        ([sqrt(a) - sqrt(b)], "a > b"),
        ([b**2 - 4 * a**2], "b > 2*a"),
        ([a ** Rational(2, 3) - 4], "a > 8"),
        ([a**2 - 2], "a**2 > 2"),
        ([log(a) - log(b)], "a > b"),
        ([log(a)], "a > 1"),
        ([s**3], "s > 0"),
        ([s**2 * t], "(t > 0) & Ne(s, 0)"),
        ([(s - t) ** 2], "Ne(s, t)"),
        ([a / (a + b) - half], "a > b"),
        ([1 / (s - t)], "s > t"),
        ([s / (s + 1)], "s*(s + 1) > 0"),
        ([t * (s + 1) ** 2], "(t > 0) & Ne(s, -1)"),
        ([a - sqrt(2) * b], "a > sqrt(2)*b"),
        ([s - sqrt(2), 2 - sqrt(2) * s], "False"),
        ([s - Abs(nu)], "s > Abs(nu)"),
        ([s - Max(a, b), Min(a, 2 * b) - t], "(s > a) & (s > b) & (t < a) & (t < 2*b)"),
        ([Abs(nu) - s], "s < Abs(nu)"),
        ([pi / 2 - t, t, 2 - t], "(t > 0) & (t < pi/2)"),
        ([pi - arg(z), pi + arg(z)], "Abs(arg(z)) < pi"),
        ([c - d / 3 + 1, oo - s], "d < 3*c + 3"),
        ([-oo], "False"),
        ([s, -1 - s], "False"),
        ([a + b], "True"),
        ([-a], "False"),
        ([pi / 2 - t, t - 2], "False"),
    ],
)
def test_to_boolean(inequalities, expected):
    boolean = Region().positive(*inequalities).to_boolean()
    words = {
        "Abs": Abs,
        "re": re,
        "arg": arg,
        "Ne": Ne,
        "pi": pi,
        "sqrt": sqrt,
        **{x.name: x for x in (*_NAMES, z)},
    }
    assert boolean == S(expected, locals=words), boolean


_NAMES = (s, t, nu, mu, k, m, a, b, c, d, n)


def test_facts_are_not_repeated():
    assert Region(Facts([b < a])).positive(s - a, b - s).to_boolean() is S.false
    assert Region(Facts([a < b])).positive(s, a - s, b - s).to_boolean() == And(s > 0, s < a)
    assert Region(Facts([a > b])).holds(Ne(a, b), a + 1 > b).to_boolean() is S.true
    assert Region(Facts([s > 0])).positive(s + 1).to_boolean() is S.true


def test_conditions_that_are_not_inequalities():
    assert Region().holds(And(s > 0, s < 2, Ne(s, 1))).to_boolean() == And(s > 0, s < 2, Ne(s, 1))
    assert Region().holds(s > 0, Ne(s, 0), Ne(s, -1)).to_boolean() == (s > 0)
    assert Region().holds(re(z) > 0, Ne(z, 0)).to_boolean() == (re(z) > 0)
    assert Region().holds(re(z) > -1, Ne(z, 0)).to_boolean() == And(re(z) > -1, Ne(z, 0))
    assert Region().holds(Or(k > 0, s > 0), s > 1).to_boolean() == (s > 1)
    assert Region().holds(Or(k > 0, s > 0), s < -1).to_boolean() == And(k > 0, s < -1)
    assert Region().holds(Or(s > 2, s > 0), s < -1).empty
    assert Region().holds(s >= 0, s < 0).empty
    assert not Region().holds(s >= 0, s <= 0).empty
    assert Region().holds(s >= 0, s <= 0, Ne(s, 0)).empty
    assert Region().holds(S.false).empty
    with pytest.raises(ValueError, match="no sign"):
        Region().positive(nan)


def test_meet_and_implies():
    region = Region().positive(s).meet(Region().positive(1 - s))
    assert region.to_boolean() == And(s > 0, s < 1)
    assert region.implies(s > -1) is True
    assert region.implies(s > 1) is False
    assert region.implies(s > half) is None
    assert region.meet(Region().positive(s - 2)).empty


def test_region_is_immutable():
    region = Region().positive(s)
    region.positive(1 - s).holds(Ne(s, half))
    assert region.to_boolean() == (s > 0)


def test_project():
    assert project([c * k - s, mu - a * k], [k], Facts()) == [c * mu - a * s]
    assert set(project([s - k - 1, k - nu, k + nu], [k], Facts())) == {s - nu - 1, s + nu - 1}
    assert project([k - s, s - k], [k], Facts()) == [-1]
    assert project([k > a, k > 0], [k], Facts()) == []
    for wrong in ([k**2 - s], [nu * k - s], [k >= 0]):
        with pytest.raises(ValueError):
            project(wrong, [k], Facts())


def test_project_refuses_an_explosion():
    many = [s + j * t - j**2 for j in range(60)] + [j * nu - s - j**2 for j in range(60)]
    with pytest.raises(ValueError, match="too many"):
        project(many, [s], Facts())


def test_same_text_for_every_hash_seed():
    program = (
        "from sympy import *; from sympy_mellin_ext.region import Region, Facts, project;"
        "a,b,c=symbols('a b c',positive=True); s,t,nu,mu=symbols('s t nu mu',real=True);"
        "f=Facts([a>b, b>c, s>t]);"
        "print(Region(f).positive(s-mu,s+nu,a*s-b*t,t-nu,a+b-mu,c*mu-nu).holds(Or(s>0,mu>nu),Ne(nu,mu)),"
        "project([s-mu-nu,nu-t,a-nu,mu+nu,b*nu-s],[nu],f))"
    )
    texts = {
        subprocess.run(
            [sys.executable, "-c", program],
            env={"PYTHONHASHSEED": seed, "PATH": ""},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("1", "2", "3")
    }
    assert len(texts) == 1
    assert "Region(" in texts.pop()


# Properties.

_ATOMS = (s, t, nu, a, b)
_small = st.integers(-3, 3)
_linear = st.tuples(*[_small] * (len(_ATOMS) + 1))
_rational = st.fractions(min_value=-4, max_value=4, max_denominator=6)
_above_zero = st.fractions(min_value=Fraction(1, 6), max_value=4, max_denominator=6)
_point = st.tuples(_rational, _rational, _rational, _above_zero, _above_zero)


def _expr(row):
    return row[-1] + sum(x * atom for x, atom in zip(row, _ATOMS, strict=False))


def _value(row, point):
    return row[-1] + sum(x * y for x, y in zip(row, point, strict=False))


def _at(point):
    return {atom: Rational(x.numerator, x.denominator) for atom, x in zip(_ATOMS, point, strict=True)}


def _feasible(rows):
    """Fourier-Motzkin elimination of all unknowns from strict rows (coefficients, constant) and a, b > 0."""
    count = len(_ATOMS)
    rows = {tuple(map(Fraction, row)) for row in rows}
    for positive in (3, 4):
        rows.add(tuple(Fraction(int(j == positive)) for j in range(count + 1)))
    for j in range(count):
        above = [row for row in rows if row[j] > 0]
        below = [row for row in rows if row[j] < 0]
        rows = {row for row in rows if row[j] == 0}
        for p in above:
            for q in below:
                rows.add(tuple(x / p[j] - y / q[j] for x, y in zip(p, q, strict=True)))
    return all(row[-1] > 0 for row in rows)


@settings(max_examples=80, deadline=None)
@given(st.lists(_linear, min_size=1, max_size=5), st.lists(_point, min_size=6, max_size=6))
def test_boolean_agrees_with_the_raw_inequalities(rows, points):
    region = Region().positive(*map(_expr, rows))
    boolean = region.to_boolean()
    for point in points:
        raw = all(_value(row, point) > 0 for row in rows)
        assert (boolean.subs(_at(point)) == S.true) == raw
        assert region.contains(_at(point)) == raw


@settings(max_examples=80, deadline=None)
@given(st.lists(_linear, min_size=2, max_size=6))
def test_empty_is_exact_for_linear_systems(rows):
    assert Region().positive(*map(_expr, rows)).empty == (not _feasible(rows))


@settings(max_examples=60, deadline=None)
@given(st.lists(_linear, min_size=1, max_size=8), _point, _above_zero)
def test_feasible_systems_are_not_called_empty(rows, point, margin):
    shifted = [(*row[:-1], row[-1] - _value(row, point) + margin) for row in rows]
    exprs = [_expr([Rational(x.numerator, x.denominator) for x in row]) for row in shifted]
    assert not Region().positive(*exprs).empty


@settings(max_examples=60, deadline=None)
@given(st.lists(_linear, min_size=1, max_size=5))
def test_no_inequality_of_the_result_is_redundant(rows):
    region = Region().positive(*map(_expr, rows))
    needed = []
    if not _feasible(rows):
        assert region.to_boolean() is S.false
        return
    distinct = {tuple(Fraction(x, max(map(abs, row))) for x in row) for row in rows if any(row)}
    for row in distinct:
        others = distinct - {row} - {r for r in needed if r not in distinct}
        if _feasible_with_weak(others, row):
            needed.append(row)
    boolean = region.to_boolean()
    parts = 0 if boolean is S.true else len(boolean.args) if isinstance(boolean, And) else 1
    assert parts <= max(len(needed), 1)


def _feasible_with_weak(others, row):
    """Whether the others leave room for -row >= 0 (for small integers a small shift of the row tells)."""
    return _feasible([*others, (*[-x for x in row[:-1]], -row[-1] + Fraction(1, 10**12))])


_factor = st.sampled_from([a, b, s, t, 1 / a, a**2, sqrt(b), a + b, Abs(t), exp(s)])
_term = st.tuples(_small, st.lists(_factor, max_size=3)).map(lambda pair: pair[0] * Mul(*pair[1]))
_polynomial = st.lists(_term, min_size=1, max_size=3).map(sum)


@settings(max_examples=80, deadline=None)
@given(st.lists(_polynomial, min_size=1, max_size=3), st.lists(_point, min_size=5, max_size=5))
def test_nonlinear_inequalities_keep_their_meaning(exprs, points):
    exprs = [S(expr) for expr in exprs]
    region = Region().positive(*exprs)
    boolean = region.to_boolean()
    for point in points:
        values = [expr.subs(_at(point)).evalf(30) for expr in exprs]
        if any(abs(value) < 1e-20 and not expr.is_zero for value, expr in zip(values, exprs, strict=True)):
            continue
        raw = all(value > 0 for value in values)
        assert (boolean.subs(_at(point)) == S.true) == raw, (exprs, boolean, point)
        assert not (raw and region.empty)


@settings(max_examples=100, deadline=None)
@given(_polynomial, st.lists(_linear, max_size=2), _point)
def test_a_proved_sign_is_the_sign(expr, relations, point):
    told = [_expr(row) > 0 for row in relations if _value(row, point) > 0]
    sign = Facts(told).sign(S(expr))
    if sign is not None:
        value = S(expr).subs(_at(point)).evalf(30)
        assert bool(value > 0) - bool(value < 0) == sign


@settings(max_examples=50, deadline=None)
@given(st.lists(_linear, min_size=1, max_size=5), _point)
def test_projection_is_the_shadow(rows, point):
    shadow = project([_expr(row) for row in rows], [s], Facts())
    inside = all(S(expr).subs(_at(point)) > 0 for expr in shadow)
    lower = [-_value((0, *row[1:]), point) / Fraction(row[0]) for row in rows if row[0] > 0]
    upper = [-_value((0, *row[1:]), point) / Fraction(row[0]) for row in rows if row[0] < 0]
    fixed = all(_value(row, point) > 0 for row in rows if row[0] == 0)
    assert inside == (fixed and all(x < y for x in lower for y in upper))
