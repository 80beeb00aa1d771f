"""Inputs made here and sent to the host."""

from __future__ import annotations

import random
from collections.abc import Callable
from typing import Any

import pytest

from steplaw.errors import CallError
from steplaw.expression import args
from steplaw.feed import FeedError, FeedSpec
from steplaw.host.pickled import PickledFeed, unpickling
from steplaw.subject import locate, parse


class Ship:
    def __init__(self, name: str) -> None:
        self.name = name


def feed(function: Callable[..., Any], *names: str) -> PickledFeed:
    return PickledFeed(FeedSpec("python", "<lambda>", function), names or ("n",))


def test_what_is_sent_arrives_afresh_each_time() -> None:
    text, drew = feed(lambda n: args([n] * n, key=len)).make({"n": 3}, 0)
    there = unpickling(locate(parse("statistics:median")), text, "there")
    there._subject = None
    first, second = there.make({"n": 3}, 0), there.make({"n": 3}, 0)
    assert (first.args, first.kwargs) == (([3, 3, 3],), {"key": len})
    assert second.args[0] is not first.args[0]
    assert drew is False and first.random is False


def test_chance_is_told_and_leaves_the_callers_generator_alone() -> None:
    random.seed(5)
    expected = random.random()
    random.seed(5)
    text, drew = feed(lambda n, rng: [rng.random() + random.random()] * n).make({"n": 2}, 1)
    assert random.random() == expected
    assert drew is True
    assert unpickling(locate(parse("statistics:mean")), text, "x", drew).make({"n": 2}, 1).random


def test_a_draw_is_the_same_each_time_and_unlike_another() -> None:
    maker = feed(lambda n, rng: [rng.random() for _ in range(n)])
    assert maker.make({"n": 2}, 1) == maker.make({"n": 2}, 1)
    assert maker.make({"n": 2}, 1) != maker.make({"n": 2}, 2)


def test_what_cannot_be_pickled_is_said() -> None:
    with pytest.raises(CallError, match=r"at n=4 cannot be sent") as caught:
        feed(lambda n: [open] and (x for x in range(n))).make({"n": 4}, 0)
    assert "\n" not in str(caught.value)


def test_a_feed_that_raises() -> None:
    with pytest.raises(FeedError, match=r"raises IndexError: .* at n=4"):
        feed(lambda n: [][n]).make({"n": 4}, 0)


@pytest.mark.parametrize("function", [range, lambda: 1, lambda n, k: n, dict])
def test_a_function_that_cannot_be_a_feed(function: Callable[..., Any]) -> None:
    with pytest.raises(CallError):
        feed(function).make({"n": 4}, 0)


def test_an_input_that_does_not_fit_the_subject() -> None:
    text, _ = feed(lambda n: args(n, n, n)).make({"n": 4}, 0)
    with pytest.raises(FeedError, match="does not fit"):
        unpickling(locate(parse("statistics:median")), text, "x").make({"n": 4}, 0)
