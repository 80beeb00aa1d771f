"""What the page's size slider works with: laws as trees, the sizes to stop at, the clock."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.faces import along as ways
from steplaw.faces.along import Along
from steplaw.faces.notation import signed_terms
from steplaw.faces.tree import tree

Json = Mapping[str, Any]


def live(record: Json) -> dict[str, Any] | None:
    """Give the data of the slider.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    dict or None
        Plain JSON values; None where no law is claimed or it cannot be worked out.
    """
    law = record["figure"]["law"]
    found = ways.ways(record)
    names = [along.name for along in found]
    figure = tree(law.get("formula"), names)
    if not found or figure is None:
        return None
    terms = [tree(text, names) for text in signed_terms(law["formula"])]
    return {
        "names": names,
        "figure": figure,
        "grade": law["grade"],
        "steps": _tree(record["laws"].get("steps"), names),
        "work": _work(record, names),
        "terms": terms,
        "lines": [
            {"frequency": _tree(line.get("frequency"), names)}
            | {"steps": _tree(line.get("steps"), names)}
            for line in record.get("lines") or []
        ],
        "rate": _rate(record),
        "timed": _timed(record, names),
        "start": [ways.starts_at(law, along) for along in found],
        "largest": [along.run[-1] for along in found],
        "stops": [_stops(law, along) for along in found],
        "counted": [
            [value["at"].get(name) for name in names] + [str(value["mean"])]
            for value in record["figure"]["values"]
        ],
    }


def _work(record: Json, names: list[str]) -> Any:
    """Give steps and native visits together, where the figure is steps and there are visits."""
    laws = record["laws"]
    same = (laws.get("work") or {}).get("formula") == (laws.get("steps") or {}).get("formula")
    shown = record["figure"]["name"] == "steps" and not same
    return _tree(laws.get("work"), names) if shown else None


def _tree(law: Json | None, names: list[str]) -> Any:
    return tree((law or {}).get("formula"), names)


def _timed(record: Json, names: list[str]) -> Any:
    """Give what the clock was held against: steps, or steps and native visits at a rate."""
    laws, clock = record["laws"], record.get("clock") or {}
    steps = _tree(laws.get("steps"), names)
    if clock.get("held") != "work":
        return steps
    native, rate = _tree(laws.get("native"), names), tree(clock.get("visit_rate"), ())
    return ["+", steps, ["*", rate, native]] if steps and native and rate else None


def _rate(record: Json) -> list[float] | None:
    """Give nanoseconds a step, least and most, where time follows what it was held against."""
    clock = record.get("clock") or {}
    between = clock.get("ns_per_step_interval")
    return list(between) if between and clock.get("agrees") is True else None


def _stops(law: Json, along: Along) -> list[int]:
    """Give the slider's stops: from the smallest size to where the law is past use."""
    read = ways.reader(law, along.names)
    assert read is not None
    low = ways.starts_at(law, along)
    every = sorted({*ways.stops(low, ways.MOST_SIZE), *(n for n in along.run if n >= low)})
    out = []
    for size in every:
        if not ways.finite(read(along.at(size))) and size > low:
            break
        out.append(size)
    return out
