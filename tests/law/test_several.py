from __future__ import annotations

import math
import random
from fractions import Fraction

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st
from law_helpers import by_sympy, grid

from steplaw.law import Observation, find_law, leading_term, value

GRID = [(a, b) for a in (0, 1, 2, 3, 4, 5, 8, 13) for b in (0, 1, 2, 3, 5, 7, 16)]
WIDE = [(a, b) for a in (4, 8, 16, 33, 64) for b in (4, 9, 16, 32, 64)]


@pytest.mark.parametrize(
    ("function", "formula"),
    [
        (lambda n, m: n * m, "n*m"),
        (lambda n, m: n + 2 * m + 7, "n + 2*m + 7"),
        (lambda n, m: n * (n - 1) // 2 * m + 3, "n**2*m/2 - n*m/2 + 3"),
        (lambda n, m: 5 * min(n, m) + 3, "5*Min(n, m) + 3"),
        (lambda n, m: max(n, m) + n * m, "Max(n, m) + n*m"),
        (lambda n, m: 9, "9"),
        (lambda n, m: 0, "0"),
    ],
)
def test_exact_on_a_grid(function, formula):
    law = find_law(grid(function, GRID), ("n", "m"))
    assert law.grade == "exact"
    assert sympy.expand(sympy.sympify(law.formula) - sympy.sympify(formula)) == 0
    assert law.holds_from == [0, 0]
    assert (13, 16) in law.checked_at
    assert len(law.checked_at) >= 3
    assert "n = 13, m = 16" in law.note


@settings(max_examples=30, deadline=None)
@given(st.lists(st.integers(-9, 9), min_size=6, max_size=6))
def test_random_polynomials_and_a_disturbed_point(cs):
    def function(n, m):
        a, b, c, d, e, f = cs
        return a * n * n + b * n * m + c * m * m + d * n + e * m + f

    data = grid(function, GRID)
    law = find_law(data, ("n", "m"))
    assert law.grade == "exact"
    for at in ((20, 31), (100, 7)):
        assert value(law, at) == function(*at) == by_sympy(law.formula, n=at[0], m=at[1])
    data[-1] = Observation(GRID[-1], data[-1].value + 1)
    assert find_law(data, ("n", "m")).grade != "exact"


def test_halves_and_halvings():
    law = find_law(grid(lambda n, m: (n // 2) * m + m, GRID), ("n", "m"))
    assert law.formula == "floor(n/2)*m + m"
    law = find_law(grid(lambda n, m: n * m.bit_length() if m else 0, GRID), ("n", "m"))
    assert law.grade == "exact"
    assert law.holds_from[1] >= 1
    assert value(law, (10, 1000)) == 100


def test_edges_of_a_grid_may_differ():
    law = find_law(grid(lambda n, m: (n - 1) * (m - 1) if n and m else 40, GRID), ("n", "m"))
    assert law.grade == "exact"
    assert law.holds_from == [1, 1]


def test_vertices_and_edges():
    """Breadth-first search sees every vertex once and every edge twice (common practice)."""
    points = [(v, e) for v in (4, 6, 9, 14, 22) for e in (v - 1, v + 3, 2 * v, 3 * v - 6)]
    law = find_law(grid(lambda v, e: v + 2 * e, points), ("V", "E"))
    assert law.grade == "exact"
    assert leading_term(law.formula, ("V", "E")) in ("V + 2*E", "2*E + V")


def test_three_sizes():
    points = [(a, b, c) for a in (1, 2, 3, 5) for b in (1, 2, 4, 5) for c in (0, 1, 3, 6)]
    law = find_law(grid(lambda a, b, c: a * b * c + a, points), ("a", "b", "c"))
    assert law.formula == "a*b*c + a"
    assert law.leading == "a*b*c"


@pytest.mark.parametrize(
    ("function", "leading"),
    [
        (lambda n, m: round(n * m * math.log(m + 1) + 5 * n), "m*n*log(m)"),
        (lambda n, m: int(n**1.5 * m), "m*n**(3/2)"),
    ],
)
def test_fitted_products(function, leading):
    law = find_law(grid(function, WIDE), ("n", "m"))
    assert law.grade == "fitted"
    assert law.leading.endswith(leading)
    assert law.error < 0.05


def test_means_of_draws_in_several_sizes():
    rng = random.Random(3)
    data = []
    for n, m in WIDE:
        mean = n * m * 2 * (1 + rng.gauss(0, 0.01)) + 3 * n
        data.append(Observation((n, m), Fraction(mean).limit_denominator(99), 10, Fraction(n * m)))
    law = find_law(data, ("n", "m"))
    assert law.grade in ("fitted", "open")
    if law.grade == "fitted":
        assert law.leading.endswith("m*n")


def test_too_few_points():
    assert find_law(grid(lambda n, m: n * m, [(1, 1), (2, 2)]), ("n", "m")).grade == "open"
