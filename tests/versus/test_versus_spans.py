"""Crossings of formulas, held against working out every size one by one."""

from __future__ import annotations

import math
from collections.abc import Callable
from fractions import Fraction
from typing import Any

import mpmath
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from steplaw.forecast.domain import Domain
from steplaw.law import value
from steplaw.versus.enclose import enclose
from steplaw.versus.formulas import settle
from steplaw.versus.spans import Crossing, Less, Span, crossings, side

EVERY = Domain(0)


def one_by_one(a: str, b: str, sizes: range) -> list[Less]:
    """Work both out at each size by the evaluation that laws are tested with."""
    values = [(value(a, n), value(b, n)) for n in sizes]
    return [side(Fraction(x) - Fraction(y)) for x, y in values]


def told(spans: list[Span], sizes: range) -> list[Less]:
    out: list[Less] = []
    for n in sizes:
        span = next(s for s in spans if s.first <= n and (s.last is None or n <= s.last))
        out.append(span.less)
    return out


def hold(a: str, b: str, sizes: range) -> None:
    settled = settle(a, b, "n", Domain(sizes.start))
    found = told(settled.spans, sizes)
    for n, seen, true in zip(sizes, found, one_by_one(a, b, sizes), strict=True):
        assert seen in (true, "turns"), (n, seen, true)


coefficients = st.fractions(-60, 60, max_denominator=12)


def polynomial(numbers: list[Fraction]) -> str:
    return " + ".join(f"({c})*n**{k}" for k, c in enumerate(numbers)) or "0"


@given(st.lists(coefficients, max_size=5), st.lists(coefficients, max_size=5))
@settings(max_examples=60, deadline=None)
def test_polynomials(a: list[Fraction], b: list[Fraction]) -> None:
    hold(polynomial(a), polynomial(b), range(120))


@given(
    st.lists(st.integers(0, 150), min_size=1, max_size=4, unique=True),
    st.integers(1, 5),
)
@settings(max_examples=20, deadline=None)
def test_roots_at_whole_sizes_are_all_found(roots: list[int], scale: int) -> None:
    factors = "*".join(f"(n - {root})" for root in roots)
    spans = settle(f"{scale}*{factors} + n**5", "n**5", "n", EVERY).spans
    equal = sorted(n for s in spans if s.less == "same" for n in range(s.first, (s.last or 0) + 1))
    assert equal == sorted(roots)
    assert spans[-1].last is None


@given(
    st.integers(2, 5),
    st.integers(2, 5),
    st.lists(st.integers(-20, 20), min_size=4, max_size=4),
)
@settings(max_examples=20, deadline=None)
def test_quasi_polynomials(p: int, q: int, c: list[int]) -> None:
    a = f"n*floor(n/{p}) + {c[0]}*n + {c[1]}*ceiling(n/{q})"
    b = f"{c[2]}*floor((n + 1)/{q}) + {c[3]}*n + 40"
    hold(a, b, range(90))


@pytest.mark.parametrize(
    ("a", "b", "crossing"),
    [
        ("n**2", "100*n - 2400", [Crossing(39, 41, "a", True), Crossing(59, 61, "b", True)]),
        ("n**2", "100*n - 2500", []),
        ("n**2", "n**2", []),
        ("n**3", "10**27 - 1", [Crossing(10**9 - 1, 10**9, "b", True)]),
        ("2*n", "n + 10**30", [Crossing(10**30 - 1, 10**30 + 1, "b", True)]),
    ],
)
def test_known_crossings(a: str, b: str, crossing: list[Crossing]) -> None:
    assert crossings(settle(a, b, "n", EVERY).spans) == crossing


def lg(n: int) -> int:
    """Give the logarithm to base 2, rounded up."""
    return (n - 1).bit_length()


@pytest.mark.parametrize(
    ("a", "b", "first", "difference"),
    [
        (
            "47*n*log(n)/log(2) + 100",
            "n**2 + 3",
            1,
            lambda n: 47 * n * mpmath.log(n, 2) + 97 - n**2,
        ),
        (
            "n*ceiling(log(n)/log(2)) - 2**ceiling(log(n)/log(2)) + 1",
            "n*(n - 1)/4 + 9",
            1,
            lambda n: 4 * (n * lg(n) - 2 ** lg(n) - 8) - n * (n - 1),
        ),
        ("2**n", "10**9*n**3", 0, lambda n: 2**n - 10**9 * n**3),
        ("factorial(n)", "100**n", 0, lambda n: math.factorial(n) - 100**n),
        (
            "2*(n + 1)*harmonic(n) - 4*n",
            "n**2/7",
            1,
            lambda n: (
                2 * (n + 1) * sum(Fraction(1, k) for k in range(1, n + 1))
                - 4 * n
                - Fraction(n * n, 7)
            ),
        ),
        (
            "40*n**(log(3)/log(2))",
            "n**2",
            1,
            lambda n: 40 * mpmath.mpf(n) ** mpmath.log(3, 2) - n**2,
        ),
        ("floor(sqrt(n))*40", "n + 3", 0, lambda n: math.isqrt(n) * 40 - n - 3),
        ("fibonacci(n)", "n**4 + 1", 0, lambda n: int(sympy.fibonacci(n)) - n**4 - 1),
    ],
)
def test_other_formulas_against_each_size(
    a: str, b: str, first: int, difference: Callable[[int], Any]
) -> None:
    sizes = range(first, 400)
    found = told(settle(a, b, "n", Domain(first)).spans, sizes)
    with mpmath.workdps(50):
        true = [side(difference(n)) for n in sizes]
    assert found == true


def test_a_crossing_far_out_is_found_to_the_size() -> None:
    spans = settle("10**9*n*log(n)", "n**2", "n", Domain(2)).spans
    (crossing,) = crossings(spans)
    for n, less in ((crossing.after, "b"), (crossing.at, "a")):
        over = sympy.Rational(n) - 10**9 * sympy.log(n).evalf(50)
        assert (over > 0) == (less == "a")
    assert crossing.at == crossing.after + 1
    assert spans[-1].last == 10**18


def test_turns_are_no_crossing() -> None:
    spans = settle("2*floor(n/2)", "n - 1 + 2*floor((n + 1)/2) - n", "n", EVERY).spans
    assert [s.less for s in spans if s.last is None] == ["turns"]
    assert crossings(spans[-1:]) == []


def test_laws_of_even_sizes_cross_at_even_sizes() -> None:
    (crossing,) = crossings(settle("n**2/2", "10*n + 1", "n", Domain(0, "even")).spans)
    assert (crossing.after, crossing.at) == (20, 22)


@pytest.mark.parametrize(
    ("formula", "exact"),
    [
        ("n*log(n)/log(2) - 3*n", lambda n: n * mpmath.log(n, 2) - 3 * n),
        ("harmonic(n)*n", lambda n: n * mpmath.harmonic(n)),
        ("factorial(n)/n**3", lambda n: mpmath.factorial(n) / n**3),
        ("n*floor(log(n)/log(2))", lambda n: mpmath.mpf(n * (n.bit_length() - 1))),
        ("floor(n**2/7) - n", lambda n: mpmath.mpf(n * n // 7 - n)),
        ("sqrt(n)*n - 5/3", lambda n: mpmath.sqrt(n) * n - mpmath.mpf(5) / 3),
        ("ceiling(3*n/4)*2", lambda n: mpmath.mpf(2 * -(-3 * n // 4))),
    ],
)
def test_enclosures_hold_every_value(formula: str, exact: Callable[[int], Any]) -> None:
    least, most = enclose(formula, "n", 100, 100)
    assert 0 <= most - least < abs(most) / 1000
    for low, high in ((1, 1), (2, 9), (64, 127), (100, 163)):
        least, most = enclose(formula, "n", low, high)
        with mpmath.workdps(60):
            values = [exact(n) for n in range(low, high + 1)]
            room = abs(values[-1]) * mpmath.mpf(10) ** -40
            assert least - room <= min(values)
            assert max(values) <= most + room
