"""Lists of integrals: reading, workers and their limits, journal, outputs, executors."""
from __future__ import annotations

import csv
import errno
import importlib.util
import json
import os
import signal
import subprocess
import sys
import threading
import time
from collections import Counter
from concurrent.futures import BrokenExecutor, Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import pytest
from mpmath import mp
from sympy import Integral, Rational, Symbol, exp, oo

from sympy_mellin_ext.batch import (
    Entry,
    Journal,
    JournalError,
    ListError,
    Options,
    RunError,
    evaluate_many,
    read_list,
    stream,
)
from sympy_mellin_ext.batch.outputs import identifiers, succeeded, write_module, write_sweeps, write_tex
from sympy_mellin_ext.batch.reader import entry_from_table
from sympy_mellin_ext.examples import BUOYS

x = Symbol("x", positive=True)
a = Symbol("a", positive=True)
QUICK = Options(seconds=60, check=False)


def moments(count: int) -> list[Entry]:
    return [Entry(f"moment {n}", x**n * exp(-a * x), ((x, 0, oo),)) for n in range(count)]


# -- lists ------------------------------------------------------------------------------------------------


def write(folder: Path, text: str) -> Path:
    path = folder / "list.toml"
    path.write_text(text, encoding="utf-8")
    return path


def test_reads_every_key(tmp_path: Path) -> None:
    (tmp_path / "values.csv").write_text("where,b\nhere,1/2\nthere, 2\n")
    path = write(tmp_path, """
title = "Two"
[[integral]]
name = "first"
integrand = "t**(s - 1)*exp(-a*t)*0.5"
variable = "t"
lower = 0
upper = "oo"
assume = { a = "positive", s = "real" }
given = ["s > 1", "s < a"]
sweep = { a = [1, "3/2"], s = { first = 1.5, last = 3, count = 3 } }
expected = "gamma(s)/(2*a**s)"
digits = 20
note = "a note"
[[integral]]
name = "second"
integrand = "exp(-b*x**2)"
lower = "-oo"
csv = "values.csv"
sweep = { c = { first = 1, last = 100, count = 3, spacing = "logarithmic" } }
[integral.assume]
b = "positive"
c = "positive"
""")
    first, second = read_list(path)
    s, positive = Symbol("s", real=True), Symbol("t", positive=True)
    assert first.integrand == positive ** (s - 1) * exp(-a * positive) / 2
    assert first.limits == ((positive, 0, oo),)
    assert first.given == (s > 1, s < a)
    assert len(first.sweep) == 6
    assert first.sweep[1] == {a: 1, s: Rational(9, 4)}
    assert (first.digits, first.note) == (20, "a note")
    assert second.limits[0][0].is_positive is None
    b, c = Symbol("b", positive=True), Symbol("c", positive=True)
    assert [point[b] for point in second.sweep] == [Rational(1, 2)] * 3 + [2] * 3
    assert abs(second.sweep[1][c] - 10) < 1e-20


HEAD = "[[integral]]\nname='one'\nintegrand='x'\n"


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("[[integral]\nname=1", "not valid TOML.*line 1"),
        ("titel = 'a'", "unknown key 'titel' at the top; did you mean title?"),
        ("title = 'a'", "no \\[\\[integral\\]\\] table"),
        ("integral = 3", "array of tables"),
        ("[[integral]]\nintegrand = 'x'", "line 1, entry number 1, name: a text"),
        ("[[integral]]\nname = 'one'", "line 1, entry one, integrand: is missing"),
        ("[[integral]]\nname = 'one'\n\nintegrant = 'x'", "line 4, entry one, integrant: .*did you mean integrand?"),
        ("[[integral]]\nname = 'one'\nintegrand = 'exp(-y)'", r"integrand: unknown name y.*position 6"),
        ("[[integral]]\nname = 'one'\nintegrand = ['x']", "integrand: a formula is expected"),
        (HEAD + "assume={a='positiv'}", "line 4.*did you mean positive"),
        (HEAD + "assume={x='real'}", "variable: x is a symbol of assume"),
        (HEAD + "given=['a']", "line 4, entry one, given: unknown name a"),
        (HEAD + "digits=2.5", "digits: a whole number from 3 to 100"),
        (HEAD.replace("'x'", "'a*x'") + "assume={a='real',b='real'}\nsweep={b=[1]}", "sweep: no value for a"),
        (HEAD + "assume={a='real'}\nsweep={b=[1]}", "unknown symbol b"),
        (HEAD + "assume={a='real'}\nsweep={a=['b']}", "sweep: unknown name b"),
        (HEAD + "assume={a='real'}\nsweep={a={first=1,last=2}}", "count must be a whole"),
        (HEAD + "assume={a='real'}\nsweep={a={first=1,last=2,cout=3}}", "unknown key cout"),
        (HEAD + "csv='../values.csv'", "in the folder of the list"),
        (HEAD + "csv='none.csv'", "cannot be read"),
        (HEAD + "[[integral]]\nname='one'\nintegrand='x'", "line 5.*has this name"),
    ],
)
def test_faults_name_file_line_entry_and_position(tmp_path: Path, text: str, message: str) -> None:
    with pytest.raises(ListError, match=message) as caught:
        read_list(write(tmp_path, text))
    assert "list.toml" in str(caught.value)


def test_all_faults_are_told_at_once(tmp_path: Path) -> None:
    text = "".join(f"[[integral]]\nname = 'n{n}'\nintegrand = 'y'\n" for n in range(3))
    with pytest.raises(ListError) as caught:
        read_list(write(tmp_path, text))
    assert len(caught.value.problems) == 3


def test_key_knows_the_question_only() -> None:
    entry = moments(2)[1]
    assert replace(entry, name="other", note="a note").key == entry.key
    changed = [replace(entry, digits=20), replace(entry, integrand=x), replace(entry, expected=x),
               replace(entry, limits=((x, 1, oo),)), replace(entry, given=(a > 1,)), replace(entry, sweep=({a: 1},))]
    assert len({entry.key, *(c.key for c in changed)}) == 7


def test_the_shipped_list_is_two_dozen_with_expected_formulas() -> None:
    entries = read_list(BUOYS)
    assert len(entries) >= 24
    assert all(entry.expected is not None for entry in entries)
    assert sum(bool(entry.sweep) for entry in entries) >= 10


# -- workers ----------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Misbehaving(Entry):
    """An entry that does something to its worker, and nothing to the process that made it."""

    deed: str = ""
    home: int = 0

    def described(self) -> dict[str, Any]:
        if os.getpid() != self.home:
            if self.deed == "hang":
                time.sleep(1000)
            elif self.deed == "memory":
                bytearray(2**29)
            elif self.deed == "abort":
                os.abort()
            elif self.deed == "exit":
                os._exit(3)
            elif self.deed == "raise":
                raise ZeroDivisionError("of its own")
            elif self.deed == "print":
                print("noise on the standard output")
        return super().described()


def misbehaving(deed: str) -> Entry:
    return Misbehaving(deed, x * exp(-a * x), ((x, 0, oo),), deed=deed, home=os.getpid())


def test_limits_cost_only_the_entry_that_meets_them() -> None:
    deeds = ["hang", "memory", "abort", "exit", "print"]
    entries = [entry for deed in deeds for entry in (misbehaving(deed), replace(moments(2)[1], name=f"after {deed}"))]
    options = {"seconds": 4, "memory": 256, "check": False}
    records = {r["name"]: r for r in evaluate_many(entries, jobs=2, **options)}
    assert all(records[f"after {deed}"]["value"] == "a**(-2)" for deed in deeds)
    told = {deed: (records[deed]["status"], records[deed]["reason"]) for deed in deeds}
    assert told["hang"] == ("timeout", "not finished within 4 s")
    assert told["memory"] == ("crashed", "more than 256 MiB of memory")
    assert told["abort"] == ("crashed", "the worker process died (SIGABRT)")
    assert told["exit"] == ("crashed", "the worker process died (exit status 3)")
    assert told["print"][0] == "solved"


def test_problems_of_every_kind_and_what_their_records_say() -> None:
    problems = [
        Integral(x**2 * exp(-a * x), (x, 0, oo)),
        (exp(-x) / x, (x, 0, oo)),
        {"name": "named", "integrand": "x**(s-1)*exp(-x)", "assume": {"s": "real"}, "expected": "gamma(s)",
         "sweep": {"s": ["1/2", -1]}},
        {"integrand": "x*exp(-a*x)", "assume": {"a": "positive"}, "expected": "1/a"},
        {"integrand": "exp(x)", "upper": 1},
    ]
    records = evaluate_many(problems, jobs=1)
    needed = {"name", "key", "status", "value", "condition", "seconds", "reason"}
    assert all(needed <= set(r) for r in records)
    assert [r["name"] for r in records] == ["1", "2", "named", "4", "5"]
    assert records[0]["value"] == "2/a**3"
    assert records[0]["certificate"]["ok"] is True
    assert (records[1]["status"], records[1]["value"]) == ("refused", "oo")
    assert records[1]["reason"].startswith("diverges")
    assert records[2]["condition"] == "s > 0"
    # DLMF 5.4.6: gamma(1/2) = sqrt(pi); outside the region there is no value
    assert [row[1] for row in records[2]["sweep"]] == ["1.77245385091", None]
    assert records[2]["expected"]["ok"] is True
    assert records[3]["expected"]["ok"] is False
    assert "differs at" in records[3]["expected"]["note"]
    assert records[4]["status"] in ("solved", "stock")
    assert [succeeded(r) for r in records] == [True, False, True, False, True]
    json.dumps(records)


def test_what_is_no_problem_is_refused_with_its_number() -> None:
    with pytest.raises(TypeError, match="problem 2"):
        evaluate_many([moments(1)[0], "exp(-x)"])
    with pytest.raises(ValueError, match="names"):
        evaluate_many([moments(1)[0], moments(1)[0]])
    with pytest.raises(ValueError, match="positive"):
        evaluate_many(moments(1), seconds=0)


@pytest.mark.parametrize("pool", [ThreadPoolExecutor, ProcessPoolExecutor])
def test_executors_of_the_standard_library(pool: Any) -> None:
    with pool(2) as executor:
        records = evaluate_many(moments(4), executor, check=False)
    assert [r["value"] for r in records] == ["1/a", "a**(-2)", "2/a**3", "6/a**4"]


class Breaking(Executor):
    """Does the first task, and loses its worker with the second."""

    done = 0

    def submit(self, task: Any, /, *arguments: Any, **_: Any) -> Future[Any]:
        future: Future[Any] = Future()
        if self.done:
            future.set_exception(BrokenExecutor("a worker is gone"))
        else:
            future.set_result(task(*arguments))
        self.done += 1
        return future


def test_an_executor_that_breaks_is_told_and_nothing_is_recorded_for_what_it_lost(tmp_path: Path) -> None:
    journal = tmp_path / "journal.jsonl"
    with pytest.raises(RunError, match="failed at moment 1: BrokenExecutor: a worker is gone"):
        evaluate_many(moments(3), Breaking(), check=False, journal=journal)
    assert names_in(journal) == ["moment 0"]


def test_closing_early_ends_the_workers() -> None:
    run = stream([*moments(1), misbehaving("hang")], Options(seconds=500, check=False), jobs=2)
    assert next(run)[0] == "moment 0"
    start = time.monotonic()
    run.close()
    assert time.monotonic() - start < 5
    assert not [t for t in threading.enumerate() if "ThreadPool" in t.name and t.is_alive()]


def test_dask_cluster_that_loses_a_worker(tmp_path: Path) -> None:
    from distributed import Client, LocalCluster

    journal = tmp_path / "journal.jsonl"
    slow = [Entry(f"slow {n}", x**n * exp(-a * x), ((x, 0, oo),), digits=20) for n in range(12)]
    with (
        LocalCluster(n_workers=2, threads_per_worker=1, dashboard_address=None, local_directory=str(tmp_path),
                     silence_logs=50) as cluster,
        Client(cluster) as client,
        Journal(journal) as book,
    ):
        pids = list(client.run(os.getpid).values())
        assert len(set(pids)) == 2
        names = []
        for name, _ in stream([*slow, misbehaving("exit")], Options(seconds=60), client.get_executor(), journal=book):
            names.append(name)
            if len(names) == 3:
                os.kill(pids[0], signal.SIGKILL)
    records = [json.loads(line) for line in journal.read_text().splitlines()]
    assert Counter(names) == Counter([*(e.name for e in slow), "exit"])
    assert Counter(r["name"] for r in records) == Counter(names)
    assert Counter(r["status"] for r in records) == {"solved": 12, "crashed": 1}


# -- journal ----------------------------------------------------------------------------------------------


def record(name: str, key: str = "k", status: str = "solved") -> dict[str, Any]:
    return {"name": name, "key": key, "status": status, "value": "1", "condition": "True", "seconds": 0.1,
            "reason": ""}


def names_in(path: Path) -> list[str]:
    return [json.loads(line)["name"] for line in path.read_text().splitlines()]


@pytest.mark.parametrize("cut", [1, 8, 20, 60, -1])
def test_half_written_line_is_removed_or_completed(tmp_path: Path, cut: int) -> None:
    path = tmp_path / "journal.jsonl"
    with Journal(path) as book:
        book.add(record("one"))
        book.add(record("two"))
    lines = path.read_bytes().splitlines(keepends=True)
    path.write_bytes(lines[0] + lines[1][:cut])
    with Journal(path) as book:
        known = [r["name"] for r in book]
        assert known == (["one", "two"] if cut == -1 else ["one"])
        book.add(record("two"))
        book.add(record("one"))
    assert names_in(path) == ["one", "two"]


def test_zeros_after_a_power_cut_are_removed(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    with Journal(path) as book:
        book.add(record("one"))
    path.write_bytes(path.read_bytes() + b"\0" * 100)
    with Journal(path) as book:
        book.add(record("two"))
    assert names_in(path) == ["one", "two"]


def test_second_run_on_a_journal_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    with Journal(path), pytest.raises(JournalError, match="another run is using this journal"):
        Journal(path)
    with Journal(path, retry=["timeout"]):
        pass


def test_what_is_no_journal_is_left_alone(tmp_path: Path) -> None:
    for text in ("[[integral]]\nname = 'one'\n", "no newline at the end", '{"a": 1}\n'):
        path = tmp_path / "other"
        path.write_text(text)
        with pytest.raises(JournalError, match="was the right file given"):
            Journal(path)
        assert path.read_text() == text
    with pytest.raises(JournalError, match="cannot be opened"):
        Journal(tmp_path / "none" / "journal.jsonl")


def test_retry_drops_records_of_a_status(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    with Journal(path) as book:
        book.add(record("one"))
        book.add(record("two", status="timeout"))
    with Journal(path, retry=["timeout"]) as book:
        assert [r["name"] for r in book] == ["one"]
        with pytest.raises(JournalError, match="another run"):
            Journal(path)
        book.add(record("two"))
    assert names_in(path) == ["one", "two"]
    assert list(tmp_path.iterdir()) == [path]


@pytest.mark.parametrize("short", [True, False])
def test_full_disk_is_told_and_the_record_is_still_shown(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, short: bool
) -> None:
    path, shown, real = tmp_path / "journal.jsonl", [], os.write

    def full(fd: int, data: bytes) -> int:
        if not data.startswith(b'{"name": "moment 1"'):
            return real(fd, data)
        if short:
            return real(fd, data[:30])
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(os, "write", full)
    with Journal(path) as book, pytest.raises(JournalError, match=r"(?i)no space left.*run the same command again"):
        for name, _ in stream(moments(3), QUICK, jobs=1, journal=book):
            shown.append(name)
    assert shown == ["moment 0", "moment 1"]
    assert names_in(path) == ["moment 0"]


def test_edited_entry_is_computed_again_and_others_are_not(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    entries = moments(3)
    evaluate_many(entries, jobs=1, journal=path, check=False)
    before = path.read_bytes()
    evaluate_many(entries, jobs=1, journal=path, check=False)
    assert path.read_bytes() == before
    entries[1] = replace(entries[1], integrand=5 * entries[1].integrand)
    records = evaluate_many(entries, jobs=1, journal=path, check=False)
    assert records[1]["value"] == "5/a**2"
    assert path.read_bytes().startswith(before)
    assert Counter(names_in(path)) == {"moment 0": 1, "moment 1": 2, "moment 2": 1}


def test_killed_run_continues_where_it_stopped(tmp_path: Path) -> None:
    path, journal = tmp_path / "list.toml", tmp_path / "journal.jsonl"
    table = "[[integral]]\nname = 'n{0}'\nintegrand = 'x**{0}*exp(-a*x)'\nassume = {{a = 'positive'}}\n"
    path.write_text("".join(table.format(n) for n in range(8)))
    command = [sys.executable, "-m", "sympy_mellin_ext", "batch", str(path), "--journal", str(journal), "--jobs", "2"]
    for wanted in (2, 4):
        run = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        while run.poll() is None and (not journal.exists() or journal.read_bytes().count(b"\n") < wanted):
            time.sleep(0.02)
        run.kill()
        run.wait()
    with journal.open("ab") as stream_:
        stream_.write(b'{"name": "n7", "key"')
    done = subprocess.run(command, capture_output=True, text=True, timeout=100)
    assert done.returncode == 0, done.stderr
    assert "8 of 8: 8 solved" in done.stdout
    assert sorted(names_in(journal)) == sorted(f"n{n}" for n in range(8))


# -- outputs ----------------------------------------------------------------------------------------------


def test_outputs(tmp_path: Path) -> None:
    tables = [
        {"name": "removable", "integrand": "x**(s - 1)/((1 + x)*(2 + x))", "assume": {"s": "real"},
         "sweep": {"s": [1, "3/2", 3]}, "expected": "pi*(1 - 2**(s - 1))/sin(pi*s)", "note": "50 % & more_"},
        {"name": "2nd kind", "integrand": "exp(-a*x)*besselk(0, x)", "assume": {"a": "positive"}},
        {"name": "lambda", "integrand": "exp(-x)/x"},
    ]
    entries = [entry_from_table(table) for table in tables]
    pairs = list(zip(entries, evaluate_many(entries, jobs=2, check=False), strict=True))
    assert identifiers(["a b", "a-b", "lambda", "2nd"]) == ["a_b", "a_b_2", "integral_lambda", "integral_2nd"]
    write_tex(pairs, "A_title", tmp_path / "results.tex")
    tex = (tmp_path / "results.tex").read_text()
    assert tex.count(r"\[") == 3
    assert r"50 \% \& more\_" in tex
    assert tex.count("{") == tex.count("}")
    write_module(pairs, "Title", tmp_path / "results.py")
    spec = importlib.util.spec_from_file_location("results", tmp_path / "results.py")
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    # common practice: pi*(1 - 2**(s - 1))/sin(pi*s), log(2) at s = 1
    assert abs(module.removable(1) - mp.log(2)) < 1e-15
    with mp.workdps(40):
        near = 1 + mp.mpf(10) ** -12
        expected = mp.pi * (1 - 2 ** (near - 1)) / mp.sin(mp.pi * near)
    assert abs(module.removable(near) - expected) < 1e-15
    assert mp.isnan(module.removable(2.5))
    assert not hasattr(module, "integral_lambda")
    assert [p.name for p in write_sweeps(pairs, tmp_path / "sweeps")] == ["removable.csv"]
    rows = list(csv.reader((tmp_path / "sweeps" / "removable.csv").open()))
    assert rows[0] == ["s", "value", "expected"]
    assert rows[1] == ["1", "0.69314718056", ""]
    assert rows[3][1] == ""
    assert pairs[0][1]["expected"]["ok"] is True

