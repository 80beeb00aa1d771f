"""What the garbage collector runs for others is not counted as the subject's."""

from __future__ import annotations

import gc
from collections.abc import Iterator

import pytest

from steplaw.tally import count
from steplaw.tally.collector import Undisturbed

CALLED: list[int] = []


class Manifest:
    """One of a pair that refers to each other, and is told when it is collected."""

    def __del__(self) -> None:
        CALLED.append(sum(range(3)))


def leave_a_cycle() -> None:
    first, second = Manifest(), Manifest()
    first.other, second.other = second, first  # type: ignore[attr-defined]


def collect() -> int:
    return gc.collect()


def notice(phase: str, info: dict[str, int]) -> None:
    CALLED.append(sum(info.values()))


@pytest.fixture
def callback() -> Iterator[None]:
    gc.callbacks.append(notice)
    yield
    gc.callbacks.remove(notice)


@pytest.mark.usefixtures("callback")
def test_callbacks_of_the_collector_are_not_counted() -> None:
    tally = count(collect)
    assert [f.name for f in tally.functions] == ["collect"]
    assert not tally.ledger


@pytest.mark.usefixtures("callback")
def test_callbacks_are_called_again_afterwards() -> None:
    count(collect)
    CALLED.clear()
    gc.collect()
    assert len(CALLED) == 2


def test_finalizers_of_earlier_garbage_are_not_counted() -> None:
    gc.disable()
    try:
        leave_a_cycle()
        tally = count(collect)
    finally:
        gc.enable()
    assert "__del__" not in str([f.name for f in tally.functions])


def test_finalizers_of_what_the_subject_leaves_are_counted() -> None:
    def subject() -> None:
        leave_a_cycle()
        gc.collect()

    finalizers = [f for f in count(subject).functions if f.name.endswith("__del__")]
    assert [f.calls for f in finalizers] == [2]


def test_callbacks_added_meanwhile_are_kept() -> None:
    with Undisturbed():
        gc.callbacks.append(notice)
    assert notice in gc.callbacks
    gc.callbacks.remove(notice)
