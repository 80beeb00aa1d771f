from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from law_helpers import PLAN, gives, grid, observe

from steplaw.law import Observation, Shape, find_law, value

REASON = "two nested loops over ranges"


def test_enough_counts_prove_a_law_of_known_form():
    law = find_law(observe(lambda n: n * (n - 1) // 2), shape=Shape(2, reason=REASON))
    assert (law.grade, law.formula, law.note) == ("proved", "n**2/2 - n/2", REASON)
    assert len(law.settled_by) == 3


def test_the_same_counts_without_a_shape_are_exact_at_most():
    assert find_law(observe(lambda n: n * (n - 1) // 2)).grade == "exact"


@settings(max_examples=40, deadline=None)
@given(st.integers(0, 3), st.integers(1, 3), st.randoms(use_true_random=False))
def test_random_quasi_polynomials_are_proved(degree, period, rng):
    table = [[rng.randint(-9, 9) for _ in range(degree + 1)] for _ in range(period)]

    def function(n):
        return sum(c * n**k for k, c in enumerate(table[n % period]))

    shape = Shape(degree, period, 0, REASON)
    law = find_law(observe(function, shape.sizes()), shape=shape)
    assert law.grade == "proved"
    for n in (*range(20), 1000, 1001, 1002):
        assert value(law, n) == function(n)


@pytest.mark.parametrize("missing", [1, 2, 3])
def test_too_few_counts_prove_nothing(missing):
    shape = Shape(2, 2, 0, REASON)
    law = find_law(observe(lambda n: n * (n // 2), shape.sizes(2)[:-missing]), shape=shape)
    assert law.grade != "proved"
    assert "a proof needs more counts" in law.note


def test_a_residue_class_that_was_not_counted_is_not_proved():
    sizes = [*range(0, 40, 2), 41]
    law = find_law(observe(lambda n: n * (n // 2), sizes), shape=Shape(2, 2, 0, REASON))
    assert law.grade != "proved"


def test_one_count_against_the_shape_is_named():
    data = observe(lambda n: n * n)
    data[-1] = Observation((PLAN[-1],), data[-1].value + 1)
    law = find_law(data, shape=Shape(2, reason=REASON))
    assert law.grade not in ("proved", "exact")
    assert f"contradict the derived form at n = {PLAN[-1]}" in law.note


def test_a_higher_degree_than_the_shape_is_a_contradiction():
    law = find_law(observe(lambda n: n**3), shape=Shape(2, reason=REASON))
    assert law.grade == "exact"
    assert "contradict" in law.note


def test_the_form_holds_from_its_start_and_below_where_the_counts_agree():
    shape = Shape(1, 1, 4, REASON)
    law = find_law(observe(lambda n: max(0, n - 3)), shape=shape)
    assert (law.grade, law.formula, law.holds_from) == ("proved", "n - 3", 3)
    law = find_law(observe(lambda n: n if n > 3 else 50), shape=shape)
    assert law.holds_from == 4
    assert gives(law, lambda n: n, [4, 100])


def test_values_that_vary_are_not_proved():
    data = observe(lambda n: n * n)
    data[3] = Observation((3,), data[3].value, draws=4, variance=data[3].value)
    assert find_law(data, shape=Shape(2, reason=REASON)).grade != "proved"


def test_several_sizes():
    points = [(a, b) for a in range(5) for b in range(6)]
    law = find_law(
        grid(lambda n, m: n * m * (m - 1) // 2, points), ("n", "m"), shape=Shape((1, 2), reason="r")
    )
    assert (law.grade, law.formula, law.holds_from) == ("proved", "n*m**2/2 - n*m/2", [0, 0])
    few = find_law(
        grid(lambda n, m: n * m, [(1, 1), (2, 2), (3, 3), (4, 4), (5, 5), (6, 6)]),
        ("n", "m"),
        shape=Shape((1, 1), reason="r"),
    )
    assert few.grade != "proved"


def test_sizes_that_a_proof_wants():
    assert Shape(2, 3, 4).sizes(2) == tuple(range(4, 4 + 9 + 2))
