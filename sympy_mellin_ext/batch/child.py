"""The worker process: reads entries from its standard input, writes their records to its standard output.

It is started by :mod:`.guard` and trusts what it reads, which comes from the process that started it.
"""
from __future__ import annotations

import os
import pickle
import signal
import sys
from typing import Any, BinaryIO

# A worker whose parent is gone, or that nobody needs any more, ends by itself.
IDLE = 300.0
GRACE = 5.0


def main() -> None:
    """Serve until the parent closes the pipe."""
    source, sink = _pipes()
    from .work import work

    _send(sink, "ready", None)
    limited = False
    while True:
        _alarm(IDLE)
        try:
            entry, options = pickle.load(source)
        except EOFError:
            return
        _alarm(options.seconds + GRACE)
        if not limited:
            limit_memory(options.memory)
            limited = True
        try:
            work(entry, options, lambda record: _send(sink, "part", record))
            _send(sink, "done", _large(options.memory))
        except MemoryError:
            _send(sink, "memory", None)
            return


def _pipes() -> tuple[BinaryIO, BinaryIO]:
    """The two pipes, out of reach of anything that prints or reads."""
    source, sink = os.fdopen(os.dup(0), "rb"), os.fdopen(os.dup(1), "wb")
    null = os.open(os.devnull, os.O_RDWR)
    os.dup2(null, 0)
    os.dup2(null, 1)
    sys.stdout = open(os.devnull, "w", encoding="utf-8")  # noqa: SIM115 - for as long as the process lives
    return source, sink


def _send(sink: BinaryIO, kind: str, content: Any) -> None:
    pickle.dump((kind, content), sink)
    sink.flush()


def _alarm(seconds: float) -> None:
    if hasattr(signal, "setitimer"):
        signal.signal(signal.SIGALRM, signal.SIG_DFL)
        signal.setitimer(signal.ITIMER_REAL, seconds)


def limit_memory(mebibytes: int) -> None:
    """Let this process take so much more than it has; without effect where the system knows no such limit."""
    try:
        import resource
    except ImportError:
        return
    limit = _taken() + mebibytes * 2**20
    _, hard = resource.getrlimit(resource.RLIMIT_AS)
    if hard != resource.RLIM_INFINITY:
        limit = min(limit, hard)
    resource.setrlimit(resource.RLIMIT_AS, (limit, hard))


def _taken() -> int:
    """Address space of this process in bytes; a guess where it cannot be read."""
    try:
        with open("/proc/self/statm", encoding="ascii") as file:
            return int(file.read().split()[0]) * os.sysconf("SC_PAGE_SIZE")
    except (OSError, ValueError):
        return 2**29


def _large(mebibytes: int) -> bool:
    """Whether earlier entries have left so much behind that the next would feel it."""
    return _taken() > 2**28 + mebibytes * 2**19
