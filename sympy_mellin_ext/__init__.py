"""Closed forms, with their exact parameter regions, for half-line integrals in SymPy."""
from .closed_form import ClosedForm
from .integrate import closed_form, integrate, mellin, principal_value
from .inverse_transform import inverse_transform
from .kernels import register_kernel, unregister_kernel
from .pipelines import disable, enable, evaluate_integrals, extend_sympy
from .problem import Refusal
from .strategies import register, unregister
from .strategies import strategies as registered_strategies
from .theorem import master_theorem

__version__ = "0.1.0"

__all__ = [
    "ClosedForm",
    "Refusal",
    "closed_form",
    "disable",
    "enable",
    "evaluate_integrals",
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
]
