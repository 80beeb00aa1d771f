from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from law_helpers import by_sympy, gives, observe

from steplaw.law import find_law, value
from steplaw.law.recurrence import consecutive, shortest_recurrence


def sequence(first, weights, count=60):
    values = list(first)
    while len(values) < count:
        values.append(sum(w * values[-1 - k] for k, w in enumerate(weights)))
    return values


@settings(max_examples=80, deadline=None)
@given(
    st.lists(st.integers(-3, 3), min_size=1, max_size=4).filter(lambda w: w[-1] != 0),
    st.lists(st.integers(-5, 5), min_size=4, max_size=4).filter(any),
)
def test_the_shortest_recurrence_gives_every_value(weights, first):
    values = [Fraction(v) for v in sequence(first[: len(weights)], weights, 20)]
    if not any(values[: len(weights)]):
        return
    found = shortest_recurrence(values)
    assert found is not None
    assert len(found) <= len(weights)
    for n in range(len(found), len(values)):
        assert values[n] == sum(c * values[n - 1 - k] for k, c in enumerate(found))


def test_too_few_values_for_a_long_recurrence():
    values = [Fraction(v) for v in sequence((0, 0, 1), (1, 2, 1), 8)]
    assert shortest_recurrence(values) is None


def test_consecutive_stretch():
    assert consecutive([0, 1, 2, 3, 8, 16, 17]) == (0, 4)
    assert consecutive([4, 8, 9, 10, 11, 12]) == (1, 6)


@pytest.mark.parametrize(
    ("name", "first", "weights", "formula"),
    [
        ("Fibonacci", (0, 1), (1, 1), "fibonacci(n)"),
        ("every other Fibonacci", (1, 2), (3, -1), "fibonacci(2*n + 1)"),
        ("tribonacci", (0, 1, 1), (1, 1, 1), "tribonacci(n)"),
        ("Pell", (1, 1), (2, 1), "((1 + sqrt(2))**n + (1 - sqrt(2))**n)/2"),
    ],
)
def test_closed_forms(name, first, weights, formula):
    values = sequence(first, weights)
    law = find_law(observe(lambda n: values[n], range(20)))
    assert (law.grade, law.formula) == ("exact", formula), name
    assert gives(law, lambda n: values[n], [0, 7, 12])
    assert value(law, 50) == values[50]


def test_a_recurrence_without_a_plain_form_is_named_but_not_claimed():
    values = sequence((1, 1, 1), (1, 0, 1))
    law = find_law(observe(lambda n: values[n], range(20)))
    assert law.grade != "exact"
    assert "T(n) = T(n - 1) + T(n - 3)" in law.note


def test_repeating_and_doubling():
    def function(n):
        return 3 * 2**n + (n % 3)

    law = find_law(observe(function, range(20)))
    assert law.grade == "exact"
    for n in (0, 5, 21, 22, 23):
        assert value(law, n) == function(n) == by_sympy(law.formula, n=n)
