"""Regions of parameters: what the assumptions imply, and the fewest inequalities for what they do not."""

from .facts import Facts, real_part
from .projection import project
from .region import Region

__all__ = ["Facts", "Region", "project", "real_part"]
