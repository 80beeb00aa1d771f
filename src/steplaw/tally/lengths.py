"""Loops over a range of constants: their passes are its length times their entries.

The entries follow from the other edges, as all do, and may in turn follow from the passes of a
loop further out. Where they follow from the loop's own passes, the length is no help.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from steplaw.flow.ranges import RangeLoop
from steplaw.tally.placement import Placement


class Lengths:
    """The loops of one code object whose passes follow from their entries.

    Parameters
    ----------
    placement : Placement
        The probed edges.
    loops : mapping of int to RangeLoop
        Loops whose edge is probed, by place in ``placement.probed``.

    Attributes
    ----------
    each : dict of int to (int, int)
        Length and entry edge, by place.
    """

    __slots__ = ("_placement", "each")

    def __init__(self, placement: Placement, loops: Mapping[int, RangeLoop]) -> None:
        self._placement = placement
        self.each = {
            place: (len(loop.constant), loop.entry)
            for place, loop in loops.items()
            if loop.constant is not None
        }
        needs = self._needs()
        settled: set[int] = set()
        while ready := {p for p in needs if p not in settled and needs[p] <= settled}:
            settled |= ready
        self.each = {place: self.each[place] for place in sorted(settled)}

    def length(self, place: int) -> int | None:
        """Give the length of a loop's range, None if its passes do not follow from its entries."""
        return self.each[place][0] if place in self.each else None

    def _needs(self) -> dict[int, set[int]]:
        """Give, for each place, those that its entries follow from."""
        needs: dict[int, set[int]] = {place: set() for place in self.each}
        for place in self.each:
            unit = [0] * len(self._placement.probed)
            unit[place] = 1
            flow, _ = self._placement.solve(unit, {})
            for other, (_, entry) in self.each.items():
                if flow[entry]:
                    needs[other].add(place)
        return needs

    def solve(self, passes: Sequence[int], raised: dict[int, int]) -> tuple[list[int], list[int]]:
        """Give the frequency of every edge and the inflow of every block.

        Parameters
        ----------
        passes : sequence of int
            Passes by place; of the loops here, less what their entries account for.
        raised : dict of int to int
            Net inflow of a block by fresh exceptions.

        Returns
        -------
        edges, entered : list of int
            As of `Placement.solve`. Each round settles loops whose outer ones are settled.
        """
        flow, entered = self._placement.solve(passes, raised)
        for _ in self.each:
            whole = list(passes)
            for place, (length, entry) in self.each.items():
                whole[place] += length * flow[entry]
            flow, entered = self._placement.solve(whole, raised)
        return flow, entered
