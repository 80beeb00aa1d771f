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
        One weight an edge: a loop multiplies it, a branch halves it, a way to a raise or to a
        handler makes it small. Only the cost of counting depends on it, never a count.
    """
    block = _block_weights(graph)
    weights = []
    for edge in graph.edges:
        if edge.source == OUTSIDE:
            weight = block[edge.target] if edge.kind == "enter" else COLD * COLD
        elif edge.target == OUTSIDE or edge.kind in ("raise", "pass"):
            weight = block[edge.source]
        else:
            source, target = block[edge.source], block[edge.target]
            weight = min(source, target)
            if edge.kind == "fall" and graph.decoded.ops[graph.blocks[edge.source].last] in (
                isa.BRANCH - {isa.FOR_ITER}
            ):
                weight *= 0.5
            elif edge.kind == "branch":
                weight *= 0.5 if source <= target else 1.0
        weights.append(weight)
    return weights


def _block_weights(graph: Blocks) -> list[float]:
    n = len(graph.blocks)
    depth = [0] * (n + 1)
    heads: dict[int, int] = {}
    for edge in graph.edges:
        if edge.source >= edge.target >= 0 and edge.kind in ("goto", "branch"):
            heads[edge.target] = max(heads.get(edge.target, 0), edge.source)
    for head, tail in heads.items():
        depth[head] += 1
        depth[tail + 1] -= 1
    weights, level = [], 0
    for b, block in enumerate(graph.blocks):
        level += depth[b]
        weight = LOOP**level
        if graph.decoded.ops[block.last] in isa.ALWAYS_RAISE:
            weight *= COLD
        weights.append(weight)
    for handler in graph.decoded.handlers:
        if handler is not None:
            weights[graph.of[handler.target]] = COLD
    return weights
