"""Closed forms as numerical functions, and as the source text of such functions."""

from .build import callable_of, source_of
from .printer import Unsupported

__all__ = ["Unsupported", "callable_of", "source_of"]
