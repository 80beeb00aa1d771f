"""Basic blocks of a code object and the edges between them."""

from __future__ import annotations

from dataclasses import dataclass

from steplaw.flow import isa
from steplaw.flow.decode import Decoded

#: The node that stands for everything outside the function.
OUTSIDE = -1


@dataclass(slots=True)
class Block:
    """A run of instructions that is entered at its start and left at its end.

    Parameters
    ----------
    first, last : int
        Indices of its first and last instruction.
    setup : int
        Leading instructions up to and with RESUME, which the interpreter does not report.
    """

    first: int
    last: int
    setup: int = 0


@dataclass(frozen=True, slots=True)
class Edge:
    """A way from one block to another.

    Parameters
    ----------
    source, target : int
        Block numbers, or OUTSIDE.
    kind : str
        'enter' (call or resumption), 'leave' (return or suspension), 'fall', 'goto',
        'branch' (the jump of a conditional), 'raise' (an instruction that always raises),
        'pass' (one that may re-raise), 'land' (3.11: a throw that ends a `yield from`).
    """

    source: int
    target: int
    kind: str


class Blocks:
    """The flow graph of a code object.

    Attributes
    ----------
    decoded : Decoded
        The instructions.
    blocks : list of Block
        In code order.
    edges : list of Edge
        Every way but fresh exceptions, which are recorded where they happen.
    of : list of int
        Block number by instruction, -1 for what never runs as an instruction of its own.
    """

    __slots__ = ("blocks", "decoded", "edges", "of")

    def __init__(self, decoded: Decoded) -> None:
        self.decoded = decoded
        self.blocks: list[Block] = []
        self.of = [-1] * len(decoded)
        self._cut()
        self.edges: list[Edge] = []
        self._connect()

    def jump_target(self, k: int) -> int:
        """Give the index of the instruction that the jump at `k` really goes on with."""
        target = self.decoded.targets[k]
        if self.decoded.ops[k] == isa.FOR_ITER:
            return target + isa.FOR_ITER_SKIPS
        return target

    def _cut(self) -> None:
        d = self.decoded
        ops, n = d.ops, len(d)
        leaders = {0}
        for k, op in enumerate(ops):
            if op in isa.ENDS_BLOCK:
                leaders.add(k + 1)
                if d.targets[k] >= 0:
                    leaders.add(d.targets[k])
                    leaders.add(self.jump_target(k))
        for handler in d.handlers:
            if handler is not None:
                leaders.add(handler.target)
        cuts = sorted(x for x in leaders if x < n)
        for first, after in zip(cuts, [*cuts[1:], n], strict=True):
            block = Block(first, after - 1)
            for k in range(first, after):
                if ops[k] == isa.RESUME:
                    block.setup = k - first + 1
                self.of[k] = len(self.blocks)
            self.blocks.append(block)

    def _connect(self) -> None:
        d, add = self.decoded, self._add
        for b, block in enumerate(self.blocks):
            if isa.FOR_ITER_SKIPS and d.ops[block.first] == isa.END_FOR:
                continue  # passed over by the FOR_ITER that names it as its target
            k = block.last
            op = d.ops[k]
            if block.setup:
                add(OUTSIDE, b, "enter")
            if op in isa.RETURN or op in isa.SUSPEND:
                add(b, OUTSIDE, "leave")
            elif op in isa.GOTO:
                add(b, self.of[d.targets[k]], "goto")
            elif op in isa.ALWAYS_RAISE:
                add(b, self.handler_block(k), "raise")
            else:
                if op in isa.MAY_RERAISE:
                    add(b, self.handler_block(k), "pass")
                elif op in isa.BRANCH:
                    add(b, self.of[self.jump_target(k)], "branch")
                add(b, b + 1, "fall")
            if op == isa.SEND and isa.THROW_JUMPS_SEND and d.ops[k + 1] == isa.YIELD_VALUE:
                add(OUTSIDE, self.of[d.targets[k]], "land")

    def inflow(self) -> list[int]:
        """Give the number of ways into each block, its handlers' work included."""
        ways = [0] * len(self.blocks)
        for edge in self.edges:
            if edge.target >= 0:
                ways[edge.target] += 1
        for target in {h.target for h in self.decoded.handlers if h is not None}:
            ways[self.of[target]] += 1
        return ways

    def _add(self, source: int, target: int, kind: str) -> None:
        self.edges.append(Edge(source, target, kind))

    def handler_block(self, k: int) -> int:
        """Give the block that handles an exception of instruction `k`, OUTSIDE for none."""
        handler = self.decoded.handlers[k]
        return OUTSIDE if handler is None else self.of[handler.target]
