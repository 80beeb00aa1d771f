"""Factorials, arrangements, binomial coefficients and Catalan numbers."""

from __future__ import annotations

from functools import lru_cache
from math import comb, factorial

from steplaw.law.polynomial import monomial
from steplaw.law.powers import exponential
from steplaw.law.special import arrangements, catalan, subfactorial
from steplaw.law.terms import Form, Term, divided, times_power

FACTORIAL = Term("factorial({n})", factorial)
ARRANGEMENTS = Term("floor(E*factorial({n}))", arrangements, least=1)
DERANGEMENTS = Term("subfactorial({n})", subfactorial)
CENTRAL = Term("binomial(2*{n}, {n})", lambda n: comb(2 * n, n))
MIDDLE = Term("binomial({n}, floor({n}/2))", lambda n: comb(n, n // 2))
CATALAN = Term("catalan({n})", catalan)


@lru_cache(maxsize=1)
def factorial_forms() -> tuple[Form, ...]:
    """Give the forms with factorials and central binomial coefficients."""
    one, n, n2 = monomial(0), monomial(1), monomial(2)
    nf, n2f = times_power(FACTORIAL, 1), times_power(FACTORIAL, 2)
    two, four = exponential(2), exponential(4)
    sets: list[tuple[Term, ...]] = [
        (FACTORIAL,),
        (FACTORIAL, one),
        (nf, one),
        (nf, FACTORIAL),
        (ARRANGEMENTS, one),
        (DERANGEMENTS, one),
        (FACTORIAL, n, one),
        (nf, FACTORIAL, one),
        (ARRANGEMENTS, FACTORIAL, one),
        (DERANGEMENTS, FACTORIAL, one),
        (nf, FACTORIAL, n, one),
        (FACTORIAL, n2, n, one),
        (FACTORIAL, two, one),
        (ARRANGEMENTS, FACTORIAL, n, one),
        (nf, ARRANGEMENTS, FACTORIAL, one),
        (n2f, nf, FACTORIAL, one),
        (nf, ARRANGEMENTS, FACTORIAL, n, one),
        (times_power(ARRANGEMENTS, 1), ARRANGEMENTS, nf, FACTORIAL, one),
        (CENTRAL,),
        (CENTRAL, one),
        (CATALAN, one),
        (CENTRAL, CATALAN, one),
        (CENTRAL, n, one),
        (CENTRAL, CATALAN, n, one),
        (times_power(CENTRAL, 1), CENTRAL, one),
        (four, CENTRAL, one),
        (times_power(CENTRAL, 1), four, CENTRAL, one),
        (MIDDLE, one),
        (two, MIDDLE, one),
        (times_power(MIDDLE, 1), MIDDLE, one),
        (times_power(MIDDLE, 1), two, MIDDLE, one),
    ]
    return tuple(Form("factorial", terms, growth="exponential") for terms in sets)


@lru_cache(maxsize=1)
def factorial_mean_forms() -> tuple[Form, ...]:
    """Give the forms with terms over n factorial, for means over all orders."""
    one, n = monomial(0), monomial(1)
    inverse = divided(one, FACTORIAL)
    sums = divided(ARRANGEMENTS, FACTORIAL)
    sets: list[tuple[Term, ...]] = [
        (one, inverse),
        (sums, one),
        (sums, one, inverse),
        (n, one, inverse),
        (n, sums, one, inverse),
        (one, divided(n, FACTORIAL), inverse),
        (sums, one, divided(n, FACTORIAL), inverse),
    ]
    return tuple(Form("factorial", terms, growth="shrinking") for terms in sets)
