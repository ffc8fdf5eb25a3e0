"""The package's namespace: lazy, complete, and with functions where submodules have the same name."""
from __future__ import annotations

import importlib
import subprocess
import sys
from types import ModuleType

import pytest

import sympy_mellin_ext


def test_every_public_name_is_there_and_no_module() -> None:
    for name in sympy_mellin_ext.__all__:
        assert not isinstance(getattr(sympy_mellin_ext, name), ModuleType), name
    assert set(sympy_mellin_ext.__all__) <= set(dir(sympy_mellin_ext))
    assert set(sympy_mellin_ext._HOMES) == set(sympy_mellin_ext.__all__)


@pytest.mark.parametrize("name", ["integrate", "closed_form", "verify"])
def test_function_survives_its_module(name: str) -> None:
    module = importlib.import_module(f"sympy_mellin_ext.{name}")
    assert isinstance(module, ModuleType)
    assert callable(getattr(sympy_mellin_ext, name))


def test_unknown_name() -> None:
    with pytest.raises(AttributeError, match="has no attribute 'nonsense'"):
        sympy_mellin_ext.nonsense  # noqa: B018


def test_importing_the_package_loads_nothing_of_it() -> None:
    code = (
        "import sys, sympy, sympy_mellin_ext; "
        "print([m for m in sys.modules if m.startswith('sympy_mellin_ext.')])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
