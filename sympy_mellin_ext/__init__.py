"""Closed forms, with their exact parameter regions, for half-line integrals in SymPy."""
from __future__ import annotations

import sys
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from .batch import evaluate_many
    from .closed_form import ClosedForm
    from .integrate import closed_form, integrate, mellin, principal_value
    from .inverse_transform import inverse_transform
    from .kernels import register_kernel, unregister_kernel
    from .pipelines import disable, enable, evaluate_integrals, extend_sympy
    from .problem import Refusal
    from .strategies import register, registered_strategies, unregister
    from .theorem import master_theorem
    from .verify import Verification, verify

__version__ = "0.1.0"

# Where the public names live; each module is loaded when its first name is asked for, since importing the package
# should cost next to nothing beside importing SymPy.
_HOMES = {
    "ClosedForm": "closed_form",
    "Refusal": "problem",
    "Verification": "verify",
    "closed_form": "integrate",
    "disable": "pipelines",
    "enable": "pipelines",
    "evaluate_integrals": "pipelines",
    "evaluate_many": "batch",
    "extend_sympy": "pipelines",
    "integrate": "integrate",
    "inverse_transform": "inverse_transform",
    "master_theorem": "theorem",
    "mellin": "integrate",
    "principal_value": "integrate",
    "register": "strategies",
    "register_kernel": "kernels",
    "registered_strategies": "strategies",
    "unregister": "strategies",
    "unregister_kernel": "kernels",
    "verify": "verify",
}

__all__ = [
    "ClosedForm",
    "Refusal",
    "Verification",
    "closed_form",
    "disable",
    "enable",
    "evaluate_integrals",
    "evaluate_many",
    "extend_sympy",
    "integrate",
    "inverse_transform",
    "master_theorem",
    "mellin",
    "principal_value",
    "register",
    "register_kernel",
    "registered_strategies",
    "unregister",
    "unregister_kernel",
    "verify",
]


class _Package(ModuleType):
    """The package's namespace: a public function keeps its name when the submodule of that name is loaded."""

    def __getattr__(self, name: str) -> Any:
        home = _HOMES.get(name)
        if home is None:
            raise AttributeError(f"module {self.__name__!r} has no attribute {name!r}")
        value = getattr(import_module(f".{home}", self.__name__), name)
        super().__setattr__(name, value)
        return value

    def __setattr__(self, name: str, value: Any) -> None:
        if name in _HOMES and isinstance(value, ModuleType):
            return  # the import system binds submodules; `verify` stays the function
        super().__setattr__(name, value)

    def __dir__(self) -> list[str]:
        return sorted({*super().__dir__(), *__all__})


sys.modules[__name__].__class__ = _Package
