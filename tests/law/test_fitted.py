from __future__ import annotations

import math
import random
from fractions import Fraction

import pytest
from law_helpers import observe

from steplaw.law import Observation, find_law, ratio_limit, value
from steplaw.law.constants import known_constant, simple_fraction
from steplaw.law.leastsquares import student

SIZES = (8, 12, 16, 24, 32, 48, 64, 96, 128, 192, 256, 384, 512, 768, 1024)


def drawn(function, share, draws=30, sizes=SIZES, seed=1):
    """Give means of draws that vary by a share of the mean."""
    rng = random.Random(seed)
    data = []
    for n in sizes:
        numbers = [function(n) * (1 + share * rng.gauss(0, 1)) for _ in range(draws)]
        mean = sum(numbers) / draws
        variance = sum((x - mean) ** 2 for x in numbers) / draws
        data.append(
            Observation(
                (n,), Fraction(mean).limit_denominator(1000), draws,
                Fraction(variance).limit_denominator(1000),
            )
        )  # fmt: skip
    return data


@pytest.mark.parametrize(
    ("function", "order"),
    [
        (lambda n: 3 * n + 20, "n"),
        (lambda n: 2 * n * math.log(n) - 2.8 * n + 5, "n*log(n)"),
        (lambda n: n * n / 4 + 3 * n + 7, "n**2"),
        (lambda n: 3 * math.log(n) + 4, "log(n)"),
        (lambda n: 2 * n**1.5 + n, "n**(3/2)"),
        (lambda n: n**3 / 6 + n * n, "n**3"),
        (lambda n: 4 * math.sqrt(n) + 2, "sqrt(n)"),
    ],
)
@pytest.mark.parametrize("share", [0.0, 0.01])
def test_the_order_of_growth_is_found(function, order, share):
    law = find_law(drawn(function, share or 1e-6))
    assert law.grade in ("fitted", "exact")
    limit = ratio_limit(law, order)
    assert limit not in (None, 0, math.inf)
    exact = function(10**5)
    assert float(value(law, 10**5)) == pytest.approx(exact, rel=0.1)


def test_intervals_hold_the_true_coefficients():
    held = total = 0
    for seed in range(25):
        law = find_law(drawn(lambda n: n * n / 4 + 3 * n, 0.02, seed=seed))
        if law.grade != "fitted" or len(law.details["terms"]) != 2:
            continue
        for term, true in zip(law.details["terms"], (0.25, 3), strict=True):
            total += 1
            held += term["low"] <= true <= term["high"]
    assert total >= 30
    assert held / total >= 0.85


def test_the_data_behind_the_choice_are_stated():
    law = find_law(drawn(lambda n: n * n / 4 + n, 0.01))
    evidence = law.details["data"]
    assert evidence["sizes"] == len(law.settled_by) + len(law.checked_at) == len(SIZES)
    assert evidence["draws"] == 30 * len(SIZES)
    assert min(law.checked_at) > max(law.settled_by)


def test_the_mean_of_quicksort_has_2_log_n():
    """Mean comparisons 2(n+1)H(n) - 4n ~ 2 n ln n (Sedgewick & Flajolet, ch. 1)."""

    def mean(n):
        return 2 * (n + 1) * sum(1 / k for k in range(1, n + 1)) - 4 * n

    law = find_law(drawn(mean, 0.001))
    assert law.grade == "fitted"
    assert float(ratio_limit(law, "n*log(n)")) == pytest.approx(2, rel=0.02)


def test_known_constants_need_a_narrow_interval():
    assert simple_fraction(0.2499, 0.2501) == Fraction(1, 4)
    assert simple_fraction(0.24, 0.27) is None
    assert simple_fraction(2.9999, 3.0002) == 3
    assert simple_fraction(0.31830, 0.31832) is None
    assert known_constant(1.44265, 1.44275, logarithmic=True) == "1/log(2)"
    assert known_constant(1.38620, 1.38635, logarithmic=False) == "2*log(2)"
    assert known_constant(1.3, 1.6, logarithmic=True) is None
    assert known_constant(1.44265, 1.44275, logarithmic=False) in ("1/log(2)", None)


def test_constants_by_chance_are_rare():
    rng = random.Random(2)
    hits = 0
    for _ in range(2000):
        middle = rng.uniform(0.2, 8)
        half = middle * 10 ** rng.uniform(-4, -1)
        hits += simple_fraction(middle - half, middle + half) is not None
        hits += known_constant(middle - half, middle + half, False) is not None
    assert hits / 2000 < 0.08


def test_snapped_coefficients_say_so():
    law = find_law(drawn(lambda n: n * n / 4 + 3 * n, 0.0005))
    assert law.formula.startswith("n**2/4")
    assert law.details["terms"][0]["known"] == "1/4"
    wide = find_law(drawn(lambda n: n * n / 4 + 3 * n, 0.1))
    if wide.grade == "fitted":
        assert "known" not in wide.details["terms"][0]


def test_nothing_fits_what_jumps_about():
    rng = random.Random(6)
    law = find_law(observe(lambda n: rng.randint(1, 10**6), SIZES))
    assert law.grade == "open"
    assert law.formula is None
    assert "nothing fits" in law.note or "equally well" in law.note


@pytest.mark.parametrize(
    ("freedom", "point"), [(1, 12.706), (2, 4.303), (5, 2.571), (10, 2.228), (30, 2.042)]
)
def test_student_s_points(freedom, point):
    """Two-sided 95 % points: Abramowitz & Stegun, table 26.10, from memory."""
    assert student(freedom) == pytest.approx(point, abs=0.003)
