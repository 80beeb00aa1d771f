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
STEADIEST, UNSTEADIEST = 0.05, 0.15
"""Where the clock agrees, the rate may drift with a power of the size between these two: what
cannot be excluded, and what the clock check itself lets pass."""
UNDECIDED = 1.5
"""Where the clock check came to no verdict, the rate may lie this many times off."""


@dataclass(frozen=True, slots=True)
class Row:
    """A size that was timed: its extent, its work, and nanoseconds a unit of work."""

    extent: float
    work: float
    rate: float


@dataclass(frozen=True, slots=True)
class Pace:
    """Nanoseconds a step over the sizes timed, and how they may go on.

    Parameters
    ----------
    low, high : float
        Nanoseconds a unit of work over the larger sizes timed.
    falls, rises : float
        Powers of the size that the rate may fall and rise with beyond them.
    rows : tuple of Row
        All sizes timed, the smallest first.
    first : Row
        The smallest of the larger sizes that `low` and `high` span.
    """

    low: float
    high: float
    falls: float
    rises: float
    rows: tuple[Row, ...]
    first: Row

    def seconds(self, at: Mapping[str, int], least: float, most: float) -> tuple[float, float]:
        """Give the time of a run.

        Parameters
        ----------
        at : mapping of str to int
            The size.
        least, most : float
            Work of the run.

        Returns
        -------
        tuple of float
            Seconds, least and most.
        """
        low, high = self._rates(_extent(at))
        return least * low / 1e9, most * high / 1e9

    def _rates(self, extent: float) -> tuple[float, float]:
        low, high = self.low, self.high
        reach = extent / self.rows[-1].extent
        if reach > 1:
            return low * reach**self.falls, high * reach**self.rises
        if extent < self.first.extent:
            # What a call costs by itself weighs more in a short run.
            near = [row.rate for row in self.rows if extent / 4 <= row.extent <= self.first.extent]
            low, high = min([low, *near]), max([high, *near])
            if extent < self.rows[0].extent:
                high *= self.rows[0].extent / max(extent, 1.0)
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
    The rates of the larger sizes are followed over the size on logarithmic scales, by least
    squares. Beyond them a rate may go on as that line does, within its 95 % interval, or stay as
    it is; where time was found to depart from the steps, it may do either from where it departs.
    Where time agrees, the drift is kept between what such a check cannot exclude and what it
    would have told.
    """
    if clock is None:
        return None, "the clock check was not made"
    between = clock.get("ns_per_step_interval")
    rows = _rows(clock)
    if between is None or len(rows) < LEAST_ROWS:
        return None, f"no time is foretold: {clock['reason']}"
    agrees, why, wider = clock["agrees"], "", 1.0
    upper = rows[len(rows) // 2 :] if len(rows) >= 2 * LEAST_ROWS else rows[-LEAST_ROWS:]
    most = math.inf
    if agrees is None:
        why = f"the clock check is undecided, so the interval is wide: {clock['reason']}"
        wider = UNDECIDED
    elif agrees is False:
        why = f"time departs from the law, so the interval is wide: {clock['reason']}"
        upper = _departed(clock, rows) or upper
    else:
        most = UNSTEADIEST
    slope, error = _drift(upper)
    falls = min(max(error - slope, STEADIEST), most)
    rises = min(max(error + slope, STEADIEST), most)
    low = min(between[0], *(row.rate for row in upper)) / wider
    high = max(between[1], *(row.rate for row in upper)) * wider
    return Pace(low, high, -falls, rises, tuple(rows), upper[0]), why


def _extent(at: Mapping[str, int]) -> float:
    return float(math.prod(max(1, n) for n in at.values()) ** (1 / len(at)))


def _rows(clock: Json) -> list[Row]:
    """Give what was timed well, the smallest size first."""
    out = []
    columns = (clock.get(key) or [] for key in ("sizes", "steps", "seconds"))
    for at, steps, seconds in zip(*columns, strict=True):
        work = float(Fraction(steps))
        if work > 0 and seconds >= SHORTEST:
            out.append(Row(_extent(at), work, seconds * 1e9 / work))
    return sorted(out, key=lambda row: (row.extent, row.work))


def _departed(clock: Json, rows: list[Row]) -> list[Row]:
    """Give the rows from where time departs on, where these are enough to follow."""
    at = clock.get("departs_from")
    found = [] if at is None else [row for row in rows if row.extent >= _extent(at)]
    return found if len(found) >= LEAST_ROWS else []


def _drift(rows: list[Row]) -> tuple[float, float]:
    """Give the power of the size that the rate goes with, and half of its 95 % interval."""
    xs = [math.log(row.extent) for row in rows]
    ys = [math.log(row.rate) for row in rows]
    x_mean, y_mean = sum(xs) / len(xs), sum(ys) / len(ys)
    spread = sum((x - x_mean) ** 2 for x in xs)
    if spread == 0:
        return 0.0, 0.0
    pairs = list(zip(xs, ys, strict=True))
    slope = sum((x - x_mean) * (y - y_mean) for x, y in pairs) / spread
    rest = sum((y - y_mean - slope * (x - x_mean)) ** 2 for x, y in pairs)
    freedom = len(rows) - 2
    return slope, student(freedom) * math.sqrt(rest / freedom / spread)
