"""A worst case in the terminal."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from steplaw.faces.notation import pretty
from steplaw.faces.sheet import GOOD, HEAD, QUIET, UNSURE, Sheet
from steplaw.faces.text import clean, number

if TYPE_CHECKING:
    from rich.console import Console

Json = Mapping[str, Any]
INPUT_MOST = 220
ENDED = {
    "done": "as far as was asked",
    "steps": "where a run would have cost too much",
    "time": "by the limit on its time",
    "interrupted": "interrupted",
}


def show_worst(record: Json, console: Console) -> None:
    """Print the sheet of a worst case.

    Parameters
    ----------
    record : mapping
        A `steplaw.worst/1` record.
    console : rich.console.Console
        Where to.
    """
    sheet = Sheet(console)
    title(sheet, "WORST CASE", record)
    best = record["best"]
    sheet.part("Worst input", "of all inputs" if best["true"] else "at least: the worst found")
    shown = best["input"]
    rows = [
        ("n", number(best["at"])),
        ("figure", number(best["value"])),
        ("input", shown if len(shown) <= INPUT_MOST else f"{shown[: INPUT_MOST - 1]}…"),
    ]
    if best["mean"] is not None:
        rows.append(("mean draw", f"{number(best['mean'])}; the worst is {best['times_mean']}"))
        rows[-1] = (rows[-1][0], f"{rows[-1][1]} times that")
    sheet.pairs(rows)
    if best["at"] != record["asked"]:
        sheet.say(f"n={record['asked']} was not reached: see how the search ended.", UNSURE)
    _family(sheet, record["family"])
    _whole(sheet, record["whole"])
    _search(sheet, record)


def title(sheet: Sheet, name: str, record: Json) -> None:
    """Print the title block of a record of this kind."""
    subject = record["subject"]
    sheet.title(
        name,
        [
            ("subject", clean(subject["name"])),
            ("place", f"{clean(subject['file'])}:{subject['line']}"),
            ("feed", clean(record["feed"]["text"])),
            ("figure", clean(record["figure"])),
            ("python", f"{clean(record['python'])}   steplaw {clean(record['steplaw'])}"),
        ],
    )


def law_rows(sheet: Sheet, law: Json, head: str = "") -> list[tuple[str, str]]:
    """Give a law as labelled texts."""
    if law["formula"] is None:
        return [(head or "law", f"open: {law['note']}" if law["note"] else "open")]
    rows = [(head or "law", f"{pretty(law['formula'], sheet.unicode)}   {law['grade']}")]
    if law["leading"] != law["formula"]:
        rows.append(("leading", f"~ {pretty(law['leading'], sheet.unicode)}"))
    return rows


def _family(sheet: Sheet, family: Json | None) -> None:
    if family is None:
        return
    sheet.part("Worst family", f"at least   {family['law']['grade']}")
    sheet.say(family["text"], HEAD)
    sheet.pairs(law_rows(sheet, family["law"]))


def _whole(sheet: Sheet, whole: Json | None) -> None:
    if whole is None:
        return
    sheet.part("Every input of a size", f"the true worst   {whole['law']['grade']}")
    sheet.say(f"over {whole['domain']}", QUIET)
    rows = [
        [number(row["n"]), number(row["inputs"]), number(row["value"]), row["input"]]
        for row in whole["sizes"][-12:]
    ]
    sheet.grid([("n", "right"), ("inputs", "right"), ("most", "right"), ("input", "left")], rows)
    sheet.pairs(law_rows(sheet, whole["law"], "most"))


def _search(sheet: Sheet, record: Json) -> None:
    sheet.part("Search")
    search = record["search"]
    rows = [("runs", number(search["runs"])), ("ended", ENDED[search["ended"]])]
    if record["kinds"]:
        rows.insert(0, ("arguments", ", ".join(record["kinds"])))
    sheet.pairs(rows)
    written = record["file"]
    if written is not None:
        sizes = ",".join(map(str, written["sizes"]))
        sheet.say(f"written to {written['path']}; audit it again with", QUIET)
        sheet.say(f"--feed {written['path']}:worst --sizes {sizes} --only-sizes", GOOD)
    for note in record["notes"]:
        sheet.say(note, QUIET)
