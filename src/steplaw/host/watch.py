"""Which code objects are read before and after each of many runs in one process.

To read the probes of all of them for each input would take far longer than a short run. So those
that moved at the first inputs are read, and at the end all of them once: if others have moved, the
runs are made again with these watched too.
"""

from __future__ import annotations

from typing import Any

from steplaw.tally.registry import Registry
from steplaw.tally.rewrite import Probed
from steplaw.tally.snapshot import Reading, Snapshot

Readings = dict[Probed, Reading]

#: Places in the registry, or None for all of it.
Places = frozenset[int] | None


class Watch:
    """The code objects that are read for each run.

    Parameters
    ----------
    registry : Registry
        All code objects.

    Attributes
    ----------
    places : frozenset of int or None
        Those that are watched, by their place in the registry; None for all.
    """

    def __init__(self, registry: Registry) -> None:
        self.registry = registry
        self.places: Places = frozenset()
        self._part: Registry = registry
        self._first: Readings = {}
        self._known = 0

    def begin(self) -> None:
        """Note all readings, before the first run."""
        self._known = len(self.registry.probed)
        self._first = Snapshot(self.registry).readings
        self._part = self.registry
        if self.places is not None:
            self._part = _Part(self.registry, self.places)

    def readings(self) -> Readings:
        """Give the readings of those watched."""
        return Snapshot(self._part).readings

    def unwatched(self) -> list[int]:
        """Give the places of those that have moved unwatched since `begin`.

        Returns
        -------
        list of int
            Empty if none has; ``[-1]`` if code has moved that was not there at `begin`, which can
            only be watched along with all.
        """
        if self.places is None:
            return []
        last = Snapshot(self.registry).readings
        moved = [
            place
            for place, probed in enumerate(self.registry.probed)
            if place not in self.places and last.get(probed) != self._first.get(probed)
        ]
        return [-1] if any(place >= self._known for place in moved) else moved

    def widen(self, places: list[int]) -> None:
        """Watch more of them.

        Parameters
        ----------
        places : list of int
            What `unwatched` gave.
        """
        if self.places is not None:
            self.places = None if -1 in places else self.places | frozenset(places)


class _Part(Registry):
    """Some code objects of a registry, for a `Snapshot` of these alone."""

    def __init__(self, whole: Registry, places: frozenset[int]) -> None:
        super().__init__()
        self.probed = [whole.probed[x] for x in sorted(places) if x < len(whole.probed)]
        self._by_code = whole._by_code


def change(before: Readings, after: Readings) -> Any:
    """Give what one run changed, equal for runs of equal counts.

    Parameters
    ----------
    before, after : dict
        Readings around the run.
    """
    changed = []
    for probed, (passes, left) in after.items():
        old = before.get(probed)
        if old is None:
            changed.append((id(probed), tuple(passes), tuple(sorted(left.items()))))
        elif old[0] != passes or old[1] != left:
            moved = tuple(b - a for a, b in zip(old[0], passes, strict=True))
            exits = {k: n - old[1].get(k, 0) for k, n in left.items()}
            changed.append((id(probed), moved, tuple(sorted(e for e in exits.items() if e[1]))))
    return tuple(changed)
