"""Loops over a `range` whose passes follow from the length of the range at their entry."""

from __future__ import annotations

from dataclasses import dataclass

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE, Blocks
from steplaw.flow.effects import begins, depths, takes_and_gives

_LOAD_GLOBAL, _LOAD_CONST, _CALL, _GET_ITER = (
    isa.OPMAP[name] for name in ("LOAD_GLOBAL", "LOAD_CONST", "CALL", "GET_ITER")
)
#: Longest range of constants whose length is taken for its passes.
_LONGEST = 1 << 40


#: What instructions of handlers take from the stack and give to it.
_IN_HANDLERS = {
    isa.OPMAP[name]: effect
    for name, effect in (
        ("PUSH_EXC_INFO", (1, 2)),
        ("CHECK_EXC_MATCH", (1, 1)),
        ("COPY", (0, 1)),
        ("POP_EXCEPT", (1, 0)),
        ("POP_TOP", (1, 0)),
        ("STORE_FAST", (1, 0)),
    )
} | {op: (1, 0) for op in isa.BRANCH if "POP_JUMP" in isa.OPNAME[op]}


@dataclass(frozen=True, slots=True)
class RangeLoop:
    """A `for` over a call of `range` that is left at its end or by an exception alone.

    Parameters
    ----------
    head : int
        The block with its FOR_ITER.
    body : frozenset of int
        The blocks of the loop, its head included.
    call : int
        The instruction that begins the call of `range` (PRECALL on 3.11, otherwise CALL).
    depth : int
        Stack depth in the loop, its iterator included.
    edge, entry : int
        The edges from FOR_ITER into the loop and from outside to FOR_ITER.
    load : int
        The instruction that loads `range`.
    constant : range or None
        What is called for, where all its arguments are constants.
    """

    head: int
    body: frozenset[int]
    call: int
    depth: int
    edge: int
    entry: int
    load: int
    constant: range | None

    @property
    def iterator(self) -> int:
        """The GET_ITER behind the call."""
        return self.call + (2 if isa.PRECALL >= 0 else 1)


def range_loops(graph: Blocks) -> list[RangeLoop]:
    """Find the loops over a range that need no probe inside.

    Parameters
    ----------
    graph : Blocks
        The flow graph.

    Returns
    -------
    list of RangeLoop
        In the order of the code.
    """
    if "range" not in graph.decoded.code.co_names:
        return []
    heads = [
        (b, found)
        for b, block in enumerate(graph.blocks)
        if graph.decoded.ops[block.last] == isa.FOR_ITER and block.first == block.last
        for found in [_range_call(graph, b)]
        if found is not None
    ]
    if not heads:
        return []
    depth, reached = depths(graph), _reached(graph)
    loops = []
    for head, (load, call) in heads:
        level = depth[head]
        body = None if level is None else _body(graph, head, depth, level, reached)
        if body is None or level is None or not _closed(graph, head, body, reached):
            continue
        if not _lets_go(graph, body, level):
            continue
        edge = next(n for n, e in enumerate(graph.edges) if e.source == head and e.kind == "fall")
        entry = next(
            n for n, e in enumerate(graph.edges) if e.target == head and e.source == head - 1
        )
        constant = _constant(graph, load, call)
        loops.append(RangeLoop(head, body, call, level, edge, entry, load, constant))
    return loops


def _range_call(graph: Blocks, head: int) -> tuple[int, int] | None:
    """Give what loads `range` right before a loop and what begins its call, if it is one."""
    d = graph.decoded
    get_iter = graph.blocks[head].first - 1
    call = get_iter - 1
    if call < 1 or d.ops[get_iter] != _GET_ITER or d.ops[call] != _CALL:
        return None
    if graph.of[call] != graph.of[get_iter] or graph.of[call] != head - 1:
        return None
    start = call - 1 if isa.PRECALL >= 0 else call
    first = begins(d, graph.blocks[head - 1].first, start, d.args[call]) if d.args[call] else start
    if first is None or first < 1:
        return None
    load = first - 1
    named = d.ops[load] == _LOAD_GLOBAL and d.args[load] & 1
    if named and d.code.co_names[d.args[load] >> 1] == "range":
        return load, start
    return None


def _constant(graph: Blocks, load: int, call: int) -> range | None:
    """Give the range that is called for, None if it is not the same each time."""
    d = graph.decoded
    given = [d.code.co_consts[d.args[k]] for k in range(load + 1, call) if d.ops[k] == _LOAD_CONST]
    if len(given) != call - load - 1 or any(type(value) is not int for value in given):
        return None
    try:
        made = range(*given)
        return made if 0 <= len(made) <= _LONGEST else None
    except (TypeError, ValueError, OverflowError):
        return None


def _body(
    graph: Blocks, head: int, depth: list[int | None], level: int, reached: frozenset[int]
) -> frozenset[int] | None:
    """Give the blocks that lead back to a loop's head without passing it, None for no such loop."""
    before: list[set[int]] = [set() for _ in graph.blocks]
    for edge in graph.edges:
        if edge.source in reached and edge.target >= 0:
            before[edge.target].add(edge.source)
    for k, b in enumerate(graph.of):
        handler = graph.handler_block(k)
        if handler >= 0 and b in reached:
            before[handler].add(b)
    entries = [b for b in before[head] if b < head]
    if entries != [head - 1] or any(
        e.target == head and e.source == head - 1 and e.kind != "fall" for e in graph.edges
    ):
        return None
    body = {head}
    todo = [b for b in before[head] if b > head]
    while todo:
        b = todo.pop()
        if b not in body:
            if b < head:
                return None
            body.add(b)
            todo.extend(before[b])
    keeping = {b for b, d in enumerate(depth) if d is not None and _keeps(graph, b, d, level)}
    for entry in graph.decoded.handlers:
        if entry is not None and entry.depth < level:
            keeping.discard(graph.of[entry.target])
    _add_raising(graph, head, body, before, keeping)
    return frozenset(body)


def _reached(graph: Blocks) -> frozenset[int]:
    """Give the blocks that something leads to, handled exceptions included.

    Compilers leave others behind, as the end of an empty ``except``.
    """
    after: list[set[int]] = [set() for _ in graph.blocks]
    todo = []
    for edge in graph.edges:
        if edge.source == OUTSIDE:
            todo.append(edge.target)
        elif edge.target >= 0:
            after[edge.source].add(edge.target)
    for k, b in enumerate(graph.of):
        handler = graph.handler_block(k)
        if handler >= 0 and b >= 0:
            after[b].add(handler)
    reached: set[int] = set()
    while todo:
        b = todo.pop()
        if b not in reached:
            reached.add(b)
            todo.extend(after[b])
    return frozenset(reached)


def _add_raising(
    graph: Blocks, head: int, body: set[int], before: list[set[int]], keeping: set[int]
) -> None:
    """Add the blocks that can only be reached from the loop and can only raise in the end."""
    after: list[set[int]] = [set() for _ in graph.blocks]
    ends: set[int] = set()
    for edge in graph.edges:
        if edge.source >= 0 and edge.kind not in ("raise", "pass"):
            after[edge.source].add(edge.target)
        elif edge.source >= 0:
            ends.add(edge.source)
    done = {e.target for e in graph.edges if e.source == head and e.kind == "branch"}
    while True:
        more = {
            b
            for b in keeping
            if b not in body
            and b not in done
            and before[b]
            and before[b] <= body | {b}
            and after[b] <= body
            and (after[b] or b in ends)
        }
        if not more:
            break
        body |= more


def _keeps(graph: Blocks, b: int, depth: int, level: int) -> bool:
    """Whether a block leaves the lowest `level` items of the stack where they are."""
    d, block = graph.decoded, graph.blocks[b]
    for k in range(block.first, block.last + 1):
        op = d.ops[k]
        effect = _IN_HANDLERS.get(op) or takes_and_gives(op, d.args[k])
        if op in isa.ALWAYS_RAISE:
            effect = 1, 0
        if effect is None or depth - effect[0] < level:
            return False
        depth += effect[1] - effect[0]
    return True


def _closed(graph: Blocks, head: int, body: frozenset[int], reached: frozenset[int]) -> bool:
    """Whether a loop is left at its head or by an exception alone, and never suspended."""
    for edge in graph.edges:
        if edge.source == OUTSIDE and edge.target in body:
            return False
        leaves = edge.source in body and edge.target not in body
        if leaves and edge.source != head and edge.kind not in ("raise", "pass"):
            return False
        if edge.target in body and edge.source in reached - body and edge.target != head:
            return False
    return len(body) > 1


def _lets_go(graph: Blocks, body: frozenset[int], level: int) -> bool:
    """Whether an exception that leaves a loop takes the iterator off the stack."""
    return all(
        handler is None or handler.depth < level or graph.of[handler.target] in body
        for k, handler in enumerate(graph.decoded.handlers)
        if graph.of[k] in body
    )
