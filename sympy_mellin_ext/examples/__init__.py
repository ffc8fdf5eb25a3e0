"""A worked list of integrals: what a crew that keeps measuring buoys at sea has to put into formulas.

The list is ``buoys.toml`` beside this file, in the format of :mod:`sympy_mellin_ext.batch`.
"""
from pathlib import Path

BUOYS = Path(__file__).with_name("buoys.toml")

__all__ = ["BUOYS"]
