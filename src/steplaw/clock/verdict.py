"""Whether time follows the steps, judged from steps and timings."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import pairwise
from statistics import median
from typing import Any

from steplaw.clock.higher import Higher, higher_term, lower_half
from steplaw.clock.timing import Size, Timing

SIZES_LEAST = 4
SHORTEST_NS = 200.0
"""Shorter calls are listed but not judged: what is subtracted for the call weighs too much."""
OVERHEAD_ERROR_NS = 15.0
NOISE_FLOOR = 0.02
"""Code and data placement alone move a timing by some hundredths (common practice)."""
RISE_ALLOWED = 1.5
SLOPE_ALLOWED = 0.15
DRIFT_NAMED = 1.15
RISE_UNSEEN = 2.5
"""Above this the noise could hide too much for 'agrees' to mean anything."""


def check(
    points: Sequence[Size],
    steps: Sequence[int | Fraction],
    timings: Sequence[Timing],
    unit: str = "steps",
) -> dict[str, Any]:
    """Hold the steps against the clock.

    Time is modelled as b*steps, where the timings ask for it with a fixed part and with dearer
    steps of one order less (the set-up of an inner loop, say) that fade as the size grows. The
    logarithm of measured over
    modelled time is followed over the logarithm of the size by a level line that breaks into a
    slope, or jumps to another level, at one of the sizes; the break with the least squares counts.
    Time departs from the steps when the rise over the upper half of the sizes is beyond 1.5 times,
    or its slope beyond 0.15, by more than the noise; or where a term of one order more than the
    steps adds more than 35 in a hundred at the largest size, by more than the noise. The noise is
    the greater of what the rounds show and what the fit leaves over. Time agrees only where the
    noise could not hide a term that doubles it.

    Parameters
    ----------
    points : sequence of mapping
        Sizes whose steps are known.
    steps : sequence of int or Fraction
        Steps, or their mean over the draws, at each of these.
    timings : sequence of Timing
        Timings at some of these sizes.
    unit : str
        What the steps are called, where native visits are among them.

    Returns
    -------
    dict
        The record's `clock` part. `seconds` are per call, `ns_per_step` nanoseconds; the growth
        exponents stand between each size and the one before it, the size being the geometric
        mean where there are several names; None where they have no meaning.
    """
    known = {_key(at): value for at, value in zip(points, steps, strict=True)}
    rows = [(t, known[_key(t.at)]) for t in timings if _key(t.at) in known]
    rows.sort(key=lambda row: (_extent(row[0].at), row[1]))
    usable = [
        (t, s)
        for t, s in rows
        if _extent(t.at) > 0 and s > 0 and t.best_ns >= SHORTEST_NS and len(t.samples) > 0
    ]
    verdict = _judge(usable, len(rows), unit)
    return {
        **verdict,
        "sizes": [dict(t.at) for t, _ in rows],
        "steps": [_plain(s) for _, s in rows],
        "seconds": [t.best_ns / 1e9 for t, _ in rows],
        "ns_per_step": [round(t.best_ns / float(s), 4) if s else None for t, s in rows],
        "ns_per_step_interval": _interval(usable),
        "exponent_steps": _exponents(rows, lambda row: float(row[1])),
        "exponent_clock": _exponents(rows, lambda row: row[0].best_ns),
        "rounds": max((len(t.samples) for t, _ in rows), default=0),
        "machine": _machine(),
        "samples": [list(t.samples) for t, _ in rows],
    }


Row = tuple[Timing, int | Fraction]


@dataclass(frozen=True, slots=True)
class _Break:
    """A level line that breaks at one of the sizes, fitted to log2 of time over model."""

    place: int
    kind: str
    rise: float
    rise_error: float
    slope: float
    slope_error: float
    squares: float
    scale: float = 1.0

    @property
    def departs(self) -> bool:
        """Whether the rise or the slope is beyond what is allowed by more than the noise."""
        limit = math.log2(RISE_ALLOWED)
        rise = abs(self.rise) - 2 * self.rise_error
        slope = abs(self.slope) - 2 * self.slope_error
        return rise > limit or (self.kind == "slope" and slope > SLOPE_ALLOWED and rise > limit / 2)


def _judge(rows: list[Row], listed: int, unit: str) -> dict[str, Any]:
    def say(agrees: bool | None, reason: str, at: Size | None = None) -> dict[str, Any]:
        return {"agrees": agrees, "reason": reason, "departs_from": dict(at) if at else None}

    if len(rows) < SIZES_LEAST:
        short = f", {listed - len(rows)} too short to time" if listed > len(rows) else ""
        return say(None, f"too few sizes to judge: {len(rows)}, {SIZES_LEAST} needed{short}")
    if _extent(rows[-1][0].at) < 4 * _extent(rows[0][0].at):
        return say(None, "the sizes timed are too close together to judge: less than 4 times apart")
    growth = _growth(rows, unit)
    course = _course(rows)
    for best in (course.whole, course.upper):
        if best.departs:
            pace = "faster" if best.rise > 0 else "more slowly"
            at = rows[best.place][0].at
            reason = f"from {_name(at)} on, time grows {pace} than the {unit}: {growth}"
            return say(False, reason, at)
    term = _higher(rows)
    if term is not None and term.departs:
        return say(False, *_of_one_order_more(rows, term, growth, unit))
    unseen = abs(course.whole.rise) + 2 * course.whole.rise_error > math.log2(RISE_UNSEEN)
    if unseen or course.ends_apart or (term is not None and term.may_hide):
        return say(None, f"the timings are too noisy to judge: {growth}")
    return say(True, f"time follows the {unit}: {growth}{_drift(rows, course)}")


def _higher(rows: list[Row]) -> Higher | None:
    lower = [lower_half(t.samples) for t, _ in rows]
    noise = max(NOISE_FLOOR, sum(error for _, error in lower) / len(lower))
    return higher_term(
        [_extent(t.at) for t, _ in rows],
        [float(s) for _, s in rows],
        [mean for mean, _ in lower],
        [
            math.hypot(error if error > 3 * noise else noise, OVERHEAD_ERROR_NS / mean)
            for mean, error in lower
        ],
    )


def _of_one_order_more(rows: list[Row], term: Higher, growth: str, unit: str) -> tuple[str, Size]:
    """Say that a term of one order more hides in the time, and from where on it shows."""
    top = _extent(rows[-1][0].at)
    shown = [t.at for t, _ in rows if term.share * _extent(t.at) / top >= DRIFT_NAMED - 1]
    at = shown[0]
    return (
        f"from {_name(at)} on, time grows faster than the {unit}: at {_name(rows[-1][0].at)}, a "
        f"term of one order more adds {term.share:.0%} ± {term.error:.0%}; {growth}",
        at,
    )


def _drift(rows: list[Row], course: _Course) -> str:
    """Name a rate that changes: it settles where the model has it so, and drifts otherwise."""
    first, last = (t.best_ns / float(s) for t, s in (rows[0], rows[-1]))
    least = max(math.log2(DRIFT_NAMED), 3 * _noise(rows) / math.log(2))
    if abs(math.log2(last / first)) <= least:
        return ""
    word = "drifts" if abs(course.left_over) > least else "settles"
    return f"; ns per step {word} from {first:.3g} to {last:.3g}"


def _growth(rows: list[Row], unit: str) -> str:
    names = list(rows[0][0].at)
    size = names[0] if len(names) == 1 else "size"
    of_steps, of_time = _top_exponent(rows, 1), _top_exponent(rows, 0)
    return f"{unit} grow as {size}^{of_steps:.2f}, time as {size}^{of_time:.2f}"


@dataclass(frozen=True, slots=True)
class _Course:
    """How time over modelled time goes, over all sizes and over the upper half."""

    whole: _Break
    upper: _Break
    ends_apart: bool
    left_over: float


def _course(rows: list[Row]) -> _Course:
    xs = [math.log2(_extent(t.at)) for t, _ in rows]
    ys = [math.log2(t.best_ns / m) for (t, _), m in zip(rows, _modelled(rows), strict=True)]
    noise = _noise(rows)
    errors = [
        math.hypot(max(noise, _own_noise(t)), OVERHEAD_ERROR_NS / t.best_ns) / math.log(2)
        for t, _ in rows
    ]
    middle = _middle(xs)
    whole = _best_break(xs, ys, errors, middle)
    upper = whole
    # A jump below the middle, the best single break of all, can hide a rise that follows it.
    if whole.kind == "jump" and whole.place <= middle and len(xs) - middle >= SIZES_LEAST:
        widened = [e * whole.scale for e in errors[middle:]]
        found = _best_break(xs[middle:], ys[middle:], widened, 0)
        upper = replace(found, place=found.place + middle)
    apart = abs(ys[-1] - ys[middle])
    margin = 2 * math.hypot(errors[-1], errors[middle]) * whole.scale
    return _Course(whole, upper, apart > math.log2(RISE_ALLOWED) + margin, ys[-1] - ys[0])


def _best_break(xs: list[float], ys: list[float], errors: list[float], middle: int) -> _Break:
    """Fit every break by weighted least squares and keep the best."""
    fits = []
    for place in range(len(xs)):
        ramp = [max(0.0, x - xs[place]) for x in xs]
        if place < len(xs) - 1:
            fits.append(_fit("slope", place, ramp, ys, errors, ramp[-1] - ramp[middle]))
        if place > 0:
            jump = [float(i >= place) for i in range(len(xs))]
            fits.append(_fit("jump", place, jump, ys, errors, float(place > middle)))
    best = min(fits, key=lambda fit: fit.squares)
    scale = math.sqrt(max(1.0, best.squares / max(1, len(xs) - 3)))
    return replace(
        best,
        rise_error=best.rise_error * scale,
        slope_error=best.slope_error * scale,
        scale=scale,
    )


def _fit(
    kind: str, place: int, shape: list[float], ys: list[float], errors: list[float], reach: float
) -> _Break:
    weights = [1 / e**2 for e in errors]
    total = sum(weights)
    shape_mean = sum(w * h for w, h in zip(weights, shape, strict=True)) / total
    y_mean = sum(w * y for w, y in zip(weights, ys, strict=True)) / total
    spread = sum(w * (h - shape_mean) ** 2 for w, h in zip(weights, shape, strict=True))
    if spread == 0:
        squares = sum(w * (y - y_mean) ** 2 for w, y in zip(weights, ys, strict=True))
        return _Break(place, kind, 0.0, 0.0, 0.0, 0.0, squares)
    cross = sum(
        w * (h - shape_mean) * (y - y_mean) for w, h, y in zip(weights, shape, ys, strict=True)
    )
    slope, error = cross / spread, 1 / math.sqrt(spread)
    squares = sum(
        w * (y - y_mean - slope * (h - shape_mean)) ** 2
        for w, h, y in zip(weights, shape, ys, strict=True)
    )
    return _Break(place, kind, slope * reach, error * reach, slope, error, squares)


def _modelled(rows: list[Row]) -> list[float]:
    """Model the time by steps, a fixed part, and dearer steps of one order less.

    The relative squares decide; a part is taken in only where it brings them down by more than
    the noise, and never so much that the steps themselves make less than half of the time at
    the largest size.
    """
    noise = _noise(rows)
    parts = {
        "steps": [float(s) for _, s in rows],
        "fixed": [1.0 for _ in rows],
        "lower": [float(s) / _extent(t.at) for t, s in rows],
    }
    best: tuple[float, list[float]] | None = None
    for names in (("steps",), ("steps", "fixed"), ("steps", "lower"), tuple(parts)):
        columns = [[x / t.best_ns for x, (t, _) in zip(parts[n], rows, strict=True)] for n in names]
        found = _least_squares(columns)
        if found is None or min(found) < 0:
            continue
        shown = [
            sum(c * x for c, x in zip(found, at, strict=True)) for at in zip(*columns, strict=True)
        ]
        if len(names) > 1 and found[0] * columns[0][-1] < 0.5:
            continue
        squares = sum((1 - x) ** 2 for x in shown) / noise**2 + 4 * len(names)
        if best is None or squares < best[0]:
            best = squares, [x * t.best_ns for x, (t, _) in zip(shown, rows, strict=True)]
    assert best is not None  # the steps alone always fit, with a rate above zero
    return best[1]


def _least_squares(columns: list[list[float]]) -> list[float] | None:
    """Solve for the sum of columns that comes nearest to ones, by the normal equations."""
    order = range(len(columns))
    table = [
        [sum(x * y for x, y in zip(columns[i], columns[j], strict=True)) for j in order]
        + [sum(columns[i])]
        for i in order
    ]
    scale = [table[i][i] for i in order]
    for i in order:
        if table[i][i] <= 1e-9 * scale[i]:
            return None
        for j in order:
            if j != i:
                share = table[j][i] / table[i][i]
                table[j] = [x - share * y for x, y in zip(table[j], table[i], strict=True)]
    return [table[i][-1] / table[i][i] for i in order]


def _middle(xs: Sequence[float]) -> int:
    """Give where the upper half of the sizes begins, on the logarithmic scale."""
    half = (xs[0] + xs[-1]) / 2
    first = next(i for i, x in enumerate(xs) if x >= half - 1e-9)
    return max(0, min(first, len(xs) - 3))


def _noise(rows: list[Row]) -> float:
    """Relative standard error of the least sample, as the sizes have it in the middle."""
    return max(NOISE_FLOOR, median(_own_noise(timing) for timing, _ in rows))


def _own_noise(timing: Timing) -> float:
    """Relative standard error of the least sample, from how far the next ones lie above it.

    What disturbs a timing makes it longer, so the upper samples say nothing of the least. For
    seven normal samples the third lies one standard deviation above the least, which itself has
    a standard error of 0.63 of it (order statistics, from memory).
    """
    least = sorted(x for x in timing.samples if x > 0)[:3]
    return 0.63 * math.log(least[2] / least[0]) if len(least) == 3 else 0.0


def _interval(rows: list[Row]) -> list[float] | None:
    """Give the range of ns per step over the upper half of the sizes, widened by the noise."""
    if len(rows) < 2:
        return None
    middle = _middle([math.log2(_extent(t.at)) for t, _ in rows])
    upper = [t.best_ns / float(s) for t, s in rows[middle:]]
    margin = math.exp(2 * _noise(rows))
    return [round(min(upper) / margin, 4), round(max(upper) * margin, 4)]


def _exponents(rows: list[Row], read: Callable[[Row], float]) -> list[float | None]:
    out: list[float | None] = []
    for before, after in pairwise(rows):
        low, high = _extent(before[0].at), _extent(after[0].at)
        a, b = read(before), read(after)
        meaningful = 0 < low < high and a > 0 and b > 0
        out.append(round(math.log(b / a) / math.log(high / low), 4) if meaningful else None)
    return out


def _top_exponent(rows: list[Row], which: int) -> float:
    """Give the growth exponent of the time (0) or the steps (1) over the upper half."""
    low, high = rows[_middle([math.log2(_extent(t.at)) for t, _ in rows])], rows[-1]
    a, b = (float(r[1]) if which else r[0].best_ns for r in (low, high))
    reach = math.log(_extent(high[0].at) / _extent(low[0].at))
    return math.log(b / a) / reach if reach else 0.0


def _extent(at: Size) -> float:
    return math.prod(at.values()) ** (1 / len(at)) if at and min(at.values()) > 0 else 0.0


def _key(at: Size) -> tuple[tuple[str, int], ...]:
    return tuple(sorted(at.items()))


def _name(at: Size) -> str:
    return ", ".join(f"{name} = {value}" for name, value in at.items())


def _plain(value: int | Fraction) -> int | str:
    exact = Fraction(value)
    return exact.numerator if exact.denominator == 1 else str(exact)


def _machine() -> str:
    import platform

    return f"{platform.platform()}, {platform.python_implementation()} {platform.python_version()}"
