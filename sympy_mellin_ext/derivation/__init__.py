"""Derivations: the facts behind each step, and the whole as text, Markdown or LaTeX."""
from .details import Detail, details
from .document import Document, document
from .render import FORMATS, render

__all__ = ["FORMATS", "Detail", "Document", "details", "document", "render"]
