"""How far one run lies from the mean of its size, foretold from the draws that were counted."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from steplaw.law.model import Observation

POWERS = tuple(k / 20 for k in range(31))
PROFILE = 1.92
"""Half of the 95 % point of chi-squared with one degree of freedom."""
NORMAL = 1.96
FARTHEST = 6.0


@dataclass(frozen=True, slots=True)
class Scatter:
    """The standard deviation of a run as a power of its mean, with all powers that fit about alike.

    Parameters
    ----------
    fits : tuple of (float, float)
        The power and the standard deviation at a mean of 1, for each power in the profile.
    below, above : float
        Standard deviations that one run may lie below and above the mean.
    """

    fits: tuple[tuple[float, float], ...]
    below: float = NORMAL
    above: float = NORMAL

    def deviation(self, mean: float) -> float:
        """Give the standard deviation that goes with a mean, the largest in the profile."""
        if mean <= 0 or not self.fits:
            return 0.0
        return float(max(sigma * mean**power for power, sigma in self.fits))

    def likeliest(self, mean: float) -> float:
        """Give the standard deviation by the power that fits best."""
        if mean <= 0 or not self.fits:
            return 0.0
        power, sigma = self.fits[0]
        return float(sigma * mean**power)


def scatter(observations: Sequence[Observation]) -> Scatter:
    """Find how the spread of the draws grows with their mean.

    Parameters
    ----------
    observations : sequence of Observation
        One for each size.

    Returns
    -------
    Scatter
        Without fits where no two draws of a size differ.

    Notes
    -----
    The standard deviation is taken for a power of the mean, as in Taylor's law (Taylor,
    Aggregation, variance and the mean, Nature 189, 1961). Its coefficient and its power follow
    from the likelihood of the variances, as if the draws were normal, over the sizes whose mean
    is above the geometric middle; all powers within the 95 % profile are kept.
    """
    rows = [
        (float(o.value), max(0, o.draws - 1), float(o.variance) * o.draws / (o.draws - 1), o)
        for o in observations
        if o.draws > 1 and o.value > 0
    ]
    if not any(square > 0 for _, _, square, _ in rows):
        return Scatter(())
    rows = _upper(rows)
    profile = []
    for power in POWERS:
        scaled = [(freedom, square / mean ** (2 * power)) for mean, freedom, square, _ in rows]
        total = sum(freedom for freedom, _ in scaled)
        variance = sum(freedom * square for freedom, square in scaled) / total
        if variance <= 0:
            continue
        likelihood = -0.5 * sum(
            freedom * (math.log(variance) + 2 * power * math.log(mean))
            for mean, freedom, _, _ in rows
        )
        profile.append((likelihood, power, math.sqrt(variance)))
    best = max(likelihood for likelihood, _, _ in profile)
    kept = sorted((p for p in profile if p[0] >= best - PROFILE), reverse=True)
    found = Scatter(tuple((power, sigma) for _, power, sigma in kept))
    if all(o.whole for *_, o in rows):
        return found
    return Scatter(found.fits, *_reaches(rows, found))


Row = tuple[float, int, float, Observation]


def _upper(rows: list[Row]) -> list[Row]:
    """Give the rows above the geometric middle of their means; at least six, where there are."""
    ordered = sorted(rows, key=lambda row: row[0])
    middle = math.sqrt(ordered[0][0] * ordered[-1][0])
    upper = [row for row in ordered if row[0] >= middle]
    upper = upper if len(upper) >= 6 else ordered[-6:]
    return upper if any(square > 0 for _, _, square, _ in upper) else ordered


def _reaches(rows: list[Row], found: Scatter) -> tuple[float, float]:
    """Give how far draws were seen from their mean, in standard deviations: no less than normal."""
    below = above = NORMAL
    for mean, _, _, o in rows:
        deviation = found.likeliest(mean)
        if deviation > 0:
            below = max(below, (mean - float(o.least)) / deviation)
            above = max(above, (float(o.most) - mean) / deviation)
    return min(below, FARTHEST), min(above, FARTHEST)
