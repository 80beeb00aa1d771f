"""The clock check of a sweep: which sizes are timed, and the runs of the untouched function."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from steplaw import series
from steplaw.clock import Timing, check
from steplaw.errors import SteplawError
from steplaw.host.asking import Asker, RunFailed
from steplaw.law.model import Observation
from steplaw.sweep import Sweep

SECONDS = 6.0
SIZES_MOST = 16


def points_to_time(swept: Sweep) -> list[Observation]:
    """Choose the sizes to time, with their steps.

    Parameters
    ----------
    swept : Sweep
        The counted runs.

    Returns
    -------
    list of Observation
        Smallest first; the steps grow by a quarter or more from one to the next. Empty where
        every input of a size was run: there is no one input to time.
    """
    if swept.whole:
        return []
    steps = series.of(swept, lambda run: run.tally.steps)
    chosen: list[Observation] = []
    for o in sorted(steps, key=lambda o: (o.value, o.at), reverse=True):
        if all(o.at) and o.value > 0 and (not chosen or o.value * 5 <= chosen[-1].value * 4):
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
    return check(points, [o.value for o in chosen], [Timing.from_json(row) for row in rows])


def undecided(reason: str) -> dict[str, Any]:
    """Give the record's ``clock`` of a check that was not made to its end.

    Parameters
    ----------
    reason : str
        Why not.
    """
    return {"agrees": None, "reason": reason}
