"""Which term and which line dominates at which size, read off the laws of the record."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from steplaw.faces import along as ways
from steplaw.faces.along import Along, Number
from steplaw.faces.notation import signed_terms, terms
from steplaw.faces.text import clean, grouped

Json = Mapping[str, Any]
#: How far beyond the largest size run the shares are read, as a factor.
BEYOND = 100
LEAST_REACH = 1000
#: Changes of the greatest part that one line can tell.
MOST_TOLD = 5


#: What the steps of no line shown are called; it has a share, and never leads.
ELSEWHERE = "elsewhere"
Read = Callable[[Mapping[str, int]], Number]


@dataclass(frozen=True, slots=True)
class Part:
    """A term or a line: what it is called and its value at a size."""

    label: str
    read: Read


@dataclass(frozen=True, slots=True)
class Shares:
    """Shares of parts by size.

    Parameters
    ----------
    along : Along
        The size that grows.
    labels : tuple of str
        The parts, in the record's order.
    sizes : tuple of int
        Sizes looked at.
    rows : tuple of tuple of float
        By part: its share at each size; magnitudes, where a part is negative.
    bands : tuple of (int, int)
        First size of each band, and the part with the greatest share in it.
    """

    along: Along
    labels: tuple[str, ...]
    sizes: tuple[int, ...]
    rows: tuple[tuple[float, ...], ...]
    bands: tuple[tuple[int, int], ...]


def term_shares(record: Json, along: Along, unicode: bool = True) -> Shares | None:
    """Give the shares of the terms of the figure's law.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    along : Along
        The size that grows.
    unicode : bool
        As for `pretty`.

    Returns
    -------
    Shares or None
        None where no law is claimed, or it has one term alone.
    """
    law = record["figure"]["law"]
    names = along.names
    formula = law.get("formula")
    labels = [label.removeprefix("+ ") for label in terms(formula, unicode)]
    made = [ways.formula_reader(text, names) for text in signed_terms(formula)]
    if len(made) != len(labels) or len(made) < 2:
        return None
    parts = [Part(label, read) for label, read in zip(labels, made, strict=True) if read]
    return _shares(parts, along, ways.starts_at(law, along)) if len(parts) == len(made) else None


def line_shares(record: Json, along: Along) -> tuple[Shares | None, list[int]]:
    """Give the shares of the lines, and the lines that have no law and are left out.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    along : Along
        The size that grows.

    Returns
    -------
    Shares or None, list of int
        None where fewer than two lines have a law.
    """
    names = along.names
    parts, left_out, start = [], [], 0
    for line in record.get("lines") or []:
        read = ways.reader(line.get("steps"), names)
        if read is None:
            left_out.append(int(line["line"]))
        else:
            parts.append(Part(f"line {line['line']}", read))
            start = max(start, ways.starts_at(line["steps"], along))
    if len(parts) < 2:
        return None, left_out
    whole = ways.reader(record["laws"].get("steps"), names)
    if whole is None:
        return _shares(parts, along, start), left_out
    start = max(start, ways.starts_at(record["laws"]["steps"], along))
    return _shares([*parts, _rest(parts, whole)], along, start), left_out


def _rest(parts: Sequence[Part], whole: Read) -> Part:
    """Give the steps of no line shown: other files, instructions without a line, open laws."""

    def read(at: Mapping[str, int]) -> Number:
        rest = whole(at)
        for part in parts:
            rest = rest - part.read(at)
        return max(rest, Fraction(0))

    return Part(ELSEWHERE, read)


def bands(shares: Shares) -> list[tuple[str, str]]:
    """Give the sizes over which one part is the greatest, and which it is.

    Parameters
    ----------
    shares : Shares
        Shares of terms or lines.

    Returns
    -------
    list of (str, str)
        Such as ``("n = 1 to 3", "42")``.
    """
    name = clean(shares.along.name)
    out = []
    ends = [first - 1 for first, _ in shares.bands[1:]]
    for (first, part), end in zip(shares.bands, [*ends, None], strict=True):
        if end is None:
            span = f"from {name} = {grouped(first)} on"
        else:
            span = f"{name} = {grouped(first)}" + (f" to {grouped(end)}" if end > first else "")
        out.append((span, shares.labels[part]))
    return out


def told(record: Json, unicode: bool = True) -> list[tuple[str, str]]:
    """Say which term and which line is the greatest where, in a line each.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    unicode : bool
        As for `pretty`.

    Returns
    -------
    list of (str, str)
        Label and text, where the greatest one changes with the size.
    """
    out = []
    for along in ways.ways(record):
        for label, shares in (
            ("top term", term_shares(record, along, unicode)),
            ("top line", line_shares(record, along)[0]),
        ):
            if shares is not None and 1 < len(shares.bands) <= MOST_TOLD:
                spans = [f"{part} ({span})" for span, part in bands(shares)]
                where = f", with {clean(along.where, unicode)}" if along.held else ""
                out.append((label, ", ".join(spans) + where))
    return out


def _shares(parts: Sequence[Part], along: Along, start: int) -> Shares | None:
    low = max(1, start)
    most = max(low, along.run[-1] if along.run else low)
    kept: list[int] = []
    columns: list[list[float]] = []
    for size in ways.stops(low, max(most * BEYOND, LEAST_REACH)):
        column = _column(parts, along, size)
        if column is None and kept:
            break
        if column is not None:
            kept.append(size)
            columns.append(column)
    if len(kept) < 2:
        return None
    rows = tuple(zip(*columns, strict=True))
    labels = tuple(part.label for part in parts)
    return Shares(along, labels, tuple(kept), rows, _bands(parts, along, kept, columns))


def _column(parts: Sequence[Part], along: Along, size: int) -> list[float] | None:
    values = [part.read(along.at(size)) for part in parts]
    if not all(ways.finite(value) for value in values):
        return None
    sizes = [value if value > 0 else -value for value in values]
    total = sum(sizes)
    return [float(size / total) for size in sizes] if total else None


def _bands(
    parts: Sequence[Part], along: Along, sizes: Sequence[int], columns: Sequence[Sequence[float]]
) -> tuple[tuple[int, int], ...]:
    tops = [_top(parts, column) for column in columns]
    out = [(sizes[0], tops[0])]
    for place in range(1, len(sizes)):
        if tops[place] != tops[place - 1]:
            out.append((_turn(parts, along, sizes[place - 1], sizes[place]), tops[place]))
    return tuple(out)


def _turn(parts: Sequence[Part], along: Along, low: int, high: int) -> int:
    """Find the first size from which the part that leads at `high` leads."""
    last = _column(parts, along, high)
    while high - low > 1 and last is not None:
        middle = (low + high) // 2
        column = _column(parts, along, middle)
        if column is not None and _top(parts, column) == _top(parts, last):
            high = middle
        else:
            low = middle
    return high


def _top(parts: Sequence[Part], column: Sequence[float]) -> int:
    lines = [place for place, part in enumerate(parts) if part.label != ELSEWHERE]
    return max(lines, key=lambda place: column[place])
