"""From a Gamma product on its strip back to a function with a name."""

from .invert import inverse_mellin
from .pfq import named_pfq

__all__ = ["inverse_mellin", "named_pfq"]
