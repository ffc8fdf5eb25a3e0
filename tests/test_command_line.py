"""The command line: what is printed where, in which form, and with which exit status."""
from __future__ import annotations

import json
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from mpmath import mp

from sympy_mellin_ext.__main__ import main, parser
from sympy_mellin_ext.batch.outputs import coloured, summary
from sympy_mellin_ext.examples import BUOYS

COMMAND = [sys.executable, "-m", "sympy_mellin_ext"]
LIST = """
title = "A list"
[[integral]]
name = "moment"
integrand = "x**(s - 1)*exp(-a*x)"
assume = { a = "positive", s = "real" }
expected = "gamma(s)/a**s"
sweep = { s = [1, 2], a = [1, 2] }
[[integral]]
name = "divergent"
integrand = "exp(-x)/x"
"""


def test_evaluate_as_text(capsys: pytest.CaptureFixture[str]) -> None:
    status = main(["evaluate", "x**(s-1)*exp(-a*x)", "--assume", "a=positive", "--assume", "s=real",
                   "--expected", "gamma(s)/a**s"])
    out, err = capsys.readouterr()
    assert status == 0
    assert err == ""
    assert out.splitlines() == [
        "closed form  gamma(s)/a**s",
        "region       s > 0",
        "certificate  quadrature agrees to 12 digits at 4 points",
        "expected     agrees",
        "found by     master theorem",
    ]


def test_evaluate_as_json_and_formulas_that_begin_with_a_minus_sign(capsys: pytest.CaptureFixture[str]) -> None:
    status = main(["evaluate", "-exp(-t**2)", "--variable", "t", "--lower", "-oo", "--format", "json", "--no-check"])
    record = json.loads(capsys.readouterr().out)
    assert status == 0
    assert (record["status"], record["value"]) == ("solved", "-sqrt(pi)")
    assert record["limits"] == [["t", "-oo", "oo"]]


def test_evaluate_as_latex_and_python(capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["evaluate", "exp(-a*x)*cos(x)", "--assume", "a=positive", "--no-check", "--format"]
    assert main([*arguments, "latex"]) == 0
    assert capsys.readouterr().out.strip().endswith(r"dx = \frac{a}{a^{2} + 1}")
    assert main([*arguments, "python"]) == 0
    names: dict = {}
    source = capsys.readouterr().out
    exec(compile(source, "source", "exec"), names)
    assert abs(names["integral"](2) - mp.mpf(2) / 5) < 1e-15


def test_evaluate_that_finds_nothing(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["evaluate", "exp(-x)/x"]) == 1
    assert "reason       diverges" in capsys.readouterr().out
    assert main(["evaluate", "exp(-x)", "--expected", "2", "--no-check"]) == 1
    assert "DISAGREES" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["evaluate", "exp(-y)"], "integrand: unknown name y"),
        (["evaluate", "gama(x)"], "did you mean gamma"),
        (["evaluate", "__import__('os')"], "is not accepted"),
        (["evaluate", "exp(-x)", "--lower", "9**9**9"], "lower: a numerical exponent"),
        (["evaluate", "exp(-a*x)", "--assume", "a"], "SYMBOL=KIND is expected"),
        (["evaluate", "exp(-a*x)", "--assume", "a=positiv"], "did you mean positive"),
        (["batch", "no such list.toml"], "no such list.toml: cannot be read"),
        (["batch", str(BUOYS), "--journal", "/no/such/folder/journal"], "the journal cannot be opened"),
        (["batch", str(BUOYS), "--journal", str(BUOYS)], "was the right file given"),
    ],
)
def test_bad_input_is_told_on_the_error_stream_alone(
    arguments: list[str], message: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(arguments) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert message in err


@pytest.mark.parametrize("arguments", [[], ["evaluate"], ["evaluate", "x", "--format", "pdf"],
                                       ["batch", "l", "--jobs", "0"], ["evaluate", "x", "--seconds", "-1"]])
def test_bad_usage(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as caught:
        main(arguments)
    assert caught.value.code == 2
    assert "usage" in capsys.readouterr().err


def test_help_has_examples(capsys: pytest.CaptureFixture[str]) -> None:
    for command in ("evaluate", "batch"):
        with pytest.raises(SystemExit) as caught:
            parser().parse_args([command, "--help"])
        assert caught.value.code == 0
        assert f"sympy-mellin-ext {command}" in capsys.readouterr().out


def test_batch_and_its_outputs(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path, out = tmp_path / "list.toml", tmp_path / "out"
    path.write_text(LIST)
    arguments = ["batch", str(path), "--out", str(out), "--jobs", "2"]
    assert main(arguments) == 1
    shown, told = capsys.readouterr()
    assert shown.splitlines()[-1] == "2 of 2: 1 solved, 1 refused; 1 agree with quadrature"
    assert "\x1b" not in shown
    for name in ("results.tex", "results.py", "sweeps/moment.csv", "journal.jsonl"):
        assert (out / name).stat().st_size
    assert "results.tex" in told
    if (out / "report.html").exists():
        assert "moment" in (out / "report.html").read_text(encoding="utf-8")
    journal = (out / "journal.jsonl").read_bytes()
    assert main(arguments) == 1  # nothing is computed again
    assert capsys.readouterr().out == shown
    assert (out / "journal.jsonl").read_bytes() == journal


def test_a_list_with_faults_names_them(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "list.toml"
    path.write_text(LIST.replace("exp(-x)/x", "exp(-y)/x"))
    assert main(["batch", str(path)]) == 2
    assert f"{path}, line 11, entry divergent, integrand: unknown name y" in capsys.readouterr().err


def test_no_color(monkeypatch: pytest.MonkeyPatch) -> None:
    class Terminal:
        def isatty(self) -> bool:
            return True

    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.delenv("NO_COLOR", raising=False)
    assert coloured(Terminal())  # type: ignore[arg-type]
    monkeypatch.setenv("NO_COLOR", "1")
    assert not coloured(Terminal())  # type: ignore[arg-type]
    record = {"name": "n", "status": "solved", "seconds": 0.1, "value": "1", "condition": "True", "reason": ""}
    assert "\x1b[32m" in summary([record], 1, colour=True)[2]
    assert "\x1b" not in "".join(summary([record], 1))


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_interrupted_run_leaves_a_journal_and_a_partial_report(tmp_path: Path, number: int) -> None:
    path, out = tmp_path / "list.toml", tmp_path / "out"
    # the last entry is nobody's, and the host thinks about it for seconds
    path.write_text(LIST + "[[integral]]\nname = 'slow'\nintegrand = 'gamma(x + 1/2)*exp(-sqrt(x))/(1 + x)'\n")
    run = subprocess.Popen([*COMMAND, "batch", str(path), "--out", str(out), "--jobs", "1"], text=True,
                           stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    journal = out / "journal.jsonl"
    while run.poll() is None and (not journal.exists() or journal.read_bytes().count(b"\n") < 2):
        time.sleep(0.05)
    run.send_signal(number)
    shown, told = run.communicate(timeout=60)
    assert run.returncode == 130
    assert "2 of 3" in shown
    assert "interrupted, 2 of 3 done; the same command continues" in told
    assert [json.loads(line)["name"] for line in journal.read_text().splitlines()] == ["moment", "divergent"]
    assert (out / "results.tex").exists()
