from __future__ import annotations

import pytest
from law_helpers import observe

from steplaw.law import find_law, value
from steplaw.law.dyadic import NOTE

POWERS = [2**k for k in range(11)]


def lg(n):
    return n.bit_length() - 1


@pytest.mark.parametrize(
    ("function", "formula"),
    [
        (lambda n: n * lg(n) // 2, "n*log(n)/(2*log(2))"),
        (lambda n: 3 ** lg(n), "n**(log(3)/log(2))"),
        (lambda n: 7 * 3 ** lg(n) - 5 * n + 2, "7*n**(log(3)/log(2)) - 5*n + 2"),
        (lambda n: 7 ** lg(n) - 6 * n * n, "n**(log(7)/log(2)) - 6*n**2"),
        (lambda n: n * lg(n) ** 2, "n*(log(n)/log(2))**2"),
        (lambda n: 5 * lg(n) + 1, "5*log(n)/log(2) + 1"),
    ],
)
def test_divide_and_conquer_at_powers_of_two(function, formula):
    law = find_law(observe(function, POWERS))
    assert (law.grade, law.formula) == ("exact", formula)
    assert NOTE in law.note
    for k in (0, 5, 30):
        assert value(law, 2**k) == function(2**k)


def test_the_same_values_among_other_sizes_are_not_claimed():
    sizes = [*POWERS, 3, 5, 100]
    law = find_law(observe(lambda n: int(n**1.5849625007), sorted(sizes)))
    assert law.grade != "exact"


def test_a_polynomial_seen_at_powers_of_two_says_so():
    law = find_law(observe(lambda n: n * n + n, POWERS))
    assert law.formula == "n**2 + n"
    assert "power of two" in law.note
