"""``python -m sympy_mellin_ext.examples``: integrand, closed form, region, numerical check and time of each."""
from __future__ import annotations

import sys

from ..batch import Entry, Options, read_list, stream
from ..batch.journal import Record
from ..batch.outputs import counted, succeeded, verdict
from . import BUOYS


def show(number: int, entry: Entry, record: Record) -> None:
    """One entry of the list with what came out."""
    print(f"{number:2}. {entry.name}{': ' * bool(entry.note)}{entry.note}")
    lines = [("integrand", str(entry.integrand))]
    lines += [("range", f"{x} from {low} to {high}") for x, low, high in entry.limits]
    if record["status"] not in ("solved", "stock"):
        lines.append((record["status"], record["reason"]))
    else:
        lines.append(("closed form", record["value"]))
        lines += [("", f"{value}  where {where}") for where, value in record.get("special", [])]
        region = record["condition"]
        lines.append(("region", "everywhere under the assumptions" if region == "True" else region))
        certificate = record["certificate"]
        points = counted(len(certificate["points"]))
        lines.append(("quadrature", f"{verdict(record)} at {points} {certificate['note']}"))
    if "expected" in record:
        expected = record["expected"]
        said = {True: "agrees with", False: "DISAGREES with", None: "could not be compared with"}[expected["ok"]]
        lines.append(("handbook", f"{said} {expected['formula']} at {counted(expected['points'])} {expected['note']}"))
    lines.append(("time", f"{1000 * record['seconds']:.1f} ms, {record.get('strategy') or 'SymPy alone'}"))
    for head, text in lines:
        print(f"    {head:12} {text}".rstrip())
    sys.stdout.flush()


def main() -> int:
    """Work through the list; the exit status is 0 if all its integrals are solved and checked."""
    entries = read_list(BUOYS)
    found: dict[str, Record] = {}
    shown = 0
    for name, record in stream(entries, Options()):
        found[name] = record
        while shown < len(entries) and entries[shown].name in found:
            shown += 1
            show(shown, entries[shown - 1], found[entries[shown - 1].name])
    good = sum(succeeded(record) and record["certificate"]["ok"] is True for record in found.values())
    print(f"{good} of {len(entries)} integrals solved and checked")
    return int(good < len(entries))


if __name__ == "__main__":
    sys.exit(main())
