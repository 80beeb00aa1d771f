"""The tally: the exact counts of one run."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass
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
class NativeCount:
    """Element visits made in C by one kind of operation on one line.

    Parameters
    ----------
    file : str
        Source file.
    line : int
        Line number.
    operation : str
        What was done.
    times : int
        How often.
    visits : int
        Element visits; at most so many where they are not exact.
    exact : bool
        Whether they are exact.
    """

    file: str
    line: int
    operation: str
    times: int
    visits: int
    exact: bool


@dataclass(frozen=True, slots=True)
class Uncharged:
    """Calls of one C function without a rule on one line.

    Parameters
    ----------
    file : str
        Source file.
    line : int
        Line number.
    operation : str
        What was called.
    times : int
        How often.
    largest : int
        Length of the longest operand.
    """

    file: str
    line: int
    operation: str
    times: int
    largest: int


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
    ledger : tuple of NativeCount, or None
        Element visits made in C; None where operands were not looked at.
    not_charged : tuple of Uncharged
        C calls that no rule is known for.
    """

    steps: int
    opcodes: Mapping[str, int]
    operations: Mapping[str, int]
    functions: tuple[FunctionCount, ...] = ()
    lines: tuple[LineCount, ...] = ()
    notes: tuple[str, ...] = ()
    ledger: tuple[NativeCount, ...] | None = None
    not_charged: tuple[Uncharged, ...] = ()

    @property
    def native(self) -> int | None:
        """All element visits made in C, None where operands were not looked at."""
        return None if self.ledger is None else sum(x.visits for x in self.ledger)

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
            **self._native_json(),
        }

    def _native_json(self) -> dict[str, Any]:
        if self.ledger is None:
            return {}
        return {
            "ledger": [asdict(x) for x in self.ledger],
            "not_charged": [asdict(x) for x in self.not_charged],
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
            ledger=tuple(NativeCount(**x) for x in data["ledger"]) if "ledger" in data else None,
            not_charged=tuple(Uncharged(**x) for x in data.get("not_charged", ())),
        )
