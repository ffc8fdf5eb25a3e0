"""Closed forms against numerical quadrature."""
from .quadrature import quad

__all__ = ["quad"]
