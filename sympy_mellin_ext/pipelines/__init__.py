"""Ways into SymPy's own pipelines: the hook under its calls, and the rewriting rule."""
from .hook import disable, enable, extend_sympy, is_enabled
from .rule import evaluate_integrals

__all__ = ["disable", "enable", "evaluate_integrals", "extend_sympy", "is_enabled"]
