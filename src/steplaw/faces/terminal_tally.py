"""The tally of a program in the terminal."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from steplaw.faces.sheet import QUIET, Sheet
from steplaw.faces.text import clean, grouped, percent

if TYPE_CHECKING:
    from rich.console import Console


def show_tally(record: Mapping[str, Any], console: Console, top: int = 20) -> None:
    """Print the tally of a program: by function, by operation class and by opcode.

    Parameters
    ----------
    record : mapping
        A `steplaw.tally/1` record.
    console : rich.console.Console
        Where to.
    top : int
        Rows of each table.
    """
    sheet = Sheet(console)
    steps = record["steps"]
    status = record.get("exit_status")
    rows = [
        ("subject", clean(record["program"])),
        ("steps", grouped(steps)),
        ("ended", "not at all" if status is None else f"with exit status {status}"),
        ("python", clean(record["python"])),
        ("steplaw", clean(record["steplaw"])),
    ]
    sheet.title("STEP TALLY", rows)
    _functions(sheet, record, steps, top)
    for name, key in (("Operation classes", "operations"), ("Opcodes", "opcodes")):
        counts = sorted((record.get(key) or {}).items(), key=lambda item: (-item[1], item[0]))
        if not counts:
            continue
        sheet.part(name)
        cells = [
            [
                label.replace("_", " ") if key == "operations" else label,
                grouped(count),
                _share(count, steps),
                sheet.bar(count / steps if steps else 0.0, 20),
            ]
            for label, count in counts[:top]
        ]
        sheet.grid([("name", "left"), ("steps", "right"), ("share", "right"), ("", "left")], cells)
        _rest(sheet, len(counts) - top)
    if record.get("notes"):
        sheet.part("Notes")
        for note in record["notes"]:
            sheet.say(note)


def _functions(sheet: Sheet, record: Mapping[str, Any], steps: int, top: int) -> None:
    functions = sorted(record["functions"], key=lambda f: (-f["steps"], f["file"], f["line"]))
    sheet.part("Functions", "own steps, without those of what they call")
    cells = [
        [
            grouped(f["steps"]),
            _share(f["steps"], steps),
            grouped(f["calls"]),
            str(f["name"]),
            f"{sheet.clean(f['file']).rsplit('/', 1)[-1]}:{f['line']}",
        ]
        for f in functions[:top]
    ]
    heads = [("steps", "right"), ("share", "right"), ("calls", "right")]
    sheet.grid([*heads, ("function", "left"), ("place", "left")], cells)
    _rest(sheet, len(functions) - top)


def _rest(sheet: Sheet, count: int) -> None:
    if count > 0:
        sheet.say(f"and {count} more", QUIET)


def _share(count: int, steps: int) -> str:
    return percent(count / steps) if steps else "-"
