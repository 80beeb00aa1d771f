"""The tally: the exact counts of one run."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True, slots=True)
class FunctionCount:
    """Calls and steps of one function, its callees not included.

    Parameters
    ----------
    file, name : str
        Source file and qualified name.
    line : int
        First line of the function.
    calls : int
        Times the function was entered from its start.
    steps : int
        Steps in the function's own body.
    """

    file: str
    name: str
    line: int
    calls: int
    steps: int


@dataclass(frozen=True, slots=True)
class LineCount:
    """Frequency and steps of one source line.

    Parameters
    ----------
    file : str
        Source file.
    line : int
        Line number.
    frequency : int
        Times the line was entered from another line or by a jump back.
    steps : int
        Steps of the line's own instructions.
    """

    file: str
    line: int
    frequency: int
    steps: int


@dataclass(frozen=True, slots=True)
class Tally:
    """The exact counts of one run.

    Parameters
    ----------
    steps : int
        All executed instructions, callees included.
    opcodes : mapping of str to int
        Steps by opcode name of the running interpreter.
    operations : mapping of str to int
        Steps by operation class, the same on every Python version.
    functions : tuple of FunctionCount
        By function, largest first.
    lines : tuple of LineCount
        By file and line.
    notes : tuple of str
        What keeps the counts from being exact; empty but for threads and generators that were
        under way when counting began or ended.
    """

    steps: int
    opcodes: Mapping[str, int]
    operations: Mapping[str, int]
    functions: tuple[FunctionCount, ...] = ()
    lines: tuple[LineCount, ...] = ()
    notes: tuple[str, ...] = ()

    def as_json(self) -> dict[str, Any]:
        """Give the tally as plain JSON values."""
        return {
            "steps": self.steps,
            "functions": [
                {"file": f.file, "name": f.name, "line": f.line, "calls": f.calls, "steps": f.steps}
                for f in self.functions
            ],
            "opcodes": dict(self.opcodes),
            "operations": dict(self.operations),
            "lines": [
                {"file": x.file, "line": x.line, "frequency": x.frequency, "steps": x.steps}
                for x in self.lines
            ],
            **({"notes": list(self.notes)} if self.notes else {}),
        }

    @classmethod
    def from_json(cls, data: Mapping[str, Any]) -> Tally:
        """Read back what `as_json` gave."""
        return cls(
            steps=data["steps"],
            opcodes=data["opcodes"],
            operations=data["operations"],
            functions=tuple(FunctionCount(**f) for f in data["functions"]),
            lines=tuple(LineCount(**x) for x in data["lines"]),
            notes=tuple(data.get("notes", ())),
        )
