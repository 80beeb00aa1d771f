"""Places where operands are looked at, written into a code object beside its probes.

Most passes of a place find the same callable, or an operand of the same type, as the pass before,
and nothing to charge: that is settled by a comparison in line. The rest is out of line, and what
it calls runs in frames that do not show.
"""

from __future__ import annotations

import dis
import sys
from collections.abc import Callable
from types import FunctionType
from typing import TYPE_CHECKING, Any

from steplaw.flow import isa
from steplaw.tally.assemble import Cover
from steplaw.tally.producers import UNKNOWN, stacks
from steplaw.toll import operands, quiet, watch
from steplaw.toll.ledger import Place
from steplaw.toll.rules import NAMES

if TYPE_CHECKING:
    from steplaw.tally.writer import Writer

_OP = isa.OPMAP
_FALSE = _OP.get("POP_JUMP_IF_FALSE", _OP.get("POP_JUMP_FORWARD_IF_FALSE", -1))
_TRUE = _OP.get("POP_JUMP_IF_TRUE", _OP.get("POP_JUMP_FORWARD_IF_TRUE", -1))
_NEW_CALLS = isa.VERSION >= (3, 13)
_CALL, _CALL_KW = _OP["CALL"], _OP.get("CALL_KW", -1)
_CALL_EX = _OP["CALL_FUNCTION_EX"]
_KW_NAMES = _OP.get("KW_NAMES", -1)
_LOAD_METHOD = _OP["LOAD_METHOD"] if isa.VERSION < (3, 12) else -1
_LOAD_ATTR, _LOAD_GLOBAL, _PUSH_NULL = (_OP[n] for n in ("LOAD_ATTR", "LOAD_GLOBAL", "PUSH_NULL"))
_LOAD_CONST, _BUILD_SLICE = _OP["LOAD_CONST"], _OP["BUILD_SLICE"]
_SUBSCR, _STORE, _DELETE = (_OP[n] for n in ("BINARY_SUBSCR", "STORE_SUBSCR", "DELETE_SUBSCR"))
_BINARY_SLICE, _STORE_SLICE = _OP.get("BINARY_SLICE", -1), _OP.get("STORE_SLICE", -1)
_SPREAD = {
    _OP[name]: what
    for name, what in (
        ("LIST_EXTEND", "list spread"),
        ("SET_UPDATE", "set spread"),
        ("DICT_UPDATE", "dict spread"),
        ("DICT_MERGE", "dict spread"),
        ("LIST_TO_TUPLE", "tuple of"),
        ("UNPACK_EX", "unpacked"),
    )
    if name in _OP
}
_INTRINSIC, _TO_TUPLE = _OP.get("CALL_INTRINSIC_1", -1), 6
_NUMBERS = (int, float, complex)


def _comparing(sign: str) -> int:
    """Give the argument of COMPARE_OP for a sign, as the compiler writes it before a jump."""
    code = compile(f"0 if a {sign} b else 1", "", "eval")
    return next(x.arg or 0 for x in dis.get_instructions(code) if x.opname == "COMPARE_OP")


_LESS, _GREATER = _comparing("<"), _comparing(">")
#: One digit: the interpreter compares these in its quickest way.
_SHORT = (1 << 30) - 1


class Watching:
    """The watched places of one code object.

    Parameters
    ----------
    writer : Writer
        The writer of the code object.

    Attributes
    ----------
    deepest : int
        Items that the watching puts on the stack at most.
    """

    def __init__(self, writer: Writer) -> None:
        self._writer = writer
        self.deepest = 12
        self._depth = 0
        self._d = writer.decoded
        self._arrays = "numpy" in sys.modules
        self._stacks = stacks(writer.graph)
        self._before: dict[int, Callable[[Cover | None], None]] = {}
        self._after: dict[int, int] = {}
        self._instead: dict[int, Callable[[Cover | None], None]] = {}
        self._late: list[Callable[[], None]] = []
        self._consts: dict[int, int] = {}
        busy = writer.range_calls
        for k, op in enumerate(self._d.ops):
            if k in self._stacks and k not in busy:
                self._look_at(k, op)

    def _look_at(self, k: int, op: int) -> None:
        d = self._d
        if op in (_CALL, _CALL_KW):
            self._find_call(k)
        elif op == _CALL_EX:
            self._set(k, self._spread_call, k)
        elif op == _OP["CONTAINS_OP"]:
            self._set(k, self._contains, k)
        elif op == _OP["BINARY_OP"]:
            checked = self._checked(k)
            if checked is not None:
                self._set(k, self._operator, k, watch.binary, checked)
        elif op == _OP["COMPARE_OP"]:
            if self._arrays or not (self._is_constant(k, 1) or self._is_constant(k, 2)):
                self._set(k, self._operator, k, watch.compare, 2)
        elif op in (_SUBSCR, _STORE) and d.ops[k - 1] == _BUILD_SLICE:
            self._set(k - 1, self._slice, k, d.args[k - 1])
        elif op in (_BINARY_SLICE, _STORE_SLICE):
            self._set(k, self._slice, k, 2)
        elif op == _DELETE:
            self._set(k, self._operator, k, watch.delete, 2)
        elif op in _SPREAD or (op == _INTRINSIC and d.args[k] == _TO_TUPLE):
            if not self._is_constant(k, 1):
                self._set(k, self._top, k, _SPREAD.get(op, "tuple of"))
        elif op == _OP["BUILD_STRING"]:
            self._set(k, self._build_string, k)

    def _set(self, k: int, write: Callable[..., None], *args: Any) -> None:
        self._before[k] = lambda cover: write(*args, cover)

    # -- what the writer asks ------------------------------------------------------------------

    def before(self, k: int, cover: Cover | None) -> None:
        """Write what goes before an instruction."""
        write = self._before.get(k)
        if write is not None:
            self._depth = len(self._stacks[k]) + self._writer.base
            write(cover)

    def write(self, k: int, cover: Cover | None) -> None:
        """Write an instruction, or what stands for it."""
        write = self._instead.get(k)
        if write is None:
            self._writer.out.emit(self._d.ops[k], self._d.args[k], origin=k, cover=cover)
        else:
            write(cover)
        behind = self._after.get(k)
        if behind is not None:
            self._writer.out.mark(behind)

    def late(self) -> None:
        """Write what is out of line."""
        for write in self._late:
            write()

    # -- calls ---------------------------------------------------------------------------------

    def _find_call(self, k: int) -> None:
        d, stack = self._d, self._stacks[k]
        names = d.ops[k] == _CALL_KW
        count = d.args[k]
        above = count + names
        if len(stack) < above + 2:
            return
        first, second = stack[-above - 2], stack[-above - 1]
        if first == UNKNOWN or second == UNKNOWN:
            return
        begin = k
        keywords: Any = None
        if names:
            if d.ops[k - 1] != _LOAD_CONST:
                return
            begin, keywords = k - 1, d.code.co_consts[d.args[k - 1]]
        if isa.PRECALL >= 0:
            begin = k - 1
        if begin and d.ops[begin - 1] == _KW_NAMES:
            begin, keywords = begin - 1, d.code.co_consts[d.args[begin - 1]]
        graph = self._writer.graph
        if any(graph.of[x] != graph.of[k] for x in range(begin, k)):
            return
        method = self._loads_method(second if not _NEW_CALLS else first)
        if method and first == second:
            name = self._name(first)
            if name in quiet.METHOD_NAMES or (name == "pop" and not count):
                return
            if name not in NAMES and not self._arrays:
                self._set(first, self._receive, first, name)
                return
            self._instead[first] = lambda cover: self._plain_attribute(first, cover)
            self._set(begin, self._call, k, count, keywords, name)
            return
        null = second if _NEW_CALLS else first
        if d.ops[null] == _PUSH_NULL or (d.ops[null] == _LOAD_GLOBAL and d.args[null] & 1):
            self._set(begin, self._call, k, count, keywords, "")

    def _loads_method(self, k: int) -> bool:
        op = self._d.ops[k]
        if _LOAD_METHOD >= 0:
            return op == _LOAD_METHOD
        return op == _LOAD_ATTR and bool(self._d.args[k] & 1)

    def _name(self, k: int) -> str:
        arg = self._d.args[k]
        return self._d.code.co_names[arg if _LOAD_METHOD >= 0 else arg >> 1]

    def _plain_attribute(self, k: int, cover: Cover | None) -> None:
        """Write the load of a method as that of any attribute, so that the call is a plain one."""
        emit, arg = self._writer.out.emit, self._d.args[k]
        if _NEW_CALLS:
            emit(_LOAD_ATTR, arg & ~1, origin=k, cover=cover)
            emit(_PUSH_NULL, cover=cover)
            return
        emit(_PUSH_NULL, cover=cover)
        emit(_OP["SWAP"], 2, cover=cover)
        emit(_LOAD_ATTR, arg if _LOAD_METHOD >= 0 else arg & ~1, origin=k, cover=cover)

    def _call(self, k: int, count: int, keywords: Any, name: str, cover: Cover | None) -> None:
        """Write a comparison of the callable with the one seen last, or of their types."""
        self.deepest = max(self.deepest, count + 12)
        place = self._place(k, name)
        below, depth = count + (2 if _NEW_CALLS else 1), self._depth
        slow, back, behind = (self._writer.label() for _ in range(3))
        if name:
            self._type_of(below, cover)
        else:
            self._writer.out.emit(_OP["COPY"], below, cover=cover)
        self._unless_quiet(place, slow, cover)
        self._writer.out.mark(back)
        self._after[k] = behind
        self._late.append(
            lambda: self._call_late(
                k, count, keywords, place, bool(name), (slow, back, behind), depth, cover
            )
        )

    def _call_late(
        self,
        k: int,
        count: int,
        keywords: Any,
        place: int,
        named: bool,
        labels: tuple[int, int, int],
        depth: int,
        cover: Cover | None,
    ) -> None:
        slow, back, behind = labels
        writer, emit = self._writer, self._writer.out.emit
        positional = count - len(keywords or ())
        there = writer.label()
        writer.out.mark(slow)
        self._second_look(count, named, place, back, there, cover)
        writer.push(self._const(watch.consider))
        emit(_OP["COPY"], count + (4 if _NEW_CALLS else 3))
        for _ in range(positional):
            emit(_OP["COPY"], count + 3)
        emit(_OP["BUILD_TUPLE"], positional)
        emit(_LOAD_CONST, place)
        self._call_beside(3, k, back, depth, cover)
        emit(_TRUE, jump=there, cover=cover)
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=back)
        writer.out.mark(there)
        emit(_OP["BUILD_TUPLE"], count, cover=cover)
        emit(_LOAD_CONST, self._const(watch.charged), cover=cover)
        emit(_OP["SWAP"], 4 if _NEW_CALLS else 3, cover=cover)
        emit(_LOAD_CONST, place, cover=cover)
        emit(_LOAD_CONST, writer.const(keywords), cover=cover)
        self._call_for(4, k, cover)
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=behind)

    def _second_look(
        self, count: int, named: bool, place: int, back: int, there: int, cover: Cover | None
    ) -> None:
        """Write comparisons that settle most calls that the one in line does not.

        A function of Python, or the argument that the callable took before with nothing to
        charge, goes `back`; a callable that is known to have a rule goes `there`.
        """
        writer, emit = self._writer, self._writer.out.emit
        below = count + (2 if _NEW_CALLS else 1)
        if named:
            self._type_of(below, cover)
        else:
            other, one = writer.label(), writer.label()
            self._type_of(below, cover)
            emit(_LOAD_CONST, self._const(FunctionType), cover=cover)
            emit(_OP["IS_OP"], 0, cover=cover)
            emit(_FALSE, jump=other, cover=cover)
            emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=back)
            writer.out.mark(other)
            if count == 1:
                emit(_OP["COPY"], below, cover=cover)
                self._is(place, "other", one, cover)
                self._type_of(1, cover)
                self._is(place, "calm", one, cover)
                emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=back)
            writer.out.mark(one)
            emit(_OP["COPY"], below, cover=cover)
        emit(_LOAD_CONST, place, cover=cover)
        self._attribute("known", cover)
        emit(_OP["IS_OP"], 0, cover=cover)
        emit(_TRUE, jump=there, cover=cover)

    def _spread_call(self, k: int, cover: Cover | None) -> None:
        """Write the way round a call with arguments spread out."""
        emit, keywords = self._writer.out.emit, self._d.args[k] & 1
        place = self._place(k)
        slow, back, behind = (self._writer.label() for _ in range(3))
        depth = self._depth
        emit(_OP["COPY"], 2 + keywords + _NEW_CALLS, cover=cover)
        self._unless_quiet(place, slow, cover)
        self._writer.out.mark(back)
        self._after[k] = behind
        self._late.append(lambda: self._spread_late(k, place, (slow, back, behind), depth, cover))

    def _spread_late(
        self, k: int, place: int, labels: tuple[int, int, int], depth: int, cover: Cover | None
    ) -> None:
        slow, back, behind = labels
        writer, emit, keywords = self._writer, self._writer.out.emit, self._d.args[k] & 1
        writer.out.mark(slow)
        writer.push(self._const(watch.consider_spread))
        emit(_OP["COPY"], 4 + keywords + _NEW_CALLS)
        emit(_OP["COPY"], 4 + keywords)
        emit(_LOAD_CONST, place)
        self._call_beside(3, k, back, depth, cover)
        there = writer.label()
        emit(_TRUE, jump=there, cover=cover)
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=back)
        writer.out.mark(there)
        if not keywords:
            emit(_LOAD_CONST, writer.const(None), cover=cover)
        # NULL, f, args, kwargs: the call is made by `spread`, f among its arguments.
        emit(_LOAD_CONST, self._const(watch.spread), cover=cover)
        emit(_OP["SWAP"], 5 if _NEW_CALLS else 4, cover=cover)
        emit(_LOAD_CONST, place, cover=cover)
        self._call_for(4, k, cover)
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=behind)

    def _receive(self, k: int, name: str, cover: Cover | None) -> None:
        """Write a look at what a method is loaded from, at the first passes."""
        writer, emit = self._writer, self._writer.out.emit
        place = self._place(k, name)
        slow, back, depth = writer.label(), writer.label(), self._depth
        emit(_LOAD_CONST, place, cover=cover)
        self._attribute("open", cover)
        emit(_TRUE, jump=slow, cover=cover)
        writer.out.mark(back)

        def late() -> None:
            writer.out.mark(slow)
            self._beside(watch.receive, (1,), place, k, back, depth, cover)

        self._late.append(late)

    # -- operators -----------------------------------------------------------------------------

    def _checked(self, k: int) -> int | None:
        """Give which operand of an operator tells whether it grows, None where none needs to.

        An operator with a number on either side grows with no other operand, but for `*` (which
        repeats a sequence), `%` (which formats a text), arrays, and whole numbers that get long.
        """
        if self._arrays:
            return 2
        operator = self._d.args[k] % operands.IN_PLACE
        number = next((side for side in (1, 2) if self._is_number(k, side)), 0)
        if not number:
            return 2
        if operator in (operands.MULTIPLY, operands.LSHIFT, operands.POWER):
            return 3 - number
        if operator == operands.REMAINDER:
            return 2 if number == 1 else None
        return None

    def _is_constant(self, k: int, depth: int) -> bool:
        stack = self._stacks[k]
        maker = stack[-depth] if len(stack) >= depth else UNKNOWN
        return maker != UNKNOWN and self._d.ops[maker] == _LOAD_CONST

    def _is_number(self, k: int, depth: int) -> bool:
        if not self._is_constant(k, depth):
            return False
        value = self._d.code.co_consts[self._d.args[self._stacks[k][-depth]]]
        return type(value) in _NUMBERS and (type(value) is not int or abs(value) < 1 << 30)

    def _operator(self, k: int, call: Any, checked: int, cover: Cover | None) -> None:
        """Write a comparison of an operand's type with the one seen last."""
        writer, depth = self._writer, self._depth
        place = self._place(k)
        slow, back = writer.label(), writer.label()
        lengthens = call is watch.binary and operands.makes_long(self._d.args[k])
        if lengthens:
            self._whole(k, place, cover)
        self._type_of(checked, cover)
        self._unless_quiet(place, slow, cover)
        writer.out.mark(back)

        def late() -> None:
            writer.out.mark(slow)
            self._unless_other(checked, place, back, cover)
            self._beside(call, (2, 1), place, k, back, depth, cover)

        self._late.append(late)

    def _whole(self, k: int, place: int, cover: Cover | None) -> None:
        """Write an operator between short whole numbers: its result is looked at, in line."""
        writer, emit, depth = self._writer, self._writer.out.emit, self._depth - 1
        there, behind = writer.label(), writer.label()
        emit(_LOAD_CONST, place, cover=cover)
        self._attribute("whole", cover)
        emit(_TRUE, jump=there, cover=cover)
        self._after[k] = behind

        def late() -> None:
            slow, longer, fraction = (writer.label() for _ in range(3))
            writer.out.mark(there)
            emit(self._d.ops[k], self._d.args[k], origin=k, cover=cover)
            self._type_of(1, cover)
            emit(_LOAD_CONST, self._const(int), cover=cover)
            emit(_OP["IS_OP"], 0, cover=cover)
            emit(_FALSE, jump=fraction, cover=cover)
            self._within(_SHORT, longer, cover)
            emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=behind)
            writer.out.mark(longer)
            self._within(operands.LONG, slow, cover)
            emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=behind)
            writer.out.mark(fraction)
            self._type_of(1, cover)
            emit(_LOAD_CONST, self._const(float), cover=cover)
            emit(_OP["IS_OP"], 0, cover=cover)
            emit(_FALSE, jump=slow, cover=cover)
            emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=behind)
            writer.out.mark(slow)
            self._beside(watch.result, (1,), place, k, behind, depth, cover)

        self._late.append(late)

    def _within(self, limit: int, beyond: int, cover: Cover | None) -> None:
        """Write comparisons of a whole number with a limit, on either side of zero."""
        emit = self._writer.out.emit
        for bound, compared in ((limit, _LESS), (-limit, _GREATER)):
            emit(_OP["COPY"], 1, cover=cover)
            emit(_LOAD_CONST, self._const(bound), cover=cover)
            emit(_OP["COMPARE_OP"], compared, cover=cover)
            emit(_FALSE, jump=beyond, cover=cover)

    def _contains(self, k: int, cover: Cover | None) -> None:
        writer, emit = self._writer, self._writer.out.emit
        place = self._place(k)
        slow, behind = writer.label(), writer.label()
        self._type_of(1, cover)
        self._unless_quiet(place, slow, cover)
        self._after[k] = behind

        def late() -> None:
            writer.out.mark(slow)
            # The call stands for the instruction: it takes both operands.
            writer.push(self._const(watch.contains))
            emit(_OP["COPY"], 4)
            emit(_OP["COPY"], 4)
            emit(_LOAD_CONST, place)
            self._call_for(3, k, cover)
            for _ in range(2):
                emit(_OP["SWAP"], 2, cover=cover)
                emit(_OP["POP_TOP"], cover=cover)
            emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=behind)

        self._late.append(late)

    def _slice(self, k: int, parts: int, cover: Cover | None) -> None:
        """Write the charge of a slice, in line: the container, its start, stop and step."""
        step = parts == 3
        place = self._place(k)
        reads = self._d.ops[k] in (_SUBSCR, _BINARY_SLICE)
        top = parts + (1 if reads else 2)
        self._beside_in_line(
            watch.part if reads else watch.put,
            tuple(range(top, 0, -1)),
            place,
            k,
            cover,
            none=not step,
        )

    def _top(self, k: int, what: str, cover: Cover | None) -> None:
        self._beside_in_line(watch.items, (1,), self._place(k, what), k, cover)

    def _build_string(self, k: int, cover: Cover | None) -> None:
        writer, emit, count = self._writer, self._writer.out.emit, self._d.args[k]
        self.deepest = max(self.deepest, count + 12)
        writer.push(self._const(watch.texts))
        for _ in range(count):
            emit(_OP["COPY"], count + 2, cover=cover)
        emit(_OP["BUILD_TUPLE"], count, cover=cover)
        emit(_LOAD_CONST, self._place(k), cover=cover)
        back = writer.label()
        self._call_beside(2, k, back, self._depth, cover)
        emit(_OP["POP_TOP"], cover=cover)
        writer.out.mark(back)

    # -- pieces --------------------------------------------------------------------------------

    def _place(self, k: int, name: str = "") -> int:
        code = self._d.code
        line = self._d.lines[k] or code.co_firstlineno
        return self._writer.const(Place(code.co_filename, line, name, self._d.args[k]))

    def _const(self, value: Any) -> int:
        known = self._consts.get(id(value))
        if known is None:
            known = self._consts[id(value)] = self._writer.const(value)
        return known

    def _attribute(self, name: str, cover: Cover | None) -> None:
        shift = 1 if isa.VERSION >= (3, 12) else 0
        self._writer.out.emit(_LOAD_ATTR, self._writer.name(name) << shift, cover=cover)

    def _type_of(self, depth: int, cover: Cover | None) -> None:
        writer = self._writer
        writer.push(self._const(type))
        writer.out.emit(_OP["COPY"], depth + 2, cover=cover)
        writer.call(1)

    def _unless_quiet(self, place: int, slow: int, cover: Cover | None) -> None:
        self._is(place, "quiet", slow, cover)

    def _is(self, place: int, attribute: str, unless: int, cover: Cover | None) -> None:
        """Write a comparison of the top of the stack with what a place keeps."""
        emit = self._writer.out.emit
        emit(_LOAD_CONST, place, cover=cover)
        self._attribute(attribute, cover)
        emit(_OP["IS_OP"], 0, cover=cover)
        emit(_FALSE, jump=unless, cover=cover)

    def _unless_other(self, checked: int, place: int, back: int, cover: Cover | None) -> None:
        """Write a comparison of an operand's type with the one seen before the last."""
        emit, there = self._writer.out.emit, self._writer.label()
        self._type_of(checked, cover)
        emit(_LOAD_CONST, place, cover=cover)
        self._attribute("other", cover)
        emit(_OP["IS_OP"], 0, cover=cover)
        emit(_FALSE, jump=there, cover=cover)
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=back)
        self._writer.out.mark(there)

    def _beside(
        self,
        call: Any,
        depths: tuple[int, ...],
        place: int,
        k: int,
        back: int,
        depth: int,
        cover: Cover | None,
    ) -> None:
        """Write a call with copies of operands, and the jump back."""
        writer, emit = self._writer, self._writer.out.emit
        writer.push(self._const(call))
        for number, below in enumerate(depths):
            emit(_OP["COPY"], below + 2 + number)
        emit(_LOAD_CONST, place)
        self._call_beside(len(depths) + 1, k, back, depth, cover)
        emit(_OP["POP_TOP"], cover=cover)
        emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=back)

    def _beside_in_line(
        self,
        call: Any,
        depths: tuple[int, ...],
        place: int,
        k: int,
        cover: Cover | None,
        *,
        none: bool = False,
    ) -> None:
        writer, emit = self._writer, self._writer.out.emit
        writer.push(self._const(call))
        for number, below in enumerate(depths):
            emit(_OP["COPY"], below + 2 + number, cover=cover)
        if none:
            emit(_LOAD_CONST, writer.const(None), cover=cover)
        emit(_LOAD_CONST, place, cover=cover)
        back = writer.label()
        self._call_beside(len(depths) + none + 1, k, back, self._depth, cover)
        emit(_OP["POP_TOP"], cover=cover)
        writer.out.mark(back)

    def _call_for(self, arguments: int, k: int, cover: Cover | None) -> None:
        """Write a call that stands for an instruction: what it raises leaves from there."""
        emit = self._writer.out.emit
        if isa.PRECALL >= 0:
            emit(isa.PRECALL, arguments, origin=k, cover=cover)
        emit(_CALL, arguments, origin=k, cover=cover)

    def _call_beside(
        self, arguments: int, k: int, back: int, depth: int, cover: Cover | None
    ) -> None:
        """Write a call beside an instruction; where no frame is left for it, it is not made."""
        label = self._writer.label()
        self._call_for(arguments, k, (label, depth, False))

        def late() -> None:
            writer, emit = self._writer, self._writer.out.emit
            other = writer.label()
            writer.out.mark(label)
            emit(_LOAD_CONST, self._const(RecursionError))
            emit(_OP["CHECK_EXC_MATCH"])
            emit(_FALSE, jump=other)
            emit(_OP["POP_TOP"])
            emit(_OP["JUMP_BACKWARD_NO_INTERRUPT"], jump=back)
            writer.out.mark(other)
            emit(_OP["RERAISE"], 0, origin=k, cover=cover)

        self._late.append(late)
