"""A comparison in the terminal."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from steplaw.faces import reading_versus as reading
from steplaw.faces.sheet import HEAD, QUIET, Sheet
from steplaw.faces.text import clean

if TYPE_CHECKING:
    from rich.console import Console

Json = Mapping[str, Any]


def show_versus(record: Json, console: Console) -> None:
    """Print the sheet of a comparison.

    Parameters
    ----------
    record : mapping
        A `steplaw.versus/1` record.
    console : rich.console.Console
        Where to.
    """
    sheet = Sheet(console)
    _title(sheet, record)
    sheet.console.print()
    sheet.say(reading.verdict(record), HEAD, indent=1)
    for figure, told in record["figures"].items():
        sheet.part(f"Laws of the {clean(figure)}", told["grade"])
        sheet.pairs(reading.laws(record, told, sheet.unicode))
        sheet.part(f"Which takes less: {clean(figure)}")
        _stretches(sheet, record, told)
    if record["time"] is not None:
        sheet.part("Which takes less: time", "by the clock checks")
        _stretches(sheet, record, record["time"], time=True)
    sheet.part("Notes")
    for note in record["notes"]:
        sheet.say(note, QUIET)
    if record["run_again"]:
        sheet.console.print()
        sheet.say(f"again: {record['run_again']}", QUIET, indent=1)


def _stretches(sheet: Sheet, record: Json, told: Json, time: bool = False) -> None:
    rows = reading.stretches(record, told, time)
    if rows:
        sheet.grid([("sizes", "left"), ("less", "left"), ("known by", "left")], rows)
    for text in reading.overtakings(record, told):
        sheet.say(text)
    sheet.say(reading.no_further(record, told), QUIET)


def _title(sheet: Sheet, record: Json) -> None:
    a, b = (record["subjects"][k] for k in "ab")
    held = ", ".join(f"{k} = {n}" for k, n in record["sizes"]["held"].items())
    rows = [
        ("subject", f"{clean(a['name'])} : {clean(b['name'])}"),
        ("A", f"{clean(a['file'])}:{a['line']} {clean(a['name'])}"),
        ("B", f"{clean(b['file'])}:{b['line']} {clean(b['name'])}"),
        ("feed", clean(record["feed"]["text"])),
        ("figure", clean(record["figure"])),
    ]
    if held:
        rows.append(("held", held))
    rows.append(("python", f"{clean(record['python'])}   steplaw {clean(record['steplaw'])}"))
    sheet.title("VERSUS", rows)
