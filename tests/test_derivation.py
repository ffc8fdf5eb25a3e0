"""Derivations: facts checked against the functions themselves, the renderings against their formats."""
from __future__ import annotations

import re
import shutil
import subprocess
from functools import cache
from pathlib import Path

import pytest
from mpmath import mp
from sympy import (
    Dummy,
    Expr,
    ImmutableDenseMatrix,
    S,
    Symbol,
    airyai,
    besselj,
    besselk,
    cos,
    erfc,
    exp,
    gamma,
    log,
    oo,
    pi,
    sin,
    sqrt,
    symbols,
)

from sympy_mellin_ext import ClosedForm, closed_form, master_theorem
from sympy_mellin_ext.derivation import FORMATS, details
from sympy_mellin_ext.derivation.series import power_series
from sympy_mellin_ext.gamma import GammaProduct
from sympy_mellin_ext.kernels.elementary import COS, EXP, SIN, power
from sympy_mellin_ext.steps import Contour, Question, Total
from sympy_mellin_ext.verify.numeric import evaluate

x, y, a, b, c = symbols("x y a b c", positive=True)
s, nu = symbols("s nu", real=True)
n = Symbol("n")

# one of each kind: name -> (integrand, limits)
CASES: dict[str, tuple[Expr, tuple]] = {
    "single kernel": (x ** (s - 1) * besselj(nu, a * x), ((x, 0, oo),)),
    "sum": ((exp(-a * x) - exp(-b * x)) * x ** (s - 1), ((x, 0, oo),)),
    "logarithm": (x ** (s - 1) * log(x) / (1 + x), ((x, 0, oo),)),
    "turned scale": (x ** (s - 1) * exp(-x) * cos(b * x), ((x, 0, oo),)),
    "two kernels": (x ** (s - 1) * exp(-a * x) * besselj(0, b * x), ((x, 0, oo),)),
    "exponential series": (x ** (s - 1) / (exp(x) + 1), ((x, 0, oo),)),
    "Taylor": (airyai(x) ** 2, ((x, 0, oo),)),
    "whole line": (1 / (1 + x**2 + x**4), ((x, -oo, oo),)),
    "unit interval": (x ** (a - 1) * log(x) ** 2 * sqrt(1 - x), ((x, 0, 1),)),
    "tail": (exp(-c * x) / x, ((x, b, oo),)),
    "quarter turn": (sin(x) ** a, ((x, 0, pi / 2),)),
    "lognormal": (exp(-log(x) ** 2) * x**s, ((x, 0, oo),)),
    "orthant": (x ** (a - 1) * y ** (b - 1) * exp(-x - y - c * x * y), ((x, 0, oo), (y, 0, oo))),
}


@cache
def answer(name: str) -> ClosedForm:
    f, limits = CASES[name]
    found = closed_form(f, *limits)
    assert found is not None
    return found


@pytest.mark.parametrize(
    ("product", "function"),
    [
        (EXP, lambda z: exp(-z)),  # DLMF 4.2.19
        (COS, cos), (SIN, sin),  # DLMF 4.19.1-2
        (power(S(5) / 2), lambda z: (1 + z) ** (-S(5) / 2)),  # DLMF 4.6.7
    ],
)  # fmt: skip
def test_phi_gives_back_the_function(product: GammaProduct, function) -> None:
    (series,) = power_series(product, n)
    z = S(3) / 7
    total = mp.mpf(0)
    for k in range(60):
        total += evaluate(series.phi.subs(n, k) * (-(z**series.step)) ** k / gamma(k + 1), {})
    found = total * evaluate(z**series.head, {})
    assert abs(found - evaluate(function(z), {})) < mp.mpf(10) ** -11


def test_term_ratio_is_the_quotient_of_neighbouring_coefficients() -> None:
    for product in (EXP.with_scale(a), COS, power(b), answer("single kernel").steps[0].subject.product):
        for series in power_series(product, n):
            point = {a: S(7) / 5, b: S(9) / 4, nu: S(1) / 3}

            def coefficient(k: int, series=series, point=point):
                return evaluate((series.phi * (-1) ** k / gamma(n + 1)).subs(n, k), point)

            for k in (0, 1, 5):
                ratio = evaluate(series.ratio.subs(n, k), point)
                assert mp.almosteq(coefficient(k + series.period) / coefficient(k), ratio, rel_eps=1e-12)


def test_a_ladder_of_double_poles_has_no_power_series() -> None:
    assert power_series(GammaProduct.of(up=[(0, S.Half), (0, S.Half)]), n) == []  # K_0: logarithms, DLMF 10.31.2


def test_an_ending_ladder_is_not_taken_for_a_series() -> None:
    # erfc: Gamma(s/2 + 1/2)/s; the pole at 0 is the 1 of 1 - erf, DLMF 7.6.1
    step = closed_form(x ** (s - 1) * erfc(x), (x, 0, oo)).steps[0]
    found = power_series(step.subject.product, n)
    assert [series.head for series in found] == [1]


def test_growth_numbers_of_bessel() -> None:
    # J: Lambda = 0 and Delta = 1, so that an edge is conditional (Paris and Kaminski, section 2.1)
    data = answer("single kernel").steps[0].data
    assert (data["Lambda"], data["Delta"]) == (0, 1)
    assert data["kappa"] == Symbol("sigma", real=True) - 1
    assert tuple(data["strip"]) == (-nu, oo)
    assert data["kernel"] == "besselj(nu, z)" and data["scale"] == a / 2


def test_kappa_is_the_growth_on_a_line() -> None:
    # abs(G(sigma + i*t)) ~ const*t**kappa*exp(-pi/2*Lambda*t), DLMF 5.11.9
    step = closed_form(x ** (s - 1) * besselk(S(1) / 3, x), (x, 0, oo)).steps[0]
    sigma, data, product = S(7) / 5, step.data, step.subject.product
    kappa = evaluate(data["kappa"].subs(Symbol("sigma", real=True), sigma), {})

    def size(t: int):
        value = abs(evaluate(product.as_expr(Symbol("s")).subs(Symbol("s"), sigma + S.ImaginaryUnit * t), {}, 20))
        return mp.log(value) + mp.pi / 2 * evaluate(data["Lambda"], {}) * t

    assert abs((size(800) - size(400)) / mp.log(2) - kappa) < 1e-3


def test_cancellation_is_told() -> None:
    data = answer("sum").steps[-1].data
    assert data["cancelled_at_0_1"] == x ** (s - 1)
    assert data["leading_at_0_1"] == x**s
    assert tuple(data["strip"]) == (-1, oo)


def test_the_contour_integral_has_the_value() -> None:
    last = answer("two kernels").steps[-1]
    assert isinstance(last.subject, Contour)
    point = {a: S(1), b: S.Half, s: S(3) / 2}
    u = Symbol("u")
    integrand = last.data["integrand"].subs(point)
    with mp.workdps(15):  # on Re u = 1/2, inside 0 < Re u < s
        f = mp.quad(lambda t: evaluate(integrand, {u: mp.mpc(0.5, t)}), [-20, -6, 0, 6, 20], maxdegree=4) / (2 * mp.pi)
    assert mp.almosteq(f, evaluate(answer("two kernels").value, point), rel_eps=1e-7)


def test_a_changed_integral_is_told_without_auxiliary_symbols() -> None:
    step = next(q for q in answer("lognormal").steps + answer("whole line").steps if isinstance(q.subject, Question))
    integral = step.data["integral"]
    assert not integral.atoms(Dummy)
    assert closed_form(integral.function, *integral.limits).value * 2 == answer("whole line").value


def test_an_auxiliary_width_is_written_out() -> None:
    found = closed_form((x - a) ** (c - 1) * (b - x) ** (S(3) / 2), (x, a, b))
    assert found is not None
    for step in found.steps:
        assert not any(part.atoms(Dummy) for part in [step.formula] if isinstance(part, Expr))


def test_master_theorem_tells_the_growth_of_phi() -> None:
    found = master_theorem(gamma(n + a) / gamma(a), n, s)
    assert found.steps[0].data["Lambda"] == 2
    assert "phi is of exponential type" in found.derivation()


@pytest.mark.parametrize("name", CASES)
def test_every_step_names_its_theorem(name: str) -> None:
    found = answer(name)
    assert found.steps
    for step in found.steps:
        assert step.theorem, step.action
        assert str(step).startswith(step.action)
        for detail in details(step):
            assert detail.name in step.data
    assert any(isinstance(step.subject, Total | Contour) for step in found.steps) or name in (
        "unit interval", "quarter turn", "lognormal", "orthant", "tail")  # fmt: skip


def test_the_steps_build_no_formulas() -> None:
    results = [step.result for name in ("single kernel", "sum", "two kernels") for step in answer(name).steps[:-1]]
    assert results and not any(isinstance(result, Expr) for result in results)


@pytest.mark.parametrize("name", CASES)
def test_text_and_markdown(name: str) -> None:
    found = answer(name)
    text, marked = (found.derivation(kind) for kind in FORMATS[:2])
    for i, step in enumerate(found.steps, start=1):
        assert f"{i}. " in text and f"\n{i}. " in marked
        assert step.theorem in text
    assert str(found.value) in text
    assert marked.count("$") % 2 == 0
    assert not re.search(r"\b_[a-z]\b", text), "an auxiliary symbol shows"


def test_an_unknown_format_is_named() -> None:
    with pytest.raises(ValueError, match=r"text, markdown, latex.*'html'"):
        answer("sum").derivation("html")


def balanced(text: str) -> None:
    """Braces, environments, ``\\left``/``\\right`` and displays in pairs, in order."""
    plain = re.sub(r"\\[{}$]", "", text.replace(r"\\", ""))
    depth = 0
    for sign in plain:
        depth += (sign == "{") - (sign == "}")
        assert depth >= 0
    assert depth == 0
    stack: list[str] = []
    for kind, name in re.findall(r"\\(begin|end)\{(\w+\*?)\}", plain):
        if kind == "begin":
            stack.append(name)
        else:
            assert stack and stack.pop() == name
    assert not stack
    assert len(re.findall(r"\\left\b", plain)) == len(re.findall(r"\\right\b", plain))
    assert plain.count("$") % 2 == 0
    assert text.count(r"\[") == text.count(r"\]")


def test_latex_compiles(tmp_path: Path) -> None:
    parts = [answer(name).derivation("latex") for name in CASES]
    for part in parts:
        balanced(part)
        assert r"\begin{document}" not in part
    whole = answer("sum").derivation("latex", standalone=True)
    balanced(whole)
    assert whole.startswith(r"\documentclass") and whole.rstrip().endswith(r"\end{document}")
    command = shutil.which("pdflatex") or shutil.which("lualatex") or shutil.which("xelatex")
    if command is None:
        return  # the structure has been checked
    head = whole[: whole.index(r"\begin{document}")]
    source = tmp_path / "all.tex"
    source.write_text(head + "\\begin{document}\n" + "\n".join(parts) + "\\end{document}\n", encoding="utf-8")
    run = subprocess.run(
        [command, "-interaction=nonstopmode", "-halt-on-error", source.name],
        cwd=tmp_path, capture_output=True, text=True, timeout=60, errors="replace",
    )  # fmt: skip
    assert run.returncode == 0, run.stdout[-2000:]
    assert (tmp_path / "all.pdf").stat().st_size > 10_000


def test_special_characters_are_escaped() -> None:
    from sympy_mellin_ext.derivation.render import escaped

    balanced(escaped("a_b^{c} & 50% #1 $x$ ~ \\ | <>"))
    assert escaped("x_1 > 0") == r"x\_1 \textgreater{} 0"


def test_the_exponent_matrix_of_an_orthant_is_shown() -> None:
    matrix = next(step.formula for step in answer("orthant").steps if hasattr(step.formula, "shape"))
    assert isinstance(matrix, ImmutableDenseMatrix) and matrix.shape[0] == 1
