"""``python -m sympy_mellin_ext.report --examples PAGE``: the page of the worked list of integrals."""
from __future__ import annotations

import argparse
import sys
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any

from .card import Record
from .page import write_report


def records(entries: Sequence[Any]) -> Iterator[Record | dict[str, Any]]:
    """A record of each entry; one without a closed form says why."""
    from ..integrate import closed_form
    from ..problem import Refusal

    for entry in entries:
        try:
            answer = closed_form(entry.integrand, *entry.limits, given=entry.given, strict=True)
        except Refusal as reason:
            yield {"name": entry.name, "status": "refused", "reason": str(reason), **entry.described()}
            continue
        assert answer is not None
        yield Record(entry.name, answer, entry.sweep, entry.note)


def main(arguments: Sequence[str] | None = None) -> int:
    """The command; exit status 0 if the page was written."""
    parser = argparse.ArgumentParser(prog="python -m sympy_mellin_ext.report", description=__doc__)
    parser.add_argument("--examples", metavar="PAGE", help="write the page of the example list here")
    parser.add_argument("--list", metavar="TOML", help="another list of integrals (with --page)")
    parser.add_argument("--page", metavar="PAGE", help="where the page of the list is written")
    parser.add_argument("--no-pictures", action="store_true", help="without pictures (and without matplotlib)")
    options = parser.parse_args(arguments)
    if bool(options.list) != bool(options.page) or not (options.examples or options.list):
        parser.error("--examples PAGE, or --list TOML with --page PAGE, is needed")
    from ..batch import read_list
    from ..batch.reader import read_title
    from ..examples import BUOYS

    chosen = [(BUOYS, options.examples)] if options.examples else []
    chosen += [(Path(options.list), options.page)] if options.list else []
    for source, target in chosen:
        try:
            found = list(records(read_list(source)))
            print(write_report(found, target, read_title(source), not options.no_pictures))
        except (ImportError, OSError, ValueError) as problem:
            print(f"{source}: {problem}", file=sys.stderr)
            return 1
    return 0


if __name__ == "__main__":
    sys.exit(main())
