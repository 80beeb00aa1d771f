"""Worst cases against published ones, and searches that must find them."""

from __future__ import annotations

import ast
import inspect
import re
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
import sympy

from running import steplaw
from steplaw.study import make_study
from steplaw.worst.job import worst

SUBJECTS = Path(__file__).parent / "subjects.py"
ORDERS = "(list(p) for p in permutations(range(n)))"
DRAWN = "rng.sample(range(n), n)"


def line_of(text: str) -> str:
    """The figure of the one line that reads so."""
    lines = SUBJECTS.read_text().splitlines()
    (number,) = [k for k, line in enumerate(lines, 1) if line.strip() == text]
    return f"line:{number}"


def searched(name: str, n: int, **given: Any) -> Any:
    own = {k: given.pop(k) for k in ("exhaust", "seed", "write") if k in given}
    return worst(make_study(f"{SUBJECTS}:{name}", **given), n, **own)


def most(record: Any) -> dict[int, int]:
    return {row["n"]: row["value"] for row in record["whole"]["sizes"]}


def lg_ceiling(n: int) -> int:
    return (n - 1).bit_length()


@pytest.mark.parametrize(
    ("name", "line", "published"),
    [
        # Knuth, TAOCP vol. 3, 5.2.1.
        ("insertion_sort", "if a[j - 1] <= a[j]:", lambda n: n * (n - 1) // 2),
        # Knuth, TAOCP vol. 3, 5.2.4 and 5.3.1.
        (
            "merge_sort",
            "if left[i] <= right[j]:",
            lambda n: n * lg_ceiling(n) - 2 ** lg_ceiling(n) + 1,
        ),
        # n-1 comparisons a pass, one element split off: common practice.
        ("plain_quicksort", "if x < pivot:", lambda n: n * (n - 1) // 2),
    ],
)
def test_exact_worst_case_of_sorting(name: str, line: str, published: Any) -> None:
    record = searched(name, 7, every=ORDERS, figure=line_of(line))
    assert most(record) == {n: published(n) if n else 0 for n in range(8)}
    assert record["best"]["true"]
    witness = ast.literal_eval(record["whole"]["sizes"][-1]["input"])
    assert sorted(witness) == list(range(7))


def test_exact_worst_case_of_binary_search() -> None:
    """At most floor(lg n) + 1 probes: Knuth, TAOCP vol. 3, 6.2.1."""
    every = "(args(list(range(n)), k) for k in range(-1, n + 1))"
    figure = line_of("middle = (low + high) // 2")
    record = searched("binary_search", 20, every=every, figure=figure)
    assert most(record) == {n: n.bit_length() for n in range(21)}


def test_exact_worst_case_of_euclid() -> None:
    """The least pair with k divisions is of consecutive Fibonacci numbers.

    Lamé 1844; Knuth, TAOCP vol. 2, 4.5.3.
    """
    every = "(args(a, b) for b in range(n + 1) for a in range(b + 1, n + 2))"
    record = searched("euclid", 35, every=every, figure=line_of("a, b = b, a % b"))
    rises, before = [], 0
    for row in record["whole"]["sizes"]:
        if row["value"] > before:
            rises.append(tuple(map(int, row["input"].split(", "))))
            before = row["value"]
    # 1 division for (2, 1), 2 for (3, 2), 3 for (5, 3), and so on.
    assert (
        rises
        == [(2, 1), (3, 2), (5, 3), (8, 5), (13, 8), (21, 13), (34, 21), (55, 34)][: len(rises)]
    )
    assert len(rises) >= 6


def order_of_growth(record: Any) -> Fraction:
    formula = sympy.sympify(record["family"]["law"]["leading"])
    n = sympy.Symbol("n")
    return sympy.degree(formula, n)


@pytest.mark.parametrize("name", ["first_pivot", "middle_pivot", "median_of_three"])
def test_quadratic_family_of_quicksorts(name: str) -> None:
    """Quadratic at worst: common practice. In full: `steplaw worst SUBJECT --at 200 --feed ...`."""
    record = searched(name, 64, feed=DRAWN, exhaust=4)
    assert record["best"]["at"] == 64
    assert record["family"]["law"]["grade"] == "exact"
    assert order_of_growth(record) == 2


def test_backtracking_is_exponential() -> None:
    """(a|aa)*b on n times 'a': as many ways as a Fibonacci number (common practice)."""
    record = searched("matches", 16)
    assert record["kinds"] == ["word"]
    assert set(ast.literal_eval(record["best"]["input"])) == {"a"}
    values = {row["n"]: row["value"] for row in record["family"]["values"]}
    assert 1.5 < (values[16] / values[14]) ** 0.5 < 1.7  # the golden ratio is 1.618...
    assert record["best"]["times_mean"] > 100


def test_a_bad_hash_is_found() -> None:
    record = searched("store_bookings", 64)
    assert record["family"]["law"]["grade"] == "exact"
    assert order_of_growth(record) == 2
    # A long input is shown shortened: its last number may be cut.
    numbers = [int(x) for x in re.findall(r"\d+", record["best"]["input"])[:-1]]
    assert len(numbers) > 30
    assert len({x & 255 for x in numbers}) == 1


def test_a_search_is_repeated_to_the_letter() -> None:
    one, two = (searched("insertion_sort", 10, feed=DRAWN, exhaust=3, seed=4) for _ in range(2))
    assert one == two
    assert order_of_growth(one) == 2


def test_the_worst_input_is_audited_again(tmp_path: Path) -> None:
    file = tmp_path / "worst_bookings.py"
    subject = f"{SUBJECTS}:plain_quicksort"
    found = steplaw(
        "worst", subject, "--at", "12", "--feed", DRAWN, "--exhaust", "4", "--write", str(file),
        "--json", "-",
    )  # fmt: skip
    assert found.status == 0, found.err
    record = found.record
    again = steplaw(
        "audit", subject, "--feed", f"{file}:worst", "--sizes", "3,4,12", "--only-sizes",
        "--no-clock", "--json", "-",
    )  # fmt: skip
    assert again.status == 0, again.err
    by_size = {v["at"]["n"]: v["mean"] for v in again.record["figure"]["values"]}
    assert by_size[12] == record["best"]["value"]
    assert by_size[4] == most(record)[4]


def test_an_input_of_objects_is_refused_in_one_line() -> None:
    ended = steplaw("worst", f"{SUBJECTS}:euclid", "--at", "5", "--feed", "args(n, object())")
    assert ended.status == 2
    assert "plain values" in ended.message


def test_subjects_are_what_they_are_called() -> None:
    import importlib.util

    spec = importlib.util.spec_from_file_location("worst_subjects", SUBJECTS)
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    for name, function in inspect.getmembers(module, inspect.isfunction):
        if "sort" in name or "pivot" in name or "median" in name:
            items = [3, 1, 2, 5, 4, 0, 1]
            assert (function(items) or items) == [0, 1, 1, 2, 3, 4, 5], name
    assert module.matches("aaab") and not module.matches("aaa")
    assert module.find_text("xxyabz", "__ab") == 3


@pytest.mark.parametrize("name", ["similarity", "shared_start"])
def test_real_code_has_inputs_ten_times_dearer_than_the_mean(name: str) -> None:
    """difflib.SequenceMatcher and os.path.commonprefix of the standard library."""
    record = searched(name, 32 if name == "similarity" else 64)
    assert record["best"]["times_mean"] >= 10


def test_edges_that_make_long_chains_are_found() -> None:
    """Joining without weights takes n²/2 steps of a chain at worst.

    Sedgewick & Wayne, Algorithms, 4th edition, 1.5 (quick-union); from memory.
    """
    feed = "[(rng.randrange(n), rng.randrange(n)) for _ in range(n)]"
    figure = line_of("port = above[port]")
    record = searched("joined_groups", 32, feed=feed, figure=figure)
    assert record["kinds"] == ["edges"]
    assert record["family"]["law"]["grade"] == "exact"
    assert order_of_growth(record) == 2
    assert record["best"]["times_mean"] > 4
