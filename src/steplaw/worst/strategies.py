"""The search where a strategy of hypothesis makes the inputs: the dearest of each size."""

from __future__ import annotations

import time

from steplaw.errors import CallError
from steplaw.worst.counting import Counts
from steplaw.worst.family import Family
from steplaw.worst.search import FIGURE_MOST, RUNGS, Found, Report, predicted

#: Inputs drawn at each size.
EXAMPLES = 300
SMALLEST = 1


def strategic(
    counts: Counts,
    n: int,
    seed: int = 0,
    until: float | None = None,
    report: Report | None = None,
) -> Found:
    """Search each of some sizes up to one, and give the dearest input of each.

    No pattern is carried on from one size to the next: what a strategy makes has no shape that is
    known here, so each size is searched for itself.

    Parameters
    ----------
    counts : Counts
        Counts inputs.
    n : int
        The size.
    seed : int
        Seeds hypothesis.
    until : float, optional
        Moment of `time.monotonic` at which to stop.
    report : callable, optional
        Told what is done, at which size, and the largest figure so far.

    Raises
    ------
    CallError
        If the strategy cannot be drawn from, or gives what a file cannot hold.
    """
    found = Found(family=(Family("strategy", "the dearest input that the strategy gave"),))
    tops: list[tuple[int, int]] = []
    try:
        for at in (*(r for r in (SMALLEST, 2, 3, 4, 5, *RUNGS) if r < n), n):
            if until is not None and time.monotonic() > until:
                found.ended = "time"
                break
            if tops and predicted(tops, at) > FIGURE_MOST:
                found.ended = "steps"
                break
            inputs = counts.strategic(at, EXAMPLES, seed)
            known = [
                (v, g) for v, g in zip(counts.of(inputs), inputs, strict=True) if v is not None
            ]
            if not known:
                continue
            value, given = max(known, key=lambda pair: pair[0])
            tops.append((at, value))
            found.reached, found.best, found.value = at, given, value
            found.values[at] = value
            if report is not None:
                report("searching", at, value)
    except KeyboardInterrupt:
        found.ended = "interrupted"
    if found.best is None and found.ended == "done":
        raise CallError("the subject raised on every input that the strategy gave")
    return found
