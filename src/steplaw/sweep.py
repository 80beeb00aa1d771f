"""The sweep: counted runs over the plan of sizes, in a fixed order and to a fixed end.

Where the sweep ends depends on steps alone, never on time, so that the same audit makes the same
runs on every machine.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from fractions import Fraction

from steplaw.host.asking import Asker, Run, RunFailed
from steplaw.host.limits import Failure
from steplaw.law.model import Law, Observation
from steplaw.sizes import SizePlan

#: Predicted steps beyond which a size that nobody asked for is left out.
STEPS_A_RUN = 20_000_000
STEPS_IN_ALL = 100_000_000
INPUTS_A_SIZE = 50_000
#: Predicted steps that may be spent on larger sizes where the choice between laws is not settled.
STEPS_TO_DECIDE = 200_000_000
#: Predicted steps from which on a run is worth being begun ahead of time.
STEPS_AHEAD = 1_000_000
#: Sizes from which on the time left is told by the law found so far.
SIZES_FOR_A_LAW = 6

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
    runner: Asker,
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
    runner : Asker
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
    course = _Course(runner, result, draws, wanted, report)
    for place, point in enumerate(todo):
        try:
            if not course.go_on(todo[place:]):
                break
        except KeyboardInterrupt:
            result.stopped = interrupted(result.at(point))
            break
    if not result.runs and result.passed_over and result.stopped is None:
        result.stopped = result.passed_over.pop()
    return result


@dataclass(slots=True)
class _Course:
    """A sweep under way."""

    runner: Asker
    result: Sweep
    draws: int
    wanted: set[Point]
    report: Report | None
    spent: int = 0

    def go_on(self, todo: Sequence[Point]) -> bool:
        """Run the first of the sizes that are left; give whether the sweep goes on."""
        result, point = self.result, todo[0]
        if self._is_left_out(point):
            result.left_out.append(point)
            return True
        soon = [p for p in todo if not self._is_left_out(p)]
        _expect(self.runner, result, soon, self.draws)
        tell = _teller(self.report, result, todo, self.draws, self.spent)
        tell(0)
        try:
            runs = _runs(self.runner, result.at(point), self.draws, result, tell)
        except RunFailed as failed:
            kind = failed.failure.kind
            if point in self.wanted or result.runs or kind not in ("raised", "feed"):
                result.stopped = failed.failure
                return False
            result.passed_over.append(failed.failure)
            return True
        result.runs[point] = runs
        self.spent += sum(r.tally.steps * r.times for r in runs)
        return True

    def _is_left_out(self, point: Point) -> bool:
        if point in self.wanted:
            return False
        return _is_too_long(self.result, point, self.draws, self.spent)


def extend(
    runner: Asker, swept: Sweep, sizes: Sequence[int], draws: int, report: Report | None = None
) -> None:
    """Run further sizes of a sweep over one size.

    Parameters
    ----------
    runner : Asker
        The subject.
    swept : Sweep
        Takes the further runs, in order of size.
    sizes : sequence of int
        The sizes; those that the sweep has left out or passed over are not run.
    draws : int
        Inputs at each size where they differ from draw to draw.
    report : callable, optional
        As for `sweep`.
    """
    barred = {tuple(f.at.values()) for f in swept.passed_over}
    points = [(n,) for n in sizes if (n,) not in swept.runs and (n,) not in barred]
    plan = SizePlan(swept.names, tuple(swept.at(p) for p in points), (), given=False)
    more = sweep(runner, plan, draws=draws, every=swept.whole, asked=plan.points, report=report)
    swept.left_out = [p for p in swept.left_out if p not in more.runs]
    swept.runs = dict(sorted({**swept.runs, **more.runs}.items()))
    swept.varies |= more.varies
    swept.stopped = swept.stopped or more.stopped


def larger(swept: Sweep, draws: int) -> list[int]:
    """Give the sizes above those of a sweep that can be run within its means.

    Parameters
    ----------
    swept : Sweep
        The runs, over one size.
    draws : int
        Inputs at each size where they differ from draw to draw.

    Returns
    -------
    list of int
        Two at most, whose predicted steps are at most `STEPS_TO_DECIDE` in all.
    """
    last = max(swept.runs)[0]
    spent, found = 0.0, []
    for n in (2 * last, 4 * last):
        steps = (_predict(swept, (n,)) or 0.0) * _predicted_inputs(swept, (n,), draws)
        spent += steps
        if not steps or spent > STEPS_TO_DECIDE:
            break
        found.append(n)
    return found


def _expect(runner: Asker, result: Sweep, todo: Sequence[Point], draws: int) -> None:
    """Say which runs may be made ahead of time: long ones, of which several are at work at once."""
    wanted = [
        (result.at(point), draw)
        for point in todo[: runner.ahead]
        if (_predict(result, point) or 0) * _predicted_inputs(result, point, draws) >= STEPS_AHEAD
        for draw in _draws_of(result, draws)
    ]
    if len(wanted) > 1:
        runner.expect(wanted[: runner.ahead])


def _draws_of(result: Sweep, draws: int) -> Sequence[int | None]:
    if result.whole:
        return [None]
    return range(draws if result.varies else 1)


def _teller(
    report: Report | None, result: Sweep, todo: Sequence[Point], draws: int, spent: int
) -> Callable[[int], None]:
    """Give what reports the inputs of a size that have been run so far."""
    if report is None:
        return lambda inputs: None
    a_run = _predict(result, todo[0]) or 0.0
    rest = _rest(result, todo, draws)

    def tell(inputs: int) -> None:
        done = round(a_run * inputs)
        report(result.at(todo[0]), spent + done, None if rest is None else max(rest - done, 0))

    return tell


def interrupted(at: Mapping[str, int]) -> Failure:
    """Say that a person has stopped the audit.

    Parameters
    ----------
    at : mapping of str to int
        The size that was about to be done.
    """
    return Failure("interrupted", "was interrupted from the keyboard", dict(at))


def _runs(
    runner: Asker,
    at: Mapping[str, int],
    draws: int,
    result: Sweep,
    tell: Callable[[int], None],
) -> list[Run]:
    if result.whole:
        return runner.every(at, tell)
    runs = [runner.count(at, 0)]
    if runs[0].random:
        result.varies = True
        for draw in range(1, draws):
            tell(draw)
            runs.append(runner.count(at, draw))
    return runs


def _is_too_long(result: Sweep, point: Point, draws: int, spent: int) -> bool:
    a_run, inputs = _predict(result, point), _predicted_inputs(result, point, draws)
    if a_run is None:
        return False
    too_many = result.whole and inputs > INPUTS_A_SIZE
    return a_run > STEPS_A_RUN or spent + a_run * inputs > STEPS_IN_ALL or too_many


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


def _predicted_inputs(result: Sweep, point: Point, draws: int) -> float:
    if not result.whole:
        return draws if result.varies else 1
    known = sorted((_extent(p), sum(r.times for r in runs)) for p, runs in result.runs.items())
    if len(known) < 2:
        return 1.0
    (x0, c0), (x1, c1) = known[-2], known[-1]
    x = _extent(point)
    if x <= x1 or x1 <= x0:
        return float(c1)
    ratio = max(c1 / max(c0, 1), 1.0)
    return c1 * math.exp(min((x - x1) / (x1 - x0) * math.log(ratio * 1.15), 60.0))


def _rest(result: Sweep, todo: Sequence[Point], draws: int) -> int | None:
    """Predict the steps still to run, by the law found so far or else by the growth."""
    total = 0.0
    law = _law_so_far(result)
    for point in todo:
        if _is_too_long(result, point, draws, int(total)):
            continue
        a_run = _predict(result, point) if law is None else _by_law(law, point)
        if a_run is None:
            return None
        total += a_run * _predicted_inputs(result, point, draws)
    return int(total)


def _law_so_far(result: Sweep) -> Law | None:
    """Give the law of the steps run so far, None where there is none yet."""
    from steplaw.law import find_law

    seen = [
        Observation(point, Fraction(sum(r.tally.steps * r.times for r in runs), inputs))
        for point, runs in result.runs.items()
        if (inputs := sum(r.times for r in runs))
    ]
    if len(seen) < SIZES_FOR_A_LAW:
        return None
    law = find_law(seen, result.names)
    return None if law.formula is None else law


def _by_law(law: Law, point: Point) -> float | None:
    from steplaw.law import value

    try:
        steps = float(value(law, point))
    except OverflowError:
        return None
    return steps if math.isfinite(steps) and steps > 0 else None
