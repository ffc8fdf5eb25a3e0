"""From an integrand to a sum of terms: powers, logarithms and kernels, by dispatch on the node type."""
from .reader import read_terms
from .term import Kernel, Term, Wave

__all__ = ["Kernel", "Term", "Wave", "read_terms"]
