"""The native ledger in the terminal."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.faces import reading
from steplaw.faces.sheet import QUIET, Sheet
from steplaw.faces.text import grouped, percent, size

Json = Mapping[str, Any]

ROWS_MOST = 8
NOT_CHARGED_MOST = 6


def show_ledger(sheet: Sheet, record: Json) -> None:
    """Print the ledger, if anything was charged or could not be.

    Parameters
    ----------
    sheet : Sheet
        The sheet.
    record : mapping
        A `steplaw.audit/1` record.
    """
    ledger = record.get("ledger")
    if not ledger or not (ledger["rows"] or ledger["not_charged"]):
        return
    names = reading.size_names(record)
    sheet.part("Native ledger", f"visits inside C code, shares at {size(ledger['at'], names)}")
    rows = ledger["rows"]
    several = len({str(row["file"]) for row in rows}) > 1
    cells = [
        [
            _place(sheet, row, several),
            sheet.clean(row["operation"]),
            reading.law_text(row["times"], sheet.unicode, 12),
            ("" if row["charge"] == "exact" else ("≤ " if sheet.unicode else "<= "))
            + reading.law_text(row["visits"], sheet.unicode, 22),
            percent(row["share"]),
        ]
        for row in rows[:ROWS_MOST]
    ]
    if cells:
        heads = [("line", "left"), ("operation", "left"), ("times", "left"), ("visits", "left")]
        sheet.grid([*heads, ("share", "right")], cells)
    if len(rows) > ROWS_MOST:
        sheet.say(f"and {len(rows) - ROWS_MOST} more with smaller shares", QUIET)
    _not_charged(sheet, ledger["not_charged"])


def _place(sheet: Sheet, row: Json, several: bool) -> str:
    if not several:
        return str(row["line"])
    return f"{sheet.clean(row['file']).rsplit('/', 1)[-1]}:{row['line']}"


def _not_charged(sheet: Sheet, rows: list[Json]) -> None:
    if not rows:
        return
    ranked = sorted(rows, key=lambda row: (not row["grows"], -row["times"]))
    told = [
        f"{sheet.clean(row['operation'])} at line {row['line']}, {grouped(row['times'])} times"
        + (", its operands grow" if row["grows"] else "")
        for row in ranked[:NOT_CHARGED_MOST]
    ]
    more = len(rows) - NOT_CHARGED_MOST
    rest = f"; and {more} more" if more > 0 else ""
    sheet.say(f"Not charged: {'; '.join(told)}{rest}.", QUIET)
