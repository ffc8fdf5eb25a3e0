"""Closed forms against numerical quadrature."""
from .quadrature import quad
from .record import Verification, verify

__all__ = ["Verification", "quad", "verify"]
