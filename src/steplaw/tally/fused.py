"""3.11: pairs of LOAD_FAST that the interpreter may fuse, where the second could be unbound.

3.11 runs some pairs of instructions as one and reports an unbound variable of the second at the
first. A NOP between the two keeps them apart. From 3.12 on the compiler checks such loads by an
instruction of their own.
"""

from __future__ import annotations

from steplaw.flow import isa
from steplaw.flow.blocks import Blocks

_LOAD = isa.OPMAP["LOAD_FAST"]
_STORE = isa.OPMAP["STORE_FAST"]
_DELETE = isa.OPMAP["DELETE_FAST"]
_CONST = isa.OPMAP["LOAD_CONST"]


def unsafe_pairs(graph: Blocks) -> frozenset[int]:
    """Give the instructions before which a NOP must stand.

    Parameters
    ----------
    graph : Blocks
        The flow graph.

    Returns
    -------
    frozenset of int
        Indices of LOAD_FAST instructions that follow another LOAD_FAST or a LOAD_CONST and whose
        variable is not bound on every way there.
    """
    if isa.VERSION != (3, 11):
        return frozenset()
    ops = graph.decoded.ops
    pairs = [
        k for k in range(1, len(ops)) if ops[k] == _LOAD and ops[k - 1] in (_LOAD, _CONST, _STORE)
    ]
    if not pairs:
        return frozenset()
    code = graph.decoded.code
    count = code.co_argcount + code.co_kwonlyargcount
    count += bool(code.co_flags & 4) + bool(code.co_flags & 8)
    arguments = (1 << count) - 1
    if _DELETE not in ops and all(graph.decoded.args[k] < count for k in pairs):
        return frozenset()
    bound = _bound_at_entry(graph, arguments)
    return frozenset(k for k in _unbound_loads(graph, bound) if k in set(pairs))


def _bound_at_entry(graph: Blocks, arguments: int) -> list[int]:
    """Give the variables bound on every way to each block, as bits (a forward must-analysis)."""
    everything = (1 << max(graph.decoded.code.co_nlocals, 1)) - 1
    bound = [everything] * len(graph.blocks)
    successors: list[list[int]] = [[] for _ in graph.blocks]
    for edge in graph.edges:
        if edge.source >= 0 and edge.target >= 0:
            successors[edge.source].append(edge.target)
    # A suspended frame goes on with the next block; a call begins with the arguments.
    for b, block in enumerate(graph.blocks):
        if graph.decoded.ops[block.last] in isa.SUSPEND and b + 1 < len(graph.blocks):
            successors[b].append(b + 1)
    start = next(b for b, block in enumerate(graph.blocks) if block.setup)
    bound[start] = arguments
    todo = [0, start]
    if start:
        bound[0] = arguments
    seen = set(todo)
    while todo:
        b = todo.pop()
        state = bound[b]
        block = graph.blocks[b]
        for k in range(block.first, block.last + 1):
            handler = graph.handler_block(k)
            if handler >= 0 and _meet(bound, handler, state, seen):
                todo.append(handler)
            state = _after(graph, k, state)
        for target in successors[b]:
            if _meet(bound, target, state, seen):
                todo.append(target)
    return bound


def _meet(bound: list[int], block: int, state: int, seen: set[int]) -> bool:
    joined = bound[block] & state
    if joined == bound[block] and block in seen:
        return False
    seen.add(block)
    bound[block] = joined
    return True


def _after(graph: Blocks, k: int, state: int) -> int:
    op, variable = graph.decoded.ops[k], graph.decoded.args[k]
    if op in (_STORE, _LOAD):
        return state | 1 << variable
    if op == _DELETE:
        return state & ~(1 << variable)
    return state


def _unbound_loads(graph: Blocks, bound: list[int]) -> list[int]:
    loads = []
    for b, block in enumerate(graph.blocks):
        state = bound[b]
        for k in range(block.first, block.last + 1):
            if graph.decoded.ops[k] == _LOAD and not state >> graph.decoded.args[k] & 1:
                loads.append(k)
            state = _after(graph, k, state)
    return loads
