"""The table of kernels: one declarative row a function, each with its published source."""
from .table import Row, pairs, rows

__all__ = ["Row", "pairs", "rows"]
