"""Strategies and kernel rows from outside the package."""
import subprocess
import sys
import threading
import warnings

import pytest
from sympy import Function, Symbol, exp, gamma, oo, sin, symbols

from sympy_mellin_ext import (
    ClosedForm,
    closed_form,
    integrate,
    mellin,
    register,
    register_kernel,
    registered_strategies,
    unregister,
    unregister_kernel,
)
from sympy_mellin_ext.gamma import GammaProduct
from sympy_mellin_ext.kernels import Row, rows

x, a = symbols("x a", positive=True)
s = Symbol("s", real=True)


class Moments:
    """A strategy of somebody else: knows one function only."""

    name = "moments"

    def __init__(self, f):
        self.f = f

    def attempt(self, problem):
        if problem.half_line and problem.integrand == self.f(problem.variable):
            return ClosedForm(self.f(0), strategy=self.name)
        return None


class Broken:
    name = "broken"

    def attempt(self, problem):
        raise ZeroDivisionError("of its own making")


@pytest.fixture
def names():
    before = registered_strategies()
    yield lambda: [strategy.name for strategy in registered_strategies()]
    for strategy in set(registered_strategies()) - set(before):
        unregister(strategy.name)
    assert registered_strategies() == before


def test_register_in_its_place(names):
    f = Function("f")
    built_in = names()
    register(Moments(f), after="master theorem")
    assert names()[1] == "moments"
    assert integrate(f(x), (x, 0, oo)) == f(0)
    unregister("moments")
    register(Moments(f), before="master theorem")
    assert names() == ["moments", *built_in]
    unregister("moments")
    register(Moments(f))
    assert names() == [*built_in, "moments"]
    assert closed_form(f(x), (x, 0, oo)).strategy == "moments"


def test_refusals_of_the_registry(names):
    register(Moments(sin))
    with pytest.raises(ValueError, match="registered already"):
        register(Moments(sin))
    with pytest.raises(ValueError, match="no strategy named 'nobody'"):
        register(Broken(), before="nobody")
    with pytest.raises(ValueError, match="not both"):
        register(Broken(), before="moments", after="moments")
    with pytest.raises(ValueError, match="no strategy named"):
        unregister("broken")
    with pytest.raises(TypeError, match="attempt"):
        register(object())


def test_a_raising_strategy_is_reported_once_and_skipped(names):
    register(Broken(), before="master theorem")
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        for _ in range(3):
            assert integrate(x * exp(-a * x), (x, 0, oo)) == 1 / a**2
    assert [str(w.message) for w in caught] == [
        "strategy 'broken' failed with ZeroDivisionError: of its own making; it is skipped"
    ]


def test_an_answer_that_is_none_is_reported(names):
    class Careless:
        name = "careless"

        def attempt(self, problem):
            return 42

    register(Careless(), before="master theorem")
    with pytest.warns(RuntimeWarning, match="no ClosedForm"):
        assert integrate(x * exp(-a * x), (x, 0, oo)) == 1 / a**2


class Wedge(Function):
    """(1 + z)**(-1/2)*exp(-z) under a name of its own."""


ROW = Row(Wedge, lambda: GammaProduct.of(up=[(0, 1), (1, 1)]), "made for the test")


def test_kernel_row_from_outside():
    assert closed_form(Wedge(x), (x, 0, oo)) is None
    register_kernel(ROW)
    try:
        assert mellin(Wedge(a * x), x, s).value.equals(gamma(s) * gamma(s + 1) / a**s)
        assert mellin(Wedge(a * x), x, s).sources[0] == "made for the test"
        with pytest.raises(ValueError, match="Wedge"):
            register_kernel(ROW)
    finally:
        unregister_kernel(Wedge)
    assert closed_form(Wedge(x), (x, 0, oo)) is None
    with pytest.raises(ValueError, match="Wedge"):
        unregister_kernel(Wedge)
    with pytest.raises(TypeError, match="Row"):
        register_kernel(Wedge)


def test_registry_from_many_threads(names):
    errors = []

    def work(number):
        class Mine(Moments):
            name = f"moments {number}"

        function = type(f"Own{number}", (Function,), {})
        try:
            for _ in range(30):
                register(Mine(sin))
                register_kernel(Row(function, ROW.transform, ""))
                assert f"moments {number}" in [strategy.name for strategy in registered_strategies()]
                assert function in rows()
                unregister(f"moments {number}")
                unregister_kernel(function)
        except Exception as error:
            errors.append(error)

    threads = [threading.Thread(target=work, args=(i,)) for i in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert errors == []


PLUG_IN = """
from sympy import Function
from sympy_mellin_ext import ClosedForm
from sympy_mellin_ext.gamma import GammaProduct
from sympy_mellin_ext.kernels import Row

class Bump(Function):
    pass

class Peak(Function):
    pass

class Everything:
    name = "everything"
    def attempt(self, problem):
        if problem.integrand == Peak(problem.variable):
            return ClosedForm(Peak(0), strategy=self.name)

ROWS = [Row(Bump, lambda: GammaProduct.of(up=[(0, 1)]), "made for the test")]
NONSENSE = 3
"""

ENTRY_POINTS = """
[sympy_mellin_ext.strategies]
everything = plug_in_of_the_test:Everything
missing = plug_in_of_the_test:Missing

[sympy_mellin_ext.kernels]
bumps = plug_in_of_the_test:ROWS
nonsense = plug_in_of_the_test:NONSENSE
"""

SCRIPT = """
import sys, warnings
import sympy_mellin_ext
assert "plug_in_of_the_test" not in sys.modules, "plug-ins are loaded at import time"
from sympy import Symbol, oo
from sympy_mellin_ext import closed_form, registered_strategies
with warnings.catch_warnings(record=True) as caught:
    warnings.simplefilter("always")
    names = [s.name for s in registered_strategies()]
    from plug_in_of_the_test import Bump, Peak
    x = Symbol("x", positive=True)
    print(closed_form(x**3*Bump(2*x), (x, 0, oo)))
    print(closed_form(Peak(x), (x, 0, oo)))
print("everything" in names)
for w in caught:
    print(w.category.__name__, w.message)
"""


def test_discovery_by_entry_points(tmp_path):
    (tmp_path / "plug_in_of_the_test.py").write_text(PLUG_IN)
    metadata = tmp_path / "plug_in_of_the_test-1.0.dist-info"
    metadata.mkdir()
    (metadata / "METADATA").write_text("Metadata-Version: 2.1\nName: plug-in-of-the-test\nVersion: 1.0\n")
    (metadata / "entry_points.txt").write_text(ENTRY_POINTS)
    script = f"import sys; sys.path.insert(0, {str(tmp_path)!r})\n" + SCRIPT
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, timeout=120)
    assert done.returncode == 0, done.stderr
    lines = done.stdout.splitlines()
    assert lines[:3] == ["3/8  [master theorem]", "Peak(0)  [everything]", "True"]
    assert sorted(line.split(" failed with ")[0] for line in lines[3:]) == [
        "RuntimeWarning plug-in 'missing'",
        "RuntimeWarning plug-in 'nonsense'",
    ]
