"""The sweep: counted runs over the plan of sizes, in a fixed order and to a fixed end.

Where the sweep ends depends on steps alone, never on time, so that the same audit makes the same
runs on every machine.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from steplaw.host.limits import Failure
from steplaw.host.runner import Run, RunFailed, Runner
from steplaw.sizes import SizePlan

#: Predicted steps beyond which a size that nobody asked for is left out.
STEPS_A_RUN = 20_000_000
STEPS_IN_ALL = 100_000_000
INPUTS_A_SIZE = 50_000

Point = tuple[int, ...]
Report = Callable[[Mapping[str, int], int, int | None], None]


@dataclass(slots=True)
class Sweep:
    """What was run.

    Parameters
    ----------
    names : tuple of str
        The size names.
    runs : dict of tuple to list of Run
        By size, in the order they were made.
    whole : bool
        Whether every input of each size was run.
    varies : bool
        Whether inputs differ from draw to draw.
    stopped : Failure or None
        The failure that ended the sweep.
    passed_over : list of Failure
        Sizes nobody asked for at which the subject fails, below the first at which it does not.
    left_out : list of tuple
        Sizes of the plan that were predicted to be too long.
    """

    names: tuple[str, ...]
    runs: dict[Point, list[Run]] = field(default_factory=dict)
    whole: bool = False
    varies: bool = False
    stopped: Failure | None = None
    passed_over: list[Failure] = field(default_factory=list)
    left_out: list[Point] = field(default_factory=list)

    @property
    def draws(self) -> int:
        """Most draws made at one size."""
        return max((sum(r.times for r in runs) for runs in self.runs.values()), default=0)

    def at(self, point: Point) -> dict[str, int]:
        """Give a size by its names."""
        return dict(zip(self.names, point, strict=True))


def sweep(
    runner: Runner,
    plan: SizePlan,
    *,
    draws: int,
    every: bool = False,
    asked: Sequence[Mapping[str, int]] = (),
    report: Report | None = None,
) -> Sweep:
    """Run the plan.

    Parameters
    ----------
    runner : Runner
        The subject.
    plan : SizePlan
        Sizes in the order to run them.
    draws : int
        Inputs at each size where they differ from draw to draw.
    every : bool
        Whether the feed gives every input of a size.
    asked : sequence of mapping
        Sizes that a person asked for: these are run whatever they cost.
    report : callable, optional
        Told the size about to run, the steps run so far and the steps predicted for the rest.

    Returns
    -------
    Sweep
        The runs; a failure is kept in it, not raised.
    """
    result = Sweep(plan.names, whole=every)
    wanted = {tuple(p[name] for name in plan.names) for p in asked}
    todo = [tuple(p[name] for name in plan.names) for p in plan.points]
    spent = 0
    for place, point in enumerate(todo):
        predicted = _predict(result, point)
        if point not in wanted and predicted is not None:
            inputs = 1 if not every else _predicted_inputs(result, point)
            times = draws if result.varies else 1
            cost = predicted * inputs * times
            if predicted > STEPS_A_RUN or spent + cost > STEPS_IN_ALL or inputs > INPUTS_A_SIZE:
                result.left_out.append(point)
                continue
        at = result.at(point)
        if report is not None:
            report(at, spent, _rest(result, todo[place:]))
        try:
            runs = _runs(runner, at, draws, every, result)
        except RunFailed as failed:
            if point in wanted or result.runs or failed.failure.kind not in ("raised", "feed"):
                result.stopped = failed.failure
                break
            result.passed_over.append(failed.failure)
            continue
        result.runs[point] = runs
        spent += sum(r.tally.steps * r.times for r in runs)
    if not result.runs and result.passed_over and result.stopped is None:
        result.stopped = result.passed_over.pop()
    return result


def _runs(
    runner: Runner, at: Mapping[str, int], draws: int, every: bool, result: Sweep
) -> list[Run]:
    if every:
        return runner.every(at)
    runs = [runner.count(at, 0)]
    if runs[0].random:
        result.varies = True
        runs += [runner.count(at, draw) for draw in range(1, draws)]
    return runs


def _mean(runs: Sequence[Run]) -> float:
    inputs = sum(r.times for r in runs)
    return sum(r.tally.steps * r.times for r in runs) / inputs if inputs else 0.0


def _extent(point: Point) -> float:
    return float(math.prod(max(x, 1) for x in point) ** (1 / len(point)))


def _predict(result: Sweep, point: Point) -> float | None:
    """Predict the steps of one run, the faster of power growth and exponential growth."""
    known = sorted((_extent(p), _mean(runs)) for p, runs in result.runs.items())
    known = [pair for pair in known if pair[1] > 0]
    if len(known) < 4:
        return None
    (x0, y0), (x1, y1) = known[-2], known[-1]
    x = _extent(point)
    if x <= x1 or x1 <= x0:
        return y1
    ratio = max(y1 / y0, 1.0)
    power = (x / x1) ** (math.log(ratio) / math.log(x1 / x0))
    exponential = min((x - x1) / (x1 - x0) * math.log(ratio), 60.0)
    growing = exponential if _accelerates(known) else 0.0
    return float(y1 * max(power, math.exp(growing)))


def _accelerates(known: list[tuple[float, float]]) -> bool:
    """Whether the growth exponent itself still rises from pair to pair, as in 2**n."""
    slopes = [
        math.log(y1 / y0) / math.log(x1 / x0)
        for (x0, y0), (x1, y1) in zip(known[-4:], known[-3:], strict=False)
        if x1 > x0
    ]
    return len(slopes) >= 2 and slopes[-1] > slopes[0] * 1.05


def _predicted_inputs(result: Sweep, point: Point) -> float:
    known = sorted((_extent(p), sum(r.times for r in runs)) for p, runs in result.runs.items())
    if len(known) < 2:
        return 1.0
    (x0, c0), (x1, c1) = known[-2], known[-1]
    x = _extent(point)
    if x <= x1 or x1 <= x0:
        return float(c1)
    ratio = max(c1 / max(c0, 1), 1.0)
    return float(c1 * (ratio * 1.15) ** ((x - x1) / (x1 - x0)))


def _rest(result: Sweep, todo: Sequence[Point]) -> int | None:
    """Predict the steps still to run, by the law of growth found so far."""
    total = 0.0
    for point in todo:
        predicted = _predict(result, point)
        if predicted is None:
            return None
        if predicted <= STEPS_A_RUN:
            total += predicted
    return int(total)


def unequal(first: Sequence[Run], second: Sequence[Run]) -> list[dict[str, Any]]:
    """Give the lines whose counts differ between two equal runs.

    Parameters
    ----------
    first, second : sequence of Run
        Runs of the same sizes and draws.

    Returns
    -------
    list of dict
        File, line, size and the two counts of steps.
    """
    lines = []
    for a, b in zip(first, second, strict=True):
        if a.tally == b.tally:
            continue
        left = {(x.file, x.line): x.steps for x in a.tally.lines}
        right = {(x.file, x.line): x.steps for x in b.tally.lines}
        for key in sorted({*left, *right}):
            counts = [left.get(key, 0), right.get(key, 0)]
            if counts[0] != counts[1]:
                lines.append({"file": key[0], "line": key[1], "at": dict(a.at), "counts": counts})
    return lines
