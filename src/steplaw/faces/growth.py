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
    counts, law, beyond, work, time : tuple of (float, float)
        Counted values; the law over the sizes run; the law beyond them; the law with native
        visits, at the rate that the clock check took them at, where they matter; times.
    """

    along: Along
    unit: int
    says: str
    counts: Points
    law: Points
    beyond: Points
    work: Points
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
    largest = max(counts)
    low = max(1, ways.starts_at(figure["law"], along), min(counts))
    law = _curve(figure["law"], along, low, BEYOND * largest, count)
    inside = tuple(point for point in law if point[0] <= largest)
    beyond = tuple(point for point in law if point[0] > largest and point[1] <= HIGHEST)
    return Growth(
        along,
        unit,
        f"{says} at {clean(along.name)} = {unit}",
        tuple((float(size), float(found / count)) for size, found in counts.items()),
        inside,
        inside[-1:] + beyond,
        _work(record, along, low, largest, unit),
        tuple((float(size), found / times[unit]) for size, found in times.items())
        if unit in times
        else (),
    )


def _curve(law: Json, along: Along, low: int, high: int, unit: ways.Number) -> Points:
    read = ways.reader(law, along.names)
    if read is None:
        return ()
    found = [(size, read(along.at(size))) for size in ways.stops(low, high)]
    return tuple(
        (float(size), float(value) / float(unit))
        for size, value in found
        if ways.finite(value) and value > 0
    )


def _work(record: Json, along: Along, low: int, high: int, unit: int) -> Points:
    laws, clock = record["laws"], record.get("clock") or {}
    held, led = clock.get("held") == "work", (record.get("ledger") or {}).get("leads")
    steps = ways.reader(laws.get("steps"), along.names)
    native = ways.reader(laws.get("native"), along.names)
    if record["figure"]["name"] != "steps" or not (held or led) or not steps or not native:
        return ()
    rate = Fraction(str(clock["visit_rate"])) if held and clock.get("visit_rate") else 1
    sizes = [*ways.stops(low, high), unit]
    whole = [float(steps(along.at(n))) + float(rate * native(along.at(n))) for n in sizes]
    one = whole.pop()
    if not one > 0:
        return ()
    return tuple((float(n), v / one) for n, v in zip(sizes, whole, strict=False) if v > 0)


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
