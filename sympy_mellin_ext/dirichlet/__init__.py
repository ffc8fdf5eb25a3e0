"""Series of exponentials and their transforms: zeta, eta, Hurwitz, Lerch, polylogarithm."""

from .combination import Combination, Row
from .functions import NoClosedForm

__all__ = ["Combination", "NoClosedForm", "Row"]
