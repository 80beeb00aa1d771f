"""Counts of calls that a signal handler interrupts between two instructions.

The interpreter's events cannot be the reference here: their own callbacks would handle the signal.
The subjects count their rounds themselves, and the handler reads them off the interrupted frame.
"""

# ruff: noqa: B018, SIM113 - the loops under test, as plain as can be

from __future__ import annotations

import _thread
import dis
import functools
import signal
import threading
from collections.abc import Callable, Iterator
from types import FrameType
from typing import Any

import pytest

from steplaw.tally import counting

pytestmark = pytest.mark.skipif(
    threading.current_thread() is not threading.main_thread(),
    reason="signals are handled in the main thread",
)


class Stop(Exception):
    """Raised by the signal handler."""


class Trip:
    """Its negative leaves a signal pending, handled at the interpreter's next check."""

    __neg__: Any = staticmethod(functools.partial(_thread.interrupt_main, signal.SIGINT))


trip: Any = Trip()


def range_loop(n: int) -> None:
    rounds = 0
    for i in range(n):
        rounds += 1
        if i == 3:
            -trip


def nested_range_loops(n: int) -> None:
    rounds = 0
    for i in range(n):
        for j in range(i):
            rounds += 1
            if i + j == 5:
                -trip


def while_loop(n: int) -> None:
    rounds = 0
    while rounds < n:
        rounds += 1
        if rounds == 3:
            -trip


def loop_over_a_list(n: int) -> None:
    rounds = 0
    for i in [*range(n)]:
        rounds += 1
        if i == 3:
            -trip


def at_a_call(n: int) -> None:
    rounds = 0
    for i in range(n):
        rounds += 1
        if i == 2:
            -trip
            abs(i)


def with_a_handler_inside(n: int) -> None:
    rounds = 0
    for i in range(n):
        try:
            rounds += 1
            if i == 2:
                -trip
        except ValueError:
            rounds += 100


SUBJECTS = (
    range_loop,
    nested_range_loops,
    while_loop,
    loop_over_a_list,
    at_a_call,
    with_a_handler_inside,
)


@pytest.fixture
def rounds_seen() -> Iterator[list[int]]:
    seen: list[int] = []

    def handler(number: int, frame: FrameType | None) -> None:
        assert frame is not None
        seen.append(frame.f_locals["rounds"])
        raise Stop

    before = signal.signal(signal.SIGINT, handler)
    yield seen
    signal.signal(signal.SIGINT, before)


@pytest.mark.parametrize("subject", SUBJECTS)
def test_interrupted_between_instructions(
    subject: Callable[[int], None], rounds_seen: list[int]
) -> None:
    with counting() as counter:
        try:
            subject(8)
        except Stop:
            pass
        else:
            raise AssertionError("the signal was not handled")
    code = subject.__code__
    counts = counter.instructions()[code.co_filename, code.co_qualname, code.co_firstlineno]
    instructions = list(dis.get_instructions(code))
    stores = [
        counts.get(i.offset, 0)
        for i in instructions
        if i.opname == "STORE_FAST" and i.argval == "rounds"
    ]
    assert stores[:2] == [1, rounds_seen[0]]
    trips = sum(counts.get(i.offset, 0) for i in instructions if i.opname == "UNARY_NEGATIVE")
    assert trips == 1
    loops = [i.offset for i in instructions if i.opname == "FOR_ITER"]
    if len(loops) == 1:
        assert counts[loops[0]] == rounds_seen[0]
