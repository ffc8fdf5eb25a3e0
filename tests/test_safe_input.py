"""Text that nobody vouches for: what is read, what is refused, how fast, and that nothing else happens."""
from __future__ import annotations

import itertools
import json
import random
import re
import string
import sys
import time
from pathlib import Path

import pytest
from sympy import Eq, Expr, Integer, Ne, Piecewise, Rational, Symbol, exp, gamma, hyper, oo, symbols, sympify

import sympy_mellin_ext
from sympy_mellin_ext.batch import InputError, read_condition, read_expression, read_symbol
from sympy_mellin_ext.batch.names import ASSUMPTIONS, FUNCTIONS

PACKAGE = Path(sympy_mellin_ext.__file__).parent
DATA = Path(__file__).parent / "data"
x, a, b = symbols("x a b")
NAMES = {"x": x, "a": a, "b": b}


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("exp(-0.5*x**2)", exp(-(x**2) / 2)),
        ("1/3*x", x / 3),
        ("  2*x\n + 1 ", 2 * x + 1),
        ("1.25e-3", Rational(1, 800)),
        ("-x**2", -(x**2)),
        ("Rational(2, 3)", Rational(2, 3)),
        ("0.0", Integer(0)),
        ("hyper([a, b], [1], -x)", hyper((a, b), (1,), -x)),
        ("Piecewise((x, a > b), (0, True))", Piecewise((x, a > b), (0, True))),
        ("oo", oo),
        ("+".join(["x"] * 1000), 1000 * x),
    ],
)
def test_reads(text: str, value: Expr) -> None:
    assert read_expression(text, NAMES) == value


def test_reads_conditions() -> None:
    r, q = symbols("r q", real=True)
    known = {"r": r, "q": q}
    assert read_condition("0 < r < q", known) == (r > 0) & (r < q)
    assert read_condition("(r > 0) | ~(q >= r)", known) == (r > 0) | (q < r)
    assert read_condition("r != 1 and q == 2", known) == Ne(r, 1) & Eq(q, 2)
    with pytest.raises(InputError, match="put each relation in brackets"):
        read_condition("r > 0 & q > 0", known)
    with pytest.raises(InputError, match="a relation"):
        read_condition("r + q", known)
    with pytest.raises(InputError, match="not a condition"):
        read_expression("r > q", known)


def test_published_integrals_are_read_as_the_host_reads_them() -> None:
    for file in sorted(DATA.glob("*.jsonl"))[::3]:
        for line in file.read_text().splitlines()[::2]:
            record = json.loads(line)
            known = {name: Symbol(name, **ASSUMPTIONS[kind]) for name, kind in record["symbols"].items()}
            for variable in [record["variable"]] if "variable" in record else [v for v, _, _ in record["limits"]]:
                known[variable] = Symbol(variable, positive=True)
            for field in ("integrand", "value"):
                text = record[field]
                if "Sum" not in text:  # the host's index would be a symbol of the integral
                    assert read_expression(text, known) == sympify(text, locals=known), record["id"]


REFUSED = [
    ("x.__class__.__bases__", "attributes"),
    ("().__class__", "attributes"),
    ("__import__(a)", "unknown function __import__"),
    ("__import__('os')", "character \"'\" is not accepted"),
    ("[y for y in x]", "comprehensions"),
    ("x[0]", "subscripts"),
    ("x if a else b", "if ... else"),
    ("(lambda)(x)", "not a formula"),
    ("f(x)", "unknown function f"),
    ("gama(x)", "did you mean gamma?"),
    ("x(3)", "x is a symbol, not a function"),
    ("exp", "exp is a function"),
    ("exp(x, evaluate=0)", "keyword arguments"),
    ("exp(*x)", "starred"),
    ("x^2", r"powers are written \*\*"),
    ("y", "unknown name y"),
    ("alpha + x", "symbols are declared"),
    ("9**9**9", "numerical exponent"),
    ("2**2**2**2**2**2", "numerical exponent"),
    ("((2*x)**1000)**1000", "too large"),
    ("(sqrt(2)**1000)**1000", "too large"),
    ("exp(exp(exp(exp(9))))", "larger than 1000"),
    ("factorial(10**8)", "larger than 1000"),
    ("zeta(10**6)", "larger than 100"),
    ("legendre(10**5, x)", "larger than 20"),
    ("1" * 61, "more than 60 digits"),
    ("1e999", "between 1e-60 and 1e60"),
    ("1e-999", "between 1e-60 and 1e60"),
    ("3j", "imaginary unit is I"),
    ("(" * 41 + "x" + ")" * 41, "brackets are nested"),
    ("-" * 100 + "x", "nested more than 40 deep"),
    ("sin(" * 9 + "x" + ")" * 9, "functions are nested more than 8 deep"),
    ("**".join(["x"] * 100), "nested more than 40 deep"),
    ("+".join(["x"] * 4000), "more than 3000 parts|nested too deeply"),
    ("x" * 10_001, "too long"),
    ("", "the text is empty"),
    ("(x", "is not closed"),
    ("x)", "no matching"),
    ("x +", "not a formula"),
    ("x y", "not a formula"),
    ("x / 0", "infinite or undefined"),
    ("x // 2", "of the operators"),
    ("x, a", "one formula"),
    ("exp()", "exp takes 1 argument"),
    ("besselj(x)", "besselj takes 2 arguments, not 1"),
    ("hyper(1, 2, x)", "two lists"),
    ("Piecewise((x, x))", "pairs"),
    ("I < 3", "SymPy refuses this"),
    ("\x00", "is not accepted"),
    ("x\\", "is not accepted"),
]


@pytest.mark.parametrize(("text", "message"), REFUSED, ids=range(len(REFUSED)))
def test_refuses_at_once_with_the_reason(text: str, message: str) -> None:
    start = time.process_time()
    with pytest.raises(InputError, match=message):
        read_expression(text, NAMES)
    assert time.process_time() - start < 0.05


def test_positions() -> None:
    with pytest.raises(InputError) as caught:
        read_expression("  exp(-x) + gama(x)", NAMES)
    assert caught.value.position == 12
    assert caught.value.pointed().splitlines()[2].index("^") == 4 + 12
    with pytest.raises(InputError) as caught:
        read_expression("ω*λ + z", {"ω": Symbol("ω"), "λ": Symbol("λ")})
    assert caught.value.position == 6


def test_the_most_that_each_function_may_be_asked_takes_no_time() -> None:
    slowest = (0.0, "")
    for name, row in FUNCTIONS.items():
        if name == "Rational":
            continue
        bound = str(row.bound)
        for arguments in itertools.product((bound, f"1/2-{bound}", "x"), repeat=row.least):
            text = f"{name}({', '.join(arguments)})"
            start = time.process_time()
            try:
                read_expression(text, NAMES)
            except InputError:
                continue
            finally:
                slowest = max(slowest, (time.process_time() - start, text))
    assert slowest[0] < 1, slowest


def _nested(name: str, others: int, depth: int, leaves: itertools.count) -> str:
    if not depth:
        return f"x*{next(leaves)}"
    parts = " + ".join(_nested(name, others, depth - 1, leaves) for _ in range(2))
    return f"{name}({'1/2, ' * others}1 + {parts})"


def test_nested_functions_take_no_time() -> None:
    for name, row in FUNCTIONS.items():
        start = time.process_time()
        try:
            read_expression(_nested(name, row.least - 1, 5, itertools.count(1)), NAMES)
        except InputError:
            continue
        finally:
            assert time.process_time() - start < 1, name


def test_symbols() -> None:
    assert read_symbol("a", "positive") == Symbol("a", positive=True)
    for name, kind, message in [
        ("pi", "real", "constant"), ("lambda", "real", "word of Python"), ("__a", "real", "underscores"),
        ("a b", "real", "not a name"), ("a", "positiv", "did you mean positive?"), ("ﬁ", "real", "not a name"),
    ]:
        with pytest.raises(InputError, match=message):
            read_symbol(name, kind)


def test_a_function_name_may_be_a_symbol_as_well() -> None:
    beta = Symbol("beta", positive=True)
    assert read_expression("beta*gamma(beta)", {"beta": beta}) == beta * gamma(beta)


def test_nothing_on_this_path_turns_text_into_code() -> None:
    pattern = re.compile(r"\b(eval|exec|sympify|parse_expr|lambdify|compile|__import__|S)\s*\(|sympify")
    for file in [PACKAGE / "__main__.py", *sorted((PACKAGE / "batch").glob("*.py"))]:
        for number, line in enumerate(file.read_text().splitlines(), start=1):
            found = pattern.search(re.sub(r"re\.compile\(", "", line))
            assert not found, f"{file.name}:{number}: {line}"


def _hostile(source: random.Random) -> str:
    """One string: noise, words of the language at random, a damaged formula, or an attack with its parts exchanged."""
    kind = source.randrange(8)
    if kind == 0:
        return "".join(chr(source.choice((source.randrange(32, 127), source.randrange(0x2FFF)))) for _ in range(20))
    if kind == 1:
        return "".join(source.choices(string.printable, k=source.randrange(1, 40)))
    words = ["x", "a", "(", ")", "**", "9", "1/2", "-", "~", "exp", ",", "I", "oo", "[", "]", "=", "<", "&", "for ",
             "if ", ".", "not ", "lambda ", "gamma(", "1e9", "Piecewise(", "hyper(", "_", "\n", "|", " "]
    if kind <= 3:
        return "".join(source.choices(words, k=source.randrange(1, 25)))
    if kind <= 5:
        good = source.choice(["x**(a-1)*exp(-b*x)", "hyper([a, b], [1], -x)", "besselj(0, b*x)/(x**2 + a**2)",
                              "Piecewise((x, a > b), (0, True))", "log(1 + x)**2/gamma(a)"])
        place, cut = source.randrange(len(good)), source.randrange(4)
        return good[:place] + source.choice(words) + good[place + cut:]
    name = source.choice([*FUNCTIONS, "open", "eval", "__import__", "getattr", "globals", "print", "type", "Symbol"])
    attack = source.choice(["{0}({1})", "{0}({0}({0}({1})))", "{0}({1}, {1})", "{1}.{0}", "{0}.__class__({1})",
                            "{1}**{0}", "({1})**({1})**({1})", "[{0} for {0} in {1}]", "{0}({1}" + "({1}" * 9,
                            "{0}(" * 15 + "{1}"])
    return attack.format(name, source.choice(["9**9", "x", "-1", "10**9", "os", "1e60", "1/0", "a" * 50, "0", "I*9"]))


def test_fuzz() -> None:
    """A hundred thousand strings: only formulas and refusals come out, and nothing outside is touched."""
    events: list[str] = []
    watched = False

    def hook(event: str, arguments: tuple) -> None:
        if not watched or event in ("compile", "object.__getattr__", "sys._getframe", "builtins.id"):
            return
        # two places below us write loops over whole numbers as code: products of monomials, hypergeometric sums
        frame = sys._getframe(1)
        if event == "exec" and frame.f_code.co_name in ("_build", "make_hyp_summator", "exec_"):
            return
        # the host imports parts of itself when they are first needed
        if event in ("import", "open", "exec", "marshal.loads") and "sympy" in repr(arguments)[:500]:
            return
        events.append(f"{event} {arguments!r}"[:200])

    for name, row in FUNCTIONS.items():  # what the host loads with the first call of a function is no finding
        try:
            read_expression(f"{name}({', '.join(['x'] * row.least)})", NAMES)
        except InputError:
            continue
    sys.addaudithook(hook)
    source = random.Random(20240607)
    formulas, worst = 0, (0.0, "")
    for _ in range(100_000):
        text = _hostile(source)
        start = time.process_time()
        watched = True
        try:
            formulas += isinstance(read_expression(text, NAMES), Expr)
        except InputError as error:
            assert len(str(error)) < 400
        finally:
            watched = False
        worst = max(worst, (time.process_time() - start, text))
    assert not events, events[:5]
    assert worst[0] < 1, worst
    assert formulas > 1000  # the strings are not all of one kind
