from __future__ import annotations

from fractions import Fraction
from math import comb, factorial

import pytest
from law_helpers import SMALL, gives, observe

from steplaw.law import find_law, value


def arrangements(n):
    return sum(factorial(n) // factorial(k) for k in range(n + 1))


def derangements(n):
    return sum((-1) ** k * factorial(n) // factorial(k) for k in range(n + 1))


@pytest.mark.parametrize(
    ("function", "formula"),
    [
        (lambda n: 2**n - 1, "2**n - 1"),
        (lambda n: n * 2 ** max(0, n - 1) if n else 0, "n*2**n/2"),
        (lambda n: 3**n + 2 * n, "3**n + 2*n"),
        (lambda n: 5 * 2**n + 3 * n + 7, "5*2**n + 3*n + 7"),
        (lambda n: (2**n - (-1) ** n) // 3, "2**n/3 - (-1)**n/3"),
        (lambda n: n * factorial(n) + 1, "n*factorial(n) + 1"),
        (lambda n: factorial(n), "factorial(n)"),
        (lambda n: derangements(n) + 0, "subfactorial(n)"),
        (lambda n: comb(2 * n, n) // (n + 1), "catalan(n)"),
        (lambda n: comb(2 * n, n) + 3, "binomial(2*n, n) + 3"),
        (lambda n: comb(n, n // 2), "binomial(n, floor(n/2))"),
    ],
)
def test_exponential_families(function, formula):
    law = find_law(observe(function, SMALL))
    assert law.grade == "exact"
    assert law.formula == formula
    assert gives(law, function, [*range(law.holds_from, 13), 20])


def test_arrangements():
    """Orders of all choices of n things: floor(e n!) from n = 1 (Riordan, from memory)."""
    law = find_law(observe(arrangements, SMALL))
    assert law.formula == "floor(E*factorial(n))"
    assert law.holds_from == 1
    assert value(law, 30) == arrangements(30)


def test_means_over_bit_patterns_and_orders():
    law = find_law(observe(lambda n: 2 - Fraction(2, 2**n), SMALL, whole=True))
    assert law.formula == "2 - 2/2**n"

    def function(n):
        return sum((Fraction(1, factorial(k)) for k in range(n)), Fraction(0))

    law = find_law(observe(function, range(1, 10), whole=True))
    assert law.grade == "exact"
    assert gives(law, function, range(1, 15))
    assert law.leading == "E"
