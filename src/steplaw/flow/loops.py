"""Natural loops of a code object, their nesting, and what can only end in an exception."""

from __future__ import annotations

from dataclasses import dataclass, field

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE, Block, Blocks
from steplaw.flow.dominators import dominates, immediate_dominators, reverse_postorder

#: Instructions that raise nothing, as far as a derivation is concerned.
_QUIET = frozenset(
    isa.OPMAP[name]
    for name in [
        "NOP",
        "RESUME",
        "PRECALL",
        "KW_NAMES",
        "PUSH_NULL",
        "POP_TOP",
        "COPY",
        "SWAP",
        "CACHE",
        "MAKE_CELL",
        "COPY_FREE_VARS",
        "LOAD_FAST",
        "LOAD_FAST_LOAD_FAST",
        "LOAD_FAST_CHECK",
        "LOAD_FAST_AND_CLEAR",
        "LOAD_CONST",
        "LOAD_CLOSURE",
        "LOAD_GLOBAL",
        "LOAD_DEREF",
        "STORE_FAST",
        "STORE_FAST_STORE_FAST",
        "STORE_FAST_LOAD_FAST",
        "STORE_DEREF",
        "DELETE_FAST",
        "BUILD_TUPLE",
        "BUILD_LIST",
        "BUILD_SLICE",
        "LIST_APPEND",
        "IS_OP",
        "UNARY_NOT",
        "TO_BOOL",
        "MAKE_FUNCTION",
        "SET_FUNCTION_ATTRIBUTE",
        "LIST_TO_TUPLE",
        "PUSH_EXC_INFO",
        "POP_EXCEPT",
        "CHECK_EXC_MATCH",
        "FOR_ITER",
        "YIELD_VALUE",
        "RETURN_VALUE",
        "RETURN_CONST",
        "END_FOR",
        "GET_LEN",
        "BUILD_MAP",
    ]
    if name in isa.OPMAP
) | (isa.JUMPS - frozenset((isa.SEND,)))
#: The way that an exception goes has no edge of its own.
CAUGHT = -1


class CaughtBlocks(Blocks):
    """Blocks that end behind each instruction whose exception the function may catch.

    Attributes
    ----------
    continues : list of bool
        By block: whether it is but the rest of the one before it.
    """

    __slots__ = ("continues",)

    def _cut(self) -> None:
        super()._cut()
        blocks: list[Block] = []
        self.continues: list[bool] = []
        for block in self.blocks:
            first = block.first
            for k in range(block.first, block.last + 1):
                if k == block.last or (self.decoded.handlers[k] and self.may_raise(k)):
                    setup = max(0, min(block.first + block.setup, k + 1) - first)
                    for at in range(first, k + 1):
                        self.of[at] = len(blocks)
                    self.continues.append(first != block.first)
                    blocks.append(Block(first, k, setup))
                    first = k + 1
        self.blocks = blocks

    def may_raise(self, k: int) -> bool:
        """Whether an instruction may raise an exception."""
        return self.decoded.ops[k] not in _QUIET


@dataclass(slots=True)
class Loop:
    """A natural loop.

    Parameters
    ----------
    head : int
        The block that every way into the loop leads to.
    body : set of int
        Its blocks, those of inner loops included.
    parent : int
        Head of the loop around it, -1 for none.
    """

    head: int
    body: set[int] = field(default_factory=set)
    parent: int = -1


class Nest:
    """The loops of a code object.

    Attributes
    ----------
    start : int
        The block that a call begins with.
    ways : list of list of (int, int)
        By block: the edges that leave it and their targets, ways that can only end in an
        exception left out. A generator goes on behind each of its yields.
    order : list of int
        Blocks that can be reached, each before its successors but for ways back.
    loops : dict of int to Loop
        By head.
    inner : list of int
        By block: the head of the innermost loop that it is in, -1 for none.
    raising : set of int
        Blocks from which every way ends in an exception that leaves the function.
    reducible : bool
        Whether every loop has one head.
    """

    __slots__ = (
        "dominators",
        "graph",
        "inner",
        "loops",
        "order",
        "raising",
        "reducible",
        "start",
        "ways",
    )

    def __init__(self, graph: CaughtBlocks) -> None:
        self.graph = graph
        self.start = next(b for b, block in enumerate(graph.blocks) if block.setup)
        self.ways = self._ways()
        after = [[target for _, target in ways if target >= 0] for ways in self.ways]
        self.order = reverse_postorder(after, self.start)
        self.dominators = immediate_dominators(after, self.start)
        self.reducible = True
        self.loops = self._find(after)
        self.inner = self._innermost()

    def _ways(self) -> list[list[tuple[int, int]]]:
        graph = self.graph
        ways: list[list[tuple[int, int]]] = [[] for _ in graph.blocks]
        for number, edge in enumerate(graph.edges):
            if edge.source == OUTSIDE or edge.kind in ("raise", "pass"):
                continue
            target = edge.target
            last = graph.decoded.ops[graph.blocks[edge.source].last]
            if target == OUTSIDE and last == isa.YIELD_VALUE:
                target = edge.source + 1
            ways[edge.source].append((number, target))
        self.raising = raising = self._raising(ways)
        for b, block in enumerate(graph.blocks):
            handler = graph.handler_block(block.last)
            if handler == OUTSIDE or handler in raising or self.is_with(handler):
                continue
            op = graph.decoded.ops[block.last]
            if op not in _QUIET or op in isa.ALWAYS_RAISE:
                ways[b].append((CAUGHT, handler))
        return [
            [] if b in raising else [way for way in out if way[1] not in raising]
            for b, out in enumerate(ways)
        ]

    def _raising(self, ways: list[list[tuple[int, int]]]) -> set[int]:
        """Give the blocks from which every way ends in an exception that leaves the function."""
        graph = self.graph
        raising: set[int] = set()
        todo = True
        while todo:
            todo = False
            for b, out in enumerate(ways):
                if b in raising or any(t not in raising for _, t in out):
                    continue
                block = graph.blocks[b]
                handled = graph.handler_block(block.last)
                if handled == OUTSIDE or handled in raising or self.is_with(handled):
                    raising.add(b)
                    todo = True
        return raising

    def is_with(self, handler: int) -> bool:
        """Whether it is the end of a ``with`` statement that handles an exception."""
        x = self.graph.blocks[handler]
        return any(
            isa.OPNAME[self.graph.decoded.ops[k]] == "WITH_EXCEPT_START"
            for k in range(x.first, x.last + 1)
        )

    def _find(self, after: list[list[int]]) -> dict[int, Loop]:
        place = {b: k for k, b in enumerate(self.order)}
        before: dict[int, list[int]] = {b: [] for b in self.order}
        for b in self.order:
            for target in after[b]:
                before[target].append(b)
        loops: dict[int, Loop] = {}
        for b in self.order:
            for head in after[b]:
                if place[head] > place[b]:
                    continue
                if not dominates(self.dominators, head, b):
                    self.reducible = False
                    continue
                loop = loops.setdefault(head, Loop(head, {head}))
                todo = [b]
                while todo:
                    x = todo.pop()
                    if x not in loop.body:
                        loop.body.add(x)
                        todo.extend(before[x])
        for loop in loops.values():
            around = [o for o in loops.values() if loop.head in o.body and o is not loop]
            if around:
                loop.parent = min(around, key=lambda o: len(o.body)).head
        return loops

    def _innermost(self) -> list[int]:
        inner = [-1] * len(self.graph.blocks)
        for loop in sorted(self.loops.values(), key=lambda o: -len(o.body)):
            for b in loop.body:
                inner[b] = loop.head
        return inner

    def within(self, block: int, head: int) -> bool:
        """Whether a block is in a loop; every block is in the whole, whose head is -1."""
        return head == -1 or block in self.loops[head].body

    def child(self, block: int, head: int) -> int:
        """Give the head of the loop right inside `head` that a block is in, -1 for none."""
        at = self.inner[block]
        while at != -1 and at != head and self.loops[at].parent != head:
            at = self.loops[at].parent
        return -1 if at == head else at

    def line(self, block: int) -> int:
        """Give the first source line of a block, 0 where there is none."""
        d = self.graph.decoded
        x = self.graph.blocks[block]
        return next((d.lines[k] for k in range(x.first, x.last + 1) if d.lines[k]), 0)
