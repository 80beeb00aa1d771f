from __future__ import annotations

from fractions import Fraction
from itertools import combinations

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st
from law_helpers import PLAN, gives, observe

from steplaw.law import Observation, find_law, value

coefficients = st.lists(
    st.fractions(min_value=-40, max_value=40, max_denominator=12), min_size=1, max_size=5
)


def at(cs, n):
    return sum((c * n**k for k, c in enumerate(cs)), Fraction(0))


@settings(max_examples=80, deadline=None)
@given(coefficients)
def test_random_polynomials_are_recovered(cs):
    law = find_law(observe(lambda n: at(cs, n)))
    assert law.grade == "exact"
    n = sympy.Symbol("n")
    want = sum(sympy.Rational(c.numerator, c.denominator) * n**k for k, c in enumerate(cs))
    assert sympy.expand(sympy.sympify(law.formula) - want) == 0
    assert law.holds_from == 0
    assert max(PLAN) in law.checked_at
    assert sorted(law.settled_by + law.checked_at) == list(PLAN)


@settings(max_examples=80, deadline=None)
@given(coefficients, st.integers(len(PLAN) * 2 // 3, len(PLAN) - 1), st.sampled_from([-1, 1, 5]))
def test_one_disturbed_held_out_value_forbids_the_claim(cs, place, by):
    data = observe(lambda n: at(cs, n))
    o = data[place]
    data[place] = Observation(o.at, o.value + by)
    assert find_law(data).grade != "exact"


@pytest.mark.parametrize(("start", "slope"), [(1, 1), (2, 3), (3, 5), (4, 2), (5, 7)])
def test_loops_that_are_empty_at_first(start, slope):
    law = find_law(observe(lambda n: slope * max(0, n - start)))
    assert law.grade == "exact"
    assert law.holds_from == start
    assert gives(law, lambda n: slope * (n - start), [start, 9, 300])


def test_a_start_that_is_all_of_the_small_sizes_is_no_law():
    law = find_law(observe(lambda n: max(0, n - 11) * 3, sizes=(*range(13), 14, 15, 16)))
    assert law.grade != "exact"


def test_as_many_coefficients_as_points_is_no_law():
    for count in range(1, 4):
        assert find_law(observe(lambda n: n * n, sizes=range(1, count + 1))).grade == "open"


def test_all_zero_and_constant():
    assert find_law(observe(lambda n: 0)).formula == "0"
    law = find_law(observe(lambda n: 7))
    assert (law.formula, law.leading, law.grade) == ("7", "7", "exact")


def test_triples():
    """Visits of all triples i < j < k of n are n(n-1)(n-2)/6: the binomial coefficient."""
    law = find_law(observe(lambda n: sum(1 for _ in combinations(range(n), 3)), range(14)))
    assert law.formula == "n**3/6 - n**2/2 + n/3"
    assert law.leading == "n**3/6"
    assert value(law, 1000) == 166167000
