"""Audits as they are stored, made up: counts by size, a law, a clock check."""

from __future__ import annotations

import random
from collections.abc import Callable, Mapping, Sequence
from fractions import Fraction
from statistics import pvariance
from typing import Any

from steplaw.findings import number
from steplaw.law import find_law
from steplaw.law.model import Observation
from steplaw.record import AuditRecord

SIZES = (*range(13), 16, 23, 32, 47, 64, 95, 128, 191, 256, 383, 512, 767, 1024)


def stored(
    count: Callable[..., int],
    sizes: Sequence[int | tuple[int, ...]] = SIZES,
    names: Sequence[str] = ("n",),
    draws: int = 1,
    clock: Mapping[str, Any] | None = None,
    law: Mapping[str, Any] | None = None,
    seed: int = 0,
) -> AuditRecord:
    """Give the record of an audit whose counts a function of the sizes (and rng) gives."""
    rng = random.Random(seed)
    points = [at if isinstance(at, tuple) else (at,) for at in sizes]
    runs = {at: [count(*at, rng) for _ in range(draws)] for at in points}
    return record_of_runs(runs, names, clock, law)


def record_of_runs(
    runs: Mapping[tuple[int, ...], Sequence[int]],
    names: Sequence[str] = ("n",),
    clock: Mapping[str, Any] | None = None,
    law: Mapping[str, Any] | None = None,
) -> AuditRecord:
    """Give the record of an audit that counted these steps, by size and draw."""
    draws = max(len(values) for values in runs.values())
    seen = [observed(at, values) for at, values in runs.items()]
    found = dict(law) if law is not None else find_law(seen, tuple(names)).as_json()
    own = {"name": "sail", "file": "ferry.py", "line": 3, "digest": "0"}
    record = {
        "schema": "steplaw.audit/1",
        "steplaw": "0.1.0",
        "subject": own,
        "python": "3.11.7",
        "sizes": {
            "names": list(names),
            "plan": [named(names, at) for at in runs],
            "settled_by": [],
            "held_out": [],
        },
        "feed": {"kind": "expression", "text": "n", "varies": draws > 1, "draws": draws},
        "figure": {
            "name": "steps",
            "law": found,
            "least": None,
            "most": None,
            "variance": None,
            "values": [value(names, o) for o in seen],
        },
        "tallies": [
            {"at": named(names, at), "draw": k, "steps": steps, "operations": {}, "native": 0}
            for at, values in runs.items()
            for k, steps in enumerate(values)
        ],
        "laws": {"steps": found, "native": None, "operations": {}},
        "lines": [],
        "functions": [],
        "clock": None if clock is None else dict(clock),
        "repeatable": None,
        "stopped": None,
        "notes": [],
        "run_again": "steplaw audit ferry.py:sail",
    }
    made = AuditRecord(record)
    made.validate()
    return made


def named(names: Sequence[str], at: tuple[int, ...]) -> dict[str, int]:
    return dict(zip(names, at, strict=True))


def observed(at: tuple[int, ...], values: Sequence[int]) -> Observation:
    exact = [Fraction(v) for v in values]
    return Observation(
        at, fmean_exact(exact), len(values), pvariance(exact), min(exact), max(exact)
    )


def fmean_exact(values: Sequence[Fraction]) -> Fraction:
    return sum(values, Fraction(0)) / len(values)


def value(names: Sequence[str], o: Observation) -> dict[str, Any]:
    return {
        "at": named(names, o.at),
        "draws": o.draws,
        "mean": number(o.value),
        "variance": number(o.variance),
        "least": number(o.least),
        "most": number(o.most),
    }


def clock(
    rates: Sequence[float],
    steps: Sequence[int],
    agrees: bool | None = True,
    departs_from: Mapping[str, int] | None = None,
) -> dict[str, Any]:
    """Give a clock check that measured these nanoseconds a step."""
    from steplaw.clock import Timing, check

    points = [{"n": 2**k} for k in range(len(rates))]
    timings = [
        Timing(at, rate * s, (rate * s,) * 5)
        for at, rate, s in zip(points, rates, steps, strict=True)
    ]
    made = check(points, steps, timings)
    made |= {"held": "steps", "visit_rate": None, "steps_alone": None}
    return made | {"agrees": agrees, "departs_from": departs_from}
