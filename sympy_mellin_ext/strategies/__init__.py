"""Strategies, tried in order; each returns a ClosedForm that it has justified, or None."""
from .registry import Strategy, attempt, register, strategies, unregister

# the name under which the package shows the list, beside its subpackage of this name
registered_strategies = strategies

__all__ = ["Strategy", "attempt", "register", "registered_strategies", "strategies", "unregister"]
