from __future__ import annotations

import math
from fractions import Fraction

import mpmath
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st
from law_helpers import by_sympy

from steplaw.law import Law, value
from steplaw.law.exactlog import LogRatio, ratio
from steplaw.law.special import harmonic
from steplaw.law.surd import square_root

FORMULAS = [
    "n**3/6 - n**2/2 + n/3",
    "floor(log(n)/log(2)) + 1",
    "ceiling(log(n)/log(3))",
    "n*ceiling(log(n)/log(2)) - 2**ceiling(log(n)/log(2)) + 1",
    "floor(n**2/12 + 1/4)",
    "Mod(n, 7) + Max(3, n) - Min(n, 5)",
    "harmonic(n) + harmonic(n, 2)",
    "floor(sqrt(n))*n",
    "ceiling(sqrt(n))",
    "floor(E*factorial(n))",
    "fibonacci(n) + lucas(n) + tribonacci(n) + catalan(n) + subfactorial(n)",
    "binomial(2*n, n) + binomial(n, floor(n/2))",
    "((1 + sqrt(2))**n + (1 - sqrt(2))**n)/2",
    "2**n/3 - (-1)**n/3",
]


@pytest.mark.parametrize("formula", FORMULAS)
@pytest.mark.parametrize("n", [1, 2, 7, 8, 9, 16, 27, 31])
def test_the_same_as_sympy_and_exact(formula, n):
    number = value(formula, n)
    assert isinstance(number, Fraction)
    expected = by_sympy(formula, n=n)
    assert sympy.simplify(expected - sympy.Rational(number.numerator, number.denominator)) == 0


@settings(max_examples=150, deadline=None)
@given(st.integers(1, 10**40), st.sampled_from([2, 3, 4, 5, 10]))
def test_rounded_logs_are_exact_at_any_size(n, base):
    low = value(f"floor(log(n)/log({base}))", n)
    assert base**low <= n < base ** (low + 1)
    high = value(f"ceiling(log(n)/log({base}))", n)
    assert base**high >= n > base**high // base or n == 1


@settings(max_examples=100, deadline=None)
@given(st.integers(0, 10**40))
def test_rounded_roots_are_exact_at_any_size(n):
    assert value("floor(sqrt(n))", n) == math.isqrt(n)
    root = value("ceiling(sqrt(n))", n)
    assert (root - 1) ** 2 < n <= root**2 or n == 0


def test_powers_of_two_are_exact():
    assert value("n*log(n)/(2*log(2))", 2**70) == 35 * 2**70
    assert value("n**(log(3)/log(2))", 2**70) == 3**70
    assert value("n*(log(n)/log(2))**2", 2**70) == 4900 * 2**70
    assert isinstance(value("n**(log(3)/log(2))", 100), float)


@pytest.mark.parametrize(("n", "order"), [(5000, 1), (10**7, 1), (10**7, 2), (10**6, 3)])
def test_large_harmonic_numbers_against_mpmath(n, order):
    expected = mpmath.harmonic(n) if order == 1 else mpmath.zeta(order) - mpmath.zeta(order, n + 1)
    assert float(harmonic(n, order)) == pytest.approx(float(expected), rel=1e-12)


def test_sizes_by_name_and_in_order():
    assert value("n*m + 1", {"n": 3, "m": 4}) == 13
    law = Law("n - m", "n", "exact", names=("m", "n"))
    assert value(law, (2, 10)) == 8


def test_what_is_too_large_to_write_out_is_infinite():
    assert value("2**n", 10**9) == math.inf
    assert value("factorial(n)", 10**7) == math.inf
    assert value("fibonacci(n)", 10**9) == math.inf


def test_other_functions_are_left_to_sympy():
    assert value("bell(n)", 5) == 52


def test_an_open_law_has_no_value():
    with pytest.raises(ValueError, match="open"):
        value(Law(None, None, "open"), 3)


def test_ratios_of_logs():
    assert ratio(Fraction(1), 8, 4) == Fraction(3, 2)
    three = ratio(Fraction(2), 9, 3)
    assert three == 4
    assert isinstance(ratio(Fraction(1), 10, 2), LogRatio)


@given(st.integers(1, 200), st.integers(1, 30))
def test_surds_keep_what_they_are(a, b):
    root = square_root(a)
    assert root * root == a or (root * root).settled() == a
    shifted = root + b
    back = shifted * (root - b)
    assert (back.settled() if hasattr(back, "settled") else back) == a - b * b
