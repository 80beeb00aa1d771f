"""The garbage collector kept from running foreign Python code in the middle of a count."""

from __future__ import annotations

import gc
from collections.abc import Callable
from typing import Any

#: Generation up to which garbage is collected before a run whose process was tidied at the start.
YOUNG = 1
#: All generations.
ALL = 2


class Undisturbed:
    """Collect what is garbage already, and put the collector's callbacks aside for a while.

    When the collector runs depends on everything that the process has made before. Finalizers of
    earlier garbage and the callbacks of other libraries would be counted as the subject's, and not
    in every run. What the subject itself leaves is collected and counted as ever.

    A context manager of `contextlib` will not do: its code is under probes, and would be counted.

    Parameters
    ----------
    generation : int
        Oldest generation to collect first.
    """

    def __init__(self, generation: int = ALL) -> None:
        self._generation = generation
        self._aside: list[Callable[..., Any]] = []

    def __enter__(self) -> None:
        gc.collect(self._generation)
        self._aside = list(gc.callbacks)
        gc.callbacks.clear()

    def __exit__(self, *unused: object) -> None:
        gc.callbacks[:0] = self._aside
