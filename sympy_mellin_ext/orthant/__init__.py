"""Integrals over the orthant in several variables: the master theorem by one linear system."""

from .strategy import integrate_orthant

__all__ = ["integrate_orthant"]
