"""Grade `proved`: what the code fixes and counts settle, and never anything else.

Nests of loops are Ehrhart's theorem (Clauss, ICS 1996); the counts are those that the tests of
`tally` hold against the interpreter's own events.
"""

from __future__ import annotations

import ast
import os
import sys
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
import sympy

import steplaw
from steplaw.flow.derive import derive
from steplaw.flow.module import Module, all_codes
from steplaw.host.asking import Run
from steplaw.law import find_law, value
from steplaw.law.model import Observation
from steplaw.structure import Forms, Plan
from steplaw.sweep import Sweep
from steplaw.tally.assembled import tally_of
from steplaw.tally.registry import Registry
from steplaw.tally.snapshot import Snapshot, counts_between

sys.path.insert(0, str(Path(__file__).parent / "flow"))

from nests import Nests

ROOT = Path(__file__).parents[1]
#: `STEPLAW_NESTS=500` does that many.
SHARE = int(os.environ.get("STEPLAW_NESTS", "40"))
#: As in an audit, the largest size lies beyond those that a proof may still ask for.
FOUND_AT = (*range(10), 12, 48)
FURTHER = (13, 14, 15, 16, 17, 18, 19, 20, 21, 23)


class Counts:
    """Counts a function of one number in this process."""

    def __init__(self, source: str) -> None:
        space: dict[str, Any] = {}
        exec(compile(source, "<nest>", "exec", dont_inherit=True), space)
        self.function: Callable[..., Any] = space["subject"]
        self.registry = Registry()
        self.function.__code__ = self.registry.rewrite(self.function.__code__)

    def run(self, n: int) -> Run:
        before = Snapshot(self.registry)
        self.function(n)
        counts = list(counts_between(before, Snapshot(self.registry)))
        return Run({"n": n}, 0, tally_of(counts), 0, (), measured={"n": ("int", n)})


def grade_of(source: str) -> tuple[str, list[str]]:
    """Give the grade of the steps of a nest, and what its law misses at further sizes."""
    module = Module(source, "<nest>")
    (code,) = (c for c in all_codes(module.code) if c.co_name == "subject")
    plan, counts = Plan(derive(code, module), "<nest>"), Counts(source)
    swept = Sweep(("n",), {(n,): [counts.run(n)] for n in FOUND_AT})
    for n in Forms(plan, swept).missing():
        swept.runs[n,] = [counts.run(n)]
    swept.runs = dict(sorted(swept.runs.items()))
    shape, _ = Forms(plan, swept).shape("steps")
    law = find_law(
        [Observation(at, Fraction(runs[0].tally.steps)) for at, runs in swept.runs.items()],
        shape=shape,
    )
    if law.grade != "proved":
        return law.grade, []
    largest = max(swept.runs)[0]
    sizes = [n for n in FURTHER if (n,) not in swept.runs] or [largest + 1, largest + 2]
    return law.grade, [f"n = {n}" for n in sizes if value(law, (n,)) != counts.run(n).tally.steps]


def test_random_nests_are_proved_and_none_wrongly() -> None:
    grades = []
    for seed in range(SHARE):
        source = Nests(1000 + seed, deepest=3 if SHARE <= 40 else 4).source()
        grade, misses = grade_of(source)
        assert misses == [], source
        grades.append(grade)
    proved = grades.count("proved")
    print(f"{proved} of {len(grades)} proved")
    assert proved >= 0.95 * len(grades)


UNDECIDED = ROOT / "tests" / "subjects" / "undecided.py"
CASES = [
    node.name for node in ast.parse(UNDECIDED.read_text()).body if isinstance(node, ast.FunctionDef)
]


@pytest.mark.parametrize("name", CASES)
def test_what_the_data_or_the_sizes_leave_open_is_not_proved(name: str) -> None:
    record = steplaw.audit(
        f"{UNDECIDED}:{name}", feed="n", sizes=[*range(10), 17, 40], only_sizes=True, clock=False
    )
    law = record.laws.steps
    assert law.grade != "proved", law
    if law.grade == "exact":
        assert "seen up to n = 40" in law.note


def test_a_form_that_holds_from_a_later_size_is_proved_there(tmp_path: Path) -> None:
    path = tmp_path / "late.py"
    path.write_text(
        "def late(n: int):\n    for i in range(n - 12):\n        n += i\n    return n\n"
    )
    law = steplaw.audit(f"{path}:late", sizes=[1, 2, 3, 30], clock=False).laws.steps
    assert law.grade == "proved", law
    assert law.holds_from == 12
    assert sympy.Poly(sympy.sympify(law.formula)).degree() == 1


SAILINGS = "samples/ferry/timetable.py"


@pytest.fixture(scope="module")
def trios() -> Any:
    return steplaw.audit(
        f"{ROOT / SAILINGS}:trios", feed=f"{ROOT / 'samples/feeds.py'}:even_sailings", clock=False
    )


def test_the_innermost_test_of_the_triple_loop_is_proved(trios: Any) -> None:
    (line,) = (x for x in trios.lines if x.line == 29)
    n = sympy.Symbol("n")
    expected = sympy.expand(sympy.binomial(n, 3).rewrite(sympy.FallingFactorial), func=True)
    assert line.frequency.grade == "proved"
    assert sympy.simplify(sympy.sympify(line.frequency.formula) - expected.doit()) == 0
    assert "len(sailings) = n" in line.frequency.note


def test_a_total_is_as_good_as_its_worst_part_and_says_which(trios: Any) -> None:
    assert trios.laws.steps.grade == "exact"
    assert "not proved: the data decide how often line 29" in trios.laws.steps.note


def test_the_upper_bound_is_proved_and_above_every_count(trios: Any) -> None:
    bound = trios.laws.bound
    assert bound.grade == "proved"
    formula = sympy.sympify(bound.formula)
    for v in trios.figure["values"]:
        assert formula.subs("n", v["at"]["n"]) >= v["most"]


def test_sizes_are_added_until_the_period_is_settled() -> None:
    record = steplaw.audit(f"{ROOT / 'tests/bench/affine.py'}:triangular_sums", clock=False)
    assert record.laws.steps.grade == "proved"
    only = steplaw.audit(
        f"{ROOT / 'tests/bench/affine.py'}:triangular_sums",
        sizes=[1, 2, 3, 4, 5, 6, 7, 8, 20],
        only_sizes=True,
        clock=False,
    )
    assert only.laws.steps.grade != "proved"


def test_a_feed_of_another_length_gives_the_law_in_its_own_size() -> None:
    record = steplaw.audit(
        f"{ROOT / SAILINGS}:clashes",
        feed="[Sailing(60 * i, 45) for i in range(2 * n + 1)]",
        sizes=[0, 1, 2, 3, 4, 5, 6, 9],
        only_sizes=True,
        clock=False,
    )
    (line,) = (x for x in record.lines if x.line == 50)
    assert line.frequency.grade == "proved"
    assert "len(sailings) = 2*n + 1" in line.frequency.note


def test_a_feed_whose_length_follows_no_rule_proves_nothing() -> None:
    record = steplaw.audit(
        f"{ROOT / SAILINGS}:clashes",
        feed="[Sailing(60 * i, 45) for i in range(min(n, 6))]",
        sizes=[0, 1, 2, 3, 4, 5, 6, 9, 12],
        only_sizes=True,
        clock=False,
    )
    assert all(x.frequency.grade != "proved" for x in record.lines if x.line in (49, 50, 51))
