"""Generators and coroutines that were made before counting began, whose code has no probes."""

from __future__ import annotations

import gc
import weakref
from types import AsyncGeneratorType, CoroutineType, FrameType, GeneratorType
from typing import Any

from steplaw.tally.registry import Registry

_PARTS = {GeneratorType: "gi", CoroutineType: "cr", AsyncGeneratorType: "ag"}


class Waiting:
    """The generators that are suspended at one moment.

    Parameters
    ----------
    registry : Registry
        The code objects under probes.
    """

    def __init__(self, registry: Registry) -> None:
        self._known: list[tuple[weakref.ref[Any], str, int]] = []
        for thing in gc.get_objects():
            part = _PARTS.get(type(thing))
            if part is None or registry.find(getattr(thing, f"{part}_code")) is not None:
                continue
            frame: FrameType | None = getattr(thing, f"{part}_frame")
            if frame is not None and not getattr(thing, f"{part}_running"):
                self._known.append((weakref.ref(thing), part, frame.f_lasti))

    def moved(self) -> list[str]:
        """Say which of them have run since, uncounted."""
        notes = []
        for reference, part, lasti in self._known:
            thing = reference()
            if thing is None:
                continue
            frame = getattr(thing, f"{part}_frame")
            if frame is None or frame.f_lasti != lasti:
                notes.append(
                    f"{thing.__qualname__} was made before counting began and ran uncounted: "
                    "make it inside what is counted"
                )
        return notes
