"""Observations for tests, and an independent reading of formulas by sympy."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from fractions import Fraction

import sympy

from steplaw.law import Law, Observation

#: Consecutive small sizes, doubling ones, and some off the grid, as a plan has them.
PLAN = (*range(13), 16, 21, 32, 50, 64, 100, 128, 256)
FROM_ONE = PLAN[1:]
SMALL = tuple(range(13))


def observe(
    function: Callable[[int], int | Fraction], sizes: Iterable[int] = PLAN, whole: bool = False
) -> list[Observation]:
    """Give exact observations of a function."""
    return [Observation((n,), Fraction(function(n)), whole=whole) for n in sizes]


def grid(
    function: Callable[..., int | Fraction], points: Iterable[tuple[int, ...]]
) -> list[Observation]:
    """Give exact observations of a function of several sizes."""
    return [Observation(p, Fraction(function(*p))) for p in points]


def by_sympy(formula: str, **at: int) -> sympy.Expr:
    """Work a formula out by sympy alone."""
    symbols = {name: sympy.Symbol(name, integer=True, positive=True) for name in at}
    return sympy.sympify(formula, locals=symbols).subs({symbols[name]: n for name, n in at.items()})


def gives(law: Law, function: Callable[[int], int | Fraction], sizes: Sequence[int]) -> bool:
    """Say whether the law's formula, read by sympy, gives the function at every size."""
    assert law.formula is not None
    for n in sizes:
        expected = Fraction(function(n))
        difference = by_sympy(law.formula, n=n) - sympy.Rational(
            expected.numerator, expected.denominator
        )
        if sympy.simplify(difference) != 0:
            return False
    return True


def harmonic(n: int, order: int = 1) -> Fraction:
    """Give a harmonic number by its definition."""
    return sum((Fraction(1, k**order) for k in range(1, n + 1)), Fraction(0))
