"""Strategies, tried in order; each returns a ClosedForm that it has justified, or None."""
from .registry import Strategy, attempt, register, strategies, unregister

__all__ = ["Strategy", "attempt", "register", "strategies", "unregister"]
