"""A forecast in the terminal."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from steplaw.faces import reading_forecast as reading
from steplaw.faces.sheet import QUIET, Sheet
from steplaw.faces.terminal_worst import title

if TYPE_CHECKING:
    from rich.console import Console

Json = Mapping[str, Any]


def show_forecast(record: Json, console: Console) -> None:
    """Print the sheet of a forecast.

    Parameters
    ----------
    record : mapping
        A `steplaw.forecast/1` record.
    console : rich.console.Console
        Where to.
    """
    sheet = Sheet(console)
    title(sheet, "FORECAST", record)
    sheet.part("Law", f"run up to {reading.size(record['sizes']['largest'])}")
    sheet.pairs(reading.laws(record, sheet.unicode))
    if record["at"]:
        _at(sheet, record)
    for entry in record["within"]:
        held = f"with {reading.size(entry['held'])}" if entry["held"] else ""
        sheet.part(f"Largest size within {sheet.clean(entry['limit'])}", held)
        sheet.pairs(reading.fits(entry))
    sheet.part("Clock", "what the times rest on")
    sheet.pairs(reading.clock(record))
    sheet.part("Notes")
    for note in record["notes"]:
        sheet.say(note, QUIET)
    sheet.say(f"Again: {record['run_again']}", QUIET)


def _at(sheet: Sheet, record: Json) -> None:
    sheet.part("Foretold", "beyond: times the largest size run")
    heads, rows = reading.table(record, sheet.unicode)
    if (
        sum(max(map(len, column)) + 2 for column in zip(heads, *rows, strict=True)) + 4
        > sheet.width
    ):
        for row in rows:
            sheet.pairs(list(zip(heads, row, strict=True)))
    else:
        sheet.grid([(head, "right" if k else "left") for k, head in enumerate(heads)], rows)
    for reason in reading.reasons(record):
        sheet.say(reason, QUIET)
