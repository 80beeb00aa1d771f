"""The instructions of one code object, written anew with its probes and recorders.

Fresh exceptions leave a block in its middle. A recorder at each handler, and one more table entry
around the whole body, keep the instruction that was left in a dictionary: the interpreter pushes
its place where the table asks for it. A recorder makes no call, so that nothing comes between, and
costs nothing while nothing is raised.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from itertools import repeat

from steplaw.flow import isa
from steplaw.flow.blocks import Blocks
from steplaw.flow.ranges import RangeLoop
from steplaw.tally.assemble import Assembly, Cover
from steplaw.tally.fused import unsafe_pairs
from steplaw.tally.placement import Unplaceable
from steplaw.tally.trips import ADD, FALSE_JUMP, Trips, TripWriter
from steplaw.tally.watching import Watching

_OP = isa.OPMAP
#: What takes a probe's iterator and item off the stack: END_FOR of 3.12 takes both.
_DROP = (isa.END_FOR,) if isa.VERSION == (3, 12) else (_OP["POP_TOP"], _OP["POP_TOP"])


def returns_constant(graph: Blocks, b: int) -> int | None:
    """Give where a block begins to return a constant, None if it does not end so."""
    ops, block = graph.decoded.ops, graph.blocks[b]
    if ops[block.last] == _OP.get("RETURN_CONST"):
        return block.last
    begins = block.last - 1
    if begins < block.first + block.setup or ops[block.last] != _OP["RETURN_VALUE"]:
        return None
    return begins if ops[begins] == _OP["LOAD_CONST"] else None


class Writer:
    """Writes one code object.

    Parameters
    ----------
    graph : Blocks
        Its flow graph.
    consts : tuple
        Its constants, nested code objects already in their probed form.
    probes : mapping of int to iterator
        The probe of each probed edge.
    counted : iterable of (RangeLoop, Trips)
        Loops whose trip count takes the place of a probe.
    left : dict
        Where recorders count the code units that fresh exceptions left from.
    watched : bool
        Whether operands are looked at, for the native ledger.

    Attributes
    ----------
    consts, names : list
        Constants and names of the new code object.
    base : int
        Items that the probe of a call leaves at the bottom of the stack.
    """

    def __init__(
        self,
        graph: Blocks,
        consts: tuple[object, ...],
        probes: Mapping[int, object],
        counted: Iterable[tuple[RangeLoop, Trips]],
        left: dict[int, int],
        watched: bool = False,
    ) -> None:
        self.graph = graph
        self.decoded = graph.decoded
        self.out = Assembly()
        self.consts = list(consts)
        self.names = list(self.decoded.code.co_names)
        n = len(graph.blocks)
        # Labels: b for block b, n + b for the recorder before handler block b, 2n for the recorder
        # around the body, and what `label` gives.
        self._outer_label = 2 * n
        self._last_label = 2 * n
        self._stubs: list[tuple[int, int, int]] = []
        self._late: list[int] = []
        self._handlers = {h.target: h for h in self.decoded.handlers if h is not None}
        self._first_resume = self.decoded.ops.index(isa.RESUME)
        self._start = graph.of[self._first_resume]
        self._apart = unsafe_pairs(graph)
        self._left = self.const(repeat(left))
        self._numbers = self.const(0), self.const(1)
        self._firsts: list[tuple[int, int]] = []
        loops = list(counted)
        whole = {loop.edge for loop, _ in loops}
        self._probe_const = {n: self.const(it) for n, it in probes.items() if n not in whole}
        self._at_start: int | None = None
        self._place()
        self.base = 0 if self._at_start is None else 2
        self._loops = [TripWriter(loop, trips, self) for loop, trips in loops]
        self._calls = {w.loop.call: w for w in self._loops if not w.whole}
        self._iterators = {w.loop.iterator: w for w in self._loops if not w.whole}
        self._ready = {w.loop.load: w for w in self._loops if w.whole}
        self._unwritten = {
            k for w in self._ready.values() for k in range(w.loop.load, w.loop.iterator)
        }
        self._inside = self._loops_by_block()
        self._jumped_back_to = {
            graph.of[target]
            for op, target in zip(self.decoded.ops, self.decoded.targets, strict=True)
            if op in isa.CHECKED_JUMPS and isa.CHECKS_BEHIND_JUMP
        }
        self.watching = Watching(self) if watched else None

    @property
    def range_calls(self) -> set[int]:
        """The instructions that call `range` for a loop whose passes are known from it."""
        return {
            k
            for writer in self._loops
            for k in range(
                writer.loop.load if writer.whole else writer.loop.call, writer.loop.iterator
            )
        }

    def const(self, value: object) -> int:
        """Add a constant and give its number."""
        self.consts.append(value)
        return len(self.consts) - 1

    def name(self, name: str) -> int:
        """Give the number of a name, added if need be."""
        if name not in self.names:
            self.names.append(name)
        return self.names.index(name)

    def label(self) -> int:
        """Give a new label."""
        self._last_label += 1
        return self._last_label

    def _loops_by_block(self) -> dict[int, list[TripWriter]]:
        """Give the counted loops around each block, the innermost first."""
        inside: dict[int, list[TripWriter]] = {}
        for writer in sorted(self._loops, key=lambda w: len(w.loop.body)):
            for b in writer.loop.body:
                inside.setdefault(b, []).append(writer)
        return inside

    def _place(self) -> None:
        """Sort the probed edges by the place where their probe goes."""
        n = len(self.graph.blocks)
        inflow = self.graph.inflow()
        self._head: list[list[int]] = [[] for _ in range(n)]
        self._tail: list[list[int]] = [[] for _ in range(n)]
        self._after: list[list[int]] = [[] for _ in range(n)]
        self._land: dict[int, int] = {}
        self._returns: dict[int | None, int] = {}
        self._stub_of: dict[int, int] = {}
        for number in self._probe_const:
            edge = self.graph.edges[number]
            if edge.kind == "enter" and edge.target == self._start:
                self._at_start = number
            elif edge.kind == "enter":
                self._head[edge.target].append(number)
            elif edge.kind == "leave" and returns_constant(self.graph, edge.source) is not None:
                self._returns[returns_constant(self.graph, edge.source)] = number
            elif edge.kind in ("leave", "raise", "goto"):
                self._tail[edge.source].append(number)
            elif edge.kind == "fall":
                self._after[edge.source].append(number)
            elif edge.kind == "land":
                self._land[edge.target] = number
            elif inflow[edge.target] == 1:
                self._head[edge.target].append(number)
            else:
                self._stub_of[edge.source] = number
        self._landings: dict[int, int] = {}
        for edge in self.graph.edges:
            if edge.kind == "land":
                self._landings[edge.target] = self.label()

    def _cover(self, k: int) -> Cover | None:
        """Give where an exception of an original instruction goes."""
        op = self.decoded.ops[k]
        return self._cover_in(k, self.graph.of[k], op in isa.ALWAYS_RAISE or op in isa.MAY_RERAISE)

    def _cover_in(self, k: int, b: int, quiet: bool) -> Cover | None:
        """Give where the handler of instruction `k` is reached from block `b`."""
        handler = self.decoded.handlers[k]
        target: Cover | None
        if handler is not None:
            block = self.graph.of[handler.target]
            label = block if quiet else len(self.graph.blocks) + block
            target = label, handler.depth + self.base, handler.lasti or not quiet
        elif quiet or k < self._first_resume:
            block, target = -1, None
        else:
            block, target = -1, (self._outer_label, self.base, True)
        for writer in reversed(self._inside.get(b, ())):
            if block not in writer.loop.body:
                target = writer.leaving(target)
        return target

    def write(self) -> Assembly:
        """Write all of it and settle its layout."""
        graph = self.graph
        for b, block in enumerate(graph.blocks):
            if block.first in self._handlers:
                if self._falls_into(b):
                    self._late.append(b)
                else:
                    self._record_for(b)
            if b in self._landings:
                if self._falls_into(b):
                    raise Unplaceable("a block falls into the target of SEND")
                self.out.mark(self._landings[b])
                if b in self._land:
                    self._probe(self._land[b], None)
            if b in self._jumped_back_to:
                self.out.emit(_OP["NOP"], cover=self._cover_in(block.first - 1, b, False))
            self.out.mark(b)
            self._block(b)
        for label, number, source in self._stubs:
            self._stub(label, number, source)
        if self.watching is not None:
            self.watching.late()
        # Outer loops last: what leaves an inner one may go on to the way out of an outer one.
        for writer in sorted(self._loops, key=lambda w: len(w.loop.body)):
            writer.late(self._cover(writer.loop.call))
        for b in self._late:
            self._record_for(b)
            self.out.emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=b)
        self.out.mark(self._outer_label)
        self._recorder()
        self.out.emit(_OP["RERAISE"], 1)
        for first, again in self._firsts:
            self._first_time(first, again)
        self.out.layout()
        return self.out

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
            if k in self._returns:
                self._leave_behind(self._returns[k], cover)
            if k in self._ready:
                self._ready[k].ready(cover)
            if k in self._unwritten:
                continue
            if k in self._calls:
                self._calls[k].guard(cover)
            if d.ops[k] == isa.YIELD_VALUE and k and d.ops[k - 1] == isa.SEND:
                self._landing(k - 1)
            if k in self._apart:
                out.emit(_OP["NOP"], cover=cover)
            if self.watching is not None:
                self.watching.before(k, cover)
            jump = d.targets[k]
            if jump >= 0:
                if b in self._stub_of:
                    label = self.label()
                    self._stubs.append((label, self._stub_of[b], b))
                else:
                    label = self.graph.of[jump]
                out.emit(d.ops[k], 0, jump=label, origin=k, cover=cover)
            elif self.watching is None:
                out.emit(d.ops[k], d.args[k], origin=k, cover=cover)
            else:
                self.watching.write(k, cover)
            if k + 1 in self._iterators:
                self._iterators[k + 1].entered(cover)
        if head > block.last:
            self._enter(b)
            self._probes(self._head[b], self._cover(block.last))
        self.fall_from(b)

    def fall_from(self, b: int) -> None:
        """Write the probes between a block and the next."""
        self._probes(self._after[b], self._cover(self.graph.blocks[b].last))

    def _landing(self, send: int) -> None:
        """Write, right before YIELD_VALUE, the distance that 3.11 moves a frame on by a throw."""
        landing = self._landings.get(self.graph.of[self.decoded.targets[send]])
        if landing is not None:
            self.out.emit(_OP["NOP"], jump=landing)

    def _enter(self, b: int) -> None:
        """Write the probe of a call: what it leaves on the stack stays there until the return."""
        if b == self._start and self._at_start is not None:
            self._leave_behind(self._at_start, None)

    def _leave_behind(self, number: int, cover: Cover | None) -> None:
        """Write a probe that does not clear up: the return does, with all of the frame."""
        self.out.emit(_OP["LOAD_CONST"], self._probe_const[number], cover=cover)
        self.out.emit(isa.FOR_ITER, 0, cover=cover)

    def _probes(self, numbers: list[int], cover: Cover | None) -> None:
        for number in numbers:
            self._probe(number, cover)

    def _probe(self, number: int, cover: Cover | None) -> None:
        self.pass_probe(self._probe_const[number], cover)

    def pass_probe(self, place: int, cover: Cover | None = None) -> None:
        """Write a probe whose iterator is a constant."""
        self.out.emit(_OP["LOAD_CONST"], place, cover=cover)
        self.out.emit(isa.FOR_ITER, 0, cover=cover)
        for op in _DROP:
            self.out.emit(op, cover=cover)

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
        if self.decoded.ops[last] in isa.CHECKED_JUMPS:
            self.out.emit(_OP["JUMP_BACKWARD"], jump=target, origin=last, cover=self._cover(last))
        else:
            self.out.emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=target)

    def _record_for(self, b: int) -> None:
        """Write the recorder before a handler, which finds the stack as it expects it."""
        self.out.mark(len(self.graph.blocks) + b)
        self._recorder()
        if not self._handlers[self.graph.blocks[b].first].lasti:
            self.out.emit(_OP["SWAP"], 2)
            self.out.emit(_OP["POP_TOP"])

    def _recorder(self) -> None:
        """Write what counts the place that lies below the exception on top of the stack.

        The dictionary comes out of an iterator, since a constant must have a hash. A place that
        is not in it yet is put there out of line: nothing is called.
        """
        emit, first, again = self.out.emit, self.label(), self.label()
        self._firsts.append((first, again))
        emit(_OP["LOAD_CONST"], self._left)
        emit(isa.FOR_ITER)
        emit(_OP["SWAP"], 2)
        emit(_OP["POP_TOP"])
        emit(_OP["COPY"], 3)
        emit(_OP["COPY"], 2)
        emit(_OP["CONTAINS_OP"])
        emit(FALSE_JUMP, jump=first)
        self.out.mark(again)
        emit(_OP["COPY"], 1)
        emit(_OP["COPY"], 4)
        emit(_OP["BINARY_SUBSCR"])
        emit(_OP["LOAD_CONST"], self._numbers[1])
        emit(_OP["BINARY_OP"], ADD)
        emit(_OP["SWAP"], 2)
        emit(_OP["COPY"], 4)
        emit(_OP["STORE_SUBSCR"])

    def _first_time(self, label: int, again: int) -> None:
        """Write what puts a place into the dictionary on top of the stack."""
        emit = self.out.emit
        self.out.mark(label)
        emit(_OP["LOAD_CONST"], self._numbers[0])
        emit(_OP["COPY"], 2)
        emit(_OP["COPY"], 5)
        emit(_OP["STORE_SUBSCR"])
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=again)

    def push(self, place: int) -> None:
        """Write what puts a constant on the stack to be called."""
        if isa.VERSION >= (3, 13):
            self.out.emit(_OP["LOAD_CONST"], place)
            self.out.emit(_OP["PUSH_NULL"])
        else:
            self.out.emit(_OP["PUSH_NULL"])
            self.out.emit(_OP["LOAD_CONST"], place)

    def call(self, arguments: int, origin: int = -1, cover: Cover | None = None) -> None:
        """Write a call."""
        if isa.PRECALL >= 0:
            self.out.emit(isa.PRECALL, arguments, origin=origin, cover=cover)
        self.out.emit(_OP["CALL"], arguments, origin=origin, cover=cover)
