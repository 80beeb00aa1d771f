"""Subjects of tests that need one with a particular trait."""

from __future__ import annotations

import functools
from typing import Any


class Sum:
    def __init__(self, pence: int) -> None:
        self.pence = pence


def uses_up(sums: list[int]) -> int:
    """Empty the list it is given, so that a second run on it would count nothing."""
    total = 0
    while sums:
        total += sums.pop()
    return total


def pence(sums: list[Sum]) -> int:
    """Add up the pence."""
    total = 0
    for each in sums:
        total += each.pence
    return total


def first_of(sums: list[int], wanted: int) -> int:
    """Find the place of a sum, -1 if it is not there."""
    for place, each in enumerate(sums):
        if each == wanted:
            return place
    return -1


@functools.cache
def kept(n: int) -> int:
    """Add up the numbers below n, once for each n."""
    total = 0
    for each in range(n):
        total += each
    return total


def helper(n: int) -> int:
    return sum(each for each in range(n))


def calls_helper(n: int) -> int:
    """Call the helper n times."""
    return sum([helper(n) for _ in range(n)])


def imports_late(n: int) -> int:
    """Import a module when it is called."""
    import colorsys

    return len(colorsys.__all__) * n


def lazily(n: int) -> Any:
    """Give an iterator that nobody has run."""
    return map(helper, range(n))


def in_pairs(n: int) -> list[tuple[int, int]]:
    """Pair the numbers below n."""
    pairs = []
    for first in range(n):
        for second in range(first):
            pairs.append((second, first))
    return pairs
