"""Regions of parameters: what the assumptions imply, and the fewest inequalities for what they do not."""

from .facts import Facts, real_part
from .region import Region, project

__all__ = ["Facts", "Region", "project", "real_part"]
