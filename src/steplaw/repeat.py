"""Equal runs in a second process: a tally that changes from run to run is named as such."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from steplaw.host.asking import Asker, Run, RunFailed
from steplaw.host.limits import Failure
from steplaw.sweep import STEPS_AHEAD, Point, Sweep

SIZES = 8
INPUTS_A_SIZE = 1000


@dataclass(frozen=True, slots=True)
class Repeat:
    """What the second process found.

    Parameters
    ----------
    checked_at : list of dict
        Sizes that were run again.
    lines : list of dict
        Lines whose counts differ: file, line, size, and the two counts of steps.
    failures : list of Failure
        Runs that ended well the first time and not the second.
    """

    checked_at: list[dict[str, int]]
    lines: list[dict[str, Any]]
    failures: list[Failure]

    @property
    def holds(self) -> bool:
        """Whether all that was run again gave the same."""
        return not self.lines and not self.failures

    @property
    def changed(self) -> set[tuple[str, int]]:
        """File and line of what changed."""
        return {(x["file"], x["line"]) for x in self.lines}

    def as_json(self) -> dict[str, Any]:
        """Give the record's ``repeatable``."""
        return {"holds": self.holds, "checked_at": self.checked_at, "lines": self.lines}


def run_again(runner: Asker, swept: Sweep) -> Repeat | None:
    """Make some runs of a sweep again in another process.

    Parameters
    ----------
    runner : Asker
        A host of its own for the same study.
    swept : Sweep
        The first runs.

    Returns
    -------
    Repeat or None
        None where nothing was run again.
    """
    repeat = Repeat([], [], [])
    chosen = _chosen(swept)
    if runner.ahead:
        draw = None if swept.whole else 0
        runner.expect([(swept.at(p), draw) for p in chosen if _is_long(swept.runs[p])])
    for point in chosen:
        at, first = swept.at(point), swept.runs[point]
        try:
            second = runner.every(at) if swept.whole else [runner.count(at, 0)]
        except RunFailed as failed:
            # A limit may be met by chance, on a machine that is busier than it was before.
            if failed.failure.kind not in ("time", "memory"):
                repeat.failures.append(failed.failure)
            continue
        repeat.checked_at.append(at)
        repeat.lines.extend(unequal(at, first if swept.whole else first[:1], second))
    return repeat if repeat.checked_at or repeat.failures else None


def _is_long(runs: Sequence[Run]) -> bool:
    return sum(r.tally.steps * r.times for r in runs) >= STEPS_AHEAD


def _chosen(swept: Sweep) -> list[Point]:
    """Choose sizes all along the sweep, the last one among them."""
    points = [
        point
        for point, runs in swept.runs.items()
        if not swept.whole or sum(r.times for r in runs) <= INPUTS_A_SIZE
    ]
    last = len(points) - 1
    places = {round(i * last / (SIZES - 1)) for i in range(SIZES)} if points else set()
    return [points[place] for place in sorted(places)]


def unequal(
    at: Mapping[str, int], first: Sequence[Run], second: Sequence[Run]
) -> list[dict[str, Any]]:
    """Give the lines whose counts differ between equal runs.

    Parameters
    ----------
    at : mapping of str to int
        The size.
    first, second : sequence of Run
        Runs on the same inputs.

    Returns
    -------
    list of dict
        File, line, size and the two counts of steps.
    """
    if [(r.times, r.tally) for r in first] == [(r.times, r.tally) for r in second]:
        return []
    left, right = _by_line(first), _by_line(second)
    return [
        {"file": key[0], "line": key[1], "at": dict(at), "counts": [_total(x) for x in counts]}
        for key in sorted({*left, *right})
        if _differ(counts := [lines.get(key, Counter()) for lines in (left, right)])
    ]


def _differ(counts: Sequence[Counter[int]]) -> bool:
    return counts[0] != counts[1]


def _by_line(runs: Sequence[Run]) -> dict[tuple[str, int], Counter[int]]:
    """Give how many inputs gave a line each count of steps."""
    lines: dict[tuple[str, int], Counter[int]] = {}
    for run in runs:
        for x in run.tally.lines:
            lines.setdefault((x.file, x.line), Counter())[x.steps] += run.times
    return lines


def _total(counts: Mapping[int, int]) -> int:
    return sum(steps * times for steps, times in counts.items())
