"""A worked list of integrals: what a crew that keeps measuring buoys at sea has to put into formulas.

The numbers and the crew are invented; the integrals are of the kinds that reliability, radio and wave
engineers meet.  Formulas that reach a design are to be checked independently by whoever answers for it.
"""
from .buoys import BUOYS, Example

__all__ = ["BUOYS", "Example"]
