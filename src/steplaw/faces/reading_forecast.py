"""What every face says of a forecast, in plain words and in the same order."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from steplaw.faces.notation import pretty
from steplaw.faces.text import clean, duration, number

Json = Mapping[str, Any]
WRITTEN_OUT = 27
"""Digits that an exact number is written out to."""


def size(at: Json) -> str:
    """Write a size with its digits in groups."""
    return ", ".join(f"{clean(name)} = {value:,}".replace(",", " ") for name, value in at.items())


def value(given: Any) -> str:
    """Write what a law gives, every digit of a whole number that is not too long."""
    if isinstance(given, int) and len(str(abs(given))) <= WRITTEN_OUT:
        return f"{given:,}".replace(",", " ")
    return number(given)


def rounded(given: float, up: bool) -> str:
    """Write an end of an interval to four digits, outwards."""
    if given <= 0:
        return "0"
    scale = 10.0 ** (math.floor(math.log10(given)) - 3)
    steps = given / scale
    whole = (math.ceil(steps - 1e-9) if up else math.floor(steps + 1e-9)) * scale
    return f"{whole:.4g}" if whole < 1000 else number(round(whole))


def between(interval: Any) -> str:
    """Write an interval."""
    return f"{rounded(interval[0], False)} to {rounded(interval[1], True)}"


def amount(told: Json) -> str:
    """Write a figure at a size: a number, or an interval."""
    if told["interval"] is not None:
        return between(told["interval"])
    return "none" if told["value"] is None else value(told["value"])


def seconds(entry: Json, unicode: bool = True) -> str:
    """Write the time at a size."""
    if entry["seconds"] is None:
        return "none"
    low, high = (lasting(x, unicode) for x in entry["seconds"])
    first, _, unit = low.partition(" ")
    return f"{first} to {high}" if high.endswith(f" {unit}") else f"{low} to {high}"


def lasting(given: float, unicode: bool = True) -> str:
    """Write a time in the unit that suits it, from nanoseconds to years."""
    for unit, scale in (("years", 365.25 * 86400), ("days", 86400), ("h", 3600), ("min", 60)):
        if given >= 2 * scale:
            long = given / scale
            return f"{long:.3g} {unit}" if long < 10_000 else f"{long:.3e} {unit}"
    return duration(given, unicode)


def beyond(entry: Json) -> str:
    """Write how far a size is beyond those that were run."""
    times = entry["beyond"]
    if times is None:
        return "-"
    if times <= 1:
        return "inside"
    return f"{number(round(times)) if times >= 100 else f'{times:.3g}'} x"


def table(record: Json, unicode: bool = True) -> tuple[list[str], list[list[str]]]:
    """Give headings and a row for each size; without times where no clock check was made."""
    figures = list(record["at"][0]["figures"])
    timed = record["clock"] is not None
    rows = [
        [
            size(entry["at"]),
            *(amount(entry["figures"][name]) for name in figures),
            *([seconds(entry, unicode)] if timed else []),
            beyond(entry),
        ]
        for entry in record["at"]
    ]
    return ["size", *map(clean, figures), *(["time"] if timed else []), "beyond"], rows


def reasons(record: Json) -> list[str]:
    """Say, once each, why there is no number, and what makes one wide."""
    out: list[str] = []
    for entry in record["at"]:
        where = size(entry["at"])
        for name, told in entry["figures"].items():
            if told["why"]:
                out.append(f"{clean(name)} at {where}: {clean(told['why'])}")
            if told["bound"] is not None and told["grade"] != "proved":
                out.append(f"{clean(name)} at {where}: proved to be at most {value(told['bound'])}")
            if told["grade"] == "fitted":
                mean = between(told["mean_interval"])
                out.append(f"{clean(name)} at {where}: one run, at 95 in 100; the mean {mean}")
            elif told["interval"] is not None and told["value"] is not None:
                out.append(f"{clean(name)} at {where}: one run; the mean {value(told['value'])}")
    out += [clean(entry["why_no_seconds"]) for entry in record["at"] if entry["why_no_seconds"]]
    clock = record["clock"]
    if clock is not None and clock["wide"] and any(e["seconds"] for e in record["at"]):
        out.append(clean(clock["wide"]))
    return list(dict.fromkeys(out))


def fits(entry: Json) -> list[tuple[str, str]]:
    """Say which sizes fit a limit, as labelled texts."""
    if entry["why"]:
        return [("none", clean(entry["why"]))]
    sure, perhaps = entry["sure"], entry["perhaps"]
    if sure == perhaps:
        return [("largest", _found(sure))]
    rows = [("surely", _found(sure) if sure else "no size fits for sure")]
    return [*rows, ("perhaps", _found(perhaps) if perhaps else "none")]


def _found(found: Json) -> str:
    if found["unlimited"]:
        return f"{size(found['at'])}: every size searched fits"
    return f"{size(found['at'])}   ({beyond(found)} the largest run)".replace("x the", "times the")


def laws(record: Json, unicode: bool = True) -> list[tuple[str, str]]:
    """Give the laws that the forecast follows, each with its grade."""
    return [
        (clean(name), "open" if law["formula"] is None else _law(law, unicode))
        for name, law in record["laws"].items()
    ]


def _law(law: Json, unicode: bool) -> str:
    return f"{pretty(law['formula'], unicode)}   {law['grade']}"


def clock(record: Json) -> list[tuple[str, str]]:
    """Say what the times rest on, as labelled texts."""
    held = record["clock"]
    if held is None:
        return [("clock", "not checked")]
    verdict = {True: "agrees", False: "departs", None: "undecided"}[held["agrees"]]
    rows = [("verdict", f"{verdict}: {clean(held['reason'])}")]
    if held["ns_per_step"] is not None:
        low, high = held["ns_per_step"]
        unit = "step"
        if held["held"] == "work":
            unit = f"step, a native visit counted as {held['visit_rate']}"
        rows.append(("ns", f"{low:.3g} to {high:.3g} for a {unit}"))
    if held["largest"] is not None:
        rows.append(("timed to", size(held["largest"])))
    if held["machine"]:
        rows.append(("machine", clean(held["machine"])))
    return rows
