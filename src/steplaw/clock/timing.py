"""Fair timing of the untouched function. Standard library only: it runs in a light child."""

from __future__ import annotations

import gc
import math
import sys
import time
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import Any

try:
    import resource
except ImportError:  # not a POSIX system
    resource = None  # type: ignore[assignment]

Size = Mapping[str, int]
Call = Callable[[tuple[Any, ...], dict[str, Any]], object]
Make = Callable[[Size, int], tuple[tuple[Any, ...], dict[str, Any]]]
Ticks = Callable[[], int]

SAMPLE_NS = 1_000_000
"""A sample lasts at least this long where the budget allows, far above any clock's resolution."""
BATCH_BYTES = 256 << 10
"""Inputs waiting in a batch must not push each other out of the cache."""
BATCH_MOST = 4096
ROUNDS_LEAST = 3


@dataclass(frozen=True, slots=True)
class Timing:
    """Wall-clock time of one call at one size.

    Parameters
    ----------
    at : mapping of str to int
        The size.
    best_ns : float
        Least sample, in nanoseconds per call.
    samples : tuple of float
        Every sample, one a round, in nanoseconds per call.
    calls : int
        Calls that each sample is the mean of.
    """

    at: Size
    best_ns: float
    samples: tuple[float, ...]
    calls: int = 1

    def as_json(self) -> dict[str, Any]:
        """Give the timing as plain JSON values."""
        return {
            "at": dict(self.at),
            "best_ns": self.best_ns,
            "samples": list(self.samples),
            "calls": self.calls,
        }

    @classmethod
    def from_json(cls, data: Mapping[str, Any]) -> Timing:
        """Read back what `as_json` gave."""
        return cls(data["at"], data["best_ns"], tuple(data["samples"]), data["calls"])


@dataclass(slots=True)
class _Post:
    """One size on its way through the rounds."""

    at: Size
    calls: int
    batch: int
    overhead: Mapping[int, int]
    round_ns: int
    samples: list[float] = field(default_factory=list)


def measure(
    call: Call,
    make: Make,
    points: Sequence[Size],
    *,
    rounds: int = 7,
    budget_seconds: float = 6.0,
    draws: int = 1,
    clock: Ticks = time.perf_counter_ns,
) -> list[Timing]:
    """Time a call fairly at several sizes.

    The rounds go in turn over the sizes, so that a slow spell of the machine touches all of
    them. Every call gets an input of its own, made outside the timed part; the garbage collector
    is held off meanwhile; what an empty Python function costs in the same loop is subtracted.
    Where the system tells that the thread never waited for anything, the time in which others had
    the processor is taken off as well, so that a busy machine gives the time of a quiet one.

    Parameters
    ----------
    call : callable
        Calls the subject with a tuple of arguments and a dict of keyword arguments.
    make : callable
        Makes these for a size and the number of a draw.
    points : sequence of mapping
        The sizes, smallest first.
    rounds : int
        Samples for each size; fewer, but no fewer than three, where the budget is short.
    budget_seconds : float
        Time for all of it, in seconds. Sizes for which it does not suffice are left out.
    draws : int
        The inputs are draws 0 to draws-1 in equal shares: those whose steps were counted.
    clock : callable
        Gives a time in nanoseconds.

    Returns
    -------
    list of Timing
        In the order of `points`.
    """
    with _collector_held():
        deadline = clock() + int(budget_seconds * 1e9)
        share = int(budget_seconds * 1e9 / (max(rounds, 1) * max(len(points), 1)))
        posts = _calibrate(call, make, points, draws, share, deadline, clock)
        _fit_budget(posts, deadline - clock())
        for done in range(rounds):
            a_round = sum(post.round_ns for post in posts)
            if done >= ROUNDS_LEAST and clock() + a_round > deadline:
                break
            for post in posts:
                post.samples.append(_sample(call, make, post, draws, clock))
    return [Timing(p.at, min(p.samples), tuple(p.samples), p.calls) for p in posts if p.samples]


def _calibrate(
    call: Call,
    make: Make,
    points: Sequence[Size],
    draws: int,
    share: int,
    deadline: int,
    clock: Ticks,
) -> list[_Post]:
    posts: list[_Post] = []
    last, growth = 0, 1.0
    for at in points:
        expected = last * max(growth, 1.0) * draws * ROUNDS_LEAST
        if clock() + expected > deadline:
            break
        began = clock()
        inputs = [make(at, 0)]
        make_ns = clock() - began
        weight = _footprint(inputs)
        run_ns = max(_timed(call, inputs, clock), 1)
        growth, last = (run_ns / last if last else 1.0), run_ns
        calls = min(SAMPLE_NS // run_ns, share // (make_ns + run_ns + 1))
        calls = draws * max(1, math.ceil(calls / draws))
        batch = max(1, min(calls, BATCH_MOST, BATCH_BYTES // weight))
        overhead = {m: _overhead(m, clock) for m in {batch, calls % batch} if m}
        posts.append(_Post(at, calls, batch, overhead, calls * (make_ns + run_ns)))
    return posts


def _fit_budget(posts: list[_Post], left: int) -> None:
    """Drop the largest sizes until the least number of rounds fits."""
    while posts and ROUNDS_LEAST * sum(post.round_ns for post in posts) > left:
        posts.pop()


def _sample(call: Call, make: Make, post: _Post, draws: int, clock: Ticks) -> float:
    spent = 0
    for first in range(0, post.calls, post.batch):
        numbers = range(first, min(first + post.batch, post.calls))
        inputs = [make(post.at, number % draws) for number in numbers]
        spent += max(0, _timed(call, inputs, clock) - post.overhead[len(inputs)])
        del inputs
    gc.collect()
    return round(spent / post.calls, 2)


def _timed(call: Call, inputs: list[tuple[tuple[Any, ...], dict[str, Any]]], clock: Ticks) -> int:
    waits = _waits() if clock is time.perf_counter_ns else None
    own_start = time.thread_time_ns()
    start = clock()
    for args, kwargs in inputs:
        call(args, kwargs)
    spent = clock() - start
    own = time.thread_time_ns() - own_start
    # A thread that never gave way by itself stood aside only where others took the processor.
    return min(spent, own) if waits is not None and _waits() == waits else spent


def _waits() -> int | None:
    """Count the times that this thread gave way by itself, as in a sleep or a read."""
    usage = getattr(resource, "RUSAGE_THREAD", None)
    return None if usage is None else resource.getrusage(usage).ru_nvcsw


def _nothing(args: tuple[Any, ...], kwargs: dict[str, Any]) -> object:
    return None


def _overhead(calls: int, clock: Ticks) -> int:
    inputs: list[tuple[tuple[Any, ...], dict[str, Any]]] = [((), {}) for _ in range(calls)]
    return min(_timed(_nothing, inputs, clock) for _ in range(9))


def _footprint(inputs: list[Any], most: int = 20_000) -> int:
    """Estimate the bytes that an input holds; one too wide to walk counts as a whole batch."""
    seen: set[int] = set()
    todo, size = list(inputs), 1
    while todo:
        item = todo.pop()
        if id(item) in seen or isinstance(item, type) or callable(item):
            continue
        seen.add(id(item))
        size += sys.getsizeof(item, 64)
        if len(seen) > most:
            return BATCH_BYTES
        todo.extend(gc.get_referents(item))
    return size


@contextmanager
def _collector_held() -> Iterator[None]:
    was_on = gc.isenabled()
    gc.collect()
    gc.disable()
    gc.freeze()
    try:
        yield
    finally:
        # What was frozen before is let go too: that costs time later and changes nothing.
        gc.unfreeze()
        if was_on:
            gc.enable()
