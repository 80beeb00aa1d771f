"""Intervals of fitted laws, held against made-up laws whose true values are known."""

from __future__ import annotations

import math
import random
from collections.abc import Callable

import pytest
from stored_audits import SIZES, observed

from steplaw.forecast.fan import fan
from steplaw.forecast.scatter import scatter

Mean = Callable[[float], float]
LAWS: list[tuple[str, Mean, float]] = [
    ("quadratic", lambda n: 6 * n * n + 20 * n + 12, 1.5),
    ("linear", lambda n: 23 * n + 40, 0.5),
    ("n log n", lambda n: 18 * n * math.log(n + 1) + 30 * n, 0.5),
    ("root", lambda n: 80 * math.sqrt(n) + 25, 0.9),
    ("mixed", lambda n: 4 * n * n + 300 * n * math.log(n + 1), 0.8),
]


@pytest.mark.parametrize(("mean", "power"), [(m, p) for _, m, p in LAWS], ids=[x[0] for x in LAWS])
def test_a_run_at_eight_times_lies_in_the_interval(mean: Mean, power: float) -> None:
    inside = known = 0
    sizes = [n for n in SIZES if n >= 2]
    for seed in range(20):
        rng = random.Random(seed)
        scale = 0.1 * mean(64) / mean(64) ** power

        def run(n: float, rng: random.Random = rng, scale: float = scale) -> int:
            return max(0, round(rng.gauss(mean(n), scale * mean(n) ** power)))

        seen = [observed((n,), [run(n) for _ in range(5)]) for n in sizes]
        found = fan(seen)
        if found is None:
            continue
        known += 1
        at = 8 * sizes[-1]
        interval = found.at((at,), found.models[0].at((at,))[0])
        inside += interval.low <= run(at) <= interval.high
        assert interval.low <= interval.mean_low <= interval.mean_high <= interval.high
    assert known == 20
    # 18 of 20 is the share that is claimed; one less may be chance.
    assert inside >= 17


@pytest.mark.parametrize("power", [0.5, 1.0])
def test_the_spread_of_draws_is_foretold_by_its_power(power: float) -> None:
    rng = random.Random(5)
    seen = [
        observed((n,), [round(rng.gauss(100 * n, 3 * (100 * n) ** power / 10)) for _ in range(8)])
        for n in (32, 47, 64, 95, 128, 191, 256, 383, 512)
    ]
    found = scatter(seen)
    truth = 0.3 * (100.0 * 4096) ** power
    assert 0.8 * truth <= found.deviation(100 * 4096) <= 4 * truth
    assert found.below >= 1.96


def test_equal_draws_have_no_spread() -> None:
    found = scatter([observed((n,), [7 * n] * 3) for n in range(2, 40)])
    assert found.deviation(1000.0) == 0.0


def test_too_few_sizes_give_no_interval() -> None:
    assert fan([observed((n,), [n, n + 1]) for n in (2, 4, 8)]) is None


def test_several_sizes() -> None:
    rng = random.Random(3)
    seen = [
        observed((n, m), [round(9 * n * m * rng.uniform(0.97, 1.03)) + 12 for _ in range(5)])
        for n in (4, 8, 16, 32, 64)
        for m in (4, 8, 16, 32, 64)
    ]
    found = fan(seen)
    assert found is not None
    interval = found.at((512, 512), found.models[0].at((512, 512))[0])
    assert interval.low < 9 * 512 * 512 + 12 < interval.high
    assert interval.high < 2 * 9 * 512 * 512
