"""Stretches of sizes over which one of two figures stays below the other."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Literal

Less = Literal["a", "b", "same", "turns", "unknown"]
SIDES: dict[int, Less] = {-1: "a", 0: "same", 1: "b"}


@dataclass(frozen=True, slots=True)
class Span:
    """Whole sizes over which the same one is less.

    Parameters
    ----------
    first : int
        The first size.
    last : int or None
        The last size; None where it goes on for ever.
    less : {"a", "b", "same", "turns", "unknown"}
        Which one is less; "turns" where they take turns size by size.
    counted : bool
        Whether counts say so, where no law speaks.
    """

    first: int
    last: int | None
    less: Less
    counted: bool = False


@dataclass(frozen=True, slots=True)
class Crossing:
    """Where one overtakes the other.

    Parameters
    ----------
    after : int
        The last size at which the one is less.
    at : int
        The first size at which the other is less.
    less : {"a", "b"}
        Which one is less from there on.
    sharp : bool
        Whether they are equal at each size between, if there is one; otherwise the crossing lies
        somewhere between the two sizes.
    """

    after: int
    at: int
    less: Less
    sharp: bool


def side(difference: Fraction) -> Less:
    """Name which is less by the sign of the first less the second."""
    return SIDES[(difference > 0) - (difference < 0)]


def joined(spans: Iterable[Span]) -> list[Span]:
    """Put neighbouring spans of one kind together."""
    out: list[Span] = []
    for span in spans:
        before = out[-1] if out else None
        if before is not None and (before.less, before.counted) == (span.less, span.counted):
            out[-1] = replace(before, last=span.last)
        else:
            out.append(span)
    return out


def crossings(spans: Iterable[Span]) -> list[Crossing]:
    """Find each place where one overtakes the other.

    Parameters
    ----------
    spans : iterable of Span
        One after the other, by size.

    Returns
    -------
    list of Crossing
        None is claimed across sizes at which the two take turns.
    """
    out: list[Crossing] = []
    last: Span | None = None
    sharp = True
    for span in spans:
        if span.less == "turns":
            last, sharp = None, True
        elif span.less in ("a", "b"):
            if last is not None and last.less != span.less and last.last is not None:
                out.append(Crossing(last.last, span.first, span.less, sharp))
            last, sharp = span, True
        else:
            sharp = sharp and span.less == "same"
    return out
