"""A hidden term of one order more than the steps: how much of the time it makes, and how surely."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

#: Share of the modelled time, at the largest size, up to which a term of one order more may be
#: the drift of caches and allocation.
ALLOWED = 0.35
#: Share from which on a term that the noise does not rule out keeps time from agreeing.
HIDDEN = 1.0
#: Upper twentieth of Student's t by degrees of freedom (published tables, such as Abramowitz &
#: Stegun, table 26.10), for noise that is known from what the fit leaves over alone.
_T95 = (6.314, 2.920, 2.353, 2.132, 2.015, 1.943, 1.895, 1.860, 1.833, 1.812)
_NORMAL95 = 1.645


#: By the number of samples: the standard error of the mean of the lower half of normal samples,
#: over the expected distance from the least to the last of that half (10^6 simulated draws).
_HALF_ERROR = {3: 0.737, 4: 0.792, 5: 0.426, 6: 0.443, 7: 0.314, 8: 0.323, 9: 0.254, 10: 0.260}


def lower_half(samples: Sequence[float]) -> tuple[float, float]:
    """Give the mean of the lower half of the samples, and its relative standard error.

    What disturbs a timing makes it longer, so the upper half says little; the lower half together
    is steadier than the least sample alone.

    Parameters
    ----------
    samples : sequence of float
        Timings of equal calls; the error is 0 where there are fewer than three.
    """
    ordered = sorted(x for x in samples if x > 0)
    half = ordered[: (len(ordered) + 1) // 2]
    mean = sum(half) / len(half)
    known = _HALF_ERROR.get(min(len(ordered), max(_HALF_ERROR)), 0.0)
    return mean, known * math.log(half[-1] / half[0])


@dataclass(frozen=True, slots=True)
class Higher:
    """What a term of one order more adds to the time.

    Parameters
    ----------
    share : float
        Its time at the largest size, as a share of the rest.
    error : float
        Half of the interval that holds the share in 90 of 100 cases.
    """

    share: float
    error: float

    @property
    def departs(self) -> bool:
        """Whether the term is there beyond the noise, and more than a drift."""
        return self.share - self.error > ALLOWED

    @property
    def may_hide(self) -> bool:
        """Whether the noise could hide a term that doubles the time."""
        return self.share + self.error >= HIDDEN


def higher_term(
    extents: Sequence[float],
    steps: Sequence[float],
    times: Sequence[float],
    errors: Sequence[float],
) -> Higher | None:
    """Fit time by steps, what fades beside them, and a term of one order more.

    Relative squares, weighted by the relative errors, are made least; a fixed part and dearer steps
    of one order less are taken in where they bring the squares down by more than the noise.

    Parameters
    ----------
    extents, steps : sequence of float
        Sizes and their steps.
    times, errors : sequence of float
        Measured times and their relative standard errors.

    Returns
    -------
    Higher or None
        None where the sizes do not tell.
    """
    top = extents[-1]
    parts = {
        "steps": list(steps),
        "higher": [s * x / top for s, x in zip(steps, extents, strict=True)],
        "fixed": [1.0] * len(steps),
        "lower": [s / x for s, x in zip(steps, extents, strict=True)],
    }
    best: tuple[float, Higher] | None = None
    for more in ((), ("fixed",), ("lower",), ("fixed", "lower")):
        names = ("steps", "higher", *more)
        if len(steps) - len(names) < 1:
            continue
        found = _fit([parts[n] for n in names], times, errors)
        if found is not None and (best is None or found[0] + 4 * len(names) < best[0]):
            best = found[0] + 4 * len(names), found[1]
    return None if best is None else best[1]


def _fit(
    columns: Sequence[Sequence[float]], times: Sequence[float], errors: Sequence[float]
) -> tuple[float, Higher] | None:
    import numpy as np

    weights = 1 / (np.asarray(times) * np.asarray(errors))
    table = np.asarray(columns).T * weights[:, None]
    scale = np.linalg.norm(table, axis=0)
    table = table / scale
    if np.linalg.cond(table) > 1e6:
        return None
    target = np.asarray(times) * weights
    inverse = np.linalg.inv(table.T @ table)
    found = inverse @ (table.T @ target)
    squares = float(((target - table @ found) ** 2).sum())
    rate, term, *others = found / scale
    if rate <= 0 or any(x < 0 for x in others):
        return None
    covariance = inverse / np.outer(scale, scale)
    share = term / rate
    variance = (
        covariance[1, 1] - 2 * share * covariance[0, 1] + share**2 * covariance[0, 0]
    ) / rate**2
    free = len(times) - len(columns)
    wider = math.sqrt(max(1.0, squares / free))
    # Where the rounds account for all that is left over, the noise is as good as known.
    quantile = _T95[min(free, len(_T95)) - 1] if wider > 1 else _NORMAL95
    return squares, Higher(float(share), quantile * wider * math.sqrt(max(variance, 0.0)))
