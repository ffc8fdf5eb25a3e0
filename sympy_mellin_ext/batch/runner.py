"""Many integrals at once, on any executor, with limits, a journal and progress."""
from __future__ import annotations

import os
import sys
from collections.abc import Collection, Iterable, Iterator
from concurrent.futures import CancelledError, Executor, Future, ThreadPoolExecutor
from contextlib import contextmanager
from pathlib import Path
from queue import SimpleQueue
from threading import local
from typing import Any

from .entry import Entry, as_entry
from .guard import Guard, run_guarded
from .journal import Journal, JournalError, Record
from .work import Options

# Futures that fail this way cost their own entry only: a cluster gives a task up after it lost several workers to it.
_LOST = ("KilledWorker",)


class RunError(RuntimeError):
    """The executor itself failed; what was finished is in the journal."""


def evaluate_many(
    problems: Iterable[Any],
    executor: Executor | None = None,
    *,
    jobs: int | None = None,
    seconds: float = 60.0,
    memory: int = 2048,
    journal: str | Path | None = None,
    retry: Collection[str] = (),
    check: bool = True,
    stock: bool = True,
    steps: bool = False,
    progress: bool = False,
) -> list[Record]:
    """Evaluate a list of integrals and return a record of each, in their order.

    Every entry is evaluated in a worker process, which is ended and replaced where a limit is passed, so that a hang
    or a crash of one costs only that one.

    Parameters
    ----------
    problems : iterable
        Each an :class:`Entry`, an ``Integral``, a tuple ``(integrand, (x, lower, upper))``, or a table as in a list
        file, ``{"integrand": "exp(-a*x)", "assume": {"a": "positive"}}``.
    executor : concurrent.futures.Executor, optional
        Where to run: a pool of threads or processes, ``Client.get_executor()`` of a Dask cluster.  By default a
        pool of `jobs` worker processes.  Each thread of the executor owns one process in which the limits hold.
    jobs : int
        Number of worker processes of the default pool; by default one for each processor.
    seconds, memory : float, int
        Limits of an entry, in seconds and in MiB (memory: where the system can limit it).
    journal : path
        Records are appended to it as they come; entries that are in it already are not computed again.
    retry : statuses
        Entries whose record in the journal has one of these statuses are computed again all the same.
    check, stock, steps : bool
        Compare with quadrature; ask SymPy's own integrator where we have no closed form; record the derivation.
    progress : bool
        Show a progress bar if tqdm is there and the standard error stream is a terminal.

    Returns
    -------
    list of dict
        With ``name``, ``key``, ``status`` (solved, stock, refused, timeout, crashed, error), ``value``,
        ``condition``, ``seconds``, ``reason``, and more where it applies: ``strategy``, ``sources``, ``special``,
        ``certificate``, ``expected``, ``sweep``.

    Raises
    ------
    TypeError, ValueError
        For problems and arguments that are not of these forms.
    JournalError
        If the journal is in use or cannot be written.
    RunError
        If the executor breaks.

    Examples
    --------
    >>> from sympy import exp, oo, symbols
    >>> from sympy_mellin_ext.batch import evaluate_many
    >>> x, a = symbols("x a", positive=True)
    >>> record, = evaluate_many([(x**2*exp(-a*x), (x, 0, oo))], jobs=1)
    >>> record["status"], record["value"], record["certificate"]["ok"]
    ('solved', '2/a**3', True)
    """
    entries = [as_entry(problem, number) for number, problem in enumerate(problems, start=1)]
    options = Options(seconds, memory, check, stock, steps)
    if journal is None:
        found = dict(counted(stream(entries, options, executor, jobs), len(entries), progress))
    else:
        with Journal(journal, retry) as book:
            found = dict(counted(stream(entries, options, executor, jobs, book), len(entries), progress))
    return [found[entry.name] for entry in entries]


def stream(
    entries: list[Entry],
    options: Options,
    executor: Executor | None = None,
    jobs: int | None = None,
    journal: Journal | None = None,
) -> Iterator[tuple[str, Record]]:
    """(name, record) as the entries are finished; those in the journal come first.

    Closing the iterator, or an exception in it, ends the worker processes of the default pool.
    """
    names = {entry.name for entry in entries}
    if len(names) < len(entries):
        raise ValueError("the names of the entries must differ from one another")
    if not options.seconds > 0 or options.memory < 1 or (jobs is not None and jobs < 1):
        raise ValueError("seconds, memory and jobs must be positive")
    waiting = []
    for entry in entries:
        record = journal.records.get((entry.name, entry.key)) if journal is not None else None
        if record is None:
            waiting.append(entry)
        else:
            yield entry.name, record
    if not waiting:
        return
    with _pool(executor, min(jobs or processors(), len(waiting))) as (pool, task):
        futures: dict[Future[Record], Entry] = {}
        finished: SimpleQueue[Future[Record]] = SimpleQueue()
        try:
            for entry in waiting:
                future = pool.submit(task, entry, options)
                futures[future] = entry
                future.add_done_callback(finished.put)
            while futures:
                future = finished.get()
                record = _result(future, futures.pop(future))
                try:
                    if journal is not None:
                        journal.add(record)
                except JournalError:
                    yield record["name"], record  # not on disk, yet it can be shown
                    raise
                yield record["name"], record
        finally:
            for future in futures:
                future.cancel()


def _result(future: Future[Record], entry: Entry) -> Record:
    try:
        return future.result()
    except CancelledError:
        raise RunError(f"the executor dropped {entry.name}; run again to continue") from None
    except Exception as error:
        if type(error).__name__ not in _LOST:
            raise RunError(f"the executor failed at {entry.name}: {type(error).__name__}: {error}") from error
        return {"name": entry.name, "key": entry.key, "status": "crashed", "value": None, "condition": None,
                "seconds": 0.0, "reason": f"{type(error).__name__}: {str(error)[:300]}", **entry.described()}


def processors() -> int:
    """Processors that this process may use."""
    try:
        return len(os.sched_getaffinity(0))
    except AttributeError:
        return os.cpu_count() or 1


@contextmanager
def _pool(executor: Executor | None, jobs: int) -> Iterator[tuple[Executor, Any]]:
    """The executor and the function to hand to it; the default is a thread for each worker process."""
    if executor is not None:
        yield executor, run_guarded
        return
    guards: list[Guard] = []
    own = local()

    def task(entry: Entry, options: Options) -> Record:
        guard = getattr(own, "guard", None)
        if guard is None:
            guard = own.guard = Guard()
            guards.append(guard)
        record: Record = guard.run(entry, options)
        return record

    pool = ThreadPoolExecutor(jobs)
    try:
        yield pool, task
    finally:
        pool.shutdown(wait=False, cancel_futures=True)
        for guard in list(guards):
            guard.close()
        pool.shutdown(wait=True)


def counted(found: Iterator[tuple[str, Record]], total: int, progress: bool) -> Iterator[tuple[str, Record]]:
    """The same, with a progress bar beside it."""
    if not progress or not sys.stderr.isatty():
        yield from found
        return
    try:
        from tqdm import tqdm
    except ImportError:
        yield from found
        return
    yield from tqdm(found, total=total, unit="integral", file=sys.stderr)
