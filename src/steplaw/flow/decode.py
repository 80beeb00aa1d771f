"""A code object taken apart: instructions, lines, exception table."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from types import CodeType

from steplaw.flow import isa


@dataclass(frozen=True, slots=True)
class Handler:
    """Where the exception table sends an exception.

    Parameters
    ----------
    target : int
        Index of the handler's first instruction.
    depth : int
        Stack depth to unwind to.
    lasti : bool
        Whether the raising instruction's place is pushed as well.
    """

    target: int
    depth: int
    lasti: bool


class Decoded:
    """The instructions of a code object, EXTENDED_ARG folded in and CACHE left out.

    Attributes
    ----------
    code : CodeType
        The original code object.
    ops, args : list of int
        Opcode and argument by instruction index.
    starts, offsets : list of int
        Code unit where the instruction starts (its first EXTENDED_ARG) and of its opcode.
    targets : list of int
        Index of the jump target as encoded, -1 for none.
    handlers : list of Handler or None
        Handler that covers each instruction.
    lines : list of int
        Source line, 0 where there is none.
    """

    __slots__ = ("args", "code", "handlers", "lines", "offsets", "ops", "starts", "targets")

    def __init__(self, code: CodeType) -> None:
        self.code = code
        self.ops: list[int] = []
        self.args: list[int] = []
        self.starts: list[int] = []
        self.offsets: list[int] = []
        units = self._read_instructions(code.co_code)
        self.targets = self._targets(units)
        self.handlers = self._handlers(units)
        self.lines = self._lines(units)

    def __len__(self) -> int:
        return len(self.ops)

    def _read_instructions(self, raw: bytes) -> dict[int, int]:
        """Fill ops, args, starts and offsets; give the index of each starting code unit."""
        caches, extended = isa.CACHES, isa.EXTENDED_ARG
        ops, args, starts, offsets = self.ops, self.args, self.starts, self.offsets
        units: dict[int, int] = {}
        i, high, start, n = 0, 0, -1, len(raw) >> 1
        while i < n:
            op, arg = raw[2 * i], raw[2 * i + 1] | high
            if start < 0:
                start = i
            if op == extended:
                high = arg << 8
                i += 1
                continue
            units[start] = len(ops)
            ops.append(op)
            args.append(arg)
            starts.append(start)
            offsets.append(i)
            high, start = 0, -1
            i += 1 + caches[op]
        return units

    def _targets(self, units: dict[int, int]) -> list[int]:
        jumps, backward, caches = isa.JUMPS, isa.BACKWARD, isa.CACHES
        targets = [-1] * len(self.ops)
        for k, op in enumerate(self.ops):
            if op in jumps:
                arg = -self.args[k] if op in backward else self.args[k]
                targets[k] = units[self.offsets[k] + 1 + caches[op] + arg]
        return targets

    def _handlers(self, units: dict[int, int]) -> list[Handler | None]:
        handlers: list[Handler | None] = [None] * len(self.ops)
        if not self.code.co_exceptiontable:
            return handlers
        known: dict[tuple[int, int], Handler] = {}
        for start, length, target, packed in exception_entries(self.code.co_exceptiontable):
            handler = known.setdefault(
                (target, packed), Handler(units[target], packed >> 1, bool(packed & 1))
            )
            for unit in range(start, start + length):
                k = units.get(unit)
                if k is not None:
                    handlers[k] = handler
        return handlers

    def _lines(self, units: dict[int, int]) -> list[int]:
        lines = [0] * len(self.ops)
        for begin, end, line in self.code.co_lines():
            if line is None:
                continue
            for unit in range(begin >> 1, end >> 1):
                k = units.get(unit)
                if k is not None:
                    lines[k] = line
        return lines


def exception_entries(table: bytes) -> Iterator[tuple[int, int, int, int]]:
    """Read an exception table.

    Parameters
    ----------
    table : bytes
        `co_exceptiontable`.

    Yields
    ------
    tuple of int
        Start, length and target in code units, and depth and lasti packed as
        ``depth << 1 | lasti``.

    Notes
    -----
    The format is described in CPython's ``Objects/exception_handling_notes.txt``.
    """
    values: list[int] = []
    value = 0
    for byte in table:
        value = (value << 6) | (byte & 63)
        if not byte & 64:
            values.append(value)
            value = 0
            if len(values) == 4:
                yield values[0], values[1], values[2], values[3]
                values.clear()
