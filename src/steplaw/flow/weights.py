"""How often each edge is likely to be passed, guessed from the shape of the code.

Which way a branch is likely to go follows the rules of Ball & Larus (Branch prediction for free,
PLDI 1993); the odds are our own.
"""

from __future__ import annotations

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE, Blocks

LOOP = 10.0
COLD = 0.02
#: Odds that a test for equality fails, that a value is not None, and that what is awaited is
#: ready at once.
UNEQUAL, NOT_NONE, READY = 0.7, 0.6, 0.9

_COMPARE, _TO_BOOL = isa.OPMAP["COMPARE_OP"], isa.OPMAP.get("TO_BOOL", -1)
_AWAITS = frozenset(isa.OPMAP[name] for name in ("GET_AWAITABLE", "GET_ANEXT"))
#: COMPARE_OP keeps the comparison above some bits (CPython's opcode.h).
_SHIFT = {(3, 11): 0, (3, 12): 4}.get(isa.VERSION, 5)
_EQUAL, _NOT_EQUAL = 2, 3


def edge_weights(graph: Blocks) -> list[float]:
    """Guess the relative frequency of every edge.

    Parameters
    ----------
    graph : Blocks
        The flow graph.

    Returns
    -------
    list of float
        One weight an edge, passed on in the order of the code: a loop multiplies it, a branch
        divides it, a way to a raise or out of a loop gets the small share. Only the cost of
        counting depends on it, never a count.
    """
    edges, ops = graph.edges, graph.decoded.ops
    tails = _loop_tails(graph)
    raising = [ops[block.last] in isa.ALWAYS_RAISE for block in graph.blocks]
    weights = [COLD * COLD] * len(edges)
    leaving: list[list[int]] = [[] for _ in graph.blocks]
    flow = [0.0] * len(graph.blocks)
    begun = graph.of[ops.index(isa.RESUME)]
    resumed: dict[int, int] = {}
    for number, edge in enumerate(edges):
        if edge.source != OUTSIDE:
            leaving[edge.source].append(number)
        elif edge.kind == "enter" and edge.target == begun:
            weights[number] = flow[begun] = 1.0
        elif edge.kind == "enter":
            resumed[edge.target] = number
    for handler in {h.target for h in graph.decoded.handlers if h is not None}:
        flow[graph.of[handler]] += COLD
    for b, numbers in enumerate(leaving):
        if b in tails and not _awaits(graph, b):
            flow[b] *= LOOP
        jumps = _jumps(graph, b)
        shares = [
            _share(edges[n].target, b, tails, raising)
            * (jumps if edges[n].kind == "branch" else 1 - jumps)
            for n in numbers
        ]
        whole = sum(shares) or 1.0
        for number, share in zip(numbers, shares, strict=True):
            weights[number] = flow[b] * share / whole
            target = edges[number].target
            if target > b:
                flow[target] += weights[number]
            elif (
                target == OUTSIDE
                and b + 1 in resumed
                and ops[graph.blocks[b].last] == isa.YIELD_VALUE
            ):
                weights[resumed[b + 1]] = weights[number]
                flow[b + 1] += weights[number]
    return weights


def _jumps(graph: Blocks, b: int) -> float:
    """Give the odds that the jump at the end of a block is made."""
    d, k = graph.decoded, graph.blocks[b].last
    name = isa.OPNAME[d.ops[k]]
    if d.ops[k] == isa.SEND:
        # The other way out of a loop has the small share already.
        return LOOP * READY / (LOOP * READY + 1 - READY) if _awaits(graph, b) else 0.5
    if "_IF_" not in name:
        return 0.5
    if name.endswith("NONE"):
        return NOT_NONE if "NOT" in name else 1 - NOT_NONE
    holds = _holds(graph, k)
    return holds if name.endswith("IF_TRUE") else 1 - holds


def _awaits(graph: Blocks, b: int) -> bool:
    """Whether a block asks an awaited object for its next value."""
    ops, k = graph.decoded.ops, graph.blocks[b].last
    return ops[k] == isa.SEND and k > 1 and ops[k - 2] in _AWAITS


def _holds(graph: Blocks, jump: int) -> float:
    """Give the odds that what a jump tests is true."""
    d, k = graph.decoded, jump - 1
    if k > 0 and d.ops[k] == _TO_BOOL:
        k -= 1
    if k < 0 or d.ops[k] != _COMPARE:
        return 0.5
    return {_EQUAL: 1 - UNEQUAL, _NOT_EQUAL: UNEQUAL}.get(d.args[k] >> _SHIFT, 0.5)


def _loop_tails(graph: Blocks) -> dict[int, int]:
    """Give, for each block that a jump goes back to, the last block that does."""
    tails: dict[int, int] = {}
    for edge in graph.edges:
        if edge.source >= edge.target >= 0:
            tails[edge.target] = max(tails.get(edge.target, 0), edge.source)
    return tails


def _share(target: int, source: int, tails: dict[int, int], raising: list[bool]) -> float:
    if target != OUTSIDE and raising[target]:
        return COLD
    for head, tail in tails.items():
        if head <= source <= tail and not head <= target <= tail:
            return 1 / LOOP
    return 1.0
