"""Power series as transforms: coefficients, growth, recurrences, zeta coefficients."""

from .coefficients import CoefficientForm, Extra, gamma_form, term_ratio
from .growth import Growth, SeriesTransform, coefficient_transform, growth_ok, phi_transform
from .holonomic import Piece, TaylorTransform, hypergeometric_pieces, taylor_transform
from .zeta import ZetaTransform, zeta_transform

__all__ = [
    "CoefficientForm",
    "Extra",
    "Growth",
    "Piece",
    "SeriesTransform",
    "TaylorTransform",
    "ZetaTransform",
    "coefficient_transform",
    "gamma_form",
    "growth_ok",
    "hypergeometric_pieces",
    "phi_transform",
    "taylor_transform",
    "term_ratio",
    "zeta_transform",
]
