"""The evidence of a law, size by size: what was counted, what the law gives, and the rest."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any, NamedTuple

from steplaw.faces import along as ways
from steplaw.faces.reading import size_names, value_rows
from steplaw.faces.text import number

Json = Mapping[str, Any]


class Row(NamedTuple):
    """One size, as texts."""

    size: str
    part: str
    draws: str
    counted: str
    spread: str
    law: str
    rest: str
    ratio: str


def rows(record: Json) -> list[Row]:
    """Give the evidence of the figure's law by size.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    list of Row
        In the record's order. ``part`` says what the size was for: the law was found from it,
        tested at it, or it lies below where the law holds. ``rest`` is counted less law.
    """
    law = record["figure"]["law"]
    names = size_names(record)
    read = ways.reader(law, names)
    found = _set(law.get("settled_by"), names)
    tested = _set(law.get("checked_at"), names)
    exact = law["grade"] in ("exact", "proved")
    out = []
    for value, shown in zip(record["figure"].get("values") or [], value_rows(record), strict=True):
        at = tuple(value["at"].get(name) for name in names)
        part = "found from" if at in found else "tested" if at in tested else ""
        by_law, rest = "", ""
        if read is not None and (part or not exact):
            given, counted = read(value["at"]), Fraction(str(value["mean"]))
            by_law, rest = number(_plain(given)), _rest(counted, given)
        size, draws, counted_text, spread, ratio = shown
        out.append(Row(size, part, draws, counted_text, spread, by_law, rest, ratio))
    return out


def _rest(counted: Fraction, given: ways.Number) -> str:
    if not isinstance(given, float):
        return number(str(counted - given))
    if not math.isfinite(given):
        return ""
    if not counted:
        return f"{-given:.2g}"
    return f"{100 * (float(counted) - given) / float(counted):+.2g} %"


def _plain(given: ways.Number) -> object:
    return given if isinstance(given, float) else str(given)


def _set(entries: Sequence[Any] | None, names: Sequence[str]) -> set[tuple[Any, ...]]:
    out = set()
    for entry in entries or []:
        if isinstance(entry, Mapping):
            out.add(tuple(entry.get(name) for name in names))
        else:
            out.add(tuple(entry) if isinstance(entry, list) else (entry,))
    return out
