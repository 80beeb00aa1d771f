"""Trip counts of loops over a `range`: its length, added up at each entry of the loop.

A range of constants has one length: its loop's passes are that times the entries, and what makes
the range each time gives way to one that is made already.
"""

from __future__ import annotations

import sys
from itertools import compress, repeat
from operator import length_hint
from typing import TYPE_CHECKING

from steplaw.flow import isa
from steplaw.flow.ranges import RangeLoop
from steplaw.tally.assemble import Assembly, Cover

if TYPE_CHECKING:
    from steplaw.tally.writer import Writer

_OP = isa.OPMAP
ADD, _SUBTRACT = 0, 10  # the arguments of BINARY_OP (CPython's opcode.h, NB_ADD, NB_SUBTRACT)
_LOAD_GLOBAL = _OP["LOAD_GLOBAL"]
FALSE_JUMP = _OP.get("POP_JUMP_IF_FALSE", _OP.get("POP_JUMP_FORWARD_IF_FALSE", -1))
NAME = "n"


class Trips:
    """Passes of one loop.

    Attributes
    ----------
    each : int or None
        Length of the range where it is of constants; the passes then leave out that times the
        entries.
    n : int
        Lengths of the ranges entered, less what was left of them when an exception left the loop.
    wrapped : repeat
        Counts item by item where the loop turned out not to run over a `range` that has a length.
    others : repeat
        Counts the entries where it was something else that was called than `range`.
    """

    __slots__ = ("each", "n", "others", "wrapped")

    def __init__(self, each: int | None = None) -> None:
        self.each = each
        self.n = 0
        self.wrapped = repeat(True, sys.maxsize)
        self.others = repeat(None, sys.maxsize)

    def passes(self) -> int:
        """Give the passes so far, but for those of a range of constants at each entry."""
        others = (self.each or 0) * (sys.maxsize - length_hint(self.others))
        return self.n - others + sys.maxsize - length_hint(self.wrapped)


class TripWriter:
    """Writes what counts the passes of one loop.

    Parameters
    ----------
    loop : RangeLoop
        The loop.
    trips : Trips
        Where its passes are added up.
    writer : Writer
        The writer of the code object.

    Attributes
    ----------
    whole : bool
        Whether the call is not made, since it would give one range each time.
    """

    def __init__(self, loop: RangeLoop, trips: Trips, writer: Writer) -> None:
        self.loop = loop
        self.whole = trips.each is not None
        self._writer = writer
        self._out: Assembly = writer.out
        self._trips = writer.const(trips)
        self._range = writer.const(range)
        self._hint = writer.const(length_hint)
        self._compress = writer.const(compress)
        self._wrapped = writer.const(trips.wrapped)
        if self.whole:
            self._made = writer.const(loop.constant)
            self._others = writer.const(trips.others)
        self._attribute = writer.name(NAME)
        self._slow, self._long = writer.label(), writer.label()
        self._exits: dict[Cover | None, int] = {}

    def guard(self, cover: Cover | None) -> None:
        """Write, before the call, a jump away unless it is `range` that is called."""
        arguments = self._arguments()
        emit = self._out.emit
        emit(_OP["COPY"], arguments + (2 if isa.VERSION >= (3, 13) else 1), cover=cover)
        emit(_OP["LOAD_CONST"], self._range, cover=cover)
        emit(_OP["IS_OP"], 0, cover=cover)
        emit(FALSE_JUMP, jump=self._slow, cover=cover)

    def ready(self, cover: Cover | None) -> None:
        """Write what takes the place of the call: the range, unless `range` is something else."""
        load, emit = self.loop.load, self._out.emit
        args = self._writer.decoded.args
        emit(_LOAD_GLOBAL, args[load] & ~1, origin=load, cover=cover)
        emit(_OP["COPY"], 1, cover=cover)
        emit(_OP["LOAD_CONST"], self._range, cover=cover)
        emit(_OP["IS_OP"], 0, cover=cover)
        emit(FALSE_JUMP, jump=self._slow, cover=cover)
        emit(_OP["POP_TOP"], cover=cover)
        emit(_OP["LOAD_CONST"], self._made, cover=cover)

    def entered(self, cover: Cover | None) -> None:
        """Write, behind the call, what adds the length of the range on top of the stack."""
        below = self.loop.depth - 1 + self._writer.base
        self._out.emit(_OP["GET_LEN"], cover=(self._long, below + 1, False))
        self._load(cover)
        self._out.emit(_OP["BINARY_OP"], ADD, cover=cover)
        self._store(cover)

    def late(self, origin_cover: Cover | None) -> None:
        """Write the ways that are hardly ever gone, out of line."""
        d, out = self._writer.decoded, self._out
        out.mark(self._slow)
        if self.whole:
            out.emit(_OP["PUSH_NULL"], cover=origin_cover)
            if isa.VERSION < (3, 13):
                out.emit(_OP["SWAP"], 2, cover=origin_cover)
        else:
            # 3.13 looks up what a Python function raises by the code unit before its call.
            out.emit(_OP["NOP"], cover=origin_cover)
        for k in range(self.loop.load + 1 if self.whole else self.loop.call, self.loop.iterator):
            out.emit(d.ops[k], d.args[k], origin=k, cover=origin_cover)
        self._wrap(origin_cover)
        if not self.whole:
            out.mark(self._long)
            out.emit(_OP["POP_TOP"], cover=origin_cover)
            self._wrap(origin_cover)
        for target, label in self._exits.items():
            out.mark(label)
            self._exit(target)

    def leaving(self, target: Cover | None) -> Cover:
        """Give the way out of the loop for an exception that goes on to `target`."""
        label = self._exits.get(target)
        if label is None:
            label = self._exits[target] = self._writer.label()
        return label, self.loop.depth + self._writer.base, True

    def _arguments(self) -> int:
        return self._writer.decoded.args[self.loop.iterator - 1]

    def _load(self, cover: Cover | None) -> None:
        shift = 1 if isa.VERSION >= (3, 12) else 0
        self._out.emit(_OP["LOAD_CONST"], self._trips, cover=cover)
        self._out.emit(_OP["LOAD_ATTR"], self._attribute << shift, cover=cover)

    def _store(self, cover: Cover | None) -> None:
        self._out.emit(_OP["LOAD_CONST"], self._trips, cover=cover)
        self._out.emit(_OP["STORE_ATTR"], self._attribute, cover=cover)

    def _wrap(self, cover: Cover | None) -> None:
        """Write what counts items one by one; it asks for their iterator as GET_ITER would."""
        emit = self._out.emit
        self._writer.push(self._compress)
        emit(_OP["COPY"], 3)
        emit(_OP["LOAD_CONST"], self._wrapped)
        self._writer.call(2, origin=self.loop.iterator, cover=cover)
        emit(_OP["SWAP"], 2)
        emit(_OP["POP_TOP"])
        if self.whole:
            self._writer.pass_probe(self._others)
        self._writer.fall_from(self.loop.head - 1)
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=self.loop.head)

    def _exit(self, target: Cover | None) -> None:
        """Write what takes off the passes that an exception cuts short; it goes on from there."""
        emit = self._out.emit
        self._writer.push(self._hint)
        emit(_OP["COPY"], 5)
        self._writer.call(1)
        self._load(None)
        emit(_OP["SWAP"], 2)
        emit(_OP["BINARY_OP"], _SUBTRACT)
        self._store(None)
        emit(_OP["RERAISE"], 1, cover=target)
