"""The command that scores `integrate` on lists of integrals."""
from __future__ import annotations

import json

import pytest
from sympy import Integral, Piecewise, Rational, Symbol, oo, pi, sin

import sympy_mellin_ext
from benchmarks import scoring
from benchmarks.corpus import main
from benchmarks.entries import load, parse, random_points
from benchmarks.scoring import classify, compare_region

# DLMF 5.9.7: the sine moment; its strip is -1 < s < 1
SINE = {
    "id": "moments-1", "family": "moments", "source": "DLMF 5.9.7", "symbols": {"s": "real", "S": "positive"},
    "integrand": "x**(s-1)*sin(S*x)", "variable": "x", "lower": "0", "upper": "oo",
    "value": "S**(-s)*gamma(s)*sin(pi*s/2)", "valid": "(s > -1) & (s < 1) & Ne(s, 0)",
    "points": [{"s": "1/3", "S": "2"}, {"s": "-1/4", "S": "3/2"}], "outside": [{"s": "5/4", "S": "1"}],
}
GAMMA = {
    "id": "gammas-1", "family": "gammas", "source": "DLMF 5.2.1", "symbols": {"s": "complex"},
    "integrand": "x**(s-1)*exp(-x)", "variable": "x", "lower": "0", "upper": "oo", "value": "gamma(s)",
    "valid": "re(s) > 0", "points": [{"s": "1/3 + I/2"}], "outside": [{"s": "-1/3"}],
}
DIVERGENT = {
    "id": "never-1", "family": "never", "source": "common practice", "symbols": {}, "integrand": "1/x",
    "variable": "x", "lower": "0", "upper": "oo", "value": "0", "valid": "False", "points": [], "outside": [{}],
}


@pytest.fixture
def entry():
    return parse(SINE)


def integral(entry):
    return Integral(entry.integrand, *entry.limits)


def test_names_of_the_list_shadow_sympy_only_where_declared(entry):
    assert entry.parameters["S"] == Symbol("S", positive=True)
    assert entry.value.has(pi) and entry.integrand.has(sin)
    assert entry.limits[0][0] == Symbol("x", positive=True)
    below = parse({**GAMMA, "lower": "-oo"})
    assert below.limits[0][0] == Symbol("x", real=True)


def test_outcomes(entry):
    unlimited, region = entry.value, entry.valid
    assert classify(Piecewise((unlimited, region), (integral(entry), True)), entry)[0] == "solved"
    assert classify(unlimited, entry)[0] == "overclaims"
    assert classify(unlimited * (1 + Rational(1, 10**6)), entry)[0] == "wrong"
    assert classify(oo, entry)[0] == "wrong"
    assert classify(integral(entry), entry)[0] == "unevaluated"
    narrow = Piecewise((unlimited, (Symbol("s", real=True) > 0) & region), (integral(entry), True))
    assert classify(narrow, entry)[0] == "unevaluated"
    for nothing in (oo, integral(parse(DIVERGENT))):
        assert classify(nothing, parse(DIVERGENT))[0] == "solved"
    assert classify(3, parse(DIVERGENT))[0] == "overclaims"


def test_regions_are_compared(entry):
    s = Symbol("s", real=True)
    assert compare_region(entry.valid, entry)[0] == "exact"
    assert compare_region((s > -1) & (s < 1), entry)[0] == "exact"
    assert compare_region((s > 0) & (s < 1), entry)[0] == "narrow"
    assert compare_region(s < 1, entry)[0] == "wide"
    assert random_points(entry, 60) == random_points(parse(SINE), 60)


def test_late_and_failing_integrators(entry):
    def late(*_):
        while True:
            pass

    def failing(*_):
        raise KeyError("x")

    assert scoring.timed(late, entry, 0.1)[2] == "timeout"
    assert scoring.timed(failing, entry, 1)[2:] == ("error", "KeyError: 'x'")


def test_command_on_a_file(tmp_path, capsys):
    file = tmp_path / "list.jsonl"
    file.write_text("\n".join(json.dumps(r) for r in (SINE, GAMMA, DIVERGENT)) + "\n")
    assert [e.name for e in load(tmp_path, ["moments", "never-1"])] == ["moments-1", "never-1"]
    out = tmp_path / "out.json"
    assert main([str(file), "--regions", "--stock", "--jobs", "2", "--json", str(out)]) == 0
    results = {r["id"]: r for r in json.loads(out.read_text())}
    assert {r["outcome"] for r in results.values()} == {"solved"}
    assert results["gammas-1"]["region"] == results["moments-1"]["region"] == "exact"
    assert results["gammas-1"]["ratio"] > 0
    text = capsys.readouterr().out
    assert "geometric mean" in text and "exact 2, beyond 0, narrow 0, wide 0" in text


def test_command_lists_what_is_not_solved(tmp_path, capsys, monkeypatch):
    file = tmp_path / "list.jsonl"
    file.write_text(json.dumps(GAMMA) + "\n")
    monkeypatch.setattr(sympy_mellin_ext, "integrate", lambda f, *limits: Rational(7, 2))
    assert main([str(file), "--only", "gammas"]) == 0
    text = capsys.readouterr().out
    assert "wrong" in text and "3.5 instead of" in text
