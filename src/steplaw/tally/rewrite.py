"""Probes set into a code object.

A probe is an endless iterator of the standard library, kept as a constant and asked for one item:
``LOAD_CONST it; FOR_ITER never; POP_TOP; POP_TOP``. `operator.length_hint` reads how often it was
passed. It needs no variable, no call and no flush, so exceptions, generators and recursion lose
nothing.

Fresh exceptions leave a block in its middle. A recorder at each handler, and one more table entry
around the whole body, keep the instruction that was left (`tb_lasti`) in a dictionary; it runs in
C alone and costs nothing while nothing is raised.
"""

from __future__ import annotations

import sys
from collections import _count_elements  # type: ignore[attr-defined]
from functools import partial
from itertools import repeat
from operator import attrgetter, length_hint
from types import CodeType

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE, Blocks
from steplaw.flow.decode import Decoded, Handler
from steplaw.flow.weights import edge_weights
from steplaw.tally.assemble import Assembly, Cover
from steplaw.tally.fused import unsafe_pairs
from steplaw.tally.placement import Placement, Unplaceable

FULL = sys.maxsize
_LASTI = attrgetter("tb_lasti")
_TRACEBACK = BaseException.__dict__["__traceback__"].__get__
_OP = isa.OPMAP
_EXTRA_STACK = 10
#: What takes a probe's iterator and item off the stack: END_FOR of 3.12 takes both.
_DROP = (isa.END_FOR,) if isa.VERSION == (3, 12) else (_OP["POP_TOP"], _OP["POP_TOP"])


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
    iterators : list
        The probes, in the order of ``placement.probed``.
    left : dict of int to int
        Byte offset in `code` of instructions that raised, with how often.
    origins : list of int
        Original instruction by code unit of `code`.
    """

    __slots__ = ("code", "graph", "iterators", "left", "original", "origins", "placement")

    def __init__(self, original: CodeType, consts: tuple[object, ...]) -> None:
        self.original = original
        self.graph = Blocks(Decoded(original))
        self.placement = Placement(self.graph, _costs(self.graph))
        self.left: dict[int, int] = {}
        self.iterators = [repeat(None, FULL) for _ in self.placement.probed]
        writer = _Writer(self, consts)
        writer.write()
        assembly = writer.out
        assembly.layout()
        self.origins = assembly.origin_by_unit()
        self.code = original.replace(
            co_code=assembly.code_bytes(),
            co_consts=writer.consts(),
            co_stacksize=original.co_stacksize + _EXTRA_STACK,
            co_linetable=assembly.location_bytes(original, self.graph.decoded.starts),
            co_exceptiontable=assembly.exception_bytes(),
        )

    def passes(self) -> list[int]:
        """Give the passes of every probe so far."""
        return [FULL - length_hint(it) for it in self.iterators]


def _costs(graph: Blocks) -> list[float]:
    """Give the likely cost of a probe on every edge: how often it is passed, by its length."""
    start = graph.of[graph.decoded.ops.index(isa.RESUME)]
    return [
        weight * (0.5 if edge.kind == "enter" and edge.target == start else 1.0)
        for edge, weight in zip(graph.edges, edge_weights(graph), strict=True)
    ]


class _Writer:
    """Writes the instructions of one code object with its probes and recorders."""

    def __init__(self, probed: Probed, consts: tuple[object, ...]) -> None:
        self.graph = probed.graph
        self.decoded = probed.graph.decoded
        self.out = Assembly()
        self._consts = list(consts)
        self._probe_const = {
            number: self._const(it)
            for number, it in zip(probed.placement.probed, probed.iterators, strict=True)
        }
        self._record = partial(_count_elements, probed.left)
        self._record_consts: tuple[int, int, int] | None = None
        n = len(self.graph.blocks)
        self._stub_label = 2 * n + 1
        self._outer_label = 2 * n
        self._stubs: list[tuple[int, int, int]] = []
        self._late: list[int] = []
        self._handlers = {h.target: h for h in self.decoded.handlers if h is not None}
        self._in = [0] * n
        for edge in self.graph.edges:
            if edge.target >= 0:
                self._in[edge.target] += 1
        for target in self._handlers:
            self._in[self.graph.of[target]] += 1
        self._first_resume = self.decoded.ops.index(isa.RESUME)
        self._apart = unsafe_pairs(self.graph)
        self._start = self.graph.of[self._first_resume]
        self._at_start: int | None = None
        self._place()
        #: What the probe of a call leaves at the bottom of the stack.
        self._base = 0 if self._at_start is None else 2

    def consts(self) -> tuple[object, ...]:
        return tuple(self._consts)

    def _const(self, value: object) -> int:
        self._consts.append(value)
        return len(self._consts) - 1

    def _place(self) -> None:
        """Sort the probed edges by the place where their probe goes."""
        n = len(self.graph.blocks)
        self._head: list[list[int]] = [[] for _ in range(n)]
        self._tail: list[list[int]] = [[] for _ in range(n)]
        self._after: list[list[int]] = [[] for _ in range(n)]
        self._land: dict[int, int] = {}
        self._stub_of: dict[int, int] = {}
        for number in self._probe_const:
            edge = self.graph.edges[number]
            if edge.kind == "enter" and edge.target == self._start:
                self._at_start = number
            elif edge.kind == "enter":
                self._head[edge.target].append(number)
            elif edge.kind in ("leave", "raise", "goto"):
                self._tail[edge.source].append(number)
            elif edge.kind == "fall":
                self._after[edge.source].append(number)
            elif edge.kind == "land":
                self._land[edge.target] = number
            elif self._in[edge.target] == 1:
                self._head[edge.target].append(number)
            else:
                self._stub_of[edge.source] = number
        self._landings: dict[int, int] = {}
        for edge in self.graph.edges:
            if edge.kind == "land":
                self._landings[edge.target] = self._new_label()

    def _new_label(self) -> int:
        self._stub_label += 1
        return self._stub_label

    # labels: block b -> b; recorder before handler block b -> n + b; outer -> 2n; then stubs
    def _cover(self, k: int) -> Cover | None:
        handler: Handler | None = self.decoded.handlers[k]
        op = self.decoded.ops[k]
        quiet = op in isa.ALWAYS_RAISE or op in isa.MAY_RERAISE
        if handler is None:
            if quiet or k < self._first_resume:
                return None
            return self._outer_label, self._base, True
        block = self.graph.of[handler.target]
        label = block if quiet else len(self.graph.blocks) + block
        return label, handler.depth + self._base, handler.lasti

    def write(self) -> None:
        graph = self.graph
        n = len(graph.blocks)
        for b, block in enumerate(graph.blocks):
            if block.first in self._handlers:
                if self._falls_into(b):
                    self._late.append(b)
                else:
                    self.out.mark(n + b)
                    self._recorder()
            if b in self._landings:
                if self._falls_into(b):
                    raise Unplaceable("a block falls into the target of SEND")
                self.out.mark(self._landings[b])
                if b in self._land:
                    self._probe(self._land[b], None)
            self.out.mark(b)
            self._block(b)
        for label, number, source in self._stubs:
            self._stub(label, number, source)
        for b in self._late:
            self.out.mark(n + b)
            self._recorder()
            self.out.emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=b)
        self.out.mark(self._outer_label)
        self._recorder()
        self.out.emit(_OP["RERAISE"], 1)

    def _falls_into(self, b: int) -> bool:
        if b == 0:
            return False
        last = self.decoded.ops[self.graph.blocks[b - 1].last]
        return last not in isa.GOTO | isa.RETURN | isa.ALWAYS_RAISE

    def _block(self, b: int) -> None:
        block, d, out = self.graph.blocks[b], self.decoded, self.out
        head = block.first + block.setup
        for k in range(block.first, block.last + 1):
            cover = self._cover(k)
            if k == head:
                self._enter(b)
                self._probes(self._head[b], cover)
            if k == block.last:
                self._probes(self._tail[b], cover)
            if k in self._apart:
                out.emit(_OP["NOP"], cover=cover)
            jump = d.targets[k]
            if jump >= 0:
                if b in self._stub_of:
                    label = self._new_label()
                    self._stubs.append((label, self._stub_of[b], b))
                else:
                    label = self.graph.of[jump]
                out.emit(d.ops[k], 0, jump=label, origin=k, cover=cover)
            else:
                out.emit(d.ops[k], d.args[k], origin=k, cover=cover)
        if head > block.last:
            self._enter(b)
            self._probes(self._head[b], self._cover(block.last))
        self._probes(self._after[b], self._cover(block.last))
        if d.ops[block.last] == isa.SEND and isa.THROW_JUMPS_SEND:
            target = self.graph.of[d.targets[block.last]]
            if target in self._landings:
                out.emit(_OP["NOP"], jump=self._landings[target])

    def _enter(self, b: int) -> None:
        """Write the probe of a call: what it leaves on the stack stays there until the return."""
        if b == self._start and self._at_start is not None:
            self.out.emit(_OP["LOAD_CONST"], self._probe_const[self._at_start])
            self.out.emit(isa.FOR_ITER, 0)

    def _probes(self, numbers: list[int], cover: Cover | None) -> None:
        for number in numbers:
            self._probe(number, cover)

    def _probe(self, number: int, cover: Cover | None) -> None:
        out = self.out
        out.emit(_OP["LOAD_CONST"], self._probe_const[number], cover=cover)
        out.emit(isa.FOR_ITER, 0, cover=cover)
        for op in _DROP:
            out.emit(op, cover=cover)

    def _stub(self, label: int, number: int, source: int) -> None:
        """Write a probe out of line, for a jump to a block that others reach as well."""
        self.out.mark(label)
        last = self.graph.blocks[source].last
        if self.decoded.ops[last] == isa.FOR_ITER:
            first = self.decoded.targets[last]
            for k in range(first, first + isa.FOR_ITER_SKIPS):
                self.out.emit(self.decoded.ops[k], self.decoded.args[k])
        self._probe(number, None)
        target = self.graph.edges[number].target
        self.out.emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=target)

    def _recorder(self) -> None:
        """Write what keeps the place of a fresh exception, the exception on top of the stack."""
        if self._record_consts is None:
            self._record_consts = (
                self._const(self._record),
                self._const(_LASTI),
                self._const(_TRACEBACK),
            )
        emit = self.out.emit
        for const in self._record_consts:
            if isa.VERSION >= (3, 13):
                emit(_OP["LOAD_CONST"], const)
                emit(_OP["PUSH_NULL"])
            else:
                emit(_OP["PUSH_NULL"])
                emit(_OP["LOAD_CONST"], const)
        emit(_OP["COPY"], 7)
        self._call()
        self._call()
        emit(_OP["BUILD_TUPLE"], 1)
        self._call()
        emit(_OP["POP_TOP"])

    def _call(self) -> None:
        if "PRECALL" in _OP:
            self.out.emit(_OP["PRECALL"], 1)
        self.out.emit(_OP["CALL"], 1)


__all__ = ["FULL", "OUTSIDE", "Probed"]
