"""A list of instructions with labels, put together into the parts of a code object."""

from __future__ import annotations

from collections.abc import Sequence
from types import CodeType

from steplaw.flow import isa
from steplaw.tally.tables import NOWHERE, Position, exception_table, location_table

#: Label, stack depth, whether the place of the raise is pushed.
Cover = tuple[int, int, bool]

_FLIP: dict[int, int] = {}
for _name, _op in isa.OPMAP.items():
    if "BACKWARD" in _name and _name.replace("BACKWARD", "FORWARD") in isa.OPMAP:
        _FLIP[_op] = isa.OPMAP[_name.replace("BACKWARD", "FORWARD")]


class Assembly:
    """Instructions in their new order, original ones among inserted ones.

    Attributes
    ----------
    ops, args : list of int
        Opcode and argument (an argument of a jump is worked out).
    jumps : list of int
        Label that the instruction jumps to, -1 for none.
    origins : list of int
        Index of the original instruction, -1 for an inserted one.
    covers : list of Cover or None
        Where an exception of the instruction goes.
    """

    __slots__ = ("args", "covers", "jumps", "labels", "ops", "origins", "units")

    def __init__(self) -> None:
        self.ops: list[int] = []
        self.args: list[int] = []
        self.jumps: list[int] = []
        self.origins: list[int] = []
        self.covers: list[Cover | None] = []
        self.labels: dict[int, int] = {}
        self.units: list[int] = []

    def mark(self, label: int) -> None:
        """Set a label on the next instruction."""
        self.labels[label] = len(self.ops)

    def emit(
        self,
        op: int,
        arg: int = 0,
        *,
        jump: int = -1,
        origin: int = -1,
        cover: Cover | None = None,
    ) -> None:
        """Add an instruction."""
        self.ops.append(op)
        self.args.append(arg)
        self.jumps.append(jump)
        self.origins.append(origin)
        self.covers.append(cover)

    def layout(self) -> None:
        """Settle the place of every instruction and the argument of every jump."""
        caches, labels = isa.CACHES, self.labels
        ops, args, jumps = self.ops, self.args, self.jumps
        sizes = [1 + _extended(a) + caches[op] for op, a in zip(ops, args, strict=True)]
        jumping = [k for k, label in enumerate(jumps) if label >= 0]
        while True:
            units, at = [], 0
            for size in sizes:
                units.append(at)
                at += size
            units.append(at)
            stable = True
            for k in jumping:
                op = ops[k]
                distance = units[labels[jumps[k]]] - units[k] - sizes[k]
                if op in isa.BACKWARD and distance > 0:
                    op = ops[k] = _FLIP[op]
                args[k] = -distance if op in isa.BACKWARD else distance
                size = 1 + _extended(args[k]) + caches[op]
                if size > sizes[k]:
                    sizes[k], stable = size, False
            if stable:
                break
        self.units = units

    def code_bytes(self) -> bytes:
        """Give the new `co_code`."""
        out = bytearray()
        extended, caches = isa.EXTENDED_ARG, isa.CACHES
        units = self.units
        for k, op in enumerate(self.ops):
            arg = self.args[k]
            room = units[k + 1] - units[k] - 1 - caches[op]
            for shift in range(8 * room, 0, -8):
                out.append(extended)
                out.append((arg >> shift) & 255)
            out.append(op)
            out.append(arg & 255)
            if caches[op]:
                out.extend(bytes(2 * caches[op]))
        return bytes(out)

    def exception_bytes(self) -> bytes:
        """Give the new `co_exceptiontable`."""
        entries = []
        begin, current = 0, None
        units, covers = self.units, self.covers
        for k, cover in enumerate([*covers, None]):
            if cover != current:
                if current is not None:
                    label, depth, lasti = current
                    target = units[self.labels[label]]
                    entries.append((begin, units[k] - begin, target, depth << 1 | lasti))
                begin, current = units[k], cover
        return exception_table(entries)

    def location_bytes(self, code: CodeType, starts: Sequence[int]) -> bytes:
        """Give the new `co_linetable`: originals keep their place, inserted ones have none."""
        positions = list(code.co_positions())
        runs: list[tuple[Position, int]] = []
        units = self.units
        for k, origin in enumerate(self.origins):
            position = NOWHERE if origin < 0 else positions[starts[origin]]
            size = units[k + 1] - units[k]
            if runs and runs[-1][0] == position:
                runs[-1] = (position, runs[-1][1] + size)
            else:
                runs.append((position, size))
        return location_table(runs, code.co_firstlineno)

    def origin_by_unit(self) -> list[int]:
        """Give the original instruction that each code unit belongs to, -1 for inserted ones."""
        out: list[int] = []
        for k, origin in enumerate(self.origins):
            out.extend([origin] * (self.units[k + 1] - self.units[k]))
        return out


def _extended(arg: int) -> int:
    return 0 if arg < 256 else 1 if arg < 65536 else 2 if arg < 16777216 else 3
