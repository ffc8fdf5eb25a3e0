"""Expansions of closed forms in a parameter, and of functions and integrals at 0 and at oo."""

from .asymptotics import Asymptotics, expansion, expansion_of_integral, expansion_of_sum
from .parameter import ParameterSeries, parameter_series
from .special import value_at

__all__ = [
    "Asymptotics",
    "ParameterSeries",
    "expansion",
    "expansion_of_integral",
    "expansion_of_sum",
    "parameter_series",
    "value_at",
]
