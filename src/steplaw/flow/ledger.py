"""What a derivation has found: frequencies by block and edge, unknowns, and what stopped it."""

from __future__ import annotations

from dataclasses import dataclass, field
from types import CodeType

from steplaw.flow.loops import CaughtBlocks
from steplaw.flow.names import Names
from steplaw.flow.pieces import NOTHING, Pieces
from steplaw.flow.poly import var


@dataclass(slots=True)
class Frequencies:
    """Frequencies in one code object, all its calls together.

    Parameters
    ----------
    graph : CaughtBlocks
        Its flow graph.
    blocks, edges : list of Pieces
        By number.
    calls : Pieces
        How often it is begun.
    caught : dict of (int, int) to Pieces
        Exceptions by the instruction that raised and the block that took them.
    """

    graph: CaughtBlocks
    blocks: list[Pieces]
    edges: list[Pieces]
    calls: Pieces = NOTHING
    caught: dict[tuple[int, int], Pieces] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Unknown:
    """A count that depends on the data.

    Parameters
    ----------
    name : str
        Its name in formulas.
    line : int
        Source line.
    what : str
        What it counts.
    most : Pieces or None
        Upper bound; None where nothing bounds it. The lower bound is 0.
    code : CodeType
        Where it is counted.
    edge, block : int
        The edge or the block whose frequency it is, -1 for none.
    """

    name: str
    line: int
    what: str
    most: Pieces | None
    code: CodeType
    edge: int = -1
    block: int = -1


@dataclass(frozen=True, slots=True)
class Stopped:
    """Something that could not be derived, and why."""

    line: int
    reason: str


@dataclass(slots=True)
class Ledger:
    """All that a derivation has found.

    Attributes
    ----------
    codes : dict of CodeType to Frequencies
        In the order of first mention.
    unknowns : list of Unknown
        In the order of the code.
    stopped : list of Stopped
        What could not be derived.
    unsure : set of CodeType
        Code of which some calls are not followed: nothing is claimed for it.
    """

    names: Names
    codes: dict[CodeType, Frequencies] = field(default_factory=dict)
    unknowns: list[Unknown] = field(default_factory=list)
    stopped: list[Stopped] = field(default_factory=list)
    unsure: set[CodeType] = field(default_factory=set)

    def frequencies(self, graph: CaughtBlocks) -> Frequencies:
        """Give the place where a code object's frequencies are added up."""
        code = graph.decoded.code
        if code not in self.codes:
            self.codes[code] = Frequencies(
                graph, [NOTHING] * len(graph.blocks), [NOTHING] * len(graph.edges)
            )
        return self.codes[code]

    def unknown(
        self,
        line: int,
        what: str,
        most: Pieces | None,
        code: CodeType,
        *,
        edge: int = -1,
        block: int = -1,
    ) -> Pieces:
        """Add a count that depends on the data; give it as a count."""
        from steplaw.flow.pieces import constant

        number = len(self.unknowns) + 1
        while f"u{number}" in self.names.known:
            number += 1
        name = f"u{number}"
        (key,) = self.names.add("unknown", what, name).names
        self.unknowns.append(Unknown(key, line, what, most, code, edge, block))
        return constant(var(key))

    def stop(self, line: int, reason: str) -> None:
        """Note what could not be derived."""
        found = Stopped(line, reason)
        if found not in self.stopped:
            self.stopped.append(found)
