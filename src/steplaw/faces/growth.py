"""The growth plot's points: counts, law and time, each as a multiple of itself at one size."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from steplaw.faces import along as ways
from steplaw.faces.along import Along
from steplaw.faces.text import clean, duration, number

Json = Mapping[str, Any]
Points = tuple[tuple[float, float], ...]
#: The law is drawn so far beyond the largest size run, as a factor, and so far up.
BEYOND = 4
HIGHEST = 100


@dataclass(frozen=True, slots=True)
class Growth:
    """Points to draw, sizes across and multiples up.

    Parameters
    ----------
    along : Along
        The size that grows.
    unit : int
        The size at which each is 1.
    says : str
        What 1 stands for.
    counts, law, beyond, time : tuple of (float, float)
        Counted values; the law over the sizes run; the law beyond them; times.
    """

    along: Along
    unit: int
    says: str
    counts: Points
    law: Points
    beyond: Points
    time: Points


def growth(record: Json, along: Along) -> Growth | None:
    """Give the growth plot's points along one size.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    along : Along
        The size that grows.

    Returns
    -------
    Growth or None
        None where fewer than two sizes have a count to draw.
    """
    figure = record["figure"]
    counts = _counts(record, along)
    if len(counts) < 2:
        return None
    times = _times(record, along)
    unit = max(set(counts) & set(times), default=max(counts))
    count = counts[unit]
    says = f"1 = {clean(figure['name'])} {number(str(count))}"
    if unit in times:
        says += f" and {duration(times[unit])}"
    read = ways.reader(figure["law"], along.names)
    law: list[tuple[float, float]] = []
    beyond: list[tuple[float, float]] = []
    largest = max(counts)
    if read is not None:
        low = max(1, ways.starts_at(figure["law"], along), min(counts))
        for size in ways.stops(low, BEYOND * largest):
            found = read(along.at(size))
            if ways.finite(found) and found > 0:
                point = (float(size), float(found / count))
                if size <= largest:
                    law.append(point)
                elif point[1] <= HIGHEST:
                    beyond.append(point)
    return Growth(
        along,
        unit,
        f"{says} at {clean(along.name)} = {unit}",
        tuple((float(size), float(found / count)) for size, found in counts.items()),
        tuple(law),
        tuple(law[-1:] + beyond),
        tuple((float(size), found / times[unit]) for size, found in times.items())
        if unit in times
        else (),
    )


def _counts(record: Json, along: Along) -> dict[int, Fraction]:
    out = {}
    for value in record["figure"].get("values") or []:
        mean = Fraction(str(value["mean"]))
        if value["at"] == along.at(value["at"][along.name]) and value["at"][along.name] > 0 < mean:
            out[value["at"][along.name]] = mean
    return dict(sorted(out.items()))


def _times(record: Json, along: Along) -> dict[int, float]:
    clock = record.get("clock") or {}
    out = {}
    for at, seconds in zip(clock.get("sizes") or [], clock.get("seconds") or [], strict=False):
        size = at.get(along.name, 0)
        if at == along.at(size) and size > 0 and seconds > 0:
            out[size] = float(seconds)
    return dict(sorted(out.items()))
