"""Which loops over a range need no probe inside."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from steplaw.flow.blocks import Blocks
from steplaw.flow.decode import Decoded
from steplaw.flow.ranges import range_loops


def plain(n: int) -> int:
    total = 0
    for i in range(n):
        for j in range(i, n, 2):
            total += j
    return total


def left_early(n: int) -> int:
    for i in range(n):
        if i == 3:
            break
    return i


def returned_from(n: int) -> int:
    for i in range(n):
        if i == 3:
            return i
    return 0


def suspended(n: int) -> Any:
    for i in range(n):
        yield i + 1


def over_a_list(n: int) -> int:
    total = 0
    for x in [1, 2, n]:
        total += x
    return total


def raising(n: int) -> None:
    for i in range(n):
        if i == 3:
            raise ValueError(i)


def caught_inside(n: int) -> int:
    bad = 0
    for i in range(n):
        try:
            1 // (i - 2)
        except ZeroDivisionError:
            bad += 1
    return bad


def named_and_let_pass(n: int) -> None:
    for i in range(n):
        try:  # noqa: SIM105
            1 // (i - 2)
        except KeyError as fault:  # noqa: F841 - its empty end is never reached
            pass


@pytest.mark.parametrize(
    ("function", "loops"),
    [
        (plain, 2),
        (left_early, 0),
        (returned_from, 0),
        (suspended, 0),
        (over_a_list, 0),
        (raising, 1),
        (caught_inside, 1),
        (named_and_let_pass, 1),
    ],
)
def test_loops_found(function: Callable[..., Any], loops: int) -> None:
    assert len(range_loops(Blocks(Decoded(function.__code__)))) == loops
