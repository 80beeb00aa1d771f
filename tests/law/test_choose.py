from __future__ import annotations

import random
from fractions import Fraction

import pytest
from law_helpers import PLAN, observe

from steplaw.law import find_law
from steplaw.law.choose import search, text_bits
from steplaw.law.families import forms_for

PLANS = {
    "plan": PLAN,
    "consecutive": tuple(range(20)),
    "powers of two": tuple(2**k for k in range(11)),
    "doubling": (8, 12, 16, 24, 32, 48, 64, 96, 128),
}


@pytest.mark.parametrize("name", PLANS)
@pytest.mark.parametrize("top", [3, 9, 1000])
def test_noise_follows_no_exact_law(name, top):
    sizes = PLANS[name]
    rng = random.Random(top)
    for _ in range(60):
        values = [Fraction(rng.randint(0, top)) for _ in sizes]
        assert search(sizes, values, forms_for(sizes, values)) is None


def test_noisy_fractions_follow_no_exact_law():
    rng = random.Random(4)
    sizes = tuple(range(9))
    for _ in range(100):
        values = [Fraction(rng.randint(0, 200), rng.randint(1, 24)) for _ in sizes]
        assert search(sizes, values, forms_for(sizes, values)) is None


def test_wider_mixtures_are_not_taken_for_noise_either():
    rng = random.Random(8)
    for _ in range(15):
        values = [Fraction(rng.randint(0, 20)) for _ in PLAN]
        assert search(PLAN, values, forms_for(PLAN, values, exhaustive=True)) is None


def test_mixtures_need_the_wider_search():
    def function(n):
        return n * (n // 2) + 3 * max(n, 1).bit_length() + 2 * n + 1

    data = observe(function, PLAN[1:])
    law = find_law(data, exhaustive=True)
    assert law.grade == "exact"
    assert all(o.value == function(o.at[0]) for o in data)


def test_the_plainer_of_two_forms_is_taken():
    assert find_law(observe(lambda n: 3 * n + 1)).details["family"] == "polynomial"
    assert find_law(observe(lambda n: n // 2)).details["family"] == "quasi-polynomial"


def test_short_formulas_are_short():
    assert text_bits("floor(n/2)") < text_bits("floor((n + 3)/5) - ceiling(n/5) + 2")
