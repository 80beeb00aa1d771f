"""What kind of value an argument is, told from what the feed draws."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Literal

KindName = Literal["permutation", "multiset", "word", "edges", "integer", "fixed"]


@dataclass(frozen=True, slots=True)
class Kind:
    """What kind of value an argument is.

    Parameters
    ----------
    name : str
        ``permutation``: an order of the same distinct elements; ``multiset``: a sequence with
        elements of one type; ``word``: a string; ``edges``: pairs of numbers; ``integer``; or
        ``fixed``, which is left as the feed makes it.
    container : type
        Type of the whole value.
    alphabet : tuple
        Letters of a word, the ordered elements of a permutation, or those of a multiset that are
        no whole numbers.
    low, high : int
        Least and largest whole number drawn.
    """

    name: KindName
    container: type = list
    alphabet: tuple[Any, ...] = ()
    low: int = 0
    high: int = 0

    @property
    def sequence(self) -> bool:
        """Whether it is made of elements in an order."""
        return self.name in ("permutation", "multiset", "word", "edges")


def kind_of(values: Sequence[Any], n: int, free: bool = False) -> Kind:
    """Tell the kind from several draws at one size.

    Parameters
    ----------
    values : sequence
        The argument in each draw.
    n : int
        The size.
    free : bool
        Whether the type alone limits the value, so that elements may be any of their type.
    """
    first = values[0]
    if any(type(v) is not type(first) for v in values):
        return Kind("fixed")
    if isinstance(first, str):
        letters = "".join(values)
        alphabet = tuple(sorted(set(letters)))
        return Kind("word", str, alphabet) if alphabet and _long(values, n) else Kind("fixed")
    if isinstance(first, bool) or first is None:
        return Kind("fixed")
    if isinstance(first, int):
        if all(v == first for v in values):
            return Kind("fixed")
        return Kind("integer", int, low=min(values), high=max(values))
    if isinstance(first, list | tuple) and _long(values, n):
        return _sequence(values, free)
    return Kind("fixed")


def _long(values: Sequence[Any], n: int) -> bool:
    """Whether the length is the size: what is much shorter is no input that grows."""
    return all(len(v) == n for v in values)


def _sequence(values: Sequence[Any], free: bool) -> Kind:
    container = type(values[0])
    elements = [x for v in values for x in v]
    if all(isinstance(x, tuple) and len(x) == 2 and _whole(x) for x in elements):
        return Kind("edges", container)
    if len({type(x) for x in elements}) > 1:
        return Kind("fixed")
    try:
        sets = [sorted(v) for v in values]
    except TypeError:
        return Kind("fixed")
    distinct = not free and all(a != b for a, b in zip(sets[0], sets[0][1:], strict=False))
    if distinct and len(values) > 1 and all(s == sets[0] for s in sets):
        if all(list(v) == list(values[0]) for v in values):
            return Kind("fixed")
        return Kind("permutation", container, tuple(sets[0]))
    if _whole(elements):
        return Kind("multiset", container, low=min(elements), high=max(elements))
    try:
        pool = tuple(sorted(set(elements)))
    except TypeError:
        return Kind("fixed")
    return Kind("multiset", container, pool)


def _whole(elements: Sequence[Any]) -> bool:
    return all(isinstance(x, int) and not isinstance(x, bool) for x in elements)
