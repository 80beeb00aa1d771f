"""Probe readings at one moment, and the exact counts between two moments."""

from __future__ import annotations

import sys
from collections.abc import Iterator, Sequence
from types import FrameType

from steplaw.flow import isa
from steplaw.flow.blocks import Blocks
from steplaw.tally.registry import Registry
from steplaw.tally.rewrite import FULL, Probed

Reading = tuple[list[int], dict[int, int]]


class CountMismatch(Exception):
    """The probes of a code object contradict each other: a defect of steplaw."""


class Snapshot:
    """The readings of every probe at one moment.

    Parameters
    ----------
    registry : Registry
        The code objects under probes.

    Notes
    -----
    A frame that is running at that moment is in the middle of a block. Its place is kept like
    that of an exception, so that the counts up to it are exact.
    """

    __slots__ = ("readings", "unsettled")

    def __init__(self, registry: Registry) -> None:
        self.unsettled: list[str] = []
        running = _running_frames(registry)
        self.readings: dict[Probed, Reading] = {}
        for probed in registry.probed:
            passes = probed.passes()
            places = running.get(probed)
            if places or probed.left or any(passes):
                left = dict(probed.left)
                for unit in places or ():
                    left[unit] = left.get(unit, 0) + 1
                    self._look_for_loops(probed, unit)
                self.readings[probed] = (passes, left)

    def _look_for_loops(self, probed: Probed, unit: int) -> None:
        """Note the loops whose passes are known only at their end and that are under way."""
        d = probed.graph.decoded
        block = probed.graph.of[probed.origins[unit]]
        for loop in probed.counted:
            if block in loop.body:
                line = d.lines[probed.graph.blocks[loop.head].first]
                self.unsettled.append(
                    f"the loop at {d.code.co_filename}:{line} was under way when counting began "
                    "or ended: all its passes are counted where it was entered"
                )


def _running_frames(registry: Registry) -> dict[Probed, list[int]]:
    running: dict[Probed, list[int]] = {}
    for top in sys._current_frames().values():
        frame: FrameType | None = top
        while frame is not None:
            probed = registry.find(frame.f_code)
            if probed is not None:
                running.setdefault(probed, []).append(frame.f_lasti >> 1)
            frame = frame.f_back
    return running


class CodeCounts:
    """Exact counts of one code object between two snapshots.

    Attributes
    ----------
    probed : Probed
        The code object.
    instructions : list of int
        Times that each original instruction ran as a step.
    edges, entered : list of int
        Frequency of each edge, and inflow of each block along edges.
    caught : dict of (int, int) to int
        Fresh exceptions by the instruction that raised and the block that took them. One from
        a jump back came when the jump was made already, before the block that it goes to.
    calls : int
        Times that the body was begun.
    passes : int
        Probe passes.
    """

    __slots__ = ("calls", "caught", "edges", "entered", "instructions", "passes", "probed")

    def __init__(self, probed: Probed, before: Reading | None, after: Reading) -> None:
        self.probed = probed
        old_passes, old_left = before or ([0] * len(after[0]), {})
        passes = [b - a for a, b in zip(old_passes, after[0], strict=True)]
        exits = self._exits(old_left, after[1])
        graph = probed.graph
        d = graph.decoded
        self.caught = {(k, _taken_by(graph, k)): n for k, n in exits.items()}
        net: dict[int, int] = {}
        for (k, block), n in self.caught.items():
            if block >= 0:
                net[block] = net.get(block, 0) + n
            if d.ops[k] not in isa.SUSPENDED:
                b = graph.of[d.targets[k] if d.ops[k] in isa.CHECKED_JUMPS else k]
                net[b] = net.get(b, 0) - n
        self.passes = probed.probe_passes(passes)
        self.edges, self.entered = probed.lengths.solve(passes, net)
        self.instructions = self._instructions(exits)
        self.calls = self._calls()

    def _exits(self, before: dict[int, int], after: dict[int, int]) -> dict[int, int]:
        origins, ops = self.probed.origins, self.probed.graph.decoded.ops
        exits: dict[int, int] = {}
        for units, sign in ((after, 1), (before, -1)):
            for unit, n in units.items():
                k = origins[unit]
                if k < 0:
                    raise CountMismatch(f"{self.probed.original!r}: left inside a probe")
                left = _left_at(ops, k)
                if left is None:
                    continue
                exits[left] = exits.get(left, 0) + sign * n
        return {k: n for k, n in exits.items() if n}

    def _instructions(self, exits: dict[int, int]) -> list[int]:
        graph = self.probed.graph
        ops = graph.decoded.ops
        counts = [0] * len(ops)
        inflow = list(self.entered)
        for (_, handler), n in self.caught.items():
            if handler >= 0:
                inflow[handler] += n
        passing = isa.SUSPENDED | isa.CHECKED_JUMPS
        behind_jumps: dict[int, int] = {}
        for k, n in exits.items():
            if ops[k] in isa.CHECKED_JUMPS:
                b = graph.of[graph.decoded.targets[k]]
                behind_jumps[b] = behind_jumps.get(b, 0) + n
        for b, block in enumerate(graph.blocks):
            current = inflow[b]
            current -= behind_jumps.get(b, 0)
            if not current:
                continue
            for k in range(block.first, block.last + 1):
                if k >= block.first + block.setup:
                    counts[k] = current
                if exits and k in exits and ops[k] not in passing:
                    current -= exits[k]
            if current < 0:
                raise CountMismatch(f"{self.probed.original!r}: block {b} ran {current} times")
        return counts

    @property
    def start(self) -> int:
        """The block that a call begins with."""
        return next(b for b, block in enumerate(self.probed.graph.blocks) if block.setup)

    def _calls(self) -> int:
        first = self.start
        return sum(
            n
            for edge, n in zip(self.probed.graph.edges, self.edges, strict=True)
            if edge.kind == "enter" and edge.target == first
        )


def counts_between(
    before: Snapshot, after: Snapshot, notes: list[str] | None = None
) -> Iterator[CodeCounts]:
    """Give the exact counts of every code object that ran between two snapshots.

    Parameters
    ----------
    before, after : Snapshot
        Readings in this order of time.
    notes : list of str, optional
        Takes a note of each code object whose probes contradict each other, which is then left
        out; without it, that is raised.

    Yields
    ------
    CodeCounts
        One for each code object whose probes moved.
    """
    for probed, reading in after.readings.items():
        old = before.readings.get(probed)
        if old == reading:
            continue
        try:
            counts = CodeCounts(probed, old, reading)
        except CountMismatch as mismatch:
            if notes is None:
                raise
            notes.append(f"left out, for its probes contradict each other: {mismatch}")
        else:
            yield counts


def _taken_by(graph: Blocks, k: int) -> int:
    """Give the block that took an exception of instruction `k`, OUTSIDE for none."""
    d = graph.decoded
    if d.ops[k] in isa.CHECKED_JUMPS and isa.CHECKS_BEHIND_JUMP:
        return graph.handler_block(d.targets[k] - 1)
    return graph.handler_block(k)


def _left_at(ops: Sequence[int], k: int) -> int | None:
    """Give the instruction that was really left, None for none, where a frame stands on `k`."""
    if ops[k] == isa.PRECALL:
        return k + 1
    if ops[k] == isa.RESUME:
        # 3.13 puts a suspended frame on the RESUME behind its YIELD_VALUE; a RESUME of any other
        # frame has not begun the block yet.
        return k - 1 if k and ops[k - 1] == isa.YIELD_VALUE else None
    return k


__all__ = ["FULL", "CodeCounts", "CountMismatch", "Snapshot", "counts_between"]
