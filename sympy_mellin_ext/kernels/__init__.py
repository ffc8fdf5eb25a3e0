"""The table of kernels: one declarative row a function, each with its published source."""
from .table import Row, pairs, register_kernel, rows, unregister_kernel

__all__ = ["Row", "pairs", "register_kernel", "rows", "unregister_kernel"]
