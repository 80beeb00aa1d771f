"""The sheet in the terminal: a calculation sheet with a title block and numbered parts."""

from __future__ import annotations

import io
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from steplaw.faces import dominance, reading
from steplaw.faces.notation import pretty, terms
from steplaw.faces.sheet import ACCENT, BAD, GOOD, HEAD, QUIET, UNSURE, Sheet
from steplaw.faces.terminal_native import show_ledger
from steplaw.faces.text import grouped, percent, size

if TYPE_CHECKING:
    from rich.console import Console
    from rich.table import Table

Json = Mapping[str, Any]

GRADE_STYLE = {"proved": GOOD, "exact": GOOD, "fitted": UNSURE, "open": BAD}
VALUES_MOST = 10
CLOCK_MOST = 6
FUNCTIONS_MOST = 8
OPERATIONS_MOST = 6


def show(record: Json, console: Console) -> None:
    """Print the sheet of an audit.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record, finished or stopped half-way.
    console : rich.console.Console
        Where to; its width, encoding and colours are kept to.
    """
    sheet = Sheet(console)
    sheet.title("STEP LAW SHEET", reading.title(record))
    _verdict(sheet, record)
    _law(sheet, record)
    _values(sheet, record)
    _lines(sheet, record)
    _functions(sheet, record)
    _operations(sheet, record)
    show_ledger(sheet, record)
    _clock(sheet, record)
    _foot(sheet, record)


def text(record: Json, width: int = 80) -> str:
    """Give a sheet as plain text.

    Parameters
    ----------
    record : mapping
        A record of any schema of steplaw.
    width : int
        Columns.

    Returns
    -------
    str
        Text without terminal codes.
    """
    from rich.console import Console

    out = io.StringIO()
    console = Console(file=out, width=width, force_terminal=False, color_system=None)
    if record.get("schema") == "steplaw.derive/1":
        from steplaw.faces.terminal_derive import show_derivation

        show_derivation(record, console)
    elif record.get("schema") == "steplaw.tally/1":
        from steplaw.faces.terminal_tally import show_tally

        show_tally(record, console)
    elif record.get("schema") == "steplaw.versus/1":
        from steplaw.faces.terminal_versus import show_versus

        show_versus(record, console)
    elif record.get("schema") == "steplaw.forecast/1":
        from steplaw.faces.terminal_forecast import show_forecast

        show_forecast(record, console)
    else:
        show(record, console)
    return out.getvalue()


def _verdict(sheet: Sheet, record: Json) -> None:
    from rich.padding import Padding
    from rich.text import Text

    joint = " · " if sheet.unicode else "; "
    line = Text(style=HEAD)
    for place, clause in enumerate(reading.verdict(record, sheet.unicode)):
        loud = reading.is_loud(clause)
        line.append(joint if place else "", style=QUIET)
        line.append(sheet.clean(clause), style=BAD if loud else "")
    sheet.console.print()
    sheet.emit(Padding(line, (0, 0, 0, 1), expand=False))


def _law(sheet: Sheet, record: Json) -> None:
    from rich.text import Text

    figure = record["figure"]
    law = figure["law"]
    names = reading.size_names(record)
    sheet.part("Law", law["grade"])
    table = sheet.table()
    table.add_column(style=QUIET, no_wrap=True, min_width=10)
    table.add_column(overflow="fold")
    if law.get("formula") is not None:
        name = sheet.clean(figure["name"])
        pieces = terms(law["formula"], sheet.unicode)
        # Terms break over lines as wholes: their inner blanks must not be breaking points.
        body = " ".join(piece.replace(" ", "\u00a0") for piece in pieces)
        relation = "=" if law["grade"] in ("exact", "proved") else "~"
        style = GRADE_STYLE.get(law["grade"], HEAD)
        table.add_row(name[:24], Text(f"{relation} {body}", style=style))
        if law.get("leading") and law["leading"] != law["formula"]:
            table.add_row("leading", Text(f"~ {pretty(law['leading'], sheet.unicode)}"))
    for label, value in reading.evidence(law, names, sheet.unicode):
        table.add_row(label, Text(sheet.clean(value)))
    for label, other in reading.named_laws(record):
        claimed = other.get("formula") is not None
        shown = Text(reading.law_text(other, sheet.unicode) if claimed else "no law claimed")
        shown.append(f" ({other['grade']})", style=QUIET)
        table.add_row(label, shown)
    for label, value in dominance.told(record, sheet.unicode):
        table.add_row(label, Text(sheet.clean(value)))
    sheet.put(table)


def _values(sheet: Sheet, record: Json) -> None:
    rows = reading.value_rows(record)
    if not rows:
        return
    left_out = len(rows) - VALUES_MOST
    aside = ""
    if left_out > 0:
        half = VALUES_MOST // 2
        rows = rows[:half] + rows[-half:]
        aside = f"{left_out} sizes between left out"
    drawn = any(row[1] != "1" for row in rows)
    sheet.part("Values", aside)
    name = ", ".join(sheet.clean(name) for name in reading.size_names(record)) or "size"
    figure = sheet.clean(record["figure"]["name"])
    columns = [
        (name, "right"),
        ("draws", "right"),
        (f"mean {figure}" if drawn else figure, "right"),
    ]
    columns += [("least to most", "right"), ("doubling ratio", "right")]
    keep = [0, 1, 2, 3, 4] if drawn else [0, 2, 4]
    if not any(row[4] for row in rows):
        keep.remove(4)
    sheet.grid([columns[i] for i in keep], [[row[i] for i in keep] for row in rows])


def _lines(sheet: Sheet, record: Json) -> None:
    rows, left_out = reading.line_rows(record)
    if not rows:
        return
    aside = "shares at the largest size run"
    sheet.part("Lines", aside)
    wide = sheet.width >= 100
    cells = (24, 24) if wide else (18, 11)
    overflow: Any = "ellipsis" if sheet.unicode else "crop"
    table = sheet.table()
    table.padding = (0, 1, 0, 0)
    table.show_header = True
    table.expand = True
    table.add_column("", no_wrap=True, width=1)
    table.add_column("line", justify="right", no_wrap=True)
    table.add_column("source", no_wrap=True, overflow=overflow, ratio=1)
    for heading, cell in zip(("frequency", "steps"), cells, strict=True):
        table.add_column(heading, no_wrap=True, overflow=overflow, max_width=cell)
    table.add_column("share", justify="right", no_wrap=True)
    if wide:
        table.add_column("", no_wrap=True)
    _fill_lines(sheet, table, rows, cells, wide)
    sheet.put(table)
    if left_out:
        sheet.say(f"and {left_out} lines with smaller shares", QUIET)
    in_the_limit = reading.dominance(record)
    if in_the_limit:
        sheet.say(in_the_limit)


def _fill_lines(
    sheet: Sheet, table: Table, rows: Sequence[Json], cells: tuple[int, int], wide: bool
) -> None:
    from rich.text import Text

    sources = _outdented([sheet.clean(row.get("source") or "").rstrip() for row in rows])
    several = len({str(row["file"]) for row in rows}) > 1
    file = None
    for row, source in zip(rows, sources, strict=True):
        if several and row["file"] != file:
            file = row["file"]
            name = sheet.clean(file).rsplit("/", 1)[-1]
            table.add_row("", "", Text(name, style=QUIET))
        share = row.get("share") or 0.0
        heavy = bool(row.get("dominant"))
        mark = ("▶" if sheet.unicode else ">") if heavy else ""
        laws = zip(("frequency", "steps"), cells, strict=True)
        shown = [
            Text(mark, style=ACCENT),
            Text(str(row["line"])),
            Text(source),
            *(Text(reading.law_text(row.get(key), sheet.unicode, cell)) for key, cell in laws),
            Text(percent(share)),
        ]
        if wide:
            shown.append(Text(sheet.bar(share), style=ACCENT if heavy else QUIET))
        table.add_row(*shown, style=HEAD if heavy else "")


def _outdented(sources: list[str]) -> list[str]:
    """Take the common indentation off, and half of the rest: columns are dear."""
    indents = [len(s) - len(s.lstrip()) for s in sources]
    least = min((i for i, s in zip(indents, sources, strict=True) if s), default=0)
    return [
        " " * (max(i - least, 0) // 2) + s.lstrip() for i, s in zip(indents, sources, strict=True)
    ]


def _functions(sheet: Sheet, record: Json) -> None:
    rows = record.get("functions") or []
    if len(rows) < 2:
        return
    ranked = sorted(rows, key=lambda row: -(row.get("share") or 0.0))
    sheet.part("Functions", "own steps, without those of what it calls")
    cells = [
        [
            f"{row['name']}{' (subject)' if row.get('own') else ''}",
            f"{sheet.clean(row['file']).rsplit('/', 1)[-1]}:{row['line']}",
            reading.law_text(row.get("calls"), sheet.unicode, 16),
            reading.law_text(row.get("steps"), sheet.unicode, 18),
            percent(row.get("share") or 0.0),
        ]
        for row in ranked[:FUNCTIONS_MOST]
    ]
    heads = [("function", "left"), ("place", "left"), ("calls", "left"), ("steps", "left")]
    sheet.grid([*heads, ("share", "right")], cells)
    if len(rows) > FUNCTIONS_MOST:
        sheet.say(f"and {len(rows) - FUNCTIONS_MOST} more with smaller shares", QUIET)


def _operations(sheet: Sheet, record: Json) -> None:
    tallies = record.get("tallies") or []
    if not tallies:
        return
    last = tallies[-1]
    counts = sorted(last["operations"].items(), key=lambda item: -item[1])
    laws = record["laws"].get("operations") or {}
    sheet.part("Operation classes", f"counts at {size(last['at'])}")
    rows = [
        [
            name.replace("_", " "),
            grouped(count),
            percent(count / last["steps"]) if last["steps"] else "-",
            reading.law_text(laws.get(name), sheet.unicode, 36),
        ]
        for name, count in counts[:OPERATIONS_MOST]
        if count
    ]
    heads = [("class", "left"), ("count", "right"), ("share", "right"), ("law", "left")]
    sheet.grid(heads, rows)


def _clock(sheet: Sheet, record: Json) -> None:
    clock = record.get("clock")
    if clock is None:
        return
    word = {True: "agrees", False: "departs"}.get(clock["agrees"], "cannot tell")
    sheet.part("Clock check", word)
    style = {True: GOOD, False: BAD}.get(clock["agrees"], UNSURE)
    sheet.say(clock["reason"], style)
    rows = reading.clock_rows(record, sheet.unicode)
    names = ", ".join(sheet.clean(name) for name in reading.size_names(record)) or "size"
    of_whole = clock.get("held") == "work"
    heads = [names, "steps", "time", "ns a step", "steps grow", "time grows"]
    if of_whole:
        heads = [names, "whole", "time", "ns each", "whole grows", "time grows"]
    if rows:
        sheet.grid([(head, "right") for head in heads], rows[-CLOCK_MOST:])
        if len(rows) > CLOCK_MOST:
            sheet.say(f"and {len(rows) - CLOCK_MOST} smaller sizes", QUIET)
        between = clock.get("ns_per_step_interval")
        rate_text = f"{between[0]:.3g} to {between[1]:.3g} ns a step; " if between else ""
        sheet.say(f"{rate_text}best of {clock['rounds']} rounds on {clock['machine']}", QUIET)
    alone = clock.get("steps_alone")
    if alone:
        sheet.say(f"Steps alone: {alone['reason']}", QUIET if clock["agrees"] else "")
        sheet.say(f"One native visit taken as {clock['visit_rate']} of a step.", QUIET)
    hidden = reading.hidden_cost(record)
    if hidden:
        sheet.say(hidden)


def _foot(sheet: Sheet, record: Json) -> None:
    from rich.text import Text

    stopped = record.get("stopped")
    names = reading.size_names(record)
    if stopped:
        sheet.part("Stopped", stopped["kind"])
        where = size(stopped["at"], names) if stopped.get("at") else "the start"
        sheet.say(f"at {where}: {stopped['message']}", BAD)
        sheet.say("What was finished before is shown above; the law rests on that alone.")
    repeatable = record.get("repeatable")
    if repeatable and not repeatable["holds"]:
        sheet.part("Not repeatable", "two equal runs counted differently")
        rows = [
            [f"{line['file']}:{line['line']}", "  ".join(grouped(c) for c in line["counts"])]
            for line in repeatable["lines"][:10]
        ]
        sheet.grid([("line", "left"), ("counts of equal runs", "left")], rows)
    notes = record.get("notes") or []
    if notes:
        sheet.part("Notes")
    for note in notes:
        sheet.say(note, QUIET)
    sheet.console.print()
    # Never broken over lines, so that it can be copied.
    again = Text(" again: ", style=QUIET).append(sheet.clean(record["run_again"]), style="none")
    sheet.console.print(again, soft_wrap=True, highlight=False)
