"""Which of two figures is less where each is known within an interval."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

from steplaw.forecast.amount import Amount
from steplaw.versus.spans import Less, Span, joined

SMALL = 32
FINENESS = 4
"""Sizes looked at for each doubling."""


@dataclass(frozen=True, slots=True)
class Known:
    """What is known of a figure at a size.

    Parameters
    ----------
    low, high : float
        Where it lies.
    counted : bool
        Whether it was counted there, and no law speaks.
    """

    low: float
    high: float
    counted: bool = False


def of_amount(amount: Amount) -> Known | None:
    """Give where the mean of a foretold figure lies; None where nothing is known."""
    counted = amount.why.startswith("counted")
    if amount.mean_low is not None and amount.mean_high is not None:
        return Known(amount.mean_low, amount.mean_high, counted)
    if counted and amount.span is not None:
        return Known(*amount.span, counted)
    if amount.number is None:
        return None
    return Known(float(amount.number), float(amount.number), counted)


def less(a: Known | None, b: Known | None) -> Less:
    """Say which is surely less; "same" where both are one number each and equal."""
    if a is None or b is None:
        return "unknown"
    if a.high < b.low:
        return "a"
    if b.high < a.low:
        return "b"
    alike = a.low == a.high == b.low == b.high
    return "same" if alike else "unknown"


def spans(
    a: Callable[[int], Known | None],
    b: Callable[[int], Known | None],
    sizes: Sequence[int],
) -> list[Span]:
    """Say which is less, looking at sizes and, where it changes, at sizes between.

    Parameters
    ----------
    a, b : callable
        What is known of the two at a size.
    sizes : sequence of int
        Rising.

    Returns
    -------
    list of Span
        From the first to the last size. Between two neighbouring sizes at which the same one
        is less, it is taken to be less.
    """
    seen: dict[int, Span] = {}

    def at(size: int) -> Span:
        if size not in seen:
            one, other = a(size), b(size)
            counted = any(k is not None and k.counted for k in (one, other))
            seen[size] = Span(size, size, less(one, other), counted)
        return seen[size]

    out = [at(sizes[0])] if sizes else []
    for before, after in pairwise(sizes):
        out += _between(at, before, after)
        out.append(at(after))
    return joined(out)


def _between(at: Callable[[int], Span], before: int, after: int) -> list[Span]:
    """Give the spans strictly between two sizes, by halving where the two differ."""
    left, right = at(before), at(after)
    if after - before < 2:
        return []
    kind = (left.less, left.counted)
    if kind == (right.less, right.counted):
        return [Span(before + 1, after - 1, *kind)]
    middle = (before + after) // 2
    if at(middle).less not in (left.less, right.less, "unknown"):
        return [*_between(at, before, middle), at(middle), *_between(at, middle, after)]
    last = _last(at, before, after, lambda span: (span.less, span.counted) == kind)
    first = _last(at, last, after, lambda s: (s.less, s.counted) != (right.less, right.counted)) + 1
    return [
        Span(x, y, *found)
        for x, y, found in (
            (before + 1, last, kind),
            (last + 1, first - 1, ("unknown", False)),
            (first, after - 1, (right.less, right.counted)),
        )
        if x <= y
    ]


def _last(at: Callable[[int], Span], low: int, high: int, fits: Callable[[Span], bool]) -> int:
    """Give the last size before the change, where the lower one fits and the higher does not."""
    while high - low > 1:
        middle = (low + high) // 2
        if fits(at(middle)):
            low = middle
        else:
            high = middle
    return low


def looked_at(most: int, run: Sequence[int]) -> list[int]:
    """Give the sizes to look at: all small ones, those run, and some for each doubling."""
    sizes = set(range(min(SMALL, most) + 1)) | {n for n in run if n <= most}
    step = 2 ** (1 / FINENESS)
    size = float(SMALL)
    while size <= most:
        sizes.add(round(size))
        size *= step
    return sorted(sizes | {most})
