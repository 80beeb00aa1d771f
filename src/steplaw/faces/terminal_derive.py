"""A derivation in the terminal: the nest of loops with a formula beside each line."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from steplaw.faces.notation import pretty, terms
from steplaw.faces.sheet import GOOD, HEAD, QUIET, UNSURE, Sheet
from steplaw.faces.text import clean

if TYPE_CHECKING:
    from rich.console import Console

Json = Mapping[str, Any]

GRADE_STYLE = {"proved": GOOD, "exact": UNSURE}
LINES_MOST = 60
LETTERS = "nmpqrstvwxyzabcdfgh"
SHORT = 4
UNKNOWNS_MOST = 24


def show_derivation(record: Json, console: Console) -> None:
    """Print the sheet of a derivation.

    Parameters
    ----------
    record : mapping
        A `steplaw.derive/1` record.
    console : rich.console.Console
        Where to.
    """
    sheet = Sheet(console)
    subject = record["subject"]
    sizes = list(zip(_letters(record["sizes"]), record["sizes"], strict=True))
    sheet.title(
        "DERIVATION",
        [
            ("subject", clean(subject["name"])),
            ("place", f"{clean(subject['file'])}:{subject['line']}"),
            ("sizes", ", ".join(_size(letter, size) for letter, size in sizes) or "none"),
            ("python", f"{clean(record['python'])}   steplaw {clean(record['steplaw'])}"),
        ],
    )
    names = {size["name"]: letter for letter, size in sizes}
    _total(sheet, record, names)
    _lines(sheet, record, names)
    _functions(sheet, record, names)
    _unknowns(sheet, record, names)
    _rest(sheet, record)


def _letters(sizes: Sequence[Json]) -> list[str]:
    """Give each size a short name for this sheet: its own, or a letter that no other has."""
    taken = {clean(size["text"]) for size in sizes}
    free = (letter for letter in LETTERS if letter not in taken)
    return [
        text if len(text) <= SHORT else next(free, text)
        for text in (clean(size["text"]) for size in sizes)
    ]


def _size(letter: str, size: Json) -> str:
    text = clean(size["text"])
    return letter if letter == text else f"{letter} = {text}"


def _written(sheet: Sheet, formula: str | None, names: Mapping[str, str]) -> str:
    """Write a formula with the sizes as people write them."""
    return _renamed(pretty(formula, sheet.unicode), names)


def _total(sheet: Sheet, record: Json, names: Mapping[str, str]) -> None:
    from rich.text import Text

    law = record["total"]
    sheet.part("Steps of the whole", law["grade"])
    table = sheet.table()
    table.add_column(style=QUIET, no_wrap=True, min_width=10)
    table.add_column(overflow="fold")
    if law["formula"] is not None:
        # Terms break over lines as wholes: their inner blanks must not be breaking points.
        pieces = [
            _renamed(p, names).replace(" ", " ") for p in terms(law["formula"], sheet.unicode)
        ]
        body = Text(f"= {' '.join(pieces)}", style=GRADE_STYLE.get(law["grade"], HEAD))
        table.add_row("steps", body)
        if law["leading"] != law["formula"]:
            table.add_row("leading", Text(f"~ {_written(sheet, law['leading'], names)}"))
    else:
        table.add_row("steps", Text("no formula for the whole", style=UNSURE))
    if law["note"]:
        table.add_row("note", Text(sheet.clean(law["note"])))
    sheet.put(table)


def _renamed(text: str, names: Mapping[str, str]) -> str:
    """Put in a formula the sizes as people write them."""
    if not names:
        return text
    longest_first = sorted(names, key=len, reverse=True)
    either = "|".join(re.escape(name) for name in longest_first)
    return re.sub(rf"(?<![\w.])({either})(?![A-Za-z0-9_])", lambda m: names[m[1]], text)


def _lines(sheet: Sheet, record: Json, names: Mapping[str, str]) -> None:
    from rich.text import Text

    rows = record["lines"][:LINES_MOST]
    if not rows:
        return
    sheet.part("Loop nest", "how often each line is run")
    table = sheet.table()
    table.padding = (0, 1, 0, 0)
    table.show_header = True
    table.expand = True
    overflow: Any = "ellipsis" if sheet.unicode else "crop"
    wide = sheet.width >= 100
    table.add_column("line", justify="right", no_wrap=True)
    table.add_column("", no_wrap=True)
    table.add_column("source", no_wrap=True, overflow=overflow, ratio=1)
    table.add_column("frequency", no_wrap=True, overflow=overflow, max_width=44 if wide else 26)
    table.add_column("steps", no_wrap=True, overflow=overflow, max_width=30 if wide else 14)
    bar = "│" if sheet.unicode else "|"
    sources = _outdented([sheet.clean(row["source"]).rstrip() for row in rows])
    for row, source in zip(rows, sources, strict=True):
        table.add_row(
            str(row["line"]),
            Text(bar * row["depth"], style=QUIET),
            Text(source),
            _cell(sheet, row["frequency"], names),
            _cell(sheet, row["steps"], names),
        )
    sheet.put(table)
    if len(record["lines"]) > LINES_MOST:
        sheet.say(f"and {len(record['lines']) - LINES_MOST} lines more", QUIET)


def _cell(sheet: Sheet, law: Json, names: Mapping[str, str]) -> Any:
    from rich.text import Text

    if law["formula"] is None:
        return Text("open", style=QUIET)
    text = _written(sheet, law["formula"], names)
    if law["holds_from"]:
        text += f" from {law['holds_from']}"
    return Text(text, style="" if law["grade"] == "proved" else UNSURE.removeprefix("bold "))


def _outdented(sources: Sequence[str]) -> list[str]:
    """Take the common indentation off, and half of the rest: columns are dear."""
    indents = [len(s) - len(s.lstrip()) for s in sources]
    least = min((i for i, s in zip(indents, sources, strict=True) if s), default=0)
    return [
        " " * (max(i - least, 0) // 2) + s.lstrip() for i, s in zip(indents, sources, strict=True)
    ]


def _functions(sheet: Sheet, record: Json, names: Mapping[str, str]) -> None:
    rows = record["functions"]
    if len(rows) < 2:
        return
    sheet.part("Functions", "own steps, without those of what they call")
    cells = [
        [
            f"{row['name']}{' (subject)' if row['own'] else ''}",
            str(row["line"]),
            _written(sheet, row["calls"]["formula"], names),
            _written(sheet, row["steps"]["formula"], names),
        ]
        for row in rows
    ]
    heads = [("function", "left"), ("line", "right"), ("calls", "left"), ("steps", "left")]
    sheet.grid(heads, cells)


def _unknowns(sheet: Sheet, record: Json, names: Mapping[str, str]) -> None:
    rows = record["unknowns"]
    if not rows:
        return
    sheet.part("Unknowns", "counts that the data decide")
    cells = [
        [
            row["name"],
            str(row["line"]),
            row["what"],
            row["least"],
            "no bound" if row["most"] is None else _written(sheet, row["most"], names),
        ]
        for row in rows[:UNKNOWNS_MOST]
    ]
    heads = [("name", "left"), ("line", "right"), ("what", "left"), ("least", "right")]
    sheet.grid([*heads, ("most", "left")], cells)
    if len(rows) > UNKNOWNS_MOST:
        sheet.say(f"and {len(rows) - UNKNOWNS_MOST} more", QUIET)


def _rest(sheet: Sheet, record: Json) -> None:
    if record["stopped_by"]:
        sheet.part("Not derived")
        for row in record["stopped_by"]:
            sheet.say(f"line {row['line']}: {row['reason']}", UNSURE)
    for row in record["recurrences"]:
        sheet.say(f"line {row['line']}: {row['text']}")
    if record["not_included"]:
        sheet.part("Not included", "steps of what is called there, if it is Python code")
        for row in record["not_included"]:
            sheet.say(f"line {row['line']}: {row['name']}", QUIET)
    sheet.part("Taken for granted")
    for row in record["assumptions"]:
        place = f"line {row['line']}: " if row["line"] else ""
        sheet.say(f"{place}{row['text']}", QUIET)
