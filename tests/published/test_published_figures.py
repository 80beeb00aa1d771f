"""Figures published elsewhere, reproduced by audits of ordinary Python code; see `figures`.

`python tests/published/test_published_figures.py` prints the table of published figures.
"""

from __future__ import annotations

import math
import sys
from pathlib import Path
from typing import Any

import pytest
import sympy

sys.path.insert(0, str(Path(__file__).parent))

from figures import ROWS, Row

import steplaw

SUBJECTS = Path(__file__).parent / "algorithms.py"
n = sympy.Symbol("n")
NAMES = {"fibonacci": sympy.fibonacci}


def line_of(row: Row) -> int:
    """Give the number of the line that the row counts."""
    lines = SUBJECTS.read_text(encoding="utf-8").splitlines()
    start = next(k for k, text in enumerate(lines) if text.startswith(f"def {row.function}("))
    return next(k for k in range(start, len(lines)) if lines[k].endswith(f"# {row.line}")) + 1


def audited(row: Row) -> Any:
    record = steplaw.audit(
        f"{SUBJECTS}:{row.function}", figure=f"line:{line_of(row)}", clock=False, **row.settings
    )
    return record.figure.law if row.reads == "law" else record.figure[row.reads]


def difference(row: Row, law: Any) -> Any:
    """Give what is left of law less figure, over the sizes for which sympy needs numbers."""
    found, expected = sympy.sympify(law.formula), sympy.sympify(row.expected, NAMES)
    left = sympy.simplify(found - expected)
    if left == 0 or not left.free_symbols:
        return left
    first = law.holds_from or 0
    values = [left.subs(n, size) for size in _sizes(row) if size >= max(first, 1)]
    return max((abs(sympy.nsimplify(sympy.simplify(v))) for v in values), default=left)


def _sizes(row: Row) -> list[int]:
    """Sizes run, and larger ones that were not: powers of two where the figure is for these."""
    run = row.settings["sizes"]
    powers = all(size & (size - 1) == 0 for size in run)
    beyond = [max(run) * 2, max(run) * 4] if powers else [max(run) + 1, max(run) + 5]
    return [*run, *beyond]


@pytest.mark.parametrize("row", ROWS, ids=[r.name.replace(" ", "-") for r in ROWS])
def test_published_figure(row: Row) -> None:
    law = audited(row)
    assert law.grade in ("exact", "proved"), law
    if row.tail:
        ratio = sympy.sympify(law.leading) / sympy.sympify(row.expected)
        assert abs(sympy.limit(ratio, n, sympy.oo) - 1) < 1e-9
    else:
        assert difference(row, law) == 0, law.formula


def test_no_order_of_few_keys_takes_merge_sort_more_comparisons() -> None:
    row = next(r for r in ROWS if r.function == "merge_sort")
    record = steplaw.audit(
        f"{SUBJECTS}:merge_sort",
        every="(list(p) for p in permutations(range(n)))",
        sizes=range(1, 8),
        only_sizes=True,
        figure=f"line:{line_of(row)}",
        clock=False,
    )
    expected = sympy.sympify(row.expected)
    for v in record.figure["values"]:
        assert v["most"] == expected.subs(n, v["at"]["n"])


def audited_line(function: str, comment: str, **settings: Any) -> Any:
    row = Row("", "", function, comment, "")
    return steplaw.audit(
        f"{SUBJECTS}:{function}", figure=f"line:{line_of(row)}", clock=False, **settings
    )


def test_euclids_divisions_are_at_most_five_times_the_digits_of_the_smaller_number() -> None:
    # Lamé 1844; Knuth, The Art of Computer Programming, vol. 2, 4.5.3: a > b >= 1.
    record = audited_line(
        "euclid",
        "division",
        every="(args(a, n) for a in range(n + 1, 2 * n + 1))",
        sizes=[1, 2, 5, 8, 13, 21, 34, 55, 89, 90],
        only_sizes=True,
    )
    for v in record.figure["values"]:
        assert v["most"] <= 5 * len(str(v["at"]["n"]))
    most = {v["at"]["n"]: v["most"] for v in record.figure["values"]}
    assert most[8] == 5  # the bound is met: 8 and 13 are Fibonacci numbers


def test_the_sieves_crossings_out_follow_mertens() -> None:
    # n times the sum of 1/p over the primes up to n, which is ln ln n + 0.2615 and a little
    # (Hardy & Wright, ch. 22; Mertens 1874). Each crossing-out of n//p rounds down: tolerance 0.1.
    record = audited_line(
        "sieve", "crossing-out", feed="n", sizes=[300, 1000, 3000, 10000], only_sizes=True
    )
    for v in record.figure["values"]:
        n_ = v["at"]["n"]
        assert abs(v["mean"] / n_ - math.log(math.log(n_)) - 0.2615) < 0.1
    assert record.figure.law.grade != "proved"


def test_there_are_enough_rows_each_with_its_source() -> None:
    assert len(ROWS) >= 35
    assert all(row.source for row in ROWS)


def table() -> str:
    rows = [
        "| what is counted | published | law found | grade | source |",
        "| --- | --- | --- | --- | --- |",
    ]
    for row in ROWS:
        law = audited(row)
        shown = law.formula if len(str(law.formula)) < 90 else law.leading + " + …"
        cells = [row.name, f"`{row.expected}`", f"`{shown}`", law.grade, row.source]
        rows.append("| " + " | ".join(cells) + " |")
    return "\n".join(rows)


if __name__ == "__main__":
    print(table())
