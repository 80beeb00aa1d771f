"""A share of the table of forecasts: the steps at eight times the sizes that the law is from.

Draws come from seeded generators, so the outcome is the same at each run on one Python version.
The whole table, with times, is made by `tests/bench/forecasts.py`.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path

import pytest

from steplaw.study import make_study

ROOT = Path(__file__).parents[2]
sys.path.insert(0, str(ROOT / "tests"))

from bench.forecast_cases import CASES, DRAWN, SAMPLE, Case  # noqa: E402
from bench.forecasts import counted, held, record_of, steps_hold  # noqa: E402
from running import python  # noqa: E402

FEEDS = "samples/feeds.py:"
EXACT = [
    Case("sample", f"{SAMPLE}timetable.py:clashes", f"{FEEDS}even_sailings", "8..64"),
    Case("sample", f"{SAMPLE}transfers.py:cheapest", f"{FEEDS}even_fares", "4..12"),
    Case("sample", f"{SAMPLE}bookings.py:seats_by_sailing", f"{FEEDS}bookings", "8..128"),
    Case("sample", f"{SAMPLE}cargo.py:best_load", f"{FEEDS}light_lots", "4..24"),
]
FITTED = [
    Case("sample", f"{SAMPLE}timetable.py:clashes", f"{FEEDS}sailings", "8..128"),
    Case("sample", f"{SAMPLE}timetable.py:in_order_fast", f"{FEEDS}departures", "8..256"),
    Case("drawn", f"{DRAWN}:heap_sort", "rng.sample(range(n), n)", "8..256"),
    Case("drawn", f"{DRAWN}:binary_insertion", "rng.sample(range(n), n)", "8..256"),
    Case("drawn", f"{DRAWN}:palindromes", "''.join(rng.choice('ab') for _ in range(n))", "8..256"),
]


def at_eight_times(case: Case) -> dict[str, object]:
    points = [at["n"] for at in make_study(case.subject, sizes=case.sizes).plan.points]
    runs, at, steps = counted(case, points)
    found = {"group": case.group, "subject": case.subject, "feed": case.feed, "time": None}
    return held(found | {"at": at, "steps": steps, "audit": record_of(case, runs)})


@pytest.fixture(autouse=True)
def in_the_projects_folder(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(ROOT)


@pytest.mark.parametrize("case", EXACT, ids=lambda c: c.subject)
def test_exact_laws_give_the_steps_at_eight_times(case: Case) -> None:
    row = at_eight_times(case)
    assert row["grade"] in ("exact", "proved")
    assert row["value"] == row["steps"]


def test_fitted_laws_hold_the_steps_at_eight_times_in_their_interval() -> None:
    rows = [at_eight_times(case) for case in FITTED]
    fitted = [row for row in rows if row["grade"] == "fitted"]
    assert len(fitted) >= len(FITTED) - 1
    # 95 in 100 is what an interval claims, so that one of five may miss it.
    assert sum(steps_hold(row) is True for row in fitted) >= len(fitted) - 1


ONE_COUNT = """
import sys, steplaw
from steplaw.feed import bind, parse_feed
from steplaw.subject import locate, parse
subject = locate(parse(sys.argv[1]))
made = bind(parse_feed(sys.argv[2]), subject, ("n",)).make({"n": 40}, 3)
print(steplaw.count(subject.function, *made.args, **made.kwargs).steps)
"""


def test_the_light_process_counts_as_steplaw_does() -> None:
    case = FITTED[2]
    asked = json.dumps({"subject": case.subject, "feed": case.feed})
    light = python("tests/bench/forecast_counts.py", stdin=f"{asked}\n[40, 3]\n")
    whole = python("-c", ONE_COUNT, case.subject, case.feed)
    assert int(light.out) == int(whole.out) > 1000


def test_the_cases_are_many_and_each_stands_once() -> None:
    assert len({(c.subject, c.feed) for c in CASES}) == len(CASES)
    assert sum(c.group == "drawn" for c in CASES) >= 90
    assert len({c.subject for c in CASES if c.group == "real"}) >= 10
