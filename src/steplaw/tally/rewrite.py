"""A code object under probes.

A probe is an endless iterator of the standard library, kept as a constant and asked for one item:
``LOAD_CONST it; FOR_ITER never; POP_TOP; POP_TOP``. `operator.length_hint` reads how often it was
passed. It needs no variable, no call and no flush, so exceptions, generators and recursion lose
nothing.
"""

from __future__ import annotations

import sys
from itertools import repeat
from operator import length_hint
from types import CodeType

from steplaw.flow import isa
from steplaw.flow.blocks import Blocks, Edge
from steplaw.flow.decode import Decoded
from steplaw.flow.ranges import RangeLoop, range_loops
from steplaw.flow.weights import edge_weights
from steplaw.tally.lengths import Lengths
from steplaw.tally.placement import Placement
from steplaw.tally.trips import Trips
from steplaw.tally.writer import Writer, returns_constant

FULL = sys.maxsize
#: Stack that a probe takes, a recorder at a handler beside the exception, and what takes off the
#: passes that an exception cuts short.
_PROBE_STACK, _HANDLER_STACK, _TRIPS_STACK = 2, 5, 5
#: Stack of the recorder around the body: place and exception, four pushed.
_RECORDER_STACK = 6
#: Cost of a probe that is left on the stack, of one out of line, and of a loop's trip count at
#: its entry, also where the range is made already, beside a probe in line that clears up behind
#: itself.
_CALL_COST, _STUB_COST, _TRIPS_COST, _READY_COST = 0.8, 1.3, 2.5, 0.1


class Probed:
    """A code object under probes, and what reads them back.

    Attributes
    ----------
    original, code : CodeType
        Before and after.
    graph : Blocks
        Flow graph of the original.
    placement : Placement
        Which edges are probed.
    iterators : list of repeat
        The probes, in the order of ``placement.probed``.
    counted : list of RangeLoop
        Loops whose passes are known from their entry.
    lengths : Lengths
        Those of them that run over a range of constants.
    trips : dict of int to Trips
        Trip counts that stand for a probe, by place in that order.
    left : dict of int to int
        Code unit in `code` of instructions that raised, with how often.
    origins : list of int
        Original instruction by code unit of `code`.
    """

    __slots__ = (
        "code",
        "counted",
        "graph",
        "iterators",
        "left",
        "lengths",
        "original",
        "origins",
        "placement",
        "trips",
    )

    def __init__(
        self, original: CodeType, consts: tuple[object, ...], watched: bool = False
    ) -> None:
        self.original = original
        self.graph = graph = Blocks(Decoded(original))
        loops = {loop.edge: loop for loop in range_loops(graph)}
        self.placement = Placement(graph, _costs(graph, loops))
        probed = self.placement.probed
        self.left: dict[int, int] = {}
        self.iterators = [repeat(None, FULL) for _ in probed]
        by_place = {place: loops[number] for place, number in enumerate(probed) if number in loops}
        self.counted = list(by_place.values())
        self.lengths = Lengths(self.placement, by_place)
        self.trips = {place: Trips(self.lengths.length(place)) for place in by_place}
        probes = dict(zip(probed, self.iterators, strict=True))
        counted = [(loops[probed[place]], trips) for place, trips in self.trips.items()]
        writer = Writer(graph, consts, probes, counted, self.left, watched)
        assembly = writer.write()
        self.origins = assembly.origin_by_unit()
        self.code = original.replace(
            co_code=assembly.code_bytes(),
            co_consts=tuple(writer.consts),
            co_names=tuple(writer.names),
            co_stacksize=_stack_size(original, writer),
            co_linetable=assembly.location_bytes(original, graph.decoded.starts),
            co_exceptiontable=assembly.exception_bytes(),
        )

    def passes(self) -> list[int]:
        """Give the passes of every probe so far; of `lengths`, without their entries' share."""
        passes = [FULL - length_hint(it) for it in self.iterators]
        for place, trips in self.trips.items():
            passes[place] = trips.passes()
        return passes

    def probe_passes(self, passes: list[int]) -> int:
        """Give how many of these passes went through a probe."""
        return sum(n for place, n in enumerate(passes) if place not in self.trips)


def _stack_size(original: CodeType, writer: Writer) -> int:
    extra = _PROBE_STACK
    if original.co_exceptiontable:
        extra = _HANDLER_STACK
    if writer.range_calls:
        extra = _TRIPS_STACK
    if writer.watching is not None:
        extra = max(extra, writer.watching.deepest)
    return writer.base + max(original.co_stacksize + extra, _RECORDER_STACK)


def _stays(graph: Blocks, edge: Edge, start: int) -> bool:
    """Whether a probe on an edge may leave what it loads on the stack until the return."""
    if edge.kind == "enter":
        return edge.target == start
    return edge.kind == "leave" and returns_constant(graph, edge.source) is not None


def _cost(graph: Blocks, edge: Edge, start: int, inflow: list[int]) -> float:
    if _stays(graph, edge, start):
        return _CALL_COST
    return _STUB_COST if edge.kind == "branch" and inflow[edge.target] > 1 else 1.0


def _costs(graph: Blocks, loops: dict[int, RangeLoop]) -> list[float]:
    """Give the likely cost of counting every edge: how often, by how dear each time."""
    weights = edge_weights(graph)
    start = graph.of[graph.decoded.ops.index(isa.RESUME)]
    inflow = graph.inflow()
    costs = [
        weight * _cost(graph, edge, start, inflow)
        for edge, weight in zip(graph.edges, weights, strict=True)
    ]
    for number, loop in loops.items():
        each = _TRIPS_COST if loop.constant is None else _READY_COST
        costs[number] = min(costs[number], weights[loop.entry] * each)
    return costs
