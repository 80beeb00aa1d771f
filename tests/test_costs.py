"""Cost models against sums made by hand."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path

import pytest

from steplaw.costs import elements, read_costs, work
from steplaw.errors import CallError
from steplaw.study import make_study
from steplaw.tally.model import NativeCount, Tally

TALLY = Tally(
    steps=100,
    opcodes={},
    operations={"call": 7, "element_read": 4, "append": 2},
    ledger=(NativeCount("f.py", 1, "slice", 2, 30, True),),
)


def written(folder: Path, text: str) -> str:
    path = folder / "weights.toml"
    path.write_text(text, encoding="utf-8")
    return str(path)


def test_weights_are_exact(tmp_path: Path) -> None:
    costs = read_costs(written(tmp_path, "[weights]\ncall = 5\nnative = 0.1\nsteps = 1\n"))
    assert costs.of(TALLY) == 7 * 5 + Fraction(30, 10) + 100


def test_native_visits_are_in_work_and_in_elements() -> None:
    assert work(TALLY) == 130
    assert elements(TALLY) == 4 + 2 + 30


@pytest.mark.parametrize(
    "text",
    [
        "",
        "weights = 3",
        "[weights]\n",
        "[weights]\nsteam = 1\n",
        "[weights]\ncall = -1\n",
        "[weights",
    ],
)
def test_what_cannot_be_weighed_is_said_in_one_line(tmp_path: Path, text: str) -> None:
    with pytest.raises(CallError) as fault:
        read_costs(written(tmp_path, text))
    assert "weights.toml" in fault.value.message
    assert fault.value.hint


def test_costs_and_a_figure_exclude_each_other(tmp_path: Path) -> None:
    path = written(tmp_path, "[weights]\ncall = 1\n")
    with pytest.raises(CallError):
        make_study("samples/ferry/bookings.py:without_repeats", figure="call", costs=path)
