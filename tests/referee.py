"""The referee: counts a call by the interpreter's own instruction events, on untouched code.

A step is an instruction for which the interpreter reports an opcode event: the 'opcode' event of
`sys.settrace` on 3.11 (`frame.f_trace_opcodes`), the INSTRUCTION event of `sys.monitoring` from
3.12 on. Both are documented in the language's library reference (sys.settrace, sys.monitoring).

What each version was seen to do, by experiment on 3.11.7, 3.12.1 and 3.13.0:

- RESUME is never reported, nor what stands before it (COPY_FREE_VARS, MAKE_CELL,
  RETURN_GENERATOR and the POP_TOP behind it). A second RESUME, behind a yield, is not either.
- EXTENDED_ARG: 3.11 reports the first of a chain and then runs the rest of the chain and the
  instruction it prefixes unreported; 3.12 and 3.13 report each of them. Here the chain and its
  instruction are one step, at the instruction's own offset.
- FOR_ITER that ends passes over END_FOR (3.12) and over END_FOR and POP_TOP (3.13) in both the
  plain and the instrumented interpreter, generators included: specialised forms, which would run
  END_FOR behind a finished generator, are not used while events are on.
- `throw` into a generator that has not started runs none of its instructions on any version.
- 3.11's trace function belongs to one thread; `threading.settrace` begins it only in the middle of
  `Thread._bootstrap_inner`. So on 3.11 the start of a thread is replaced here, which lets the trace
  begin where the monitoring of 3.12 begins: at the first instruction of the new thread.
- Code run while a callback is running is not reported. Collections of the garbage collector may
  fall there, so the collector is held off.
"""

from __future__ import annotations

import _thread
import contextlib
import dis
import gc
import sys
import threading
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from types import CodeType, FrameType
from typing import Any

Key = tuple[str, str, int]
EXTENDED_ARG = dis.opmap["EXTENDED_ARG"]
LONG_SWITCH = 1e6
_LEAVES_WHOLE_CHAIN = sys.version_info < (3, 12)


@dataclass
class Counts:
    """What the interpreter reported for one call.

    Parameters
    ----------
    instructions : dict
        For (file, qualified name, first line): byte offset to steps.
    opcodes : Counter
        Opcode name to steps.
    lines : Counter
        (file, line) to steps; instructions without a line are left out.
    calls : Counter
        (file, qualified name, first line) to entries at the function's start.
    result, error : object
        What the call returned, or the exception that left it.
    """

    instructions: dict[Key, dict[int, int]] = field(default_factory=dict)
    opcodes: Counter[str] = field(default_factory=Counter)
    lines: Counter[tuple[str, int]] = field(default_factory=Counter)
    calls: Counter[Key] = field(default_factory=Counter)
    result: Any = None
    error: BaseException | None = None

    @property
    def total(self) -> int:
        return sum(self.opcodes.values())


def key_of(code: CodeType) -> Key:
    return code.co_filename, code.co_qualname, code.co_firstlineno


class _Cells:
    """One list of counters by code object, by identity: equal code objects are not the same.

    `cells[offset] += 1` has no point between its load and its store at which the interpreter
    would hand over to another thread, so the counters need no lock.
    """

    def __init__(self) -> None:
        self.cells: dict[int, list[int]] = {}
        self.codes: dict[int, CodeType] = {}
        self.starts: Counter[int] = Counter()
        self.own: set[int] = set()

    def new(self, code: CodeType) -> list[int]:
        self.codes[id(code)] = code
        return self.cells.setdefault(id(code), [0] * (len(code.co_code) + 2))

    def leave_out(self, *codes: CodeType) -> None:
        self.own.update(map(id, codes))

    def counts(self) -> Counts:
        counts = Counts()
        for ident, cells in self.cells.items():
            if ident not in self.own:
                _add(counts, self.codes[ident], cells)
        for ident, starts in self.starts.items():
            if ident not in self.own:
                counts.calls[key_of(self.codes[ident])] += starts
        return counts


def _add(counts: Counts, code: CodeType, cells: list[int]) -> None:
    steps = _fold_extended(code, cells)
    if not steps:
        return
    line_at = {
        offset: line for start, end, line in code.co_lines() for offset in range(start, end, 2)
    }
    raw = code.co_code
    instructions = counts.instructions.setdefault(key_of(code), {})
    for offset, number in steps.items():
        instructions[offset] = instructions.get(offset, 0) + number
        counts.opcodes[dis.opname[raw[offset]]] += number
        line = line_at.get(offset)
        if line is not None:
            counts.lines[code.co_filename, line] += number


def _fold_extended(code: CodeType, cells: list[int]) -> dict[int, int]:
    """Give steps by offset, an EXTENDED_ARG chain counted once at the instruction it prefixes."""
    raw = code.co_code
    steps = {}
    chain: list[int] = []
    for offset in range(0, len(raw), 2):
        if raw[offset] == EXTENDED_ARG:
            chain.append(offset)
            continue
        number = cells[offset]
        if chain:
            before = [cells[at] for at in chain]
            if _LEAVES_WHOLE_CHAIN:
                assert number == 0 and not any(before[1:]), (code, offset)
                number = before[0]
            else:
                assert all(n == number for n in before), (code, offset)
            chain = []
        if number:
            steps[offset] = number
    return steps


@contextlib.contextmanager
def steady() -> Iterator[None]:
    """Hold off the garbage collector, and hand-overs between threads that nothing asks for."""
    interval, collecting = sys.getswitchinterval(), gc.isenabled()
    gc.collect(1)
    gc.disable()
    sys.setswitchinterval(LONG_SWITCH)
    try:
        yield
    finally:
        sys.setswitchinterval(interval)
        if collecting:
            gc.enable()


def referee(function: Callable[..., Any], *args: Any, **kwargs: Any) -> Counts:
    """Count one call by the interpreter's own events, callees and threads included."""
    with steady():
        return _count(function, args, kwargs)


if sys.version_info >= (3, 12):
    TOOL = 4

    def _count(function: Callable[..., Any], args: Any, kwargs: Any) -> Counts:
        monitoring, book = sys.monitoring, _Cells()
        watch = monitoring.events.INSTRUCTION | monitoring.events.PY_START
        book.leave_out(_count.__code__)
        foreign = set(sys._current_frames()) - {_thread.get_ident()}
        cells, new, ident = book.cells, book.new, _thread.get_ident

        def instruction(code: CodeType, offset: int) -> None:
            row = cells.get(id(code))
            if row is None:
                row = new(code)
            if foreign and ident() in foreign:
                return
            row[offset] += 1

        def start(code: CodeType, offset: int) -> None:
            if not foreign or ident() not in foreign:
                new(code)
                book.starts[id(code)] += 1

        result, error = None, None
        monitoring.use_tool_id(TOOL, "referee")
        try:
            monitoring.register_callback(TOOL, monitoring.events.INSTRUCTION, instruction)
            monitoring.register_callback(TOOL, monitoring.events.PY_START, start)
            monitoring.set_events(TOOL, watch)
            try:
                result = function(*args, **kwargs)
            except BaseException as fault:
                error = fault
        finally:
            monitoring.set_events(TOOL, 0)
            monitoring.register_callback(TOOL, monitoring.events.INSTRUCTION, None)
            monitoring.register_callback(TOOL, monitoring.events.PY_START, None)
            monitoring.free_tool_id(TOOL)
        counts = book.counts()
        counts.result, counts.error = result, error
        return counts

else:

    def _count(function: Callable[..., Any], args: Any, kwargs: Any) -> Counts:
        book = _Cells()
        tracers: dict[int, Any] = {}
        entry: dict[int, int] = {}

        def tracer_of(code: CodeType) -> Any:
            cells = book.new(code)

            def opcode(frame: FrameType, event: str, arg: Any) -> Any:
                if event == "opcode":
                    cells[frame.f_lasti] += 1
                return opcode

            entry[id(code)] = _first_resume(code)
            return tracers.setdefault(id(code), opcode)

        def enter(frame: FrameType, event: str, arg: Any) -> Any:
            code = frame.f_code
            frame.f_trace_opcodes = True
            frame.f_trace_lines = False
            tracer = tracers.get(id(code)) or tracer_of(code)
            if frame.f_lasti == entry[id(code)]:
                book.starts[id(code)] += 1
            return tracer

        start = _thread.start_new_thread

        def start_traced(body: Any, *rest: Any) -> int:
            def traced(*args: Any, **kwargs: Any) -> Any:
                sys.settrace(enter)
                return body(*args, **kwargs)

            return start(traced, *rest)

        book.leave_out(start_traced.__code__)
        result, error = None, None
        _thread.start_new_thread = start_traced
        threading._start_new_thread = start_traced  # type: ignore[attr-defined]
        sys.settrace(enter)
        try:
            result = function(*args, **kwargs)
        except BaseException as fault:
            error = fault
        finally:
            sys.settrace(None)
            _thread.start_new_thread = start
            threading._start_new_thread = start  # type: ignore[attr-defined]
        counts = book.counts()
        counts.result, counts.error = result, error
        return counts

    def _first_resume(code: CodeType) -> int:
        # A subject may have replaced the builtin `range`: nothing here looks it up.
        resume = dis.opmap["RESUME"]
        raw, offset = code.co_code, 0
        while raw[offset] != resume:
            offset += 2
        return offset
