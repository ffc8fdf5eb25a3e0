"""The comparison that stands behind the list of tests failing by form only."""
import sys
import textwrap
from importlib import import_module

import pytest
from sympy import FiniteSet, Max, Rational, S, erf, erfc, gamma, oo, re, sin, sqrt, symbols

from benchmarks import host_forms, host_tests

x, a = symbols("x a", positive=True)
s, z = symbols("s z")


@pytest.mark.parametrize(
    ("left", "right"),
    [
        (1 - erf(x), erfc(x)),
        (S.One, S(1.0)),
        (2 * sqrt(2), sqrt(8)),
        (FiniteSet(2 * x), FiniteSet(x + x * sqrt(1))),
        ((gamma(s), (-1, oo), True), (gamma(s), (0, oo), True)),
        ((gamma(s), abs(re(a)), True), (gamma(s), Max(-re(a), re(a)), True)),
        ((x + a, z > -1), (a + x, z > 0)),
    ],
)
def test_same(left, right):
    assert host_forms.agree(left, right)


@pytest.mark.parametrize(
    ("left", "right"),
    [
        (erf(x), erfc(x)),
        (S.One, 1 + Rational(1, 10**6)),
        (FiniteSet(x), FiniteSet(x, a)),
        ((gamma(s), (0, oo), True), (gamma(s), (-1, oo), True)),  # ours claims less
        ((gamma(s), 0, True), (gamma(s + 1), 0, True)),
        (sin(z), sin(z) + z / 10**3),
    ],
)
def test_different(left, right):
    assert not host_forms.agree(left, right)


def test_relaxed_module(tmp_path, monkeypatch):
    (tmp_path / "module_of_the_test.py").write_text(
        textwrap.dedent("""
            from sympy import Symbol, erf, erfc
            x = Symbol("x", positive=True)
            def test_form():
                assert erfc(x) == 1 - erf(x) == erfc(x)
            def test_value():
                assert erfc(x) == erf(x)
        """)
    )
    monkeypatch.syspath_prepend(str(tmp_path))
    module = host_forms.relaxed(import_module("module_of_the_test"))
    module.test_form()
    assert len(getattr(module, host_forms.DIFFERENCES)) == 2
    with pytest.raises(AssertionError):
        module.test_value()
    sys.modules.pop("module_of_the_test")


def test_listed_tests_exist():
    assert set(host_tests.FORM_ONLY) <= set(host_tests.test_names())


def test_comparison_of_runs():
    runs = [
        host_tests.Run("m:a", "stock", "passed", 1.0),
        host_tests.Run("m:a", "enabled", "failed", 1.0),
        host_tests.Run("m:b", "stock", "failed", 1.0),
        host_tests.Run("m:b", "enabled", "failed", 1.0),
        host_tests.Run("m:c", "stock", "passed", 1.0),
        host_tests.Run("m:c", "enabled", "timed out", 9.0),
    ]
    failing, late = host_tests.compare(runs, "enabled")
    assert [r.test for r in failing] == ["m:a"] and [r.test for r in late] == ["m:c"]


def test_one_test_in_a_process():
    name = next(host_tests.test_names("test_issue_3623"))
    (stock,), (ours,) = (host_tests.run_all([(name, m)], 1, 120) for m in ("stock", "enabled"))
    assert (stock.outcome, ours.outcome) == ("passed", "passed")
