"""Costs over a life, distributions and what is held, against textbook figures."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path

import sympy

from running import steplaw
from steplaw.law.evaluate import value
from steplaw.study import make_study
from steplaw.worst.life import life
from steplaw.worst.space import space
from steplaw.worst.typical import quantile_of, typical

SUBJECTS = Path(__file__).parent / "subjects.py"


def line_of(text: str) -> int:
    lines = SUBJECTS.read_text().splitlines()
    return next(k for k, line in enumerate(lines, 1) if line.strip() == text)


def test_binary_counter_flips_two_bits_an_increment() -> None:
    """2n - (ones of n) flips in n increments, below 2 each.

    Cormen, Leiserson, Rivest & Stein, Introduction to Algorithms, ch. 'Amortized Analysis'.
    """
    figure = f"line:{line_of('self.bits[k] ^= 1')}"
    record = life(make_study(f"{SUBJECTS}:increments", figure=figure))
    for row in record["sizes"]:
        n = row["n"]
        assert row["total"] == 2 * n - n.bit_count()
        assert row["largest"] == n.bit_length()
    assert Fraction(record["bound"]["most_mean"]) < 2
    assert record["laws"]["largest"]["grade"] == "exact"
    assert record["laws"]["total"]["grade"] != "exact"
    at_powers = record["laws"]["total_at_powers"]
    assert (at_powers["grade"], at_powers["formula"]) == ("exact", "2*n - 1")


def test_growing_array_copies_less_than_two_a_place() -> None:
    """Below 2n copies of cells in n appends to a doubling table; the same source."""
    figure = f"line:{line_of('larger[k] = self.cells[k]')}"
    record = life(make_study(f"{SUBJECTS}:appends", figure=figure))
    for row in record["sizes"]:
        copied = sum(2**k for k in range(20) if 2**k < row["n"])
        assert row["total"] == copied
    assert Fraction(record["bound"]["most_mean"]) < 2
    steps = life(make_study(f"{SUBJECTS}:appends"))
    assert steps["laws"]["total"]["grade"] == "exact"
    assert Fraction(steps["bound"]["most_mean"]) < 60
    assert max(steps["operations"]) > 20 * Fraction(steps["sizes"][-1]["mean"]) / 2


def test_queue_of_two_stacks_moves_each_value_once() -> None:
    """Constant cost on average, one operation of order n (common practice)."""
    record = life(make_study(f"{SUBJECTS}:queueing"))
    total, mean = record["laws"]["total"], record["laws"]["mean"]
    n = sympy.Symbol("n")
    assert total["grade"] == mean["grade"] == "exact"
    assert sympy.degree(sympy.sympify(total["formula"]), n) == 1
    assert sympy.limit(sympy.sympify(mean["formula"]), n, sympy.oo).is_finite
    assert sympy.degree(sympy.sympify(record["laws"]["largest"]["formula"]), n) == 1
    moved = f"line:{line_of('self.front.append(self.back.pop())')}"
    moves = life(make_study(f"{SUBJECTS}:queueing", figure=moved))
    assert all(row["total"] == row["n"] for row in moves["sizes"])


def test_quicksort_over_every_order_has_the_published_mean() -> None:
    """2(n+1)H(n) - 4n: Sedgewick & Flajolet, Analysis of Algorithms, ch. 1."""
    figure = f"line:{line_of('if x < pivot:')}"
    every = "(list(p) for p in permutations(range(n)))"
    study = make_study(
        f"{SUBJECTS}:plain_quicksort",
        every=every,
        figure=figure,
        sizes="0..7+1",
        only_sizes=True,
        clock=False,
    )
    record = typical(study)
    for row in record["sizes"]:
        n = row["n"]
        harmonic = sum((Fraction(1, k) for k in range(1, n + 1)), Fraction(0))
        assert Fraction(row["mean"]) == 2 * (n + 1) * harmonic - 4 * n
        assert row["least"] <= row["lower"] <= row["median"] <= row["upper"] <= row["most"]
        assert row["most"] == n * (n - 1) // 2


def test_quantiles_are_values_that_were_seen() -> None:
    values = [(1, 1), (5, 2), (9, 1)]
    assert [quantile_of(values, (k, 4)) for k in (1, 2, 3, 4)] == [1, 5, 5, 9]


def test_triangle_of_pairs_is_held() -> None:
    study = make_study(f"{SUBJECTS}:pairs", sizes="0..12+1")
    record = space(study)
    for row in record["sizes"]:
        # Each of the n(n-1)/2 pairs is an element and holds two.
        assert row["elements"] == 3 * row["n"] * (row["n"] - 1) // 2
    law = record["laws"]["elements"]
    assert law["grade"] == "exact"
    assert value(law["formula"], {"n": 100}) == 3 * 100 * 99 // 2
    assert record["sizes"][-1]["memory"] > 8 * 66


def test_commands_and_picture(tmp_path: Path) -> None:
    picture = tmp_path / "spread.svg"
    ended = steplaw(
        "typical", f"{SUBJECTS}:insertion_sort", "--feed", "rng.sample(range(n), n)", "--sizes",
        "4..32", "--only-sizes", "--draws", "10", "--plot", str(picture), "--json", "-",
    )  # fmt: skip
    assert ended.status == 0, ended.err
    assert picture.read_text().startswith("<?xml")
    assert ended.record["schema"] == "steplaw.typical/1"
    wrong = steplaw("life", f"{SUBJECTS}:euclid", "--feed", "args(n, 1)")
    assert wrong.status == 3
    assert "gives no operations" in wrong.message
