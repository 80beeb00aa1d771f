"""The audit, end to end."""

from __future__ import annotations

import importlib
import itertools
import json
import math
import random
import shlex
from collections import Counter
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
import sympy

import steplaw
from running import ROOT, python
from running import steplaw as command
from steplaw.errors import CallError
from steplaw.record import AuditRecord
from steplaw.tally.classes import CLASSES

TIMETABLE = str(ROOT / "samples/ferry/timetable.py")
TRIOS = f"{TIMETABLE}:trios"
EVEN = str(ROOT / "samples/feeds.py") + ":even_sailings"
RANDOM = str(ROOT / "samples/feeds.py") + ":sailings"
LEDGER = str(ROOT / "tests/subjects/ledger.py")
n = sympy.Symbol("n")


@pytest.fixture(autouse=True)
def importable(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.syspath_prepend(str(ROOT / "samples"))
    monkeypatch.syspath_prepend(str(ROOT / "tests/subjects"))


def formula(law: Any) -> sympy.Expr:
    return sympy.sympify(law["formula"], locals={"n": n})


def line_of(record: AuditRecord, source: str) -> Any:
    return next(line for line in record.lines if line.source.strip().startswith(source))


def audit(subject: str | Callable[..., Any], **given: Any) -> AuditRecord:
    record = steplaw.audit(subject, **{"clock": False, **given})
    AuditRecord.from_json(record.to_json())
    return record


@pytest.fixture(scope="module")
def even() -> AuditRecord:
    return audit(TRIOS, feed=EVEN)


@pytest.fixture(scope="module")
def drawn() -> AuditRecord:
    return audit(TRIOS, feed=RANDOM, sizes="4..64")


def test_the_innermost_test_of_the_trios_runs_once_for_each_trio(
    even: AuditRecord, drawn: AuditRecord
) -> None:
    # The number of i < j < k out of n: the binomial coefficient (n over 3).
    trios = n * (n - 1) * (n - 2) / 6
    for record in (even, drawn):
        law = line_of(record, "if in_port[i]").frequency
        assert sympy.expand(formula(law) - trios) == 0
        assert law.grade == "proved"
        assert law.checked_at
        assert sympy.simplify(sympy.sympify(law.leading) - sympy.Symbol("n") ** 3 / 6) == 0


def test_the_law_of_an_even_feed_gives_every_tally(even: AuditRecord) -> None:
    assert even.feed.varies is False
    law = even.laws.steps
    assert law.grade == "exact"
    for run in even.tallies:
        assert run.steps == formula(law).subs(n, run.at.n)
    settled, held_out = set(law.settled_by), set(law.checked_at)
    assert not settled & held_out
    assert max(held_out) > max(settled)
    assert settled | held_out == {run.at.n for run in even.tallies}
    assert even.sizes.held_out == [{"n": size} for size in law.checked_at]


def test_the_laws_of_parts_add_up_to_the_whole(even: AuditRecord) -> None:
    whole = formula(even.laws.steps)
    assert sympy.expand(sum(formula(f.steps) for f in even.functions) - whole) == 0
    # 3.11 compiles a few jumps to which it gives no line.
    without_line = sympy.expand(whole - sum(formula(line.steps) for line in even.lines))
    for size in range(9):
        assert 0 <= without_line.subs(n, size) <= size**3 / 6
    assert 0.9 < sum(line.share for line in even.lines) < 1.001
    assert [line.line for line in even.lines if line.dominant] == [29]


def test_random_sailings_have_an_exact_part_and_a_data_part(drawn: AuditRecord) -> None:
    assert drawn.feed.varies is True
    exact, data = drawn.laws.parts.exact, drawn.laws.parts.data
    assert exact.grade == "exact"
    assert data.grade in ("fitted", "open")
    assert drawn.laws.steps.grade in ("fitted", "open")
    # What the data decide lies in lines 29 and 30, the second comparison and the counting.
    in_these = sum(line.share for line in drawn.lines if line.line in (29, 30))
    for run in drawn.tallies:
        decided = run.steps - formula(exact).subs(n, run.at.n)
        assert 0 <= decided <= in_these * run.steps * 1.5
        assert decided == 0 or run.at.n > 2


def test_every_draw_is_kept(drawn: AuditRecord) -> None:
    by_size: dict[int, list[int]] = {}
    for run in drawn.tallies:
        by_size.setdefault(run.at.n, []).append(run.steps)
    assert {len(runs) for size, runs in by_size.items() if size > 0} == {5}
    for value in drawn.figure["values"]:
        runs = by_size[value.at.n]
        mean = Fraction(sum(runs), len(runs))
        assert Fraction(value.mean) == mean
        assert Fraction(value.variance) == Fraction(sum(x * x for x in runs), len(runs)) - mean**2
        assert (value.least, value.most) == (min(runs), max(runs))


def test_counts_are_those_of_one_call() -> None:
    from feeds import even_sailings
    from ferry.timetable import trios

    record = audit(trios, feed=even_sailings, sizes=[5, 9], only_sizes=True)
    assert [run.steps for run in record.tallies] == [
        steplaw.count(trios, even_sailings(size)).steps for size in (5, 9)
    ]


def without_clock(record: dict[str, Any]) -> dict[str, Any]:
    return {key: value for key, value in record.items() if key != "clock"}


def test_two_audits_write_the_same_record(tmp_path: Path) -> None:
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    words = ("audit", TRIOS, "--feed", RANDOM, "--sizes", "4..32", "--json", "-")
    first = command(*words)
    second = command(*words, folder=elsewhere, PYTHONHASHSEED="77", LC_ALL="C.UTF-8")
    assert (first.status, second.status) == (0, 0)
    assert first.record["clock"] is not None
    assert first.record["repeatable"]["holds"] is True
    ours, theirs = (json.dumps(without_clock(done.record)) for done in (first, second))
    assert ours == theirs


def test_the_command_and_python_give_the_same_record() -> None:
    words = ("audit", TRIOS, "--feed", EVEN, "--sizes", "4,8,12", "--no-clock", "--json", "-")
    done = command(*words)
    record = audit(TRIOS, feed=EVEN, sizes=[4, 8, 12])
    ours = json.loads(record.to_json())
    again = ours.pop("run_again"), done.record.pop("run_again")
    theirs = done.record
    theirs.pop("run_again")
    assert ours == theirs
    assert again[1] == shlex.join(["steplaw", *words[:-2]])
    # The command that the record of a call from Python names is that audit again.
    once_more = command(*shlex.split(again[0])[1:], "--no-clock", "--json", "-").record
    once_more.pop("run_again")
    assert once_more == ours


@pytest.fixture(scope="module")
def all_orders() -> AuditRecord:
    return audit(
        f"{TIMETABLE}:in_order",
        every="(list(p) for p in permutations(range(n)))",
        figure="line:78",
    )


def test_every_order_of_an_input_is_counted_once(all_orders: AuditRecord) -> None:
    by_size: dict[int, list[Any]] = {}
    for run in all_orders.tallies:
        by_size.setdefault(run.at.n, []).append(run)
    for size, runs in by_size.items():
        assert sum(run.inputs for run in runs) == math.factorial(size)
        if size < 7:
            orders = [list(p) for p in itertools.permutations(range(size))]
            by_hand = Counter(comparisons(order) for order in orders)
            counted: Counter[int] = Counter()
            for run in runs:
                counted[run.operations.get("comparison", 0)] += run.inputs
            assert counted == by_hand
            for run in runs:
                order = json.loads(run.input)
                assert comparisons(order) == run.operations.get("comparison", 0)
    assert max(by_size) == 8
    assert all_orders.feed.kind == "every" and all_orders.clock is None


def comparisons(ordered: list[int]) -> int:
    """Count the comparisons of `in_order`, that of `j > 0` included, written out by hand."""
    count = 0
    for i in range(1, len(ordered)):
        departure, j = ordered[i], i
        while True:
            count += 1
            if not j > 0:
                break
            count += 1
            if not ordered[j - 1] > departure:
                break
            ordered[j] = ordered[j - 1]
            j -= 1
        ordered[j] = departure
    return count


def test_the_mean_over_all_orders_is_exact(all_orders: AuditRecord) -> None:
    # An element is moved for each inversion: n(n-1)/4 of them in the mean (Knuth, TAOCP vol. 3,
    # 5.1.1), with variance n(n-1)(2n+5)/72. The test of line 78 is come to once for each move and
    # once for each element but the first.
    inversions = n * (n - 1) / 4
    moved = line_of(all_orders, "ordered[j] = ordered[j - 1]").frequency
    assert sympy.expand(formula(moved) - inversions) == 0
    assert moved.grade == "exact"
    law = all_orders.figure.law
    assert sympy.expand(formula(law) - (inversions + n - 1)) == 0
    assert law.grade == "exact" and law.holds_from == 1
    assert sympy.expand(formula(all_orders.figure.variance) - n * (n - 1) * (2 * n + 5) / 72) == 0
    # Element comparisons, n(n-1)/4 + n - H(n) in the mean (Knuth, TAOCP vol. 3, 5.2.1), and as
    # many tests of j > 0 as line 78 is come to.
    law = all_orders.laws.operations.comparison
    expected = 2 * inversions + 2 * n - 1 - sympy.harmonic(n)
    assert sympy.simplify(formula(law) - expected) == 0


def test_fractions_are_exact_and_extremes_have_witnesses(all_orders: AuditRecord) -> None:
    for value in all_orders.figure["values"]:
        size = value.at.n
        if size:
            assert Fraction(value.mean) == Fraction(size * (size - 1), 4) + size - 1
            assert (value.least, value.most) == (size - 1, size * (size - 1) // 2 + size - 1)
            assert json.loads(value.witness_least) == sorted(range(size))
            assert json.loads(value.witness_most) == sorted(range(size), reverse=True)


def test_a_figure_that_is_an_operation_class() -> None:
    record = audit(f"{TIMETABLE}:clashes", feed=EVEN, figure="comparison", sizes=[8, 16])
    assert record.figure.name == "comparison"
    # Two comparisons for each pair; hourly sailings of 45 minutes never clash, so that the second
    # one is made for all pairs of n.
    assert sympy.expand(formula(record.figure.law) - n * (n - 1)) == 0
    assert record.figure.law == record.laws.operations.comparison
    assert set(record.laws.operations) <= set(CLASSES)
    for run in record.tallies:
        assert sum(run.operations.values()) <= run.steps


def test_a_figure_that_is_the_frequency_of_a_line() -> None:
    record = audit(TRIOS, feed=EVEN, figure="line:28", sizes=[8, 16])
    # The head of the inner loop: once for each j < k and once more at the end of each.
    assert record.figure.name == "line:28"
    assert sympy.expand(formula(record.figure.law) - (n**3 - n) / 6) == 0
    assert record.laws.steps.formula != record.figure.law.formula


def test_two_sizes() -> None:
    record = audit(
        str(ROOT / "samples/ferry/bookings.py") + ":busiest_stretch",
        feed="args([1] * (n + m), m)",
        sizes={"n": [2, 4, 6, 8, 10], "m": [1, 2, 4, 6, 8]},
    )
    m = sympy.Symbol("m")
    inner = line_of(record, "total += seats").frequency
    assert inner.grade == "proved"
    assert sympy.expand(sympy.sympify(inner.formula) - (n + 1) * m) == 0


def test_steps_of_callees_are_told_apart() -> None:
    record = audit(f"{LEDGER}:calls_helper", sizes="0..12+1")
    by_name = {f.name: f for f in record.functions}
    assert by_name["calls_helper"].own is True
    assert by_name["helper"].own is False
    assert formula(by_name["helper"].calls) == n
    assert formula(by_name["helper.<locals>.<genexpr>"].calls) == n
    total = sum(formula(f.steps) for f in record.functions)
    assert sympy.expand(total - formula(record.laws.steps)) == 0
    own = sympy.lambdify(n, sum(formula(f.steps) for f in record.functions if f.own))
    for run in record.tallies:
        # 3.11 has a code object of its own for a comprehension; from 3.12 on it is inlined.
        assert run.own_steps == own(run.at.n)


def test_each_run_gets_a_fresh_input() -> None:
    record = audit(f"{LEDGER}:uses_up", feed="list(range(n))", sizes=[8, 16])
    assert line_of(record, "total += sums.pop()").frequency.formula == "n"
    assert record.repeatable.holds is True


def test_kept_results_are_forgotten() -> None:
    record = audit(f"{LEDGER}:kept", sizes=[8, 16])
    assert line_of(record, "total += each").frequency.formula == "n"
    assert any("functools.cache" in note for note in record.notes)


def test_a_late_import_costs_no_run() -> None:
    record = audit(f"{LEDGER}:imports_late", sizes=[4, 8])
    assert len({run.steps for run in record.tallies}) == 1
    assert record.tallies[0].steps < 100


def test_an_iterator_that_nobody_runs_is_named() -> None:
    record = audit(f"{LEDGER}:lazily", sizes=[4, 8])
    assert any("returns a map that is not run" in note for note in record.notes)


def test_a_record_in_a_session(even: AuditRecord) -> None:
    assert even.figure.law.formula == even["figure"]["law"]["formula"]
    shown = repr(even)
    assert even.figure.law.formula in shown and "(exact)" in shown
    assert "line 29" in shown
    page = even._repr_html_()
    assert "<html" not in page and "trios" in page


def test_the_function_itself(even: AuditRecord) -> None:
    from feeds import even_sailings
    from ferry.timetable import trios

    record = audit(trios, feed=even_sailings)
    for part in ("subject", "sizes", "tallies", "laws", "lines", "functions"):
        assert record[part] == even[part]


def test_a_feed_that_no_other_process_can_import(even: AuditRecord) -> None:
    from ferry.timetable import Sailing

    length = 45
    record = audit(TRIOS, feed=lambda n: [Sailing(60 * i, length) for i in range(n)])
    assert record.feed.kind == "python"
    assert record.feed.varies is False
    assert record.tallies == even.tallies
    assert record.laws == even.laws


def test_such_a_feed_draws_as_any_other(drawn: AuditRecord) -> None:
    import feeds

    state = random.getstate()
    record = audit(TRIOS, feed=lambda n, rng: feeds.sailings(n, rng), sizes="4..64")
    assert random.getstate() == state
    assert record.feed.varies is True
    assert record.tallies == drawn.tallies


def test_such_a_feed_gives_fresh_inputs_and_is_timed() -> None:
    record = audit(f"{LEDGER}:uses_up", feed=lambda n: [1] * n, sizes=[64, 128, 256], clock=True)
    assert line_of(record, "total += sums.pop()").frequency.formula == "n"
    assert len(record.clock.sizes) >= 3
    # A second run on a list that is used up would take no time at all.
    assert record.clock.seconds[-1] > record.clock.seconds[0]


def test_such_a_feed_with_several_sizes_and_arguments() -> None:
    record = audit(
        f"{LEDGER}:first_of",
        feed=lambda n, m: steplaw.args(list(range(n + m)), wanted=n + m - 1),
        sizes={"n": [1, 2, 4, 8], "m": [1, 2, 4, 8]},
    )
    m = sympy.Symbol("m")
    law = line_of(record, "if each == wanted").frequency
    assert sympy.expand(sympy.sympify(law.formula) - n - m) == 0


def test_an_input_that_cannot_be_sent() -> None:
    with pytest.raises(CallError, match=r"cannot be sent to the process that runs the subject"):
        audit(f"{LEDGER}:uses_up", feed=lambda n: [lambda: n] * n)


def test_such_a_feed_that_raises() -> None:
    with pytest.raises(CallError, match=r"the feed raises ZeroDivisionError.* at n=16"):
        audit(f"{LEDGER}:uses_up", feed=lambda n: n // 0, sizes=[16], only_sizes=True)
    record = audit(f"{LEDGER}:uses_up", feed=lambda n: [1] * n if n < 9 else [][n], sizes=[8, 16])
    assert record.stopped.kind == "feed"
    assert record.stopped.at.n == 11


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ({"feed": lambda k: [k]}, "asks for 'k'"),
        ({"feed": lambda rng: [1]}, "does not use the size n"),
        ({"feed": range}, "cannot be called by its parameters|asks for|does not use"),
        ({"feed": 42}, "not 42"),
        ({"sizes": []}, "sizes is empty"),
        ({"sizes": [-1]}, "negative"),
        ({"sizes": [1.5]}, "not a size"),
        ({"figure": "haste"}, "no figure"),
        ({"draws": 0}, "makes no input"),
    ],
)
def test_a_wrong_call_from_python(given: dict[str, Any], message: str) -> None:
    with pytest.raises(CallError, match=message):
        audit(f"{LEDGER}:uses_up", **{"feed": lambda n: [1] * n, **given})


def test_subjects_that_no_other_process_can_import() -> None:
    def inner(sums: list[int]) -> int:
        return len(sums)

    for subject in (inner, lambda sums: len(sums), len, dict):
        with pytest.raises(CallError):
            audit(subject, feed="[1] * n")


def test_a_script_that_audits_its_own_function(tmp_path: Path) -> None:
    script = tmp_path / "office.py"
    script.write_text(
        "import steplaw\n"
        "class Sum:\n"
        "    def __init__(self, pence):\n"
        "        self.pence = pence\n"
        "def total(sums):\n"
        "    found = 0\n"
        "    for each in sums:\n"
        "        assert isinstance(each, Sum)\n"
        "        found += each.pence\n"
        "    return found\n"
        "if __name__ == '__main__':\n"
        "    record = steplaw.audit(total, feed=lambda n: [Sum(i) for i in range(n)],\n"
        "                           sizes=[4, 8], clock=False)\n"
        "    print(record.stopped, record.lines[1].frequency.formula)\n"
    )
    done = python(str(script), folder=tmp_path)
    assert (done.out, done.err, done.status) == ("None n + 1\n", "", 0)


@pytest.mark.parametrize("subject", ["total", "'office.py:total'"])
def test_a_script_without_the_guard_is_told_so(subject: str, tmp_path: Path) -> None:
    script = tmp_path / "office.py"
    script.write_text(
        "import steplaw\n"
        "def total(n: int):\n"
        "    return n\n"
        f"steplaw.audit({subject}, sizes=[4, 8], clock=False)\n"
    )
    done = python(str(script), folder=tmp_path)
    assert done.status == 1
    assert "put that" in done.err and "__main__" in done.err.splitlines()[-1]


def test_public_names_are_what_they_say() -> None:
    assert set(steplaw.__all__) == {
        "AuditRecord",
        "__version__",
        "args",
        "audit",
        "count",
        "counting",
    }
    for _ in range(2):  # the second look-up is not the first: submodules have been imported since
        for name in steplaw.__all__:
            value = getattr(steplaw, name)
            assert name == "__version__" or value.__name__ == name
        importlib.import_module("steplaw.commands.audit")
    with pytest.raises(AttributeError, match="no attribute 'forecast_of_doom'"):
        _ = steplaw.forecast_of_doom  # type: ignore[attr-defined]


def test_progress_counts_up_to_what_was_foreseen() -> None:
    from steplaw.job import run
    from steplaw.study import make_study

    seen: list[tuple[str, int, int, int | None]] = []

    def report(what: str, at: Any, done: int, rest: int | None) -> None:
        seen.append((what, at["n"], done, rest))

    record = run(make_study(f"{LEDGER}:in_pairs", sizes="8..256", clock=False), report)
    assert [at for _, at, _, _ in seen] == [p["n"] for p in record["sizes"]["plan"]]
    total = sum(run["steps"] for run in record["tallies"])
    # Once the growth shows, what is done and what is foreseen come near the steps of the whole.
    late = [(done, rest) for _, at, done, rest in seen if at >= 64]
    for done, rest in late:
        assert rest is not None
        assert done + rest == pytest.approx(total, rel=0.1)


def test_a_size_that_would_take_too_long_is_left_out_unless_asked_for() -> None:
    record = audit(str(ROOT / "samples/ferry/cargo.py") + ":restacking_moves")
    assert {"n": 4096} in record.sizes.left_out
    assert record.stopped is None
    assert max(run.steps for run in record.tallies) <= 20_000_000
    assert record.laws.steps.grade == "exact"
    # 2^n - 1 moves of n discs on three pegs (common practice).
    calls = next(f for f in record.functions if f.own).calls
    assert sympy.simplify(formula(calls) - (2 ** (n + 1) - 1)) == 0


def test_auditing_by_name_imports_nothing_of_the_subject() -> None:
    code = (
        "import sys, steplaw\n"
        f"steplaw.audit({TRIOS!r}, feed={EVEN!r}, sizes=[4, 8], clock=False)\n"
        "print('ferry' in sys.modules, any('samples' in p for p in sys.path))\n"
    )
    assert python("-c", code).out == "False False\n"
