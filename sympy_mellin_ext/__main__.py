"""The command line: ``python -m sympy_mellin_ext``, or ``sympy-mellin-ext`` where it is installed."""
from __future__ import annotations

import argparse
import json
import os
import shutil
import signal
import sys
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from concurrent.futures import Executor

    from .batch import Entry, Options
    from .batch.journal import Record

_SOLVED, _UNSOLVED, _BAD = 0, 1, 2

_EVALUATE = """\
examples:
  sympy-mellin-ext evaluate 'x**(s-1)*exp(-a*x)' --assume a=positive --assume s=real
  sympy-mellin-ext evaluate 'cos(b*x)/(1 + x**2)' --lower -oo --assume b=positive --format latex
  sympy-mellin-ext evaluate 'exp(-a*t)*besselj(0, t)' --variable t --assume a=positive --format python

Powers are written **; every symbol but the variable is declared with --assume.
Exit status: 0 solved, 1 not solved, 2 bad usage or unreadable input."""

_BATCH = """\
examples:
  sympy-mellin-ext batch list.toml
  sympy-mellin-ext batch list.toml --journal list.jsonl --jobs 4 --seconds 30 --out results
  sympy-mellin-ext batch list.toml --journal list.jsonl --retry timeout --seconds 600
  sympy-mellin-ext batch list.toml --journal list.jsonl --cluster tcp://10.0.0.1:8786

Run the same command again after an interruption, and it continues where it stopped.  The format of lists is
described in README.md and in batch/SCHEMA.md of the package.
Exit status: 0 all solved, 1 some not solved, 2 bad usage, unreadable input or unwritable output."""


class _Failure(Exception):
    """Bad input, told in one message; exit status 2."""


def parser() -> argparse.ArgumentParser:
    """The arguments of both sub-commands."""
    raw = argparse.RawDescriptionHelpFormatter
    top = argparse.ArgumentParser(
        prog="sympy-mellin-ext", description="Closed forms of definite integrals, with their regions of convergence.",
        epilog="'sympy-mellin-ext evaluate --help' and 'sympy-mellin-ext batch --help' show examples.",
    )  # fmt: skip
    commands = top.add_subparsers(dest="command", required=True, metavar="evaluate | batch")
    limits = argparse.ArgumentParser(add_help=False)
    limits.add_argument("--seconds", type=_positive, default=60.0, metavar="S",
                        help="time limit an integral (default 60)")
    limits.add_argument("--memory", type=_whole, default=2048, metavar="MIB",
                        help="memory limit an integral in MiB (default 2048)")
    limits.add_argument("--no-check", dest="check", action="store_false", help="do not compare with quadrature")
    limits.add_argument("--no-stock", dest="stock", action="store_false",
                        help="do not ask SymPy's own integrator where there is no closed form of ours")

    one = commands.add_parser("evaluate", parents=[limits], help="one integral", formatter_class=raw, epilog=_EVALUATE,
                              description="Print closed form, region and numerical check of one integral.")
    one.add_argument("expression", metavar="EXPRESSION", help="the integrand")
    one.add_argument("--variable", default="x", metavar="NAME", help="variable of integration (default x)")
    one.add_argument("--lower", default="0", metavar="A", help="lower end of the range (default 0)")
    one.add_argument("--upper", default="oo", metavar="B", help="upper end of the range (default oo)")
    one.add_argument("--assume", action="append", default=[], metavar="SYMBOL=KIND",
                     help="what a symbol is: positive, real, integer, complex ... (repeatable)")
    one.add_argument("--given", action="append", default=[], metavar="RELATION",
                     help="what the parameters satisfy, such as 'a > b' (repeatable)")
    one.add_argument("--expected", metavar="FORMULA", help="a formula to be compared with the closed form")
    one.add_argument("--digits", type=_whole, default=12, metavar="N", help="digits of the check (default 12)")
    one.add_argument("--format", choices=("text", "latex", "json", "python"), default="text")

    many = commands.add_parser("batch", parents=[limits], help="a list of integrals", formatter_class=raw,
                               epilog=_BATCH, description="Evaluate a list of integrals in worker processes.")
    many.add_argument("file", metavar="FILE", help="a list of integrals in TOML")
    many.add_argument("--journal", metavar="JOURNAL",
                      help="where records are kept (default: journal.jsonl in the folder of --out, else none)")
    many.add_argument("--retry", action="append", default=[], metavar="STATUS",
                      choices=("stock", "refused", "timeout", "crashed", "error"),
                      help="compute entries again whose record has this status (repeatable)")
    many.add_argument("--jobs", type=_whole, metavar="N", help="worker processes (default: one a processor)")
    many.add_argument("--cluster", metavar="ADDRESS", help="address of a Dask scheduler to run on (extra 'cluster')")
    many.add_argument("--out", metavar="FOLDER", help="write results.tex, results.py, CSV of the sweeps and a report")
    return top


def _positive(text: str) -> float:
    value = float(text)
    if not 0 < value < 1e9:
        raise argparse.ArgumentTypeError(f"a positive number is expected, not {text}")
    return value


def _whole(text: str) -> int:
    value = int(text)
    if not 0 < value < 10**9:
        raise argparse.ArgumentTypeError(f"a positive whole number is expected, not {text}")
    return value


def _prepared(arguments: Sequence[str]) -> list[str]:
    """Arguments in which formulas may begin with a minus sign, which argparse takes for an option."""
    result: list[str] = []
    for word in arguments:
        formula = word[:1] == "-" and word[:2] != "--" and len(word) > 2 and word != "-h"
        if formula and result and result[-1] in ("--lower", "--upper", "--given", "--expected"):
            result[-1] += f"={word}"
        elif formula:
            result.append(f" {word}")
        else:
            result.append(word)
    return result


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line; returns the exit status."""
    options = parser().parse_args(_prepared(sys.argv[1:] if arguments is None else arguments))
    try:
        return _evaluate(options) if options.command == "evaluate" else _batch(options)
    except _Failure as failure:
        print(f"sympy-mellin-ext: {failure}", file=sys.stderr)
        return _BAD
    except KeyboardInterrupt:
        print("sympy-mellin-ext: interrupted", file=sys.stderr)
        return 130
    except BrokenPipeError:  # whoever read our output has seen enough
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return _UNSOLVED


def _options(options: argparse.Namespace, steps: bool = False) -> Options:
    from .batch import Options

    return Options(options.seconds, options.memory, options.check, options.stock, steps)


def _evaluate(options: argparse.Namespace) -> int:
    from .batch import stream
    from .batch.outputs import succeeded
    from .batch.reader import entry_from_table

    table: dict[str, Any] = {
        "name": "integral", "integrand": options.expression.lstrip(), "variable": options.variable,
        "lower": options.lower, "upper": options.upper, "given": options.given, "digits": options.digits, "assume": {},
    }  # fmt: skip
    if options.expected is not None:
        table["expected"] = options.expected
    for item in options.assume:
        symbol, equals, kind = item.partition("=")
        if not equals:
            raise _Failure(f"--assume {item}: SYMBOL=KIND is expected, such as a=positive")
        table["assume"][symbol.strip()] = kind.strip()
    try:
        entry = entry_from_table(table)
    except ValueError as error:
        raise _Failure(str(error)) from None
    [(_, record)] = stream([entry], _options(options), jobs=1)
    print(_shown(entry, record, options.format))
    return _SOLVED if succeeded(record) else _UNSOLVED


def _shown(entry: Entry, record: Record, form: str) -> str:
    from .batch.outputs import counted, formula, read_back, verdict

    if form == "json":
        return json.dumps(record, indent=1, ensure_ascii=False)
    if form == "latex":
        return formula(entry, record)
    if form == "python":
        found = read_back(entry, record)
        if found is None:
            return f"# no closed form: {record['reason'] or record['status']}"
        try:
            return found.source(name="integral").rstrip()
        except ValueError as error:
            return f"# no numerical function: {error}"
    lines = [("closed form", record["value"] if record["status"] in ("solved", "stock") else "none found")]
    lines += [("", f"{value}  where {where}") for where, value in record.get("special", [])]
    if record["status"] in ("solved", "stock"):
        region = record["condition"]
        lines.append(("region", "everywhere under the assumptions" if region == "True" else region))
        certificate = record.get("certificate", {})
        if certificate:
            points = counted(len(certificate["points"]))
            lines.append(("certificate", f"quadrature {verdict(record)} at {points} {certificate['note']}".strip()))
        if "expected" in record:
            said = {True: "agrees", False: "DISAGREES", None: "could not be compared"}[record["expected"]["ok"]]
            lines.append(("expected", f"{said} {record['expected']['note']}".strip()))
        lines.append(("found by", record.get("strategy") or "SymPy's own integrator"))
    elif record["value"]:
        lines.append(("diverges to", record["value"]))
    if record["status"] not in ("solved", "stock"):
        lines.append(("reason", record["reason"]))
    lines += [("warning", text) for text in record.get("warnings", [])]
    return "\n".join(f"{head:12} {text}" for head, text in lines)


def _batch(options: argparse.Namespace) -> int:
    from .batch import Journal, JournalError, ListError, RunError, read_list, stream
    from .batch.outputs import coloured, succeeded, summary, write_all
    from .batch.reader import read_title
    from .batch.runner import counted

    try:
        entries = read_list(options.file)
        title = read_title(options.file)
    except ListError as error:
        raise _Failure(str(error)) from None
    except OSError as error:
        raise _Failure(f"{options.file}: cannot be read: {error.strerror}") from None
    out = Path(options.out) if options.out else None
    if out is not None:
        try:
            out.mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise _Failure(f"{out}: the folder cannot be made: {error.strerror}") from None
    place = options.journal or (out / "journal.jsonl" if out is not None else None)
    found: dict[str, Record] = {}
    trouble, interrupted = "", False
    book = None
    try:
        book = Journal(place, options.retry) if place is not None else None
        with _executor(options.cluster) as executor, _terminable():
            run = stream(entries, _options(options, steps=out is not None), executor, options.jobs, book)
            for name, record in counted(run, len(entries), True):
                found[name] = record
    except KeyboardInterrupt:
        interrupted = True
    except (JournalError, RunError) as error:
        trouble = str(error)
    finally:
        if book is not None:
            book.close()
    pairs = [(entry, found[entry.name]) for entry in entries if entry.name in found]
    records = [record for _, record in pairs]
    if records:
        width = shutil.get_terminal_size().columns if sys.stdout.isatty() else 140
        print("\n".join(summary(records, len(entries), width, coloured(sys.stdout))), flush=True)
    if out is not None and records:
        try:
            for path in write_all(pairs, title, out):
                print(f"written: {path}", file=sys.stderr)
        except OSError as error:
            trouble = trouble or f"{error.filename or out}: cannot be written: {error.strerror}"
    if trouble:
        raise _Failure(trouble)
    if interrupted:
        again = "; the same command continues" if place is not None else ""
        print(f"sympy-mellin-ext: interrupted, {len(found)} of {len(entries)} done{again}", file=sys.stderr)
        return 130
    return _SOLVED if all(map(succeeded, records)) and len(records) == len(entries) else _UNSOLVED


@contextmanager
def _executor(address: str | None) -> Iterator[Executor | None]:
    """The executor of a Dask cluster, or None for the processes of this machine."""
    if address is None:
        yield None
        return
    try:
        from distributed import Client
    except ImportError:
        raise _Failure("--cluster needs the extra 'cluster': pip install 'sympy-mellin-ext[cluster]'") from None
    try:
        client = Client(address, timeout=20)
    except (OSError, ValueError) as error:
        raise _Failure(f"--cluster {address}: no scheduler answers there ({error})") from None
    with client:
        yield client.get_executor()


@contextmanager
def _terminable() -> Iterator[None]:
    """Within the block, a request to terminate ends the run as an interrupt from the keyboard does."""

    def stop(_signal: int, _frame: Any) -> None:
        raise KeyboardInterrupt

    before = signal.signal(signal.SIGTERM, stop)
    try:
        yield
    finally:
        signal.signal(signal.SIGTERM, before)


if __name__ == "__main__":
    sys.exit(main())
