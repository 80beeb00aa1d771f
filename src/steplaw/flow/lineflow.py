"""Frequencies of source lines from those of blocks and edges."""

from __future__ import annotations

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE
from steplaw.flow.ledger import Frequencies
from steplaw.flow.loops import Nest
from steplaw.flow.pieces import NOTHING, Piece, Pieces

_INLINE = ("<listcomp>", "<setcomp>", "<dictcomp>")


def scaled(pieces: Pieces, by: int) -> Pieces:
    """Give a count so many times."""
    return Pieces(tuple(Piece(x.when, x.poly * by) for x in pieces.parts)) if by else NOTHING


def line_frequencies(found: Frequencies) -> dict[int, tuple[Pieces, Pieces]]:
    """Give frequency and steps of the lines of one code object.

    Parameters
    ----------
    found : Frequencies
        Those of its blocks and edges.

    Returns
    -------
    dict of int to (Pieces, Pieces)
        By the same rules as `steplaw.tally.lines.line_counts` has for counts.
    """
    graph = found.graph
    lines = graph.decoded.lines
    frequency: dict[int, Pieces] = {}
    steps: dict[int, Pieces] = {}
    first_line: list[int] = []
    last_line: list[int] = []
    current = 0
    for b, (block, count) in enumerate(zip(graph.blocks, found.blocks, strict=True)):
        first = 0
        current = current if graph.continues[b] else 0
        by_line: dict[int, int] = {}
        for k in range(block.first + block.setup, block.last + 1):
            line = lines[k] or current
            if line:
                by_line[line] = by_line.get(line, 0) + 1
            if line != current:
                if current or graph.continues[b]:
                    frequency[line] = frequency.get(line, NOTHING) + count
                else:
                    first = line
                current = line
        for line, n in by_line.items():
            if count:
                steps[line] = steps.get(line, NOTHING) + scaled(count, n)
        first_line.append(first)
        last_line.append(current)
    ops = graph.decoded.ops
    waiting = {b for b, x in enumerate(graph.blocks) if ops[x.last] == isa.SEND}
    for edge, count in zip(graph.edges, found.edges, strict=True):
        if not count or edge.target == OUTSIDE or edge.source == OUTSIDE:
            continue
        if graph.continues[edge.target] and edge.source == edge.target - 1:
            continue
        line = first_line[edge.target]
        back = edge.source >= edge.target and edge.target not in waiting
        if line and (back or line != last_line[edge.source]):
            frequency[line] = frequency.get(line, NOTHING) + count
    for (k, handler), count in found.caught.items():
        line = first_line[handler]
        if line and line != lines[k]:
            frequency[line] = frequency.get(line, NOTHING) + count
    start = next(b for b, block in enumerate(graph.blocks) if block.setup)
    if graph.decoded.code.co_name not in _INLINE and first_line[start]:
        line = first_line[start]
        frequency[line] = frequency.get(line, NOTHING) + found.calls
    return {line: (frequency.get(line, NOTHING), n) for line, n in steps.items()}


def steps_of(found: Frequencies) -> Pieces:
    """Give the steps of one code object."""
    out = NOTHING
    for block, count in zip(found.graph.blocks, found.blocks, strict=True):
        out = out + scaled(count, block.last + 1 - block.first - block.setup)
    return out


def line_depths(nest: Nest) -> dict[int, int]:
    """Give how many loops of its own function each line is in."""
    out: dict[int, int] = {}
    d = nest.graph.decoded
    for b, block in enumerate(nest.graph.blocks):
        depth, head = 0, nest.inner[b]
        while head != -1:
            depth, head = depth + 1, nest.loops[head].parent
        if head == -1 and depth and d.ops[block.first] == isa.FOR_ITER:
            depth -= 1
        for k in range(block.first + block.setup, block.last + 1):
            if d.lines[k]:
                out[d.lines[k]] = min(out.get(d.lines[k], depth), depth)
    return out
