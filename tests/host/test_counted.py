"""Counted runs: what belongs to the run and what does not."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from steplaw.feed import parse_every, parse_feed
from steplaw.host.runner import RunFailed, Runner
from steplaw.subject import parse

SOURCE = """
import random
from functools import lru_cache

def total(xs):
    found = 0
    for x in xs:
        found += x
    return found

def adds(xs):
    return total(xs) if xs else 0

@lru_cache(maxsize=None)
def kept(n):
    return total(range(n))

def draws(xs):
    return [random.random() for _ in xs]

def coin(xs):
    found = 0
    for x in xs:
        if random.random() < 0.5:
            found += 1
    return found

def makes_code(xs):
    scope = {}
    for x in xs:
        exec(f"def port(): return {x}", scope)
        scope["port"]()

def rarely(xs):
    if xs == sorted(xs):
        return adds(xs)
    return 0

def raises_on_two(xs):
    if 2 in xs:
        raise ValueError("two")

def leaves(xs):
    raise SystemExit(3)
"""


@pytest.fixture(scope="module")
def office(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("office") / "port_office.py"
    path.write_text(SOURCE)
    return path


def host(office: Path, name: str, feed: str = "list(range(n))") -> Runner:
    return Runner(parse(f"{office}:{name}"), parse_feed(feed), first={"n": 1})


def every(office: Path, name: str, feed: str) -> Runner:
    return Runner(parse(f"{office}:{name}"), parse_every(feed))


def steps_by_name(run: object) -> dict[str, int]:
    return {f.name: f.steps for f in run.tally.functions}  # type: ignore[attr-defined]


def test_making_the_input_is_no_part_of_the_run(office: Path) -> None:
    tallies = []
    for feed in ("list(range(n))", "sorted(n - x - 1 for x in range(n))"):
        with host(office, "total", feed) as runner:
            tallies.append(runner.count({"n": 20}).tally)
    assert tallies[0] == tallies[1]


def test_steps_of_callees_count_and_are_told_apart(office: Path) -> None:
    with host(office, "adds") as runner:
        run = runner.count({"n": 6})
    steps = steps_by_name(run)
    assert set(steps) == {"adds", "total"}
    assert run.own_steps == steps["adds"]
    assert run.tally.steps == sum(steps.values())


def test_kept_results_are_forgotten_between_runs(office: Path) -> None:
    with host(office, "kept", "n") as runner:
        assert runner.count({"n": 5}).tally == runner.count({"n": 5}).tally
        assert steps_by_name(runner.count({"n": 5})).keys() == {"kept", "total"}


def test_only_the_feed_makes_an_input_random(office: Path) -> None:
    with host(office, "draws") as runner:
        assert runner.count({"n": 3}).random is False
    with host(office, "total", "[rng.randrange(9) for _ in range(n)]") as runner:
        assert runner.count({"n": 3}).random is True
        assert runner.count({"n": 0}).random is False


def test_the_subjects_own_chance_is_not_seeded(office: Path) -> None:
    with host(office, "coin") as runner:
        tallies = {runner.count({"n": 200}).tally.steps for _ in range(5)}
    # Five binomial counts of 200 throws that are all equal: less than one time in 10^5.
    assert len(tallies) > 1


@pytest.fixture(scope="module")
def orders(office: Path) -> Iterator[Runner]:
    with every(office, "rarely", "(list(p) for p in permutations(range(n)))") as runner:
        yield runner


def test_code_that_only_a_late_input_runs_is_counted(orders: Runner) -> None:
    # Only the ascending order comes to `adds`; it is the first at each size, and at n = 1 the only
    # one, so ask for the largest size first.
    runs = orders.every({"n": 5})
    assert sum(run.times for run in runs) == 120
    by_steps = {run.input: (run.times, steps_by_name(run)) for run in runs}
    assert by_steps["[0, 1, 2, 3, 4]"][0] == 1
    assert set(by_steps["[0, 1, 2, 3, 4]"][1]) == {"rarely", "adds", "total"}
    others = [run for run in runs if run.input != "[0, 1, 2, 3, 4]"]
    # Their steps are the same; the comparisons of the sort in them are not.
    assert sum(run.times for run in others) == 119
    assert len({run.tally.steps for run in others}) == 1


def test_code_that_the_last_input_alone_runs_is_counted(office: Path) -> None:
    feed = "(list(p) for p in reversed(list(permutations(range(n)))))"
    with every(office, "rarely", feed) as runner:
        runs = runner.every({"n": 4})
    assert sum(run.times for run in runs) == 24
    assert runs[-1].times == 1
    assert len({run.tally.steps for run in runs[:-1]}) == 1
    assert set(steps_by_name(runs[-1])) == {"rarely", "adds", "total"}


def test_each_of_all_inputs_counts_as_it_does_alone(office: Path, orders: Runner) -> None:
    with host(office, "rarely") as runner:
        alone = runner.count({"n": 5})
    runs = orders.every({"n": 5})
    assert next(r for r in runs if r.input == "[0, 1, 2, 3, 4]").tally == alone.tally


def test_code_made_while_running_is_counted(office: Path) -> None:
    with every(office, "makes_code", "[[x] * n for x in range(3)]") as runner:
        runs = runner.every({"n": 2})
    assert sum(run.times for run in runs) == 3
    assert all(steps_by_name(run)["port"] > 0 for run in runs)


def test_progress_is_told(orders: Runner) -> None:
    seen: list[int] = []
    orders.every({"n": 6}, seen.append)
    assert seen[-2:] == [256, 512]


def test_the_input_that_the_subject_cannot_take_is_named(office: Path) -> None:
    with every(office, "raises_on_two", "([x] for x in range(n))") as runner:
        assert len(runner.every({"n": 2})) == 1
        with pytest.raises(RunFailed, match=r"raised ValueError: two at \S+:\d+ on input \[2\]"):
            runner.every({"n": 3})
        assert sum(run.times for run in runner.every({"n": 2})) == 2


def test_leaving_the_interpreter_ends_that_run_alone(office: Path) -> None:
    with host(office, "leaves") as runner:
        for _ in range(2):
            with pytest.raises(RunFailed) as caught:
                runner.count({"n": 1})
            assert caught.value.failure.kind == "exit"
