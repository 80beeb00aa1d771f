"""The tally of a stretch of running, put together from its code objects."""

from __future__ import annotations

from collections.abc import Sequence

from steplaw.flow import isa
from steplaw.tally.classes import operations
from steplaw.tally.lines import line_counts
from steplaw.tally.model import FunctionCount, LineCount, NativeCount, Tally, Uncharged
from steplaw.tally.snapshot import CodeCounts
from steplaw.toll.ledger import Taken


def tally_of(
    counts: Sequence[CodeCounts], notes: Sequence[str] = (), taken: Taken | None = None
) -> Tally:
    """Add up the counts of all code objects.

    Parameters
    ----------
    counts : sequence of CodeCounts
        One for each code object that ran.
    notes : sequence of str
        What keeps the counts from being exact.
    taken : tuple, optional
        What `Ledger.take` gave for the stretch.

    Returns
    -------
    Tally
        Functions by steps, largest first; lines in order of file and number.
    """
    opcodes: dict[int, int] = {}
    classes: dict[str, int] = {}
    functions: dict[tuple[str, str, int], list[int]] = {}
    lines: dict[tuple[str, int], list[int]] = {}
    for item in counts:
        code, ops = item.probed.original, item.probed.graph.decoded.ops
        steps = 0
        for op, n in zip(ops, item.instructions, strict=True):
            if n:
                opcodes[op] = opcodes.get(op, 0) + n
                steps += n
        for operation, n in operations(item):
            classes[operation] = classes.get(operation, 0) + n
        if steps:
            key = (code.co_filename, code.co_qualname, code.co_firstlineno)
            entry = functions.setdefault(key, [0, 0])
            entry[0] += item.calls
            entry[1] += steps
        for number, (frequency, n) in line_counts(item).items():
            line = lines.setdefault((code.co_filename, number), [0, 0])
            line[0] += frequency
            line[1] += n
    return Tally(
        steps=sum(opcodes.values()),
        opcodes={isa.OPNAME[op]: opcodes[op] for op in sorted(opcodes, key=isa.OPNAME.__getitem__)},
        operations={name: classes[name] for name in sorted(classes)},
        functions=tuple(
            FunctionCount(file, name, line, calls, steps)
            for (file, name, line), (calls, steps) in sorted(
                functions.items(), key=lambda item: (-item[1][1], item[0])
            )
        ),
        lines=tuple(LineCount(file, line, *n) for (file, line), n in sorted(lines.items())),
        notes=tuple(dict.fromkeys(notes)),
        ledger=None if taken is None else tuple(NativeCount(*row) for row in taken[0]),
        not_charged=() if taken is None else tuple(Uncharged(*row) for row in taken[1]),
    )
