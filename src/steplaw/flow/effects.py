"""What instructions take from the operand stack and put on it."""

from __future__ import annotations

import opcode
from opcode import stack_effect

from steplaw.flow import isa
from steplaw.flow.blocks import Blocks
from steplaw.flow.decode import Decoded

_OP = isa.OPMAP
_FIXED: dict[int, tuple[int, int]] = {
    _OP[name]: effect
    for names, effect in (
        ("LOAD_CONST LOAD_FAST LOAD_FAST_CHECK LOAD_DEREF LOAD_CLASSDEREF LOAD_NAME", (0, 1)),
        ("PUSH_NULL LOAD_CLOSURE", (0, 1)),
        ("LOAD_FAST_LOAD_FAST", (0, 2)),
        ("UNARY_NEGATIVE UNARY_NOT UNARY_INVERT UNARY_POSITIVE TO_BOOL", (1, 1)),
        ("BINARY_OP BINARY_SUBSCR COMPARE_OP IS_OP CONTAINS_OP", (2, 1)),
        ("NOP PRECALL KW_NAMES", (0, 0)),
    )
    for name in names.split()
    if name in _OP
}
_BUILD = frozenset(_OP[n] for n in ("BUILD_TUPLE", "BUILD_LIST", "BUILD_SET", "BUILD_STRING"))
_CALL, _LOAD_GLOBAL, _LOAD_ATTR = _OP["CALL"], _OP["LOAD_GLOBAL"], _OP["LOAD_ATTR"]
_LOAD_METHOD = _OP.get("LOAD_METHOD", -1)


def takes_and_gives(op: int, arg: int) -> tuple[int, int] | None:
    """Give the items that an instruction takes from the stack and puts on it.

    Returns
    -------
    tuple of int, or None
        None for instructions that are not simple loads, calls or operators.
    """
    fixed = _FIXED.get(op)
    if fixed is not None:
        return fixed
    if op in _BUILD:
        return arg, 1
    if op == _CALL:
        return arg + 2, 1
    if op == _LOAD_GLOBAL:
        return 0, 1 + (arg & 1)
    if op == _LOAD_METHOD:
        return 1, 2
    if op == _LOAD_ATTR:
        return 1, 1 + (arg & 1 if isa.VERSION >= (3, 12) else 0)
    return None


def begins(decoded: Decoded, first: int, end: int, need: int) -> int | None:
    """Find where the top items of the stack begin to be made.

    Parameters
    ----------
    decoded : Decoded
        The instructions.
    first, end : int
        The stretch to look in, `end` not included.
    need : int
        How many items.

    Returns
    -------
    int or None
        The instruction from which on nothing below these items is touched; None if it is not in
        the stretch or something in it is not simple.
    """
    k = end
    while need:
        k -= 1
        if k < first:
            return None
        effect = takes_and_gives(decoded.ops[k], decoded.args[k])
        if effect is None or effect[1] > need:
            return None
        need += effect[0] - effect[1]
    return k


def depths(graph: Blocks) -> list[int | None]:
    """Give the stack depth at the start of every block, None for blocks that never run."""
    d = graph.decoded
    start = next(b for b, block in enumerate(graph.blocks) if block.setup)
    out: list[int | None] = [None] * len(graph.blocks)
    leaving: list[list[tuple[int, bool]]] = [[] for _ in graph.blocks]
    for edge in graph.edges:
        if edge.source >= 0 and edge.target >= 0 and edge.kind in ("fall", "goto", "branch"):
            leaving[edge.source].append((edge.target, edge.kind == "branch"))
    out[start] = 1 if start else 0  # a generator's frame begins with the value that was sent
    todo = [start]
    for handler in {h.target: h for h in d.handlers if h is not None}.values():
        out[graph.of[handler.target]] = handler.depth + handler.lasti + 1
        todo.append(graph.of[handler.target])
    while todo:
        b = todo.pop()
        block, depth = graph.blocks[b], out[b]
        assert depth is not None
        for k in range(block.first, block.last):
            depth += _effect(d, k, False)
        last = d.ops[block.last]
        targets = leaving[b]
        if last == isa.YIELD_VALUE:
            targets = [(b + 1, False)]
        for target, jump in targets:
            if out[target] is None:
                out[target] = depth + _effect(d, block.last, jump)
                todo.append(target)
    return out


def _effect(d: Decoded, k: int, jump: bool) -> int:
    op = d.ops[k]
    if op == isa.FOR_ITER:
        return -1 if jump else 1
    arg = d.args[k] if op >= _HAVE_ARGUMENT else None
    return int(stack_effect(op, arg, jump=jump))


_HAVE_ARGUMENT = opcode.HAVE_ARGUMENT
