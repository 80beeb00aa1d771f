"""How often each edge is likely to be passed, guessed from the shape of the code."""

from __future__ import annotations

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE, Blocks

LOOP = 10.0
COLD = 0.02


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
    for number, edge in enumerate(edges):
        if edge.source != OUTSIDE:
            leaving[edge.source].append(number)
        elif edge.kind == "enter":
            weights[number] = 1.0
            flow[edge.target] += 1.0
    for handler in {h.target for h in graph.decoded.handlers if h is not None}:
        flow[graph.of[handler]] += COLD
    for b, numbers in enumerate(leaving):
        if b in tails:
            flow[b] *= LOOP
        shares = [_share(edges[n].target, b, tails, raising) for n in numbers]
        whole = sum(shares) or 1.0
        for number, share in zip(numbers, shares, strict=True):
            weights[number] = flow[b] * share / whole
            target = edges[number].target
            if target > b:
                flow[target] += weights[number]
    return weights


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
