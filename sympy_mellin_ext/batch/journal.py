"""The journal: one JSON record a line, on disk before anything else happens.

A record is written with one call and synchronised, so that a killed run leaves at most a half-written last line,
which the next run removes.  The open file carries a lock, which the system drops with the process.
"""
from __future__ import annotations

import json
import os
import stat
import tempfile
from collections.abc import Collection, Iterator
from pathlib import Path
from types import ModuleType, TracebackType
from typing import Any

fcntl: ModuleType | None
try:
    import fcntl
except ImportError:  # where the system has no such locks, one run at a time is up to the user
    fcntl = None

Record = dict[str, Any]
STATUSES = ("solved", "stock", "refused", "timeout", "crashed", "error")
_BEGINNING = b'{"name": '


class JournalError(OSError):
    """A journal that cannot be used or written; the message says what to do."""


class Journal:
    """Records on disk, by (name, key).

    Parameters
    ----------
    path : path of the file, made if it is not there
    retry : statuses of records to be dropped, so that their entries are computed again

    Raises
    ------
    JournalError
        If it cannot be opened, is in use, or is no journal.
    """

    def __init__(self, path: str | Path, retry: Collection[str] = ()) -> None:
        self.path = Path(path)
        self.records: dict[tuple[str, str], Record] = {}
        self._held: list[int] = []
        try:
            self._fd = os.open(self.path, os.O_RDWR | os.O_CREAT | os.O_APPEND, 0o666)
        except OSError as error:
            raise JournalError(f"{self.path}: the journal cannot be opened: {error.strerror}") from None
        self._held.append(self._fd)
        try:
            self._lock(self._fd)
            # a device, such as the one that is always full, holds no records
            if stat.S_ISREG(os.fstat(self._fd).st_mode):
                self._load()
                if any(r["status"] in retry for r in self.records.values()):
                    self._drop(retry)
        except BaseException:
            self.close()
            raise

    def _lock(self, fd: int) -> None:
        if fcntl is None:
            return
        try:
            fcntl.flock(fd, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            raise JournalError(f"{self.path}: another run is using this journal; wait for it, or give this run a "
                               "journal of its own") from None  # fmt: skip
        except OSError:  # a file system without locks
            return

    def _load(self) -> None:
        with open(self._fd, "rb", closefd=False) as stream:
            stream.seek(0)
            data = stream.read()
        whole, _, tail = data.rpartition(b"\n")
        for number, line in enumerate(whole.split(b"\n"), start=1):
            if line.strip():
                record = _parsed(line)
                if record is None:
                    raise JournalError(f"{self.path}: line {number} is no record; was the right file given?")
                self.records.setdefault((record["name"], record["key"]), record)
        if not tail:
            return
        record = _parsed(tail)
        try:
            if record is not None:
                self.records.setdefault((record["name"], record["key"]), record)
                os.write(self._fd, b"\n")
            elif tail.startswith(_BEGINNING[:len(tail)]) or not tail.strip(b"\0"):
                os.ftruncate(self._fd, len(data) - len(tail))
            else:
                raise JournalError(f"{self.path}: this is no journal; was the right file given?")
        except JournalError:
            raise
        except OSError as error:
            raise JournalError(f"{self.path}: the last line cannot be repaired: {error.strerror}") from None

    def _drop(self, retry: Collection[str]) -> None:
        kept = {k: r for k, r in self.records.items() if r["status"] not in retry}
        try:
            fd, name = tempfile.mkstemp(prefix=self.path.name, dir=self.path.parent or ".")
            try:
                with open(fd, "wb") as stream:
                    stream.writelines(_line(r) for r in kept.values())
                    stream.flush()
                    os.fsync(fd)
                os.chmod(name, stat.S_IMODE(os.fstat(self._fd).st_mode))
                new = os.open(name, os.O_RDWR | os.O_APPEND)
                self._lock(new)
                # the old file stays locked, so that a run that opened it before this moment is refused too
                os.replace(name, self.path)
            except BaseException:
                Path(name).unlink(missing_ok=True)
                raise
        except OSError as error:
            raise JournalError(f"{self.path}: the journal cannot be rewritten: {error.strerror}") from None
        self._held.append(new)
        self._fd, self.records = new, kept

    def add(self, record: Record) -> None:
        """Write one record and wait until it is on disk; a record that is there already is not repeated."""
        place = (record["name"], record["key"])
        if place in self.records:
            return
        line = _line(record)
        try:
            size = os.fstat(self._fd).st_size
            written = os.write(self._fd, line)
            if written < len(line):
                os.ftruncate(self._fd, size)
                raise OSError(28, "no space left on device")
            _sync(self._fd)
        except OSError as error:
            raise JournalError(f"{self.path}: the record of {record['name']} cannot be written: {error.strerror}; "
                               "make room or give another journal, and run the same command again") from None
        self.records[place] = record

    def close(self) -> None:
        """Give the file and its lock back."""
        while self._held:
            os.close(self._held.pop())

    def __iter__(self) -> Iterator[Record]:
        return iter(self.records.values())

    def __enter__(self) -> Journal:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None,
                 trace: TracebackType | None) -> None:
        self.close()


def _line(record: Record) -> bytes:
    first = {key: record[key] for key in ("name", "key", "status")}
    return json.dumps({**first, **record}, ensure_ascii=False).encode() + b"\n"


def _parsed(line: bytes) -> Record | None:
    try:
        record = json.loads(line)
    except (ValueError, RecursionError):
        return None
    if not isinstance(record, dict) or record.get("status") not in STATUSES:
        return None
    return record if isinstance(record.get("name"), str) and isinstance(record.get("key"), str) else None


def _sync(fd: int) -> None:
    try:
        os.fsync(fd)
    except OSError as error:
        if error.errno != 22:  # pipes and devices have nothing to synchronise
            raise
