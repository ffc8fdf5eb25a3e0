"""Series of exponentials and the Dirichlet series that are their transforms: zeta, eta, Hurwitz, Lerch, polylog."""
from .combination import Combination, Row
from .functions import NoClosedForm

__all__ = ["Combination", "NoClosedForm", "Row"]
