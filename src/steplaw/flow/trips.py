"""How many items there are, and how many passes a counted loop makes."""

from __future__ import annotations

from collections.abc import Iterable

from steplaw.flow.names import Beyond, Names
from steplaw.flow.poly import CONST_ONE, ZERO, Poly, as_poly, var
from steplaw.flow.values import HERE, Extent

PLACE = var(HERE)


def make_names() -> Names:
    """Give the names of a new derivation: the place in a sequence alone."""
    names = Names()
    names.add("pass", "place", HERE)
    return names


def counted(length: Poly) -> Extent:
    """Give the extent of a sequence with so many items (fewer than one: none)."""
    return (length - 1 - PLACE,)


def of_range(start: Poly, stop: Poly, step: int) -> Extent:
    """Give the extent of ``range(start, stop, step)``, empty ranges included."""
    gap = stop - start if step > 0 else start - stop
    return (gap - 1 - PLACE * abs(step),)


def at(names: Names, extent: Extent, place: Poly) -> tuple[Poly, ...]:
    """Give the conditions for an item to exist at a place."""
    return tuple(names.put(p, {HERE: place}) for p in extent)


def length(names: Names, extent: Extent, known: Iterable[Poly] = ()) -> Poly:
    """Give the number of items.

    Parameters
    ----------
    names : Names
        The names of the derivation.
    extent : Extent
        Conditions for an item to exist, each falling along the sequence.
    known : iterable of Poly
        What holds where it is asked.

    Raises
    ------
    Beyond
        If a condition is no falling linear function of the place.
    """
    known = list(known)
    counts = [_first_missing(names, p) for p in extent]
    kept = list(counts)
    for c in counts:
        others = [k for k in kept if k is not c]
        if any(names.implies(known, c - k) for k in others):
            kept = others
    shortest = kept[0] if len(kept) == 1 else names.least(kept)
    if names.implies(known, shortest):
        return shortest
    if all(names.implies(known, k) for k in kept):
        return shortest
    return names.greatest([shortest, ZERO])


def _first_missing(names: Names, condition: Poly) -> Poly:
    if not condition.linear_in(HERE) or condition.coefficient(HERE) >= 0:
        raise Beyond("a sequence without an end")
    if any(names.depends(n, (HERE,)) for n in condition.names - {HERE}):
        raise Beyond("a sequence of irregular extent")
    fall = int(-condition.coefficient(HERE))
    return names.floor(condition.put({HERE: ZERO}), fall) + 1


def is_falling(names: Names, condition: Poly, passes: str) -> bool:
    """Whether a condition, once it fails, fails in all later passes."""
    others = condition.names - {passes}
    return (
        condition.linear_in(passes)
        and condition.coefficient(passes) < 0
        and not any(names.depends(n, (passes,)) for n in others)
    )


def halvings(names: Names, top: Poly, least: int, divisor: int) -> Poly:
    """Give how often ``top //= divisor`` can be done while top > least.

    Parameters
    ----------
    names : Names
        The names of the derivation.
    top : Poly
        The value at first.
    least : int
        The bound, at least 0.
    divisor : int
        At least 2.

    Returns
    -------
    Poly
        floor(log(top/(least + 1))/log(divisor)) + 1; valid where top > least.
    """
    return names.logarithm(top, least + 1, divisor) + CONST_ONE


def doublings(names: Names, first: int, stop: Poly, factor: int) -> Poly:
    """Give how often ``x *= factor`` can be done from `first` while x < stop.

    Returns
    -------
    Poly
        The least t with first*factor**t >= stop; valid where stop > first.
    """
    # first*factor**t >= stop  iff  factor**t > (stop - 1)/first.
    return names.logarithm(stop - 1, first, factor) + CONST_ONE


__all__ = [
    "PLACE",
    "as_poly",
    "at",
    "counted",
    "doublings",
    "halvings",
    "is_falling",
    "length",
    "make_names",
    "of_range",
]
