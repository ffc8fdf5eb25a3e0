"""A process of one's own in which limits of time and memory hold.

A future that runs cannot be cancelled, and a worker of a pool or of a cluster may not have children of
:mod:`multiprocessing`.  So every thread that evaluates entries, wherever it runs, owns one plain subprocess: a hang
is ended by killing it, and a crash costs the entry that caused it and nothing else.
"""
from __future__ import annotations

import json
import pickle
import signal
import subprocess
import sys
import threading
import time
import weakref
from typing import Any

from .entry import Entry
from .journal import Record
from .work import Options

_START = (
    "import sys, json; sys.path[:] = json.loads(sys.argv[1]); from sympy_mellin_ext.batch.child import main; main()"
)
_STARTUP_SECONDS = 120.0


class Guard:
    """One worker process, started when it is needed and replaced when it is lost."""

    def __init__(self) -> None:
        self.memory = 0
        self._process: subprocess.Popen[bytes] | None = None
        self._closed = False
        self._lock = threading.Lock()

    def run(self, entry: Entry, options: Options) -> Record:
        """The record of an entry, within its limits."""
        if options.memory != self.memory:
            self.stop()
            self.memory = options.memory
        started = time.monotonic()
        process = self._ready()
        begun = time.monotonic()
        late = threading.Event()
        timer = threading.Timer(options.seconds, _end, (process, late))
        timer.daemon = True
        timer.start()
        record: Record | None = None
        try:
            assert process.stdin is not None and process.stdout is not None
            pickle.dump((entry, options), process.stdin)
            process.stdin.flush()
            while True:
                kind, content = pickle.load(process.stdout)
                if kind == "part":
                    record = content
                elif kind == "memory":
                    self.stop()
                    return self._lost(record, entry, "crashed", f"more than {options.memory} MiB of memory", begun)
                else:
                    if content:
                        self.stop()
                    assert record is not None
                    return record
        except (EOFError, OSError, pickle.UnpicklingError):
            self.stop()
            if late.is_set():
                return self._lost(record, entry, "timeout", f"not finished within {options.seconds:g} s", begun)
            code = process.returncode
            if _idle(code) and time.monotonic() - begun < 1:
                return self.run(entry, options)  # it had just gone to rest
            return self._lost(record, entry, "crashed", f"the worker process died ({_cause(code)})", started)
        finally:
            timer.cancel()

    def _lost(self, record: Record | None, entry: Entry, status: str, reason: str, begun: float) -> Record:
        """What is left of an entry whose process is gone: its closed form stands if it had come that far."""
        if record is not None:
            note = f"the numerical part was not finished: {reason}"
            return {**record, "certificate": {"ok": None, "digits": [], "points": [], "note": note}}
        return {"name": entry.name, "key": entry.key, "status": status, "value": None, "condition": None,
                "seconds": round(time.monotonic() - begun, 6), "reason": reason, **entry.described()}  # fmt: skip

    def _ready(self) -> subprocess.Popen[bytes]:
        process = self._process
        if process is not None and process.poll() is None:
            return process
        with self._lock:
            if self._closed:
                raise RuntimeError("the run was stopped")
            process = subprocess.Popen(
                [sys.executable, "-c", _START, json.dumps(sys.path)], stdin=subprocess.PIPE, stdout=subprocess.PIPE,
                stderr=subprocess.DEVNULL, start_new_session=True,
            )  # fmt: skip
            self._process = process
        weakref.finalize(self, _kill, process)
        timer = threading.Timer(_STARTUP_SECONDS, process.kill)
        timer.daemon = True
        timer.start()
        try:
            assert process.stdout is not None
            pickle.load(process.stdout)
        except (EOFError, pickle.UnpicklingError):
            self.stop()
            raise RuntimeError(f"a worker process could not be started ({_cause(process.returncode)})") from None
        finally:
            timer.cancel()
        return process

    def stop(self) -> None:
        """End the process; the next entry gets a new one."""
        process, self._process = self._process, None
        if process is not None:
            _kill(process)

    def close(self) -> None:
        """End the process for good, from whatever thread."""
        with self._lock:
            self._closed = True
        self.stop()


def _kill(process: subprocess.Popen[bytes]) -> None:
    process.kill()
    process.wait()
    for pipe in (process.stdin, process.stdout):
        if pipe is not None:
            try:
                pipe.close()
            except OSError:
                continue  # what was still to be written has no reader any more


def _end(process: subprocess.Popen[bytes], late: threading.Event) -> None:
    late.set()
    process.kill()


def _idle(code: int | None) -> bool:
    return hasattr(signal, "SIGALRM") and code == -signal.SIGALRM


def _cause(code: int | None) -> str:
    if code is not None and code < 0:
        try:
            return signal.Signals(-code).name
        except ValueError:
            return f"signal {-code}"
    return f"exit status {code}"


_own = threading.local()


def run_guarded(entry: Entry, options: Options) -> Record:
    """The record of an entry from this thread's own worker process; this is what executors are handed."""
    guard: Any = getattr(_own, "guard", None)
    if guard is None:
        guard = _own.guard = Guard()
    record: Record = guard.run(entry, options)
    return record


