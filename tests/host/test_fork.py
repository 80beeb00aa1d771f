"""One run in a forked process: what it gives, and every way it can end badly."""

from __future__ import annotations

import faulthandler
import os
import signal
import time
from collections.abc import Callable, Iterator
from typing import Any

import pytest

from steplaw.host.fork import forked_stream
from steplaw.host.limits import Limits

SHORT = Limits(seconds=1.0, megabytes=256)


def _eats() -> dict[str, Any]:
    held = []
    while True:
        held.append(bytearray(1 << 24))


def _sleeps() -> dict[str, Any]:
    time.sleep(60)
    return {}


def _raises() -> dict[str, Any]:
    raise KeyError("berth")


def _exits() -> dict[str, Any]:
    raise SystemExit(4)


def _killed() -> dict[str, Any]:
    faulthandler.disable()
    os.kill(os.getpid(), signal.SIGSEGV)
    return {}


def test_a_reply_comes_through() -> None:
    replies = list(forked_stream(lambda: iter([{"n": 1}, {"n": "é" * 100_000}]), SHORT))
    assert [r for r in replies if "n" in r] == [{"n": 1}, {"n": "é" * 100_000}]


def test_nothing_that_a_run_does_is_seen_outside() -> None:
    kept: list[int] = []

    def work() -> Iterator[dict[str, Any]]:
        kept.append(1)
        yield {"held": len(kept)}

    for _ in range(2):
        assert {"held": 1} in list(forked_stream(work, SHORT))
    assert kept == []


@pytest.mark.parametrize(
    ("work", "kind", "part"),
    [
        (_eats, "memory", "256 MB"),
        (_sleeps, "time", "1 s"),
        (_raises, "fault", "KeyError"),
        (_exits, "exit", "sys.exit(4)"),
        (_killed, "crash", "SIGSEGV"),
        (lambda: os._exit(3), "exit", "status 3"),
    ],
)
def test_a_run_that_ends_badly_is_named(
    work: Callable[[], dict[str, Any]], kind: str, part: str
) -> None:
    replies = list(forked_stream(lambda: iter((work(),)), SHORT))
    failed = next(r["failed"] for r in replies if "failed" in r)
    assert failed["kind"] == kind
    assert part in failed["message"]
    assert "\n" not in failed["message"]
