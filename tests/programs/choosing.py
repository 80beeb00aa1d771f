"""Where a program builder takes its choices from: a seed, or a hypothesis draw that shrinks."""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence
from typing import Any, Protocol, TypeVar

T = TypeVar("T")


class Chooser(Protocol):
    """A source of choices; 0 is always the simplest one, so that shrinking leads there."""

    def below(self, limit: int) -> int:
        """Give a whole number from 0 to limit - 1."""


class Seeded:
    """Choices from a seeded generator."""

    def __init__(self, seed: int) -> None:
        self._random = random.Random(seed)

    def below(self, limit: int) -> int:
        return self._random.randrange(limit)


class Drawn:
    """Choices drawn by hypothesis.

    Parameters
    ----------
    draw : callable
        The draw function of a composite strategy.
    """

    def __init__(self, draw: Callable[..., Any]) -> None:
        self._draw = draw

    def below(self, limit: int) -> int:
        from hypothesis import strategies

        return int(self._draw(strategies.integers(0, limit - 1)))


def one_of(chooser: Chooser, options: Sequence[T]) -> T:
    return options[chooser.below(len(options))]


def weighted(chooser: Chooser, options: Sequence[tuple[int, T]]) -> T:
    """Pick by whole-number weight."""
    at = chooser.below(sum(weight for weight, _ in options))
    for weight, option in options:
        if at < weight:
            return option
        at -= weight
    raise AssertionError("weights are positive")
