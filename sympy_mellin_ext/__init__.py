"""Closed forms, with their exact parameter regions, for half-line integrals in SymPy."""
from .closed_form import ClosedForm
from .integrate import closed_form, integrate, mellin, principal_value
from .problem import Refusal
from .theorem import master_theorem

__version__ = "0.1.0"

__all__ = ["ClosedForm", "Refusal", "closed_form", "integrate", "master_theorem", "mellin", "principal_value"]
