from __future__ import annotations

from fractions import Fraction

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from steplaw.law.exactmath import PRIME, bits, bits_together, relations, residue, solve

fractions = st.fractions(min_value=-50, max_value=50, max_denominator=20)


def test_the_field_is_a_field():
    """2**61 - 1 is a Mersenne prime (Pervushin 1883); checked with sympy."""
    assert sympy.isprime(PRIME)


@given(fractions, fractions)
def test_residues_respect_sums_and_products(a, b):
    assert residue(a + b) == (residue(a) + residue(b)) % PRIME
    assert residue(a * b) == residue(a) * residue(b) % PRIME


@settings(max_examples=60, deadline=None)
@given(st.lists(st.lists(fractions, min_size=3, max_size=3), min_size=3, max_size=6), st.data())
def test_solve_agrees_with_sympy(rows, data):
    unknowns = data.draw(st.lists(fractions, min_size=3, max_size=3))
    values = [sum((a * x for a, x in zip(row, unknowns, strict=True)), Fraction(0)) for row in rows]
    rank = sympy.Matrix(
        [[sympy.Rational(x.numerator, x.denominator) for x in r] for r in rows]
    ).rank()
    solved = solve(rows, values)
    if rank < 3:
        assert solved is None
    else:
        assert solved is not None
        assert solved[0] == unknowns
        assert len(solved[1]) == 3


@settings(max_examples=40, deadline=None)
@given(st.lists(st.lists(st.integers(-9, 9), min_size=2, max_size=3), min_size=1, max_size=7))
def test_every_relation_gives_zero(rows):
    width = min(len(r) for r in rows)
    rows = [r[:width] for r in rows]
    found = relations([[residue(x) for x in r] for r in rows])
    assert len(found.pivots) == sympy.Matrix(rows).rank()
    assert len(found.pivots) + len(found.dependent) == len(rows)
    for low, used, weights in found.dependent:
        assert min(used) == low
        for k in range(width):
            assert sum(w * rows[j][k] for j, w in zip(used, weights, strict=True)) % PRIME == 0


def test_solve_takes_the_first_rows_that_settle_it():
    rows = [[1, 0], [2, 0], [1, 1], [1, 2]]
    assert solve(rows, [3, 6, 4, 5]) == ([Fraction(3), Fraction(1)], [0, 2])


@pytest.mark.parametrize(("a", "b"), [(1, 1000), (Fraction(1, 2), Fraction(1, 64)), (0, 1)])
def test_simple_numbers_are_short(a, b):
    assert bits(a) < bits(b)


def test_a_common_denominator_is_written_once():
    shared = bits_together([Fraction(1, 72), Fraction(5, 72), Fraction(7, 72)])
    assert shared < sum(bits(Fraction(k, 72)) for k in (1, 5, 7))
