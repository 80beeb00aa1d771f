"""Following a code object block by block with symbolic values and symbolic frequencies."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import lru_cache
from types import CodeType
from typing import Any

from steplaw.flow import isa, trips
from steplaw.flow.blocks import OUTSIDE
from steplaw.flow.decode import Decoded
from steplaw.flow.ledger import Ledger
from steplaw.flow.loops import CAUGHT, CaughtBlocks, Nest
from steplaw.flow.module import Module, all_codes
from steplaw.flow.names import Beyond, Names
from steplaw.flow.pieces import (
    NOTHING,
    ONCE,
    Pieces,
    restricted,
    simplified,
    sum_over,
)
from steplaw.flow.poly import CONST_ONE, ZERO, Poly
from steplaw.flow.symbolic import Machine, Stop
from steplaw.flow.values import (
    Extent,
    Function,
    Num,
    Obj,
    State,
    Test,
    Value,
    Ways,
)

MOST_DEPTH = 6
MOST_CALLS = 120
_TRUE_JUMPS = frozenset(
    op for name, op in isa.OPMAP.items() if "JUMP" in name and name.endswith(("_IF_TRUE", "_NONE"))
) | frozenset(op for name, op in isa.OPMAP.items() if name == "JUMP_IF_TRUE_OR_POP")
_NONE_JUMPS = frozenset(
    op for name, op in isa.OPMAP.items() if "JUMP" in name and name.endswith("NONE")
)
_KEEPING = frozenset(
    isa.OPMAP[n] for n in ("JUMP_IF_TRUE_OR_POP", "JUMP_IF_FALSE_OR_POP") if n in isa.OPMAP
)


@dataclass(frozen=True, slots=True)
class Weight:
    """How often a place of the code is reached.

    Parameters
    ----------
    local : Pieces
        Times for each combination of passes through the loops around it.
    total : Pieces
        Times in all, beside those, as far as they cannot be told by pass.
    """

    local: Pieces
    total: Pieces

    def __add__(self, other: Weight) -> Weight:
        return Weight(self.local + other.local, self.total + other.total)

    def __bool__(self) -> bool:
        return bool(self.local) or bool(self.total)


Flow = tuple[int, int, State, Weight | None]


@dataclass(slots=True)
class Frame:
    """One run of a code object."""

    graph: CaughtBlocks
    nest: Nest
    depth: int
    record: bool
    partial: bool = False
    returns: list[tuple[Value, State, Weight | None]] = field(default_factory=list)
    yields: list[tuple[State, Weight | None, tuple[str, ...]]] = field(default_factory=list)
    stays: dict[int, dict[int, Ways | None]] = field(default_factory=dict)
    forced: dict[int, list[int]] = field(default_factory=dict)
    leaving: dict[int, Pieces] = field(default_factory=dict)
    staying: dict[int, list[Poly]] = field(default_factory=dict)


def nest_of(code: CodeType) -> Nest:
    """Give the loops of a code object."""
    return _nest_of(code, code.co_filename)


@lru_cache(maxsize=512)
def _nest_of(code: CodeType, file: str) -> Nest:
    """Give the loops of a code object; equal ones of two files are not one."""
    return Nest(CaughtBlocks(Decoded(code)))


class Walk(Machine):
    """Follows a code object block by block, loops as wholes, calls of known code inlined.

    Parameters
    ----------
    names : Names
        The names of the derivation.
    hints : dict of str to str
        What arguments are, as far as known.
    module : Module or None
        The module around the subject.
    """

    def __init__(self, names: Names, hints: dict[str, str], module: Module | None) -> None:
        super().__init__(names, hints)
        self.ledger = Ledger(names)
        self.changing: dict[tuple[CodeType, int], set[tuple[str, Any]]] = {}
        self.active: list[CodeType] = []
        self.calls = 0
        self.recursive: list[dict[str, object]] = []
        self.frame: Frame
        self.weight: Weight | None = None
        self._sums: dict[tuple[Pieces, tuple[str, ...]], Pieces] = {}
        if module is not None:
            self.globals, self.bound = module.functions, module.bound

    # -- whole functions -------------------------------------------------------------------

    def run(
        self,
        function: Function,
        args: list[Value],
        state: State,
        weight: Weight | None,
        record: bool,
        partial: bool = False,
    ) -> tuple[Value, State, Frame]:
        """Run the code of a function on symbolic arguments.

        Raises
        ------
        Stop
            If the function cannot be derived at all.
        """
        code = function.code
        nest = nest_of(code)
        self._check(nest)
        kept = (
            getattr(self, "frame", None),
            getattr(self, "decoded", None),
            self.weight,
            self.line,
            self.at,
            self.keywords,
        )
        frame = Frame(nest.graph, nest, len(self.active), record, partial)
        self.frame, self.decoded = frame, nest.graph.decoded
        self.active.append(code)
        inner = state.copy()
        inner.stack, inner.local = [], dict(enumerate(args))
        self.enter(inner, function)
        if code.co_flags & 0x20:
            inner.stack = [self.other(inner, "")]
        try:
            entry = [(-1, nest.start, inner, weight)]
            if record and weight is not None:
                found = self.ledger.frequencies(nest.graph)
                found.calls = found.calls + self.sum(weight)
            for k in range(nest.graph.blocks[nest.start].first):
                self._prologue(inner, k)
            self.region(-1, nest.start, entry)
        finally:
            self.active.pop()
            frame_kept, decoded, self.weight, self.line, self.at, self.keywords = kept
            if frame_kept is not None and decoded is not None:
                self.frame, self.decoded = frame_kept, decoded
        if not frame.returns:
            raise Stop("it never returns as far as can be seen", code.co_firstlineno)
        value, after = self._returned(frame)
        return value, after, frame

    def _prologue(self, state: State, k: int) -> None:
        """Run what stands before the first block, as that of a generator does."""
        if isa.OPNAME[self.decoded.ops[k]] in ("MAKE_CELL", "COPY_FREE_VARS"):
            self.step(state, k)

    def _check(self, nest: Nest) -> None:
        d = nest.graph.decoded
        if not nest.reducible:
            raise Stop("a loop with two ways in", d.code.co_firstlineno)

    def _returned(self, frame: Frame) -> tuple[Value, State]:
        flows = [(-1, -1, s, w) for _, s, w in frame.returns]
        for flow, (value, _, _) in zip(flows, frame.returns, strict=True):
            flow[2].stack = [value]
        state = self.merged(flows, 0)
        return state.stack[0], state

    # -- regions ---------------------------------------------------------------------------

    def region(self, head: int, start: int, entries: list[Flow]) -> tuple[list[Flow], list[Flow]]:
        """Run the blocks of a loop, or of the whole where `head` is -1, once each.

        Returns
        -------
        tuple of list of Flow
            What goes back to the head, and what leaves.
        """
        nest = self.frame.nest
        pending: dict[int, list[Flow]] = {start: entries}
        back: list[Flow] = []
        leaving: list[Flow] = []
        for b in nest.order:
            if b not in pending:
                continue
            child = nest.child(b, head)
            if child not in (-1, b):
                continue
            flows = pending.pop(b)
            state = self.merged(flows, nest.line(b))
            weight = self.added(flows)
            if child == b and b != head:
                outs = self.loop(b, state, weight)
            else:
                outs = self.block(b, state, weight)
            for flow in outs:
                target = flow[1]
                if target == head and head != -1:
                    back.append(flow)
                elif target != OUTSIDE and nest.within(target, head):
                    pending.setdefault(target, []).append(flow)
                else:
                    leaving.append(flow)
        return back, leaving

    def merged(self, flows: list[Flow], line: int) -> State:
        """Give what is known where several ways meet."""
        first = flows[0][2]
        if len(flows) == 1:
            return first.copy()
        states = [f[2] for f in flows]
        out = first.copy()
        out.known = frozenset.intersection(*(s.known for s in states))
        out.loose = frozenset().union(*(s.loose for s in states))
        for k in range(len(out.stack)):
            out.stack[k] = self._choice(out, [s.stack[k] for s in states], "")
        for slot in set().union(*(s.local for s in states)):
            values = [s.local.get(slot) for s in states]
            chosen = self._choice(out, values, self._slot_text(slot))
            if chosen is None:
                out.local.pop(slot, None)
            else:
                out.local[slot] = chosen
        for key in set().union(*(s.cells for s in states)):
            chosen = self._choice(out, [s.cells.get(key) for s in states], "")
            if chosen is not None:
                out.cells[key] = chosen
        self.line = line or self.line
        for key in set().union(*(s.extents for s in states)):
            extents = {s.extents.get(key, self.default_extent(key)) for s in states}
            if len(extents) == 1:
                out.extents[key] = extents.pop()
            elif key in self.born:
                found = [s.extents[key] for s in states if key in s.extents]
                if len(set(found)) == 1:
                    out.extents[key] = found[0]
                else:
                    self._unsettle(out, key, "it")
            else:
                self._unsettle(out, key, "it")
        for key in set().union(*(s.epochs for s in states)):
            if len({s.epochs.get(key, "") for s in states}) > 1:
                out.epochs[key] = self.fresh("e")
        return out

    def added(self, flows: list[Flow]) -> Weight | None:
        """Add up how often several ways are gone."""
        if len(flows) == 1:
            return flows[0][3]
        local, total = NOTHING, NOTHING
        for flow in flows:
            if flow[3] is None:
                return None
            local, total = local + flow[3].local, total + flow[3].total
        names = self.names
        return Weight(simplified(names, local), simplified(names, total))

    def _slot_text(self, slot: int) -> str:
        try:
            return self.slot(slot)
        except IndexError:
            return ""

    def _choice(self, state: State, values: list[Value | None], text: str) -> Value:
        first = values[0]
        if all(v == first for v in values):
            return first  # type: ignore[return-value]
        keys: set[str] = set()
        for v in values:
            if isinstance(v, Obj):
                keys |= {v.key, *v.alias}
            elif v is not None:
                self.loosen(state, v)
        out = self.other(state, text)
        return Obj(out.key, text, "other", frozenset(keys))

    # -- blocks ----------------------------------------------------------------------------

    def block(self, b: int, state: State, weight: Weight | None) -> list[Flow]:
        """Run one block; give the ways out of it."""
        frame = self.frame
        block = frame.graph.blocks[b]
        self.weight = weight
        state = state.copy()
        self._watch_handlers(b)
        self._record_block(b, weight)
        for k in range(block.first, block.last):
            self.step(state, k)
        ways = [w for w in frame.nest.ways[b] if w[0] != CAUGHT]
        caught = [w for w in frame.nest.ways[b] if w[0] == CAUGHT]
        before = state.copy() if caught else state
        k = block.last
        op = self.decoded.ops[k]
        self.line = self.decoded.lines[k] or self.line
        thrown: list[Flow]
        if op in isa.BRANCH:
            thrown = []
            if caught:
                weight, thrown = self._caught(k, caught[0][1], before, state, weight)
            flows = [*self._branch(b, ways, op, state, weight), *thrown]
        else:
            if op in isa.RETURN:
                value = self._return_value(state, k)
                frame.returns.append((value, state, weight))
            elif op == isa.YIELD_VALUE:
                frame.yields.append((state.copy(), weight, self.passes))
                self.loosen(state, state.stack[-1])
                self.step(state, k)
                self.disturb(state)
                weight = self._resumed(b, weight)
            elif op not in isa.ALWAYS_RAISE:
                self.step(state, k)
            thrown = []
            if caught:
                weight, thrown = self._caught(k, caught[0][1], before, state, weight)
            flows = [*((n, t, state, weight) for n, t in ways), *thrown]
        self._record_edges(flows)
        return flows

    def _caught(
        self, k: int, handler: int, before: State, after: State, weight: Weight | None
    ) -> tuple[Weight | None, list[Flow]]:
        """Let an exception of an instruction go to its handler; give what is left to go on."""
        place = self.decoded.handlers[k]
        assert place is not None
        states = [before.copy(), after.copy()]
        for s in states:
            del s.stack[place.depth :]
        line = self.line
        state = self.merged([(-1, -1, s, None) for s in states], line)
        state.stack += [self.other(state, "") for _ in range(place.lasti + 1)]
        if weight is None:
            return weight, [(CAUGHT, handler, state, None)]
        if self.decoded.ops[k] in isa.ALWAYS_RAISE:
            thrown, rest = weight, Weight(NOTHING, NOTHING)
        else:
            found = self.ledger.unknown(
                line, "an exception is caught", self.sum(weight), self.decoded.code
            )
            thrown, rest = Weight(NOTHING, found), Weight(weight.local, weight.total - found)
        if self.frame.record:
            kept = self.ledger.frequencies(self.frame.graph).caught
            kept[k, handler] = kept.get((k, handler), NOTHING) + self.sum(thrown)
        return rest, [(CAUGHT, handler, state, thrown)]

    def _return_value(self, state: State, k: int) -> Value:
        if isa.OPNAME[self.decoded.ops[k]] == "RETURN_CONST":
            return self.constant(self.decoded.code.co_consts[self.decoded.args[k]])
        return state.stack[-1]

    def _watch_handlers(self, b: int) -> None:
        """Note that nothing is taken to be raised under a ``with`` statement."""
        graph, nest = self.frame.graph, self.frame.nest
        block = graph.blocks[b]
        for k in range(block.first, block.last + 1):
            handler = graph.handler_block(k)
            if handler != OUTSIDE and handler not in nest.raising and nest.is_with(handler):
                self.line = self.decoded.lines[k] or self.line
                self.assume("no exception is raised under a `with` statement")

    def _record_block(self, b: int, weight: Weight | None) -> None:
        if self.frame.record and weight is not None:
            found = self.ledger.frequencies(self.frame.graph)
            found.blocks[b] = found.blocks[b] + self.sum(weight)

    def _record_edges(self, flows: list[Flow]) -> None:
        if not self.frame.record:
            return
        found = self.ledger.frequencies(self.frame.graph)
        for number, _, _, weight in flows:
            if weight is not None and number >= 0:
                found.edges[number] = found.edges[number] + self.sum(weight)

    def sum(self, weight: Weight) -> Pieces:
        """Give how often a place is reached in all."""
        key = (weight.local, self.passes)
        local = self._sums.get(key)
        if local is None:
            local = weight.local
            for name in reversed(self.passes):
                local = sum_over(self.names, local, name)
            self._sums[key] = local
        return local + weight.total

    # -- branches --------------------------------------------------------------------------

    def _branch(
        self, b: int, ways: list[tuple[int, int]], op: int, state: State, weight: Weight | None
    ) -> list[Flow]:
        test, sides = self._tested(op, state)
        out: list[tuple[int, int, State, Ways | None]] = []
        for number, target in ways:
            jumps = self.frame.graph.edges[number].kind == "branch"
            side = sides[1 if jumps else 0]
            true = (op in _TRUE_JUMPS) == jumps
            ways_in = None if test is None else (test.true if true else test.false)
            after = self._after(side, ways_in)
            if after is not None:
                out.append((number, target, after, ways_in))
        self.frame.stays[b] = {n: w for n, _, _, w in out}
        if len(out) < 2 or weight is None:
            return [(n, t, s, weight) for n, t, s, _ in out]
        return self._shared_out(b, out, weight)

    def _tested(self, op: int, state: State) -> tuple[Test | None, tuple[State, State]]:
        """Give the test of a branch, and the state when it falls through and when it jumps."""
        fall, jump = state.copy(), state.copy()
        if op == isa.FOR_ITER:
            iterator = state.stack[-1]
            jump.stack.pop()
            kept = self.items.get(iterator.key) if isinstance(iterator, Obj) else None
            extent = state.extents.get(iterator.key) if isinstance(iterator, Obj) else None
            fall.stack.append(
                kept.at(ZERO) if kept and kept.at and extent else self.other(fall, "")
            )
            if isinstance(iterator, Obj):
                self.consume(fall, iterator, whole=False)
                fall.extents[iterator.key] = None
            if extent is None:
                return None, (fall, jump)
            first = trips.at(self.names, extent, ZERO)
            from steplaw.flow.objects import complement

            # FOR_ITER jumps when there is no item, and is no "true" jump.
            return Test((first,), complement(first)), (fall, jump)
        if op == isa.SEND:
            if isa.VERSION < (3, 12):
                jump.stack.pop()
            return None, (fall, jump)
        value = state.stack[-1]
        fall.stack.pop()
        if op not in _KEEPING:
            jump.stack.pop()
        if op in _NONE_JUMPS:
            none = self._is_none(value)
            name = isa.OPNAME[op]
            if none is None:
                return None, (fall, jump)
            true = none != ("NOT_NONE" in name)
            return (Test(((),), ()) if true else Test((), ((),))), (fall, jump)
        return self.truth(state, value), (fall, jump)

    def _after(self, state: State, ways: Ways | None) -> State | None:
        """Give the state behind a branch, None where it cannot be taken."""
        if ways is None:
            return state
        possible = [
            w for w in ways if not self.names.impossible([*self._relevant(state.known, w), *w])
        ]
        if not possible:
            return None
        if len(possible) == 1:
            state.known |= {c for c in possible[0] if c.constant is None}
        return state

    def _relevant(self, known: frozenset[Poly], ways: tuple[Poly, ...]) -> list[Poly]:
        return list(known)

    def _shared_out(
        self, b: int, out: list[tuple[int, int, State, Ways | None]], weight: Weight
    ) -> list[Flow]:
        """Share the weight of a block out among its ways."""
        exact = self._decided(out, weight)
        if exact is not None:
            return exact
        (n1, t1, s1, _), (n2, t2, s2, _) = out
        whole = self.sum(weight)
        stays = self.frame.staying.get(n1) or self.frame.staying.get(n2)
        if stays is not None and not weight.total:
            on = restricted(self.names, weight.local, stays)
            parts = [Weight(on, NOTHING), Weight(weight.local - on, NOTHING)]
            if n1 in self.frame.staying:
                parts.reverse()
            return [(n1, t1, s1, parts[0]), (n2, t2, s2, parts[1])]
        forced = self.frame.forced.get(n1) is not None, self.frame.forced.get(n2) is not None
        if any(forced):
            last = 0 if forced[0] else 1
            number = (n1, n2)[last]
            given = self.frame.leaving.get(number)
            if given is not None:
                first, second = Weight(NOTHING, given), Weight(weight.local, weight.total - given)
                if last == 1:
                    first, second = second, first
                return [(n1, t1, s1, first), (n2, t2, s2, second)]
        fall_first = self.frame.graph.edges[n1].kind != "branch"
        op = self.decoded.ops[self.frame.graph.blocks[b].last]
        true_is_first = fall_first != (op in _TRUE_JUMPS)
        number = n1 if true_is_first else n2
        most = whole
        if weight.total:
            most = self.cap(s1 if true_is_first else s2) or whole
        u = self.ledger.unknown(
            self.line,
            _told(op),
            most,
            self.decoded.code,
            edge=number,
        )
        taken, rest = Weight(NOTHING, u), Weight(weight.local, weight.total - u)
        if not true_is_first:
            taken, rest = rest, taken
        return [(n1, t1, s1, taken), (n2, t2, s2, rest)]

    def _decided(
        self, out: list[tuple[int, int, State, Ways | None]], weight: Weight
    ) -> list[Flow] | None:
        """Share a weight out exactly, None where the test is not known or has no formula."""
        names = self.names
        flows: list[Flow] = []
        try:
            for number, target, state, ways in out:
                if ways is None or not self._settled(p for w in ways for p in w):
                    return None
                local, total = NOTHING, NOTHING
                for conditions in ways:
                    local = local + restricted(names, weight.local, conditions)
                    if weight.total:
                        if names.scope(conditions):
                            return None
                        total = total + restricted(names, weight.total, conditions)
                found = Weight(local, total)
                self.sum(found)
                flows.append((number, target, state, found))
        except Beyond:
            return None
        return flows

    def _settled(self, polys: object) -> bool:
        """Whether polynomials hold only sizes from outside and numbers of passes."""
        return all(self._is_settled(n) for p in polys for n in p.names)  # type: ignore[attr-defined]

    def _is_settled(self, name: str) -> bool:
        known = self.names.known[name]
        if known.parts:
            return self._settled(known.parts)
        if known.kind == "pass":
            return name in self.passes
        return not known.scope & set(self.passes)

    def cap(self, state: State) -> Pieces | None:
        """Give the most times that a place can be reached: once for each pass."""
        conditions = [c for c in state.known if self._settled([c])]
        try:
            found = restricted(self.names, ONCE, conditions)
            for name in reversed(self.passes):
                found = sum_over(self.names, found, name)
        except Beyond:
            return None
        return found

    # -- loops -----------------------------------------------------------------------------

    def loop(self, head: int, state: State, weight: Weight | None) -> list[Flow]:
        """Run a loop as a whole; give the ways out of it."""
        from steplaw.flow.forloop import ForLoop
        from steplaw.flow.whileloop import WhileLoop

        block = self.frame.graph.blocks[head]
        op = self.decoded.ops[block.last]
        if op == isa.FOR_ITER and block.first == block.last:
            return ForLoop(self, head, state, weight).run()
        return WhileLoop(self, head, state, weight).run()

    # -- calls -----------------------------------------------------------------------------

    def inline(self, state: State, function: Function, args: list[Value]) -> Value:
        """Run a function's code in place of a call of it."""
        line, name = self.line, function.code.co_name
        if function.code in self.active:
            if self.frame.record:
                self._recurs(function, args, line)
            return self._not_followed(state, function, args)
        self.calls += 1
        if len(self.active) > MOST_DEPTH or self.calls > MOST_CALLS:
            if self.frame.record:
                self.ledger.stop(line, f"calls are nested too deeply at {name}")
            return self._not_followed(state, function, args)
        try:
            value, after, _ = self.run(function, args, state, self.weight, self.frame.record)
        except Stop as stop:
            if self.frame.record:
                self.ledger.stop(stop.line, stop.reason)
            return self._not_followed(state, function, args)
        self._take_over(state, after)
        return value

    def _not_followed(self, state: State, function: Function, args: list[Value]) -> Value:
        """Leave a call out; what is known of its code does not hold for all of its calls."""
        if self.frame.record:
            self.ledger.unsure.update(all_codes(function.code))
        return self.call_unseen(state, function, args)

    def _recurs(self, function: Function, args: list[Value], line: int) -> None:
        """State a call of a function by itself."""
        code = function.code
        told = [self._told_argument(a) for a in args]
        text = f"{code.co_name}({', '.join(code.co_varnames[: len(args)])})"
        text += f" calls {code.co_name}({', '.join(told)})"
        self.ledger.stop(line, f"{code.co_name} calls itself")
        found = {"function": code.co_qualname, "line": line, "text": text}
        if found not in self.recursive:
            self.recursive.append(found)

    def _told_argument(self, value: Value) -> str:
        if isinstance(value, Num):
            return self.names.written(value.poly)
        if isinstance(value, Obj) and value.key in self._lazy:
            return self.names.written(self._lazy[value.key])
        return value.text or "..." if isinstance(value, Obj) else "..."

    def _take_over(self, state: State, after: State) -> None:
        state.cells, state.extents = after.cells, after.extents
        state.loose, state.epochs = after.loose, after.epochs

    def yields(self, state: State, function: Function, args: list[Value]) -> Extent | None:
        """Give how many items a generator gives, where a single loop gives one in each pass."""
        if function.code in self.active or len(self.active) > MOST_DEPTH:
            return None
        outer, ledger, sums = self.passes, self.ledger, self._sums
        self.ledger, self._sums = Ledger(self.names), {}
        try:
            settled = [c for c in state.known if self._settled([c])]
            weight = Weight(restricted(self.names, ONCE, settled), NOTHING)
            _, _, frame = self.run(function, args, state.copy(), weight, False)
        except (Stop, Beyond):
            return None
        finally:
            self.ledger, self._sums, self.passes = ledger, sums, outer
        if len(frame.yields) != 1:
            return None
        _, found, passes = frame.yields[0]
        if found is None or found.total or len(passes) != len(outer) + 1:
            return None
        if len(found.local.parts) != 1 or found.local.parts[0].poly != CONST_ONE:
            return None
        here = passes[-1]
        conditions = tuple(c for c in found.local.parts[0].when if here in c.names)
        around = {c for part in weight.local.parts for c in part.when}
        if not conditions or found.local.parts[0].when - set(conditions) - around:
            return None
        if not all(trips.is_falling(self.names, c, here) for c in conditions):
            return None
        return tuple(c.put({here: trips.PLACE}) for c in conditions)

    def generate(
        self, state: State, function: Function, args: list[Value], whole: bool, begun: bool = True
    ) -> None:
        """Run a generator's code for all of its items, or for some."""
        if whole or not self.frame.record or self.weight is None:
            self.inline(state, function, args)
            return
        weight = self.weight
        if not begun:
            most = self.sum(weight)
            code = function.code
            started = self.ledger.unknown(self.line, f"{code.co_name} is begun", most, code)
            weight = Weight(NOTHING, started)
        try:
            _, after, _ = self.run(function, args, state, weight, True, partial=True)
        except Stop as stop:
            self.ledger.stop(stop.line, stop.reason)
            self.ledger.unsure.update(all_codes(function.code))
            self.unseen[self.line, function.code.co_name] = None
            return
        self._take_over(state, after)

    def _resumed(self, b: int, weight: Weight | None) -> Weight | None:
        """Give how often a generator goes on behind a yield."""
        if weight is None or not self.frame.partial:
            return weight
        code, most = self.decoded.code, self.sum(weight)
        again = self.ledger.unknown(self.line, "another item is asked for", most, code)
        self._closed_at(b, most - again)
        return Weight(NOTHING, again)

    def _closed_at(self, b: int, waiting: Pieces) -> None:
        """Count what runs where a generator that waits at a yield is closed."""
        graph = self.frame.graph
        handler = graph.handler_block(graph.blocks[b].last)
        if handler == OUTSIDE:
            return
        closed = self.ledger.unknown(
            self.line, "it is closed before its end", waiting, self.decoded.code
        )
        self._record_block(handler, Weight(NOTHING, closed))
        if self.decoded.ops[graph.blocks[handler].last] not in isa.ALWAYS_RAISE:
            self.ledger.stop(self.line, "what runs when the generator is closed is not followed")


def _told(op: int) -> str:
    return "an item is there" if op == isa.FOR_ITER else "the condition holds"
