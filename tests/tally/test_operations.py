"""Operation classes: counts by hand, and one table that every version of the interpreter meets.

`operations.json` was written on one version (`python tests/tally/operations_table.py --write`);
what is counted here, on whichever version runs this, must be equal to it.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

import steplaw
from tally import operations_table

TESTS = Path(__file__).parents[1]
TABLE = json.loads(operations_table.TABLE.read_text(encoding="utf-8"))


@pytest.mark.parametrize("kind", operations_table.KINDS)
def test_counts_are_those_of_the_other_versions(kind: str) -> None:
    done = subprocess.run(
        [sys.executable, operations_table.__file__, "--count", kind],
        env={
            **{k: v for k, v in os.environ.items() if k != "STEPLAW_PROGRAMS"},
            "PYTHONHASHSEED": "0",
            "PYTHONPATH": os.pathsep.join((str(TESTS), str(TESTS.parent / "src"))),
        },
        capture_output=True,
        encoding="utf-8",
        timeout=120,
    )
    assert done.returncode == 0, done.stderr
    found = json.loads(done.stdout)[kind]
    assert operations_table.differences(TABLE[kind], found) == []


def test_the_table_has_enough_in_it() -> None:
    assert operations_table.own_functions(TABLE) >= 200
    assert len(TABLE["samples"]) >= 25
    named = {
        word
        for kind in TABLE.values()
        for row in kind.values()
        for text in row.get("functions", {}).values()
        for word in text.split()[::2]
    }
    assert named == set(steplaw.tally.classes.CLASSES)


def test_another_count_is_noticed() -> None:
    kept = {"1": {"outcome": "3", "functions": {"f": "call 1", "g": "call 2"}}}
    found = {"1": {"outcome": "3", "functions": {"f": "call 1", "h": "call 2"}}}
    assert operations_table.differences(kept, kept) == []
    assert operations_table.differences(kept, found) == [
        "1 g: None, not call 2",
        "1 h: call 2, not None",
    ]
    assert operations_table.differences(kept, {}) == ["1: None, not " + str(kept["1"])]


class _Hull:
    def room(self) -> int:
        return 4


class _Ferry(_Hull):
    def room(self) -> int:
        return super().room() + 1


def _none_tests(value: Any) -> int:
    return 1 if value is None else 2


def _slices(xs: list[int]) -> None:
    xs[1:3] = xs[2:4]


def _squares(n: int) -> list[int]:
    return [k * k for k in range(n)]


def _closure(n: int) -> int:
    def inner(k: int = 3) -> int:
        return n + k

    return inner()


@pytest.mark.parametrize(
    ("function", "given", "expected"),
    [
        (_Ferry().room, (), {"call": 2, "attribute": 1, "arithmetic": 1}),
        (_none_tests, (3,), {"comparison": 1}),
        (_slices, ([1, 2, 3, 4],), {"element_read": 1, "element_write": 1}),
        (
            _squares,
            (4,),
            {"call": 1, "iteration": 5, "arithmetic": 4, "append": 4, "build": 1},
        ),
        (_closure, (1,), {"call": 1, "arithmetic": 1}),
    ],
)
def test_counts_by_hand(
    function: Callable[..., Any], given: tuple[Any, ...], expected: dict[str, int]
) -> None:
    assert steplaw.count(function, *given).operations == expected
