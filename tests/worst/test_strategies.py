"""Worst cases where a strategy of hypothesis makes the inputs."""

from __future__ import annotations

import ast
from pathlib import Path

from running import steplaw
from steplaw.study import make_study
from steplaw.worst.job import worst

HERE = Path(__file__).parent
FEEDS = HERE / "strategic_feeds.py"
SUBJECTS = HERE / "subjects.py"


def steps_on(text: str, name: str) -> int:
    """Count the steps of one input by an audit of its own."""
    ended = steplaw(
        "audit", f"{SUBJECTS}:{name}", "--feed", f"[{text}, n][0]", "--sizes", "1,2",
        "--only-sizes", "--no-clock", "--json", "-",
    )  # fmt: skip
    assert ended.status == 0, ended.err
    values = {v["mean"] for v in ended.record["figure"]["values"]}
    assert len(values) == 1
    return int(values.pop())


def test_the_search_comes_near_the_known_worst() -> None:
    record = worst(make_study(f"{SUBJECTS}:insertion_sort", feed=f"{FEEDS}:bookings"), 6)
    numbers = ast.literal_eval(record["best"]["input"])
    assert len(numbers) == 6
    falls = sum(a > b for i, a in enumerate(numbers) for b in numbers[i + 1 :])
    # The worst has all 15 pairs the wrong way round, an order drawn at random half of them on
    # average (Knuth, The Art of Computer Programming 3, 5.2.1; from memory).
    assert falls >= 13
    assert record["best"]["value"] == steps_on(record["best"]["input"], "insertion_sort")
    assert not record["best"]["true"]


def test_nested_structures_beside_a_plain_argument() -> None:
    record = worst(make_study(f"{FEEDS}:depth", feed=f"{FEEDS}:nested"), 4)
    assert record["best"]["value"] > record["family"]["values"][0]["value"]
    tree, limit = ast.literal_eval(record["best"]["input"].removeprefix("args"))
    assert isinstance(tree, tuple)
    assert limit == 100


def test_a_strategy_of_what_no_file_holds() -> None:
    ended = steplaw("worst", f"{FEEDS}:known", "--at", "1", "--feed", f"{FEEDS}:open_files")
    assert ended.status == 2
    assert "plain values alone" in ended.message


def test_no_law_of_a_strategy() -> None:
    ended = steplaw("audit", f"{SUBJECTS}:insertion_sort", "--feed", f"{FEEDS}:bookings")
    assert ended.status == 2
    assert "strategy of hypothesis" in ended.message
