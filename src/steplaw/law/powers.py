"""Powers of two, three and four times polynomials; their reciprocals for means."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import lru_cache

from steplaw.law.polynomial import monomial
from steplaw.law.terms import Form, Term, divided, times_power


@lru_cache(maxsize=16)
def exponential(base: int) -> Term:
    """Give a whole number to the power of the size."""
    shown = f"({base})" if base < 0 else str(base)
    return Term(f"{shown}**{{n}}", _power_of(base))


def _power_of(base: int) -> Callable[[int], int]:
    return lambda n: int(base**n)


def shrinking(base: int, term: Term | None = None) -> Term:
    """Give a term (1 by default) divided by a whole number to the power of the size."""
    return divided(term or monomial(0), exponential(base))


@lru_cache(maxsize=1)
def power_forms() -> tuple[Form, ...]:
    """Give the forms that grow exponentially."""
    one, n, n2, n3 = (monomial(k) for k in range(4))
    two, three, four = exponential(2), exponential(3), exponential(4)
    n_two, n2_two = times_power(two, 1), times_power(two, 2)
    sign, minus = exponential(-1), exponential(-2)
    sets: list[tuple[Term, ...]] = [
        (two,),
        (three,),
        (two, one),
        (three, one),
        (four, one),
        (two, n, one),
        (n_two, two, one),
        (two, sign, one),
        (three, n, one),
        (three, two, one),
        (four, two, one),
        (four, three, one),
        (two, n2, n, one),
        (n_two, two, n, one),
        (n2_two, n_two, two, one),
        (three, two, n, one),
        (four, two, n, one),
        (two, n, sign, one),
        (three, two, sign, one),
        (four, three, two, one),
        (two, minus, one),
        (n_two, two, sign, one),
        (two, n3, n2, n, one),
        (n_two, two, n2, n, one),
        (n2_two, n_two, two, n, one),
        (times_power(three, 1), three, n, one),
        (three, n_two, two, n, one),
        (times_power(four, 1), four, two, one),
    ]
    return tuple(Form("exponential", terms, growth="exponential") for terms in sets)


@lru_cache(maxsize=1)
def shrinking_forms() -> tuple[Form, ...]:
    """Give the forms with terms that vanish exponentially, for means over all bit patterns."""
    one, n = monomial(0), monomial(1)
    half = shrinking(2)
    n_half = shrinking(2, n)
    third, quarter = shrinking(3), shrinking(4)
    sets: list[tuple[Term, ...]] = [
        (one, half),
        (n, one, half),
        (one, n_half, half),
        (n, one, n_half, half),
        (one, half, quarter),
        (n, one, half, quarter),
        (one, third),
        (n, one, third),
        (one, half, third),
        (n, one, half, third),
        (one, n_half, half, quarter),
        (n, one, n_half, half, quarter),
    ]
    return tuple(Form("exponential", terms, growth="shrinking") for terms in sets)


@lru_cache(maxsize=1)
def rational_forms() -> tuple[Form, ...]:
    """Give polynomials with terms 1/n, 1/n**2, 1/(n + 1) and 1/(n - 1)."""
    powers = {k: monomial(k) for k in range(-2, 4)}
    above = Term("", lambda n: Fraction(1, n + 1), under="({n} + 1)")
    above2 = Term("", lambda n: Fraction(1, n + 2), under="({n} + 2)")
    below = Term("", lambda n: Fraction(1, n - 1), under="({n} - 1)", least=2)
    sets: list[tuple[Term, ...]] = []
    for top in range(4):
        whole = tuple(powers[k] for k in range(top, -1, -1))
        sets += [(*whole, powers[-1]), (*whole, above), (*whole, below)]
        sets += [(*whole, powers[-1], powers[-2]), (*whole, powers[-1], above)]
        sets += [(*whole, below, powers[-1]), (*whole, above, above2)]
    return tuple(Form("rational", terms, growth="rational") for terms in sets)
