"""The sweep: which sizes are run, in what order, and where it ends."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import pytest

from steplaw.host.limits import Failure
from steplaw.host.runner import Run, RunFailed
from steplaw.repeat import unequal
from steplaw.sizes import plan
from steplaw.sweep import STEPS_A_RUN, Sweep, extend, larger, sweep
from steplaw.tally.model import LineCount, Tally


def run(at: Mapping[str, int], steps: int, draw: int = 0, **more: Any) -> Run:
    tally = Tally(steps, {}, {}, (), (LineCount("port.py", 7, steps, steps),))
    return Run(dict(at), draw, tally, steps, (), **more)


class Host:
    """Stands for a host: its runs have the steps that a rule gives."""

    ahead = 0

    def __init__(self, rule: Callable[[int, int], int], random: bool = False) -> None:
        self.rule, self.random = rule, random
        self.asked: list[tuple[int, int]] = []

    def count(self, at: Mapping[str, int], draw: int = 0) -> Run:
        self.asked.append((at["n"], draw))
        return run(at, self.rule(at["n"], draw), draw, random=self.random)

    def every(self, at: Mapping[str, int], progress: Callable[[int], None] | None = None) -> Any:
        self.asked.append((at["n"], -1))
        return [run(at, self.rule(at["n"], 0), times=2 ** at["n"])]


def swept(host: Host, sizes: str | None = None, **given: Any) -> Sweep:
    asked = plan(sizes, True).points if sizes else ()
    return sweep(host, plan(sizes, bool(sizes)), asked=asked, **{"draws": 3, **given})  # type: ignore[arg-type]


def failing(size: int, kind: str) -> Callable[[int, int], int]:
    def rule(n: int, draw: int) -> int:
        if n == size:
            raise RunFailed(Failure(kind, "failed", {"n": n}, draw))
        return n

    return rule


def test_one_draw_where_the_input_does_not_vary() -> None:
    host = Host(lambda n, draw: n)
    result = swept(host, "2,4")
    assert host.asked == [(2, 0), (4, 0)]
    assert (result.varies, result.draws) == (False, 1)


def test_several_where_it_does() -> None:
    host = Host(lambda n, draw: n + draw, random=True)
    result = swept(host, "2,4")
    assert host.asked == [(n, draw) for n in (2, 4) for draw in range(3)]
    assert (result.varies, result.draws) == (True, 3)


@pytest.mark.parametrize("rule", [lambda n, d: n**4, lambda n, d: 2 ** min(n, 80)])
def test_what_would_take_too_long_is_left_out_of_the_plan(rule: Callable[[int, int], int]) -> None:
    result = swept(Host(rule))
    largest = max(result.runs)[0]
    assert rule(largest, 0) <= STEPS_A_RUN
    assert (4096,) in result.left_out
    assert {*result.runs, *result.left_out} == {(p["n"],) for p in plan().points}


def test_the_same_steps_make_the_same_sweep() -> None:
    rule = lambda n, d: n**3 + 40 * n  # noqa: E731
    one, two = swept(Host(rule)), swept(Host(rule))
    assert list(one.runs) == list(two.runs) and one.left_out == two.left_out


def test_what_is_asked_for_is_run_whatever_it_costs() -> None:
    result = swept(Host(lambda n, d: 2 ** min(n, 80)), "2,4,6,8,10,60")
    assert (60,) in result.runs and result.left_out == []


def test_too_many_inputs_of_a_size() -> None:
    result = swept(Host(lambda n, d: n), every=True)
    assert (13,) in result.runs and (64,) in result.left_out


@pytest.mark.parametrize("kind", ["raised", "time", "memory", "exit", "crash", "feed"])
def test_a_failure_ends_it_and_keeps_what_was_finished(kind: str) -> None:
    result = swept(Host(failing(4, kind)), "2,4,8")
    assert list(result.runs) == [(2,)]
    assert result.stopped is not None
    assert (result.stopped.kind, result.stopped.at) == (kind, {"n": 4})


def test_a_size_nobody_asked_for_may_fail_before_the_first_that_does_not() -> None:
    result = swept(Host(failing(0, "raised")))
    assert result.stopped is None
    assert [f.at for f in result.passed_over] == [{"n": 0}]
    assert (1,) in result.runs


def test_one_that_takes_too_long_is_not_passed_over() -> None:
    assert swept(Host(failing(0, "time"))).stopped is not None


def test_an_interrupt_ends_it_and_keeps_what_was_finished() -> None:
    def rule(n: int, draw: int) -> int:
        if n == 8:
            raise KeyboardInterrupt
        return n

    result = swept(Host(rule), "2,4,8,16")
    assert list(result.runs) == [(2,), (4,)]
    assert result.stopped is not None
    assert (result.stopped.kind, result.stopped.at) == ("interrupted", {"n": 8})


def test_lines_of_unequal_runs_are_named() -> None:
    at = {"n": 3}
    assert unequal(at, [run(at, 5)], [run(at, 5)]) == []
    found = unequal(at, [run(at, 5)], [run(at, 6)])
    assert found == [{"file": "port.py", "line": 7, "at": at, "counts": [5, 6]}]


def test_all_inputs_are_compared_by_how_many_gave_what() -> None:
    at = {"n": 3}
    first = [run(at, 5, times=2), run(at, 9, times=1)]
    assert unequal(at, first, [run(at, 5, times=2), run(at, 9, times=1)]) == []
    found = unequal(at, first, [run(at, 5, times=3)])
    assert found[0]["counts"] == [19, 15]


def test_larger_sizes_are_offered_as_far_as_steps_allow() -> None:
    quick = Sweep(("n",), {(k,): [run({"n": k}, 10 * k)] for k in range(1, 33)})
    assert larger(quick, 5) == [64, 128]
    slow = Sweep(("n",), {(k,): [run({"n": k}, 10_000_000 * k)] for k in range(1, 17)})
    assert larger(slow, 5) == []


def test_a_sweep_is_extended_in_order_of_size() -> None:
    host = Host(lambda n, draw: n * n)
    swept = Sweep(("n",), {(k,): [run({"n": k}, k * k)] for k in (1, 2, 8)}, left_out=[(16,)])
    extend(host, swept, [4, 16, 2], 5)
    assert list(swept.runs) == [(1,), (2,), (4,), (8,), (16,)]
    assert host.asked == [(4, 0), (16, 0)]
    assert swept.left_out == []
