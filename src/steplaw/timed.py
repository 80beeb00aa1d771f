"""The clock check of a sweep: which sizes are timed, and the runs of the untouched function."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from fractions import Fraction
from typing import Any

from steplaw import series
from steplaw.clock import Timing, check
from steplaw.costs import work
from steplaw.errors import SteplawError
from steplaw.host.asking import Asker, RunFailed
from steplaw.law.model import Observation
from steplaw.sweep import Sweep

SECONDS = 6.0
SIZES_MOST = 16
RATES = tuple(Fraction(2) ** power for power in range(2, -10, -1))
"""Steps that one native visit may take."""


def points_to_time(swept: Sweep) -> list[Observation]:
    """Choose the sizes to time, with their steps.

    Parameters
    ----------
    swept : Sweep
        The counted runs.

    Returns
    -------
    list of Observation
        Smallest first; steps and native visits together grow by a quarter or more from one to
        the next, or the sizes do where these hardly grow: the time may all the same, by work
        that is not charged. Empty where every input of a size was run: there is no one input to
        time.
    """
    if swept.whole:
        return []
    steps = [o for o in series.of(swept, lambda run: work(run.tally)) if all(o.at) and o.value > 0]
    chosen = _apart(steps, lambda o: o.value)
    if len(chosen) == 1:
        chosen = _apart(steps, lambda o: Fraction(math.prod(o.at)))
    return chosen


def _apart(
    observed: Sequence[Observation], measure: Callable[[Observation], Fraction]
) -> list[Observation]:
    """Give those that are a quarter or more apart from each other, smallest first."""
    chosen: list[Observation] = []
    for o in sorted(observed, key=lambda o: (measure(o), o.at), reverse=True):
        if not chosen or measure(o) * 5 <= measure(chosen[-1]) * 4:
            chosen.append(o)
    return chosen[::-1][-SIZES_MOST:]


def hold_against_clock(
    runner: Asker, swept: Sweep, chosen: Sequence[Observation], draws: int
) -> dict[str, Any]:
    """Time the untouched function and hold its steps against that.

    Parameters
    ----------
    runner : Asker
        A host without probes.
    swept : Sweep
        The counted runs.
    chosen : sequence of Observation
        What `points_to_time` gave.
    draws : int
        Inputs at each size, where they differ.

    Returns
    -------
    dict
        The record's ``clock``.
    """
    points = [swept.at(o.at) for o in chosen]
    try:
        rows = runner.time(points, draws if swept.varies else 1, SECONDS)
    except RunFailed as failed:
        return undecided(f"the timed run {failed.failure.message}")
    except SteplawError as error:
        return undecided(f"the timed run could not be made: {error}")
    timings = [Timing.from_json(row) for row in rows]
    by_size = {o.at: o.value for o in series.of(swept, lambda run: run.tally.steps)}
    steps = [by_size[o.at] for o in chosen]
    visits = [o.value - own for o, own in zip(chosen, steps, strict=True)]
    alone = check(points, steps, timings)
    if 10 * visits[-1] < steps[-1]:
        # Too few to tell in the time, and a rate fitted to them would be one for something else.
        return {**alone, "held": "steps", "visit_rate": None, "steps_alone": None}
    rate = _rate_of_visits(steps, visits, points, timings)
    whole = [own + rate * more for own, more in zip(steps, visits, strict=True)]
    return {
        **check(points, whole, timings, "steps and native visits"),
        "held": "work",
        "visit_rate": str(rate),
        "steps_alone": {
            key: alone[key] for key in ("agrees", "reason", "departs_from", "exponent_steps")
        },
    }


def _rate_of_visits(
    steps: Sequence[Fraction],
    visits: Sequence[Fraction],
    points: Sequence[Mapping[str, int]],
    timings: Sequence[Timing],
) -> Fraction:
    """Give how much of a step a visit takes, the power of two that fits the timings best.

    A visit by C code is mostly far quicker than a step, so that their sum as it stands would hide
    the steps; with one rate for all sizes the growth of neither can hide.
    """
    times = {tuple(t.at.values()): t.best_ns for t in timings}
    rows = [
        (float(own), float(more), times[key])
        for own, more, at in zip(steps, visits, points, strict=True)
        for key in [tuple(at.values())]
        if times.get(key, 0) > 0
    ]

    def spread(rate: Fraction) -> float:
        logs = [math.log(t / (own + float(rate) * more)) for own, more, t in rows]
        mean = sum(logs) / len(logs)
        return sum((x - mean) ** 2 for x in logs)

    return min(RATES, key=spread) if rows else Fraction(1)


def undecided(reason: str) -> dict[str, Any]:
    """Give the record's ``clock`` of a check that was not made to its end.

    Parameters
    ----------
    reason : str
        Why not.
    """
    return {"agrees": None, "reason": reason}
