"""Reports: a self-contained page of closed forms with certificates, derivations and pictures.

Pictures need matplotlib (extra ``report``); everything else needs nothing beside SymPy.
"""
from .card import Record
from .page import write_report

__all__ = ["Record", "write_report"]
