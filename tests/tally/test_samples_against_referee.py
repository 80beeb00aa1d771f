"""Every sample counted as the interpreter's own instruction events count it."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from programs.compare import differences
from steplaw.feed import bind
from steplaw.subject import SubjectRef, locate

SAMPLES = Path(__file__).parents[2] / "samples"
SIZES = (0, 1, 2, 5, 9)


def _names() -> list[tuple[str, str]]:
    found = []
    for file in sorted((SAMPLES / "ferry").glob("*.py")):
        for line in file.read_text(encoding="utf-8").splitlines():
            if line.startswith("def "):
                found.append((file.stem, line[4 : line.index("(")]))
    return found


@pytest.mark.parametrize(("module", "name"), _names())
def test_sample_is_counted_like_the_referee(module: str, name: str) -> None:
    subject = locate(SubjectRef(str(SAMPLES / "ferry" / f"{module}.py"), name, True))
    feed = bind(None, subject)

    def make() -> Callable[[], Any]:
        inputs = [feed.make({"n": n}, 0) for n in SIZES if n or not _needs_one(feed)]

        def run() -> Any:
            return [subject.function(*made.args, **made.kwargs) for made in inputs]

        return run

    assert differences(make) == []


def _needs_one(feed: Any) -> bool:
    try:
        feed.make({"n": 0}, 0)
    except Exception:
        return True
    return False


def test_there_are_samples() -> None:
    assert len(_names()) >= 8
    assert sys.version_info >= (3, 11)
