"""A study: what was asked for, checked before anything runs."""

from __future__ import annotations

import functools
import shlex
from typing import Any

import pytest
from click.testing import CliRunner

from running import ROOT
from steplaw.commands import audit as command
from steplaw.errors import CallError
from steplaw.study import make_study

SUBJECT = "samples/ferry/timetable.py:trios"


def module_feed(n: int) -> list[int]:
    return list(range(n))


def test_nothing_given() -> None:
    study = make_study(SUBJECT)
    assert study.feed is None and study.asked == () and not study.every
    assert study.plan.names == ("n",) and study.figure == "steps" and study.clock
    assert study.again == f"steplaw audit {SUBJECT}"


@pytest.mark.parametrize(
    ("sizes", "asked"),
    [
        ("4,8", [{"n": 4}, {"n": 8}]),
        ([4, 8], [{"n": 4}, {"n": 8}]),
        (range(4, 9, 4), [{"n": 4}, {"n": 8}]),
        (6, [{"n": 6}]),
        ({"n": [1], "m": [2, 3]}, [{"n": 1, "m": 2}, {"n": 1, "m": 3}]),
        ("n m", []),
        (None, []),
    ],
)
def test_sizes_that_a_person_names(sizes: Any, asked: list[dict[str, int]]) -> None:
    assert list(make_study(SUBJECT, sizes=sizes).asked) == asked


def test_a_feed_by_its_function() -> None:
    spec = make_study(SUBJECT, feed=module_feed).feed
    assert spec is not None
    assert (spec.kind, spec.text) == ("function", f"{__file__}:module_feed")


@pytest.mark.parametrize(
    "feed", [lambda n: [n], functools.partial(module_feed), module_feed.__call__]
)
def test_a_feed_that_only_this_process_has(feed: Any) -> None:
    spec = make_study(SUBJECT, feed=feed).feed
    assert spec is not None
    assert spec.kind == "python" and spec.function is feed


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ({"feed": "n", "every": "[n]"}, "together"),
        ({"draws": 0}, "--draws 0"),
        ({"limit_seconds": 0}, "above 0"),
        ({"limit_memory": -1}, "above 0"),
        ({"figure": "line:x"}, "no figure 'line:x'"),
        ({"figure": ""}, "no figure"),
        ({"sizes": ""}, "empty"),
        ({"sizes": {}}, "empty"),
        ({"sizes": {"n": []}}, "empty"),
        ({"sizes": "-1"}, "negative"),
        ({"only_sizes": True}, "needs sizes"),
        ({"only_sizes": True, "sizes": "n m"}, "needs sizes"),
        ({"feed": 3.5}, "not 3.5"),
    ],
)
def test_what_cannot_be_used(given: dict[str, Any], message: str) -> None:
    with pytest.raises(CallError, match=message):
        make_study(SUBJECT, **given)


@pytest.mark.parametrize(
    "given",
    [
        {},
        {"feed": "[rng.random() for _ in range(n)]", "draws": 7},
        {"every": "(list(p) for p in permutations(range(n)))", "figure": "comparison"},
        {"sizes": [4, 8, 15]},
        {"sizes": {"n": [2, 4], "m": [3, 9]}, "only_sizes": True, "feed": "args(n, m)"},
    ],
)
def test_the_command_for_a_call_from_python_asks_for_the_same(
    given: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    study = make_study(SUBJECT, **given)
    made: list[Any] = []

    def keep(subject: str, **words: Any) -> Any:
        made.append(make_study(subject, **{**words, "again": study.again}))
        raise CallError("enough")

    monkeypatch.setattr(command, "make_study", keep)
    monkeypatch.chdir(ROOT)
    CliRunner().invoke(command.command, shlex.split(study.again)[2:])
    assert made == [study]
