from __future__ import annotations

from fractions import Fraction

import pytest
import sympy
from law_helpers import by_sympy, gives, harmonic, observe

from steplaw.law import find_law

n = sympy.Symbol("n", integer=True, positive=True)


def test_harmonic_numbers_are_sympy_s():
    for k in range(30):
        expected = harmonic(k, 2)
        assert by_sympy("harmonic(n, 2)", n=k) == sympy.Rational(
            expected.numerator, expected.denominator
        )


@pytest.mark.parametrize(
    ("function", "formula"),
    [
        (lambda n: 2 * (n + 1) * harmonic(n) - 4 * n, "2*(n + 1)*harmonic(n) - 4*n"),
        (lambda n: Fraction(n * (n - 1), 4) + n - harmonic(n), "n*(n-1)/4 + n - harmonic(n)"),
        (lambda n: harmonic(n) - 1, "harmonic(n) - 1"),
        (lambda n: harmonic(n) - harmonic(n, 2), "harmonic(n) - harmonic(n, 2)"),
        (lambda n: n * harmonic(n), "n*harmonic(n)"),
        (lambda n: 3 * n * harmonic(n) + 5 * n + 2, "3*n*harmonic(n) + 5*n + 2"),
    ],
)
@pytest.mark.parametrize("sizes", [range(8), range(1, 8), range(9)])
def test_means_over_all_orders(function, formula, sizes):
    if 0 in sizes and "harmonic(n) - 1" in formula:
        sizes = range(1, 9)
    law = find_law(observe(function, sizes, whole=True))
    assert law.grade == "exact"
    assert (
        sympy.simplify(
            sympy.sympify(law.formula, locals={"n": n}) - sympy.sympify(formula, locals={"n": n})
        )
        == 0
    )


def test_variance_of_quicksort():
    """7n^2 - 4(n+1)^2 H2(n) - 2(n+1) H(n) + 13n (Knuth, vol. 3, 6.2.2 exercise 8), from memory."""

    def function(k):
        return 7 * k * k - 4 * (k + 1) ** 2 * harmonic(k, 2) - 2 * (k + 1) * harmonic(k) + 13 * k

    law = find_law(observe(function, range(9), whole=True))
    assert law.grade == "exact"
    assert gives(law, function, range(1, 20))


def test_a_mean_over_all_places():
    """Mean distance of two places of a row of n: (n**2 - 1)/(3n), counted over all pairs."""

    def function(k):
        return Fraction(sum(abs(i - j) for i in range(k) for j in range(k)), k * k)

    law = find_law(observe(function, range(1, 14), whole=True))
    assert law.formula == "n/3 - 1/(3*n)"


def test_a_disturbed_mean_is_no_law():
    data = observe(lambda k: 2 * (k + 1) * harmonic(k) - 4 * k, range(9), whole=True)
    from dataclasses import replace

    data[-1] = replace(data[-1], value=data[-1].value + Fraction(1, 40320))
    assert find_law(data).grade != "exact"
