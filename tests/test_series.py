"""Runs turned into observations."""

from __future__ import annotations

from fractions import Fraction
from statistics import fmean, pvariance
from typing import Any

from hypothesis import given
from hypothesis import strategies as st

from steplaw import series
from steplaw.host.runner import Run
from steplaw.sweep import Sweep
from steplaw.tally.model import Tally


def run(n: int, steps: int, times: int = 1, sites: Any = (), **operations: int) -> Run:
    return Run({"n": n}, 0, Tally(steps, {}, operations), steps, tuple(sites), times=times)


def site(block: int, steps: int) -> tuple[str, str, int, int, int, int]:
    return ("port.py", "dock", 1, block, 1 + block, steps)


@given(st.lists(st.tuples(st.integers(0, 10**6), st.integers(1, 9)), min_size=1, max_size=8))
def test_means_and_variances_are_those_of_all_inputs(pairs: list[tuple[int, int]]) -> None:
    (seen,) = series.observations({(3,): pairs}, whole=True)
    spelt_out = [Fraction(value) for value, times in pairs for _ in range(times)]
    # The standard library's own mean and variance of a population, over fractions.
    assert seen.value == sum(spelt_out) / len(spelt_out)
    assert seen.variance == pvariance(spelt_out)
    assert float(seen.value) == fmean(spelt_out)
    assert (seen.least, seen.most) == (min(spelt_out), max(spelt_out))
    assert seen.draws == len(spelt_out) and seen.whole


def test_sizes_are_in_order_and_absent_figures_are_nought() -> None:
    sweep = Sweep(("n",), {(4,): [run(4, 9, call=2)], (2,): [run(2, 5)]})
    assert [o.at for o in series.of(sweep, lambda r: r.tally.steps)] == [(2,), (4,)]
    calls = series.of_many(sweep, lambda r: r.tally.operations)["call"]
    assert [(o.at, o.value) for o in calls] == [((2,), 0), ((4,), 2)]


def test_a_block_is_in_the_exact_part_if_all_inputs_of_each_size_agree_on_it() -> None:
    sweep = Sweep(
        ("n",),
        {
            (2,): [run(2, 5, sites=[site(0, 5)]), run(2, 5, sites=[site(0, 5)])],
            (4,): [
                run(4, 12, sites=[site(0, 10), site(1, 2)]),
                run(4, 13, sites=[site(0, 10), site(1, 3)]),
            ],
        },
    )
    exact, data = series.parts(sweep)
    assert [o.value for o in exact] == [5, 10]
    assert [o.value for o in data] == [0, Fraction(5, 2)]
    whole = series.of(sweep, lambda r: r.tally.steps)
    assert [a.value + b.value for a, b in zip(exact, data, strict=True)] == [o.value for o in whole]


def test_a_block_that_some_inputs_never_come_to_is_decided_by_the_data() -> None:
    sweep = Sweep(("n",), {(2,): [run(2, 3, sites=[site(0, 3)]), run(2, 1, sites=[site(1, 1)])]})
    exact, data = series.parts(sweep)
    assert [o.value for o in exact] == [0]
    assert [o.value for o in data] == [2]
