"""From steps to seconds: the time of a step by the clock check, carried on with its doubt."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from steplaw.law.leastsquares import student

Json = Mapping[str, Any]
LEAST_ROWS = 4
SHORTEST = 200e-9
"""Calls shorter than this, in seconds, are mostly the call itself."""
STEADIEST = 0.05
"""A drift of the rate that is allowed for where the clock agrees: the power of the work."""
UNDECIDED = 1.5
"""Where the clock check came to no verdict, the rate may lie this many times off."""


@dataclass(frozen=True, slots=True)
class Pace:
    """Nanoseconds a step over the sizes timed, and how they may go on.

    Parameters
    ----------
    low, high : float
        Nanoseconds a unit of work over the larger sizes timed.
    falls, rises : float
        Powers of the work that the rate may fall and rise with beyond them.
    first, last : float
        Work at the smallest and the largest size that the rates were taken from.
    rates : tuple of (float, float)
        Work and rate at each size timed.
    """

    low: float
    high: float
    falls: float
    rises: float
    first: float
    last: float
    rates: tuple[tuple[float, float], ...]

    def seconds(self, least: float, most: float) -> tuple[float, float]:
        """Give the time of a run.

        Parameters
        ----------
        least, most : float
            Work of the run.

        Returns
        -------
        tuple of float
            Seconds, least and most.
        """
        low, high = self._rate(least)[0], self._rate(most)[1]
        return least * low / 1e9, most * high / 1e9

    def _rate(self, work: float) -> tuple[float, float]:
        low, high = self.low, self.high
        if work > self.last:
            reach = work / self.last
            return low * reach**self.falls, high * reach**self.rises
        if work < self.first:
            # What a call costs by itself weighs more in a short run.
            near = [rate for at, rate in self.rates if at >= work / 4 and at <= self.first]
            low, high = min([low, *near]), max([high, *near])
            if work < self.rates[0][0]:
                high *= self.rates[0][0] / max(work, 1.0)
        return low, high


def pace(clock: Json | None) -> tuple[Pace | None, str]:
    """Read the pace off a clock check.

    Parameters
    ----------
    clock : mapping or None
        The record's ``clock``.

    Returns
    -------
    pace : Pace or None
        None where time cannot be foretold.
    why : str
        Why not, or what makes the interval wide.

    Notes
    -----
    The rates of the larger sizes are followed over the work on logarithmic scales, by least
    squares. Beyond them a rate may go on as that line does, within its 95 % interval, or stay as
    it is; where time was found to depart from the steps, it may do either from where it departs.
    """
    if clock is None:
        return None, "the clock check was not made"
    between = clock.get("ns_per_step_interval")
    rows = _rows(clock)
    if between is None or len(rows) < LEAST_ROWS:
        return None, f"no time is foretold: {clock['reason']}"
    agrees, why, wider = clock["agrees"], "", 1.0
    upper = rows[len(rows) // 2 :] if len(rows) >= 2 * LEAST_ROWS else rows[-LEAST_ROWS:]
    low, high = between
    if agrees is None:
        why = f"the clock check is undecided, so the interval is wide: {clock['reason']}"
        wider = UNDECIDED
    elif agrees is False:
        why = f"time departs from the law, so the interval is wide: {clock['reason']}"
        upper = _departed(clock, rows) or upper
    slope, error = _drift(upper)
    falls = min(0.0, slope - error, -STEADIEST)
    rises = max(0.0, slope + error, STEADIEST)
    low, high = min(low, *(r for _, r in upper)), max(high, *(r for _, r in upper))
    return (
        Pace(low / wider, high * wider, falls, rises, upper[0][0], upper[-1][0], tuple(rows)),
        why,
    )


def _rows(clock: Json) -> list[tuple[float, float]]:
    """Give work and rate at each size that was timed well, by work."""
    out = []
    for steps, seconds in zip(clock.get("steps") or [], clock.get("seconds") or [], strict=True):
        work = float(Fraction(steps))
        if work > 0 and seconds >= SHORTEST:
            out.append((work, seconds * 1e9 / work))
    return sorted(out)


def _departed(clock: Json, rows: list[tuple[float, float]]) -> list[tuple[float, float]]:
    """Give the rows from where time departs on, where these are enough to follow."""
    at = clock.get("departs_from")
    sizes = clock.get("sizes") or []
    if at is None or at not in sizes:
        return []
    first = float(Fraction(clock["steps"][sizes.index(at)]))
    found = [row for row in rows if row[0] >= first]
    return found if len(found) >= LEAST_ROWS else []


def _drift(rows: list[tuple[float, float]]) -> tuple[float, float]:
    """Give the power of the work that the rate goes with, and half of its 95 % interval."""
    xs = [math.log(work) for work, _ in rows]
    ys = [math.log(rate) for _, rate in rows]
    x_mean, y_mean = sum(xs) / len(xs), sum(ys) / len(ys)
    spread = sum((x - x_mean) ** 2 for x in xs)
    if spread == 0:
        return 0.0, 0.0
    pairs = list(zip(xs, ys, strict=True))
    slope = sum((x - x_mean) * (y - y_mean) for x, y in pairs) / spread
    rest = sum((y - y_mean - slope * (x - x_mean)) ** 2 for x, y in pairs)
    freedom = len(rows) - 2
    return slope, student(freedom) * math.sqrt(rest / freedom / spread)
