"""Which instruction made each item of the operand stack."""

from __future__ import annotations

import opcode
from opcode import stack_effect

from steplaw.flow import isa
from steplaw.flow.blocks import Blocks
from steplaw.flow.effects import depths, takes_and_gives

_SWAP, _COPY = isa.OPMAP["SWAP"], isa.OPMAP["COPY"]
#: Made in more than one way, or by nothing that is known.
UNKNOWN = -1


def stacks(graph: Blocks) -> dict[int, list[int]]:
    """Give, for each instruction that runs, the makers of the stack before it, the top last.

    Parameters
    ----------
    graph : Blocks
        The flow graph.

    Returns
    -------
    dict of int to list of int
        Instruction numbers, `UNKNOWN` where paths differ. Blocks that end before their stack is
        known are left out.
    """
    out: dict[int, list[int]] = {}
    entry: dict[int, list[int]] = {}
    depth = depths(graph)
    after: dict[int, list[tuple[int, bool]]] = {}
    for edge in graph.edges:
        if edge.source >= 0 and edge.target >= 0:
            after.setdefault(edge.source, []).append((edge.target, edge.kind == "branch"))
    for b, block in enumerate(graph.blocks):
        level = depth[b]
        if level is None:
            continue
        stack = entry.get(b)
        if stack is None or len(stack) != level:
            stack = [UNKNOWN] * level
        stack = list(stack)
        for k in range(block.first, block.last + 1):
            out[k] = list(stack)
            if k < block.last:
                _step(graph, k, stack, False)
        for target, jump in after.get(b, ()):
            if target <= b:
                continue
            left = list(stack)
            _step(graph, block.last, left, jump)
            known = entry.get(target)
            if known is None:
                entry[target] = left
            elif len(known) == len(left):
                entry[target] = [x if x == y else UNKNOWN for x, y in zip(known, left, strict=True)]
    return out


def _step(graph: Blocks, k: int, stack: list[int], jump: bool) -> None:
    """Change a stack as an instruction does."""
    d = graph.decoded
    op, arg = d.ops[k], d.args[k]
    if op == _SWAP and arg <= len(stack):
        stack[-1], stack[-arg] = stack[-arg], stack[-1]
        return
    if op == _COPY and arg <= len(stack):
        stack.append(stack[-arg])
        return
    known = takes_and_gives(op, arg)
    if known is None:
        if op == isa.FOR_ITER:
            effect = -1 if jump else 1
        else:
            effect = int(stack_effect(op, arg if op >= opcode.HAVE_ARGUMENT else None, jump=jump))
        takes, gives = (1 - effect, 1) if effect < 0 else (0, effect)
    else:
        takes, gives = known
    del stack[max(len(stack) - takes, 0) :]
    stack.extend([k] * gives)
