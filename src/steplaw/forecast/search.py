"""The largest size that fits a limit, found by whole numbers alone."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from steplaw.forecast.asked import LARGEST
from steplaw.forecast.domain import Domain

AHEAD = 256
"""Sizes looked at beyond one that does not fit: a law may go down again, by period or parity."""


@dataclass(frozen=True, slots=True)
class Fit:
    """The largest size that fits.

    Parameters
    ----------
    size : int or None
        None where no size of the domain fits.
    unlimited : bool
        Whether every size up to 10**18 fits.
    """

    size: int | None
    unlimited: bool = False


def largest(fits: Callable[[int], bool], domain: Domain, ahead: int = AHEAD) -> Fit:
    """Search for the largest size that fits.

    Parameters
    ----------
    fits : callable
        Whether a size fits. It is taken to end at some size, but for ups and downs that are
        shorter than `ahead` sizes.
    domain : Domain
        The sizes that come into question.
    ahead : int
        Sizes looked at beyond the first that does not fit.

    Returns
    -------
    Fit
        The size.

    Examples
    --------
    >>> largest(lambda n: n * n <= 10**6, Domain(0)).size
    1000
    """
    last = domain.count(LARGEST) - 1
    low = _first(fits, domain, ahead, 0, last)
    if low is None:
        return Fit(None)
    while low < last:
        high = _beyond(fits, domain, low, last)
        if high is None:
            return Fit(domain.size(last), unlimited=True)
        low = _between(fits, domain, low, high)
        further = _first(fits, domain, ahead, low + 2, last)
        if further is None:
            return Fit(domain.size(low))
        low = further
    return Fit(domain.size(low))


def _first(
    fits: Callable[[int], bool], domain: Domain, ahead: int, start: int, last: int
) -> int | None:
    stop = min(last, start + ahead)
    return next((k for k in range(start, stop + 1) if fits(domain.size(k))), None)


def _beyond(fits: Callable[[int], bool], domain: Domain, low: int, last: int) -> int | None:
    """Give an index above one that fits, which does not; None where the last one fits."""
    reach = 1
    while True:
        high = min(last, low + reach)
        if not fits(domain.size(high)):
            return high
        if high == last:
            return None
        reach *= 2


def _between(fits: Callable[[int], bool], domain: Domain, low: int, high: int) -> int:
    while high - low > 1:
        middle = (low + high) // 2
        if fits(domain.size(middle)):
            low = middle
        else:
            high = middle
    return low
