"""The true worst of small sizes, found by running every input."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass

from steplaw.costs import reader
from steplaw.host.asking import Run, RunFailed
from steplaw.worst.counting import Counts, Given, values_of
from steplaw.worst.kinds import Kind

#: Inputs of one size from which on no larger size is tried.
INPUTS_MOST = 30_000


@dataclass(frozen=True, slots=True)
class TrueWorst:
    """The worst of all inputs of a size.

    Parameters
    ----------
    n : int
        The size.
    inputs : int
        How many inputs there are.
    value : int
        The largest figure.
    text : str
        An input that has it, for a person to read.
    feed : str
        An expression that makes it.
    """

    n: int
    inputs: int
    value: int
    text: str
    feed: str


def every_order(counts: Counts, kinds: Sequence[Kind], most: int) -> list[TrueWorst]:
    """Run every order of the elements, up to a size, where an order is all that varies.

    Parameters
    ----------
    counts : Counts
        Counts inputs.
    kinds : sequence of Kind
        What each argument is.
    most : int
        The largest size.
    """
    out = []
    for n in range(most + 1):
        base = counts.drawn(n, 1)[0]
        place = next(p for p, k in enumerate(kinds) if k.name == "permutation")
        items = sorted(values_of(base)[place])
        inputs = [
            Given(
                (*base.args[:place], repr(kinds[place].container(p)), *base.args[place + 1 :]),
                base.kwargs,
            )
            for p in itertools.permutations(items)
        ]
        values = counts.of(inputs)
        known = [(v, -i) for i, v in enumerate(values) if v is not None]
        if len(known) < len(inputs):
            continue  # an input that fails leaves the worst unknown
        value, i = max(known)
        out.append(TrueWorst(n, len(inputs), value, inputs[-i].text, inputs[-i].text))
    return out


def every_input(counts: Counts, every: str, most: int, file: str) -> list[TrueWorst]:
    """Run every input that ``--every`` gives, up to a size.

    Parameters
    ----------
    counts : Counts
        Its runner's feed gives every input.
    every : str
        The expression.
    most : int
        The largest size.
    file : str
        The subject's file, for a figure that is a line.
    """
    out: list[TrueWorst] = []
    for n in range(most + 1):
        try:
            runs = counts.runner.every({counts.name: n})
        except RunFailed:
            if out:
                break
            continue
        if not runs:
            continue
        inputs = sum(run.times for run in runs)
        counts.runs += inputs
        worst = max(runs, key=lambda run: (figure_of(run, counts.figure, file), -run.draw))
        feed = f"next(islice({every}, {worst.draw}, None))"
        out.append(TrueWorst(n, inputs, figure_of(worst, counts.figure, file), worst.input, feed))
        if inputs > INPUTS_MOST:
            break
    return out


def figure_of(run: Run, figure: str, file: str) -> int:
    """Read a figure of a run; ``line:N`` is a line of the file."""
    if figure.startswith("line:"):
        line = int(figure[5:])
        return sum(x.frequency for x in run.tally.lines if x.line == line and x.file == file)
    return int(reader(figure)(run.tally))
