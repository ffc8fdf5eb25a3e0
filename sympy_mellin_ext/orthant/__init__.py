"""Integrals over the orthant in several variables: the master theorem by one linear system."""

from .ranges import solve_several
from .strategy import integrate_orthant

__all__ = ["integrate_orthant", "solve_several"]
