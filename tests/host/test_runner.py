"""A host with one subject: counted runs, every input of a size, timings, failures."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from steplaw.errors import CallError
from steplaw.feed import parse_every, parse_feed
from steplaw.host.limits import Limits
from steplaw.host.runner import RunFailed, Runner
from steplaw.subject import parse

SOURCE = """
kept = []

def pairs(n: int) -> int:
    total = 0
    for i in range(n):
        for j in range(i):
            total += 1
    return total

def grows(n: int) -> int:
    kept.append(n)
    return sum(1 for _ in kept)

def largest(xs: list[int]) -> int:
    best = -1
    for x in xs:
        if x > best:
            best = x
    return best

def fails(n: int) -> int:
    return 1 // (n - 3)
"""


def _line(text: str) -> int:
    lines = SOURCE.splitlines()
    return next(k for k, line in enumerate(lines, 1) if line.strip() == text)


@pytest.fixture(scope="module")
def office(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("office") / "office.py"
    path.write_text(SOURCE)
    return path


@pytest.fixture(scope="module")
def pairs(office: Path) -> Iterator[Runner]:
    with Runner(parse(f"{office}:pairs"), None) as runner:
        yield runner


def test_runs_are_counted_exactly(pairs: Runner) -> None:
    """The inner line runs n(n-1)/2 times, a binomial coefficient."""
    for n in (0, 1, 5, 12):
        run = pairs.count({"n": n})
        inner = {x.line: x.frequency for x in run.tally.lines}.get(_line("total += 1"), 0)
        assert inner == n * (n - 1) // 2
        assert run.own_steps == run.tally.steps
        assert not run.random


def test_sites_add_up_to_the_steps(pairs: Runner) -> None:
    run = pairs.count({"n": 9})
    assert sum(site[5] for site in run.sites) == run.tally.steps


def test_each_run_starts_from_the_same_state(office: Path) -> None:
    with Runner(parse(f"{office}:grows"), None) as runner:
        assert runner.count({"n": 3}).tally == runner.count({"n": 3}).tally


def test_every_input_of_a_size(office: Path) -> None:
    """The running maximum changes H(n) times on average: Knuth, TAOCP vol. 1, 1.2.10."""
    feed = parse_every("(list(p) for p in permutations(range(n)))")
    with Runner(parse(f"{office}:largest"), feed) as runner:
        runs = runner.every({"n": 4})
    assert sum(r.times for r in runs) == 24
    line = _line("best = x")
    changes = sum(r.times * x.frequency for r in runs for x in r.tally.lines if x.line == line)
    assert changes == 50  # 24 * H(4)


def test_failures_are_raised_with_their_size(office: Path) -> None:
    with Runner(parse(f"{office}:fails"), None) as runner:
        runner.count({"n": 2})
        with pytest.raises(RunFailed) as caught:
            runner.count({"n": 3})
        assert caught.value.failure.kind == "raised"
        assert caught.value.failure.at == {"n": 3}
        assert "ZeroDivisionError" in caught.value.failure.message
        assert runner.count({"n": 4}).tally.steps > 0


def test_a_feed_that_cannot_be_used_is_a_call_error(office: Path) -> None:
    runner = Runner(parse(f"{office}:pairs"), parse_feed("args(n + berths)"))
    with runner, pytest.raises(CallError, match="berths"):
        runner.count({"n": 1})


def test_the_untouched_function_is_timed(office: Path) -> None:
    with Runner(parse(f"{office}:pairs"), None, limits=Limits(), probes=False) as runner:
        rows = runner.time([{"n": 50}, {"n": 100}], 1, 0.5)
    assert [row["at"] for row in rows] == [{"n": 50}, {"n": 100}]
    assert all(row["best_ns"] > 0 for row in rows)
