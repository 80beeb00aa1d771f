from __future__ import annotations

from fractions import Fraction

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st
from law_helpers import PLAN, by_sympy, gives, observe

from steplaw.law import Observation, find_law, value


@pytest.mark.parametrize(
    ("function", "formula"),
    [
        (lambda n: n // 2, "floor(n/2)"),
        (lambda n: -(-n // 2), "ceiling(n/2)"),
        (lambda n: n * n // 4, "floor(n**2/4)"),
        (lambda n: n * (n // 2), "n*floor(n/2)"),
        (lambda n: 7 * n + 12 * (n // 3) + 5, "7*n + 12*floor(n/3) + 5"),
        (lambda n: n % 5, "Mod(n, 5)"),
        (lambda n: 3 * (n % 4) + 2, "3*Mod(n, 4) + 2"),
    ],
)
def test_they_are_written_as_people_write_them(function, formula):
    law = find_law(observe(function))
    assert (law.grade, law.formula) == ("exact", formula)


def test_partitions_into_three_parts():
    """Partitions of n into at most three parts: n**2/12 + n/2 rounded up (A001399 in the OEIS)."""

    def count(n):
        return sum(1 for a in range(n + 1) for b in range(a + 1) if 0 <= n - a - b <= b)

    law = find_law(observe(count, range(25)))
    assert law.grade == "exact"
    assert gives(law, lambda n: round(Fraction((n + 3) ** 2, 12)), range(40))


@settings(max_examples=50, deadline=None)
@given(
    st.integers(2, 4),
    st.lists(st.integers(-9, 9), min_size=4, max_size=4),
    st.lists(st.integers(1, 9), min_size=1, max_size=2),
)
def test_random_quasi_polynomials_are_recovered(period, offsets, upper):
    def function(n):
        return sum(c * n ** (k + 1) for k, c in enumerate(upper)) + offsets[n % period]

    law = find_law(observe(function))
    assert law.grade == "exact"
    for n in (*PLAN, 300, 301, 302, 303):
        assert by_sympy(law.formula, n=n) == function(n) == value(law, n)


@settings(max_examples=50, deadline=None)
@given(
    st.integers(2, 4),
    st.lists(st.integers(-9, 9), min_size=4, max_size=4),
    st.integers(15, len(PLAN) - 1),
)
def test_one_disturbed_value_forbids_the_claim(period, offsets, place):
    data = observe(lambda n: 3 * n + offsets[n % period])
    o = data[place]
    data[place] = Observation(o.at, o.value + 1)
    assert find_law(data).grade != "exact"


@settings(max_examples=60, deadline=None)
@given(st.integers(2, 6), st.integers(0, 2), st.integers(0, 1), st.randoms(use_true_random=False))
def test_any_table_of_coefficients_is_written_right(period, degree, varying, rng):
    from steplaw.law.quasi import quasi

    varying = min(varying, degree)
    form = quasi(degree, period, varying)
    cs = [Fraction(rng.randint(-12, 12), rng.choice((1, 2, 3))) for _ in form.terms]
    text = form.formula(cs, "n")
    for n in range(2 * period + 3):
        want = sum((c * t.at(n) for c, t in zip(cs, form.terms, strict=True)), Fraction(0))
        assert value(text, n) == want
        assert by_sympy(text, n=n) == sympy.Rational(want.numerator, want.denominator)
