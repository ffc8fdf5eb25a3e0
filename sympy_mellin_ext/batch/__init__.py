"""Lists of integrals: read, evaluated in worker processes under limits, kept in a journal, written out."""
from .entry import Entry
from .journal import Journal, JournalError
from .reader import ListError, read_list
from .runner import RunError, evaluate_many, stream
from .safe import InputError, read_condition, read_expression, read_symbol
from .work import Options

__all__ = [
    "Entry",
    "InputError",
    "Journal",
    "JournalError",
    "ListError",
    "Options",
    "RunError",
    "evaluate_many",
    "read_condition",
    "read_expression",
    "read_list",
    "read_symbol",
    "stream",
]
