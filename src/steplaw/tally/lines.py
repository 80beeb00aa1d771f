"""Frequencies of source lines: how often each line was entered."""

from __future__ import annotations

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE
from steplaw.tally.snapshot import CodeCounts

_INLINE = ("<listcomp>", "<setcomp>", "<dictcomp>")


def line_counts(counts: CodeCounts) -> dict[int, tuple[int, int]]:
    """Give frequency and steps of the lines of one code object.

    Parameters
    ----------
    counts : CodeCounts
        Exact counts of the code object.

    Returns
    -------
    dict of int to (int, int)
        Frequency and steps by line number. A line is entered from another line, from outside or
        by a jump back; waiting in a `yield from` or an `await` and resuming are neither. A
        comprehension is part of the line that it stands on, whether or not the interpreter gives
        it a frame of its own.
    """
    graph = counts.probed.graph
    lines = graph.decoded.lines
    frequency: dict[int, int] = {}
    steps: dict[int, int] = {}
    first_line: list[int] = []
    last_line: list[int] = []
    for block in graph.blocks:
        current = first = 0
        for k in range(block.first + block.setup, block.last + 1):
            n, line = counts.instructions[k], lines[k]
            if not line:
                line = current
            if line and n:
                steps[line] = steps.get(line, 0) + n
            if line != current:
                if current:
                    frequency[line] = frequency.get(line, 0) + n
                else:
                    first = line
                current = line
        first_line.append(first)
        last_line.append(current)
    waiting = {b for b, x in enumerate(graph.blocks) if graph.decoded.ops[x.last] == isa.SEND}
    own = counts.probed.original.co_name not in _INLINE
    for edge, n in zip(graph.edges, counts.edges, strict=True):
        if not n or edge.target == OUTSIDE:
            continue
        line = first_line[edge.target]
        if edge.source == OUTSIDE:
            entered = own and edge.target == counts.start
        else:
            back = edge.source >= edge.target and edge.target not in waiting
            entered = back or line != last_line[edge.source]
        if entered and line:
            frequency[line] = frequency.get(line, 0) + n
    for (k, block_number), n in counts.caught.items():
        if block_number >= 0:
            line = first_line[block_number]
            if line and line != lines[k]:
                frequency[line] = frequency.get(line, 0) + n
    return {line: (frequency.get(line, 0), n) for line, n in steps.items()}
