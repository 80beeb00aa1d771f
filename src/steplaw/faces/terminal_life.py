"""Costs over a life, distributions and what is held, in the terminal."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import TYPE_CHECKING, Any

from steplaw.faces.notation import pretty
from steplaw.faces.sheet import QUIET, Sheet
from steplaw.faces.terminal_worst import title
from steplaw.faces.text import number

if TYPE_CHECKING:
    from rich.console import Console

Json = Mapping[str, Any]
ROWS_MOST = 14


def show_life(record: Json, console: Console) -> None:
    """Print the sheet of a `steplaw.life/1` record.

    Parameters
    ----------
    record : mapping
        The record.
    console : rich.console.Console
        Where to.
    """
    sheet = Sheet(console)
    title(sheet, "COST OVER A LIFE", record)
    sheet.part("Laws", "of one operation: the mean is the amortised cost")
    laws = record["laws"]
    powers = {"total, n = 2^k": laws["total_at_powers"]} if laws["total_at_powers"] else {}
    _laws(sheet, {**laws, **powers}, ("total", *powers, "largest", "mean"))
    bound = record["bound"]
    operations = record["sizes"][-1]["operations"]
    sheet.say(
        f"In the longest life, of {number(operations)} operations, the running mean is at no time "
        f"above {_short(bound['most_mean'])} (after {number(bound['at'])}).",
        QUIET,
    )
    sheet.part("By size")
    rows = [
        [*(number(r[k]) for k in ("n", "operations", "total", "largest")), _short(r["mean"])]
        for r in _chosen(record["sizes"])
    ]
    heads = ("n", "operations", "total", "largest", "mean")
    sheet.grid([(h, "right") for h in heads], rows)
    sheet.part("Dearest operations", "of the longest life")
    values = record["operations"]
    dearest = sorted(range(len(values)), key=lambda k: (-values[k], k))[:8]
    most = max(values) or 1
    sheet.grid(
        [("operation", "right"), ("figure", "right"), ("", "left")],
        [
            [number(k + 1), number(values[k]), sheet.bar(values[k] / most, 24)]
            for k in sorted(dearest)
        ],
    )
    _notes(sheet, record)


def show_typical(record: Json, console: Console) -> None:
    """Print the sheet of a `steplaw.typical/1` record.

    Parameters
    ----------
    record : mapping
        The record.
    console : rich.console.Console
        Where to.
    """
    sheet = Sheet(console)
    title(sheet, "TYPICAL CASES", record)
    sheet.part("Laws", "over every input" if record["whole"] else "over draws")
    _laws(sheet, record["laws"], ("mean", "variance", "lower", "median", "upper"))
    sheet.part("By size", "a quarter of the inputs is at or below 1/4")
    keys = ("least", "lower", "median", "upper", "most")
    rows = [
        [
            number(r["n"]),
            number(r["draws"]),
            _short(r["mean"]),
            f"{r['spread']:.4g}",
            *(number(r[k]) for k in keys),
        ]
        for r in _chosen(record["sizes"])
    ]
    heads = ("n", "inputs", "mean", "spread", "least", "1/4", "median", "3/4", "most")
    sheet.grid([(h, "right") for h in heads], rows)
    _notes(sheet, record)


def show_space(record: Json, console: Console) -> None:
    """Print the sheet of a `steplaw.space/1` record.

    Parameters
    ----------
    record : mapping
        The record.
    console : rich.console.Console
        Where to.
    """
    sheet = Sheet(console)
    title(sheet, "TIME AND SPACE", record)
    sheet.part("Laws", "at the peak of a run")
    _laws(sheet, record["laws"], ("steps", "elements", "memory"))
    sheet.part("By size")
    rows = [
        [number(r["n"]), number(r["steps"]), number(r["elements"]), number(r["memory"])]
        for r in _chosen(record["sizes"])
    ]
    heads = ("n", "steps", "elements", "bytes")
    sheet.grid([(h, "right") for h in heads], rows)
    _notes(sheet, record)


def _laws(sheet: Sheet, laws: Json, names: Sequence[str]) -> None:
    rows = []
    for name in names:
        law = laws[name]
        if law["formula"] is None:
            rows.append((name, "open"))
            continue
        text = pretty(law["formula"], sheet.unicode)
        if len(text) > 46 and law["leading"] is not None:
            text = f"~ {pretty(law['leading'], sheet.unicode)}"
        rows.append((name, f"{text}   {law['grade']}"))
    sheet.pairs(rows)


def _chosen(rows: Sequence[Json]) -> list[Json]:
    """Leave out rows from a long table, evenly, and keep the first and the last."""
    if len(rows) <= ROWS_MOST:
        return list(rows)
    step = (len(rows) - 1) / (ROWS_MOST - 1)
    return [rows[round(k * step)] for k in range(ROWS_MOST)]


def _short(value: Any) -> str:
    exact = Fraction(value)
    if exact.denominator == 1:
        return number(int(exact))
    return f"{float(exact):.2f}" if abs(exact) < 1000 else number(round(exact))


def _notes(sheet: Sheet, record: Json) -> None:
    sheet.part("Notes")
    for note in record["notes"]:
        sheet.say(note, QUIET)
