"""Power series as transforms: coefficients, growth, recurrences, zeta coefficients."""
from .coefficients import CoefficientForm, Extra, gamma_form, term_ratio
from .growth import Growth, SeriesTransform, coefficient_transform, growth_ok, phi_transform
from .holonomic import TaylorTransform, taylor_transform

__all__ = [
    "CoefficientForm", "Extra", "Growth", "SeriesTransform", "TaylorTransform", "coefficient_transform",
    "gamma_form", "growth_ok", "phi_transform", "taylor_transform", "term_ratio",
]
