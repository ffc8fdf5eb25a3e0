"""The table of kernels: one declarative row a function, each with its published source."""
from .table import Row, pair_rows, register_kernel, rows, unregister_kernel

__all__ = ["Row", "pair_rows", "register_kernel", "rows", "unregister_kernel"]
