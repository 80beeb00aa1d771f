from __future__ import annotations

import pytest
from stored_audits import clock

from steplaw.forecast.pace import pace

STEPS = [1000 * 2**k for k in range(10)]
FAR = {"n": 2**12}


def test_a_steady_rate_stays_within_hundredths() -> None:
    found, why = pace(clock([2.0] * 10, STEPS))
    assert found is not None
    assert why == ""
    low, high = found.seconds(FAR, 8e6, 8e6)
    assert 0.7 * 16e-3 < low < 16e-3 < high < 1.4 * 16e-3


def test_the_interval_opens_with_the_distance() -> None:
    found, _ = pace(clock([2.0] * 10, STEPS))
    assert found is not None
    ratios = [b / a for a, b in (found.seconds({"n": 2**k}, 1e6, 1e6) for k in (9, 12, 15, 40))]
    assert ratios == sorted(ratios)
    assert ratios[-1] > 3 * ratios[0]


def test_a_drift_may_go_on_or_stop() -> None:
    rates = [2.0 * 1.06**k for k in range(10)]
    found, _ = pace(clock(rates, STEPS))
    assert found is not None
    low, high = found.seconds(FAR, STEPS[-1] * 8, STEPS[-1] * 8)
    for rate in (rates[-1], rates[-1] * 1.06**3):
        assert low <= STEPS[-1] * 8 * rate / 1e9 <= high


def test_time_that_departs_may_go_on_departing() -> None:
    rates = [2.0] * 5 + [2.0 * 1.5**k for k in range(1, 6)]
    found, why = pace(clock(rates, STEPS, agrees=False, departs_from={"n": 2**5}))
    assert found is not None
    assert why.startswith("time departs from the law")
    low, high = found.seconds(FAR, STEPS[-1] * 8, STEPS[-1] * 8)
    assert low <= STEPS[-1] * 8 * rates[-1] / 1e9
    assert high >= STEPS[-1] * 8 * rates[-1] * 1.5**3 / 1e9


def test_no_verdict_makes_it_wider() -> None:
    agreed, _ = pace(clock([2.0] * 10, STEPS))
    undecided, why = pace(clock([2.0] * 10, STEPS, agrees=None))
    assert agreed is not None and undecided is not None
    assert undecided.high > 1.3 * agreed.high
    assert undecided.low < agreed.low / 1.3
    assert "undecided" in why


@pytest.mark.parametrize("given", [None, {"agrees": None, "reason": "interrupted"}])
def test_no_clock_no_time(given: dict[str, object] | None) -> None:
    found, why = pace(given)
    assert found is None
    assert why


def test_three_sizes_are_too_few() -> None:
    found, why = pace(clock([2.0] * 3, STEPS[:3], agrees=None))
    assert found is None
    assert why.startswith("no time is foretold: too few sizes")
