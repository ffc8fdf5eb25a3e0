"""The report: MathML, certificate, pictures, and the page in a browser."""
from __future__ import annotations

import json
import re
import shutil
import subprocess
from dataclasses import replace
from functools import cache
from html import escape, unescape
from html.parser import HTMLParser
from pathlib import Path
from xml.etree import ElementTree

import pytest
from mpmath import mp
from sympy import (
    And,
    Eq,
    Integral,
    Piecewise,
    S,
    Symbol,
    airyai,
    asinh,
    besselj,
    besselk,
    exp,
    gamma,
    hyper,
    meijerg,
    oo,
    polygamma,
    rf,
    sqrt,
    symbols,
    zeta,
)

from sympy_mellin_ext import closed_form
from sympy_mellin_ext.report import Record, write_report
from sympy_mellin_ext.report.card import card, points
from sympy_mellin_ext.report.mathml import mathml
from sympy_mellin_ext.report.pictures import compare, pole_picture, poles_of, sweep_picture

x, y, a, b, c = symbols("x y a b c", positive=True)
s, nu = symbols("s nu", real=True)

BESSEL = closed_form(x ** (s - 1) * besselj(nu, a * x), (x, 0, oo))
MACDONALD = closed_form(x ** (s - 1) * besselk(nu, a * x), (x, 0, oo))
GAMMA = closed_form(x ** (s - 1) * exp(-a * x), (x, 0, oo))
CANCELLED = closed_form((exp(-a * x) - exp(-b * x)) * x ** (s - 1), (x, 0, oo))
DOUBLE = closed_form(x ** (s - 1) * exp(-a * x) * besselj(0, b * x), (x, 0, oo))
ORTHANT = closed_form(x ** (a - 1) * y ** (b - 1) * exp(-x - y - c * x * y), (x, 0, oo), (y, 0, oo))
JOURNAL = {
    "name": "from a <journal>", "status": "solved", "value": "a**(-s)*gamma(s)", "condition": "s > 0", "reason": "",
    "integrand": "x**(s - 1)*exp(-a*x)", "limits": [["x", "0", "oo"]], "assume": {"a": "positive", "s": "real"},
    "steps": ["kernel exp", "master theorem"], "sources": ["DLMF 5.9.1"], "strategy": "master theorem",
    "certificate": {"ok": False, "digits": [2.0], "points": [{"a": "1", "s": "2"}], "closed": ["1.0"],
                    "quadrature": ["1.1"], "note": "differs"},
}  # fmt: skip


def records() -> list:
    assert GAMMA and CANCELLED and DOUBLE and ORTHANT
    return [
        Record("Gamma", GAMMA, {s: [S.Half, 1, 2], a: [1, 2]}, "with a sweep", 2.0),
        Record("cancelled", CANCELLED),
        ("two kernels & more", DOUBLE),
        JOURNAL,
        {"name": "refused", "status": "refused", "value": None, "reason": "diverges: at 0", "integrand": "x <"},
    ]


@cache
def text() -> str:
    from tempfile import TemporaryDirectory

    with TemporaryDirectory() as folder:
        return write_report(records(), Path(folder) / "page.html", "A title <&>").read_text(encoding="utf-8")


# -- formulas ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "letters"),
    [
        (besselj(nu, a * x), "Jν(ax)"), (besselk(0, x) ** 2, "(K0(x))2"), (gamma(s) / a**s, "a−sΓ(s)"),
        (hyper([a, b], [c], -x), "F12(a,b;c;−x)"), (airyai(x), "Ai(x)"), (polygamma(0, s), "ψ(s)"),
        (polygamma(2, s), "ψ(2)(s)"), (rf(a, s), "(a)s"), (Integral(exp(-x), (x, 0, oo)), "∫0∞e−xdx"),
        (And(s > 0, s < nu), "s>0∧s<ν"), (Piecewise((a, s > 1), (b, True)), "{afor s>1botherwise"),
        (a * asinh(x), "aarsinh(x)"), (-a * (s - 1), "−a(s−1)"), (Eq(s, 0), "s=0"), (zeta(s, a), "ζ(s,a)"),
        (meijerg([[1 - a], []], [[0], []], x), "G1,11,1(1−a;0;x)"), (1 / sqrt(x), "1x"), ((a + b) ** -s, "(a+b)−s"),
    ],
)  # fmt: skip
def test_mathml(value, letters: str) -> None:
    found = mathml(value)
    shown = "".join(ElementTree.fromstring(found).itertext()).replace("\u2062", "").replace("\u2212", "−")
    if value.has(meijerg):
        assert shown.startswith("G")
    else:
        assert shown == letters
    assert "mfenced" not in found, "not in MathML Core"


def test_mathml_is_well_formed_for_a_whole_derivation() -> None:
    for found in re.findall(r"<math.*?</math>", text(), re.DOTALL):
        ElementTree.fromstring(found)


# -- cards ------------------------------------------------------------------------------------------------


def test_a_sweep_is_the_product_of_its_values() -> None:
    assert points({a: [1, 2], s: [3]}) == ({a: 1, s: 3}, {a: 2, s: 3})
    assert points(({a: S(1)},)) == ({a: S(1)},)
    assert points({}) == ()


def test_the_certificate_is_that_of_verify() -> None:
    found = card(Record("Gamma", GAMMA)).certificate
    assert found is not None and found.ok is True and found.verdict == "agrees"
    assert all(float(digits) > 10 for *_, digits in found.rows)


def test_a_wrong_closed_form_is_shown_as_wrong() -> None:
    assert GAMMA is not None
    found = card(Record("wrong", replace(GAMMA, value=2 * GAMMA.value))).certificate
    assert found is not None and found.ok is False and found.verdict == "disagrees"


def test_a_journal_is_read() -> None:
    found = card(JOURNAL)
    integral = found.integral
    assert isinstance(integral, Integral) and integral.limits[0][2] is S.Infinity
    a_, s_ = Symbol("a", positive=True), Symbol("s", real=True)
    assert found.result[0].value == gamma(s_) / a_**s_
    assert found.certificate is not None and found.certificate.ok is False


def test_other_things_are_no_records() -> None:
    with pytest.raises(TypeError, match="Record"):
        card(3)  # type: ignore[arg-type]


# -- pictures ---------------------------------------------------------------------------------------------


def test_poles_and_strip() -> None:
    # Gamma((nu + s)/2)/Gamma(1 + (nu - s)/2): poles at -nu - 2k, strip -nu < Re s < 3/2; DLMF 10.22.43
    found = poles_of(BESSEL, {nu: S.Half, a: S(1), s: S(1)})
    assert found is not None
    assert sorted(p.real for p in found.left)[-3:] == [-4.5, -2.5, -0.5] and not found.right
    assert found.strip == (-0.5, 1.5) and found.at == 1


def test_poles_that_cancel() -> None:
    found = poles_of(CANCELLED, {a: S(1), b: S(2), s: S(1)})
    assert found is not None and found.cancelled == (0,) and 0 not in found.left and found.strip[0] == -1


def test_poles_of_a_contour_integral() -> None:
    # Gamma(u/2)/Gamma(1 - u/2) times Gamma(s - u): left 0, -2, ...; right s, s + 1, ...
    found = poles_of(DOUBLE, {a: S(1), b: S(1), s: S(2)})
    assert found is not None
    assert max(p.real for p in found.left) == 0 and min(p.real for p in found.right) == 2 and found.strip == (0, 2)


def test_no_transform_no_picture() -> None:
    assert ORTHANT is not None and pole_picture(ORTHANT) is None
    assert sweep_picture(BESSEL, {}) is None


def test_a_sweep_agrees_with_quadrature() -> None:
    found = compare(MACDONALD, {nu: [0, 1, 3], a: [2], s: [4, 1]}, 2.0)
    assert found.symbol == nu
    for point, closed, number in zip(found.points, found.closed, found.quadrature, strict=True):
        if point[s] <= point[nu]:
            assert closed is None, "outside of the region"
        else:
            assert mp.almosteq(closed, number, rel_eps=1e-12)


def test_pictures_take_the_colour_of_the_text_and_are_repeatable() -> None:
    first, again = pole_picture(CANCELLED), pole_picture(CANCELLED)
    assert first is not None and first == again
    ElementTree.fromstring(first.svg)
    assert "currentColor" in first.svg and "#000000" not in first.svg


# -- the page ---------------------------------------------------------------------------------------------


class Structure(HTMLParser):
    """Open elements, addresses, identifiers."""

    EMPTY = ("meta", "link", "br", "img", "hr")

    def __init__(self) -> None:
        super().__init__()
        self.stack: list[str] = []
        self.addresses: list[str] = []
        self.identifiers: list[str] = []
        self.counts: dict[str, int] = {}

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.counts[tag] = self.counts.get(tag, 0) + 1
        for name, value in attrs:
            if name in ("src", "href", "xlink:href", "action"):
                self.addresses.append(value or "")
            if name == "id":
                self.identifiers.append(value or "")
        if tag not in self.EMPTY:
            self.stack.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.handle_starttag(tag, attrs)
        if tag not in self.EMPTY:
            self.stack.pop()

    def handle_endtag(self, tag: str) -> None:
        assert self.stack and self.stack.pop() == tag, tag


def test_the_page_is_whole_and_asks_nobody() -> None:
    page = Structure()
    page.feed(text())
    assert not page.stack
    assert len(page.identifiers) == len(set(page.identifiers))
    local = {f"#{name}" for name in page.identifiers}
    assert all(address in local or address == "data:," for address in page.addresses)
    assert not re.findall(r"url\((?!#)|@import|<script", text())
    assert page.counts["article"] == len(records()) and page.counts["svg"] == 4 and page.counts["details"] >= 7
    assert "A title &lt;&amp;&gt;" in text() and "from a &lt;journal&gt;" in text() and "diverges: at 0" in text()
    for rule in ("prefers-color-scheme: dark", "@media print", "max-width: 40rem"):
        assert rule in text()


PROBE = """<script>addEventListener('load', () => {
  for (const d of document.querySelectorAll('details')) d.open = true;
  const maths = [...document.querySelectorAll('math')].map(m => m.getBoundingClientRect());
  const pictures = [...document.querySelectorAll('svg')].map(m => m.getBoundingClientRect());
  parent.postMessage({maths: maths.length, flat: maths.filter(r => r.width < 3 || r.height < 3).length,
    pictures: pictures.length, small: pictures.filter(r => r.width < 200 || r.height < 60).length,
    wide: document.documentElement.scrollWidth - innerWidth, width: innerWidth,
    paper: getComputedStyle(document.body).backgroundColor, ink: getComputedStyle(document.body).color}, '*');
});</script>"""


def browser() -> str | None:
    """A browser of the Chromium family, where there is one."""
    names = ("chromium", "chromium-browser", "google-chrome", "google-chrome-stable")
    return next((path for name in names if (path := shutil.which(name))), None)


def test_the_page_in_a_browser(tmp_path: Path) -> None:
    assert text().count("<math") > 40
    command = browser()
    if command is None:
        test_the_page_is_whole_and_asks_nobody()  # what can be known without one
        return
    inner = escape(text().replace("</body>", PROBE + "</body>"), quote=True)
    frames = "".join(f'<iframe style="width:{w}px;height:2000px" srcdoc="{inner}"></iframe>' for w in (390, 1100))
    outer = tmp_path / "probe.html"
    outer.write_text(
        "<!DOCTYPE html><meta charset=utf-8><pre id=out></pre><script>const found = [];"
        "addEventListener('message', e => { found.push(e.data);"
        "document.getElementById('out').textContent = JSON.stringify(found); });</script>" + frames,
        encoding="utf-8",
    )
    for scheme, dark in ((1, False), (0, True)):
        run = subprocess.run(
            [command, "--headless", "--no-sandbox", "--disable-gpu", "--enable-logging=stderr",
             f"--blink-settings=preferredColorScheme={scheme}", f"--user-data-dir={tmp_path / 'profile'}",
             "--virtual-time-budget=8000", "--dump-dom", outer.as_uri()],
            capture_output=True, text=True, timeout=60, errors="replace",
        )  # fmt: skip
        assert "CONSOLE" not in run.stderr, run.stderr[-1000:]
        told = re.search(r'<pre id="out">(.*?)</pre>', run.stdout, re.DOTALL)
        assert told and told.group(1), run.stderr[-1000:]
        found = json.loads(unescape(told.group(1)))
        assert sorted(f["width"] for f in found) == [390, 1100]
        for f in found:
            assert f["maths"] == text().count("<math") and f["flat"] == 0
            assert f["pictures"] == 4 and f["small"] == 0
            assert f["wide"] <= 0, "the page is wider than the screen"
            light = sum(map(int, re.findall(r"\d+", f["paper"])[:3])) > sum(map(int, re.findall(r"\d+", f["ink"])[:3]))
            assert light is not dark


def test_notebook() -> None:
    found = BESSEL._repr_html_()
    page = Structure()
    page.feed(found)
    assert not page.stack and page.counts["math"] > 5 and "<details>" in found and "DLMF 10.22.43" in found
    assert BESSEL._repr_latex_().startswith(r"$\displaystyle")


def test_a_report_without_pictures_loads_no_matplotlib(tmp_path: Path) -> None:
    code = (
        "import sys\nfrom sympy import exp, oo, symbols\nfrom sympy_mellin_ext import closed_form\n"
        "from sympy_mellin_ext.report import write_report\nx, s = symbols('x s', positive=True)\n"
        "answer = closed_form(x**(s - 1)*exp(-x), (x, 0, oo))\n"
        f"write_report([('G', answer)], {str(tmp_path / 'p.html')!r}, pictures=False)\n"
        "print('matplotlib' in sys.modules)"
    )
    import sys

    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60, check=True)
    assert run.stdout.strip() == "False"


def test_the_command_writes_the_page_of_a_list(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    from sympy_mellin_ext.report.__main__ import main

    listed = tmp_path / "list.toml"
    listed.write_text(
        'title = "Two"\n[[integral]]\nname = "one"\nintegrand = "x**(s - 1)*exp(-a*x)"\n'
        'assume = { a = "positive", s = "real" }\nsweep = { a = [1, 2], s = [1] }\n'
        '[[integral]]\nname = "none"\nintegrand = "exp(x)"\n',
        encoding="utf-8",
    )
    page = tmp_path / "page.html"
    assert main(["--list", str(listed), "--page", str(page)]) == 0
    written = page.read_text(encoding="utf-8")
    assert "<title>Two</title>" in written and written.count("<article") == 2 and written.count("<svg") == 2
    assert str(page) in capsys.readouterr().out
