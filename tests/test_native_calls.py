"""Real functions with hidden growth: the laws of steps and visits, and what is listed.

The clock's part is `tests/bench/clock_native.py`: timings are not asserted here.
"""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import pytest
import sympy

import steplaw
from programs.native_calls import CALLS, NativeCall
from steplaw.clock.verdict import SIZES_LEAST
from steplaw.host.runner import Run
from steplaw.sweep import Sweep
from steplaw.tally.model import Tally
from steplaw.timed import points_to_time

pytest.importorskip("networkx")
N = sympy.Symbol("n", positive=True)


def _order(formula: str, expected: str) -> bool:
    """Whether a leading term is a constant times an expected order, beside periodic parts."""
    leading = sympy.sympify(formula, locals={"n": N})
    leading = leading.replace(sympy.Mod, lambda *_: sympy.Integer(0))
    order = sympy.sympify(expected, locals={"n": N})
    if order == 0:
        return bool(leading == 0)
    ratio = sympy.simplify(leading / order)
    return bool(ratio.is_number and ratio > 0)


@pytest.mark.parametrize("call", CALLS, ids=[call.name for call in CALLS])
def test_what_steps_hide_is_charged_or_listed(call: NativeCall) -> None:
    record: Any = steplaw.audit(call.subject, feed=call.feed, sizes="16..256", clock=False)
    assert record["stopped"] is None
    assert _order(record["laws"]["steps"]["leading"], call.steps), record["laws"]["steps"]
    assert _order(record["laws"]["native"]["leading"], call.native), record["laws"]["native"]
    listed = [row["operation"] for row in record["ledger"]["not_charged"] if row["grows"]]
    assert listed == ([call.not_charged] if call.not_charged else [])


def test_at_least_ten_hide_growth_that_is_charged() -> None:
    assert sum(call.native not in ("0", "1") for call in CALLS) >= 10


def _sweep(steps: dict[int, int]) -> Sweep:
    return Sweep(
        ("n",), {(n,): [Run({"n": n}, 0, Tally(s, {}, {}), s, ())] for n, s in steps.items()}
    )


def test_where_counts_do_not_grow_the_sizes_timed_do() -> None:
    flat = points_to_time(_sweep(dict.fromkeys((0, 1, 2, 3, 4, 8, 9, 16, 32), 12)))
    assert [o.at for o in flat] == [(1,), (2,), (3,), (4,), (9,), (16,), (32,)]
    assert len(flat) >= SIZES_LEAST


def test_where_counts_grow_they_say_which_sizes_are_timed() -> None:
    chosen = points_to_time(_sweep({n: 100 + n // 8 for n in range(1, 2000, 20)}))
    values = [o.value for o in chosen]
    assert all(b >= a * 5 / 4 for a, b in pairwise(values))
