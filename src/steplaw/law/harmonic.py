"""Harmonic sums: the exact means of many methods over all inputs of a size."""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache

from steplaw.law.polynomial import monomial
from steplaw.law.special import harmonic
from steplaw.law.terms import Form, Term, over, times_power


def _exact(n: int, order: int) -> Fraction:
    number = harmonic(n, order)
    if not isinstance(number, Fraction):
        raise OverflowError(n)
    return number


H1 = Term("harmonic({n})", lambda n: _exact(n, 1))
H2 = Term("harmonic({n}, 2)", lambda n: _exact(n, 2))
H1_SQUARED = Term("harmonic({n})**2", lambda n: _exact(n, 1) ** 2)
SHIFTED = Term("({n} + 1)*harmonic({n})", lambda n: (n + 1) * _exact(n, 1))
SHIFTED_H2 = Term("({n} + 1)**2*harmonic({n}, 2)", lambda n: (n + 1) ** 2 * _exact(n, 2))


@lru_cache(maxsize=1)
def harmonic_forms() -> tuple[Form, ...]:
    """Give the forms with harmonic numbers, for values that are not all whole."""
    one, n, n2 = monomial(0), monomial(1), monomial(2)
    nh, n2h, h_n = times_power(H1, 1), times_power(H1, 2), over(H1, 1)
    inverse = monomial(-1)
    sets: list[tuple[Term, ...]] = [
        (H1,),
        (H1, one),
        (H2, one),
        (nh, n),
        (SHIFTED, n),
        (H1, H2, one),
        (SHIFTED, n, one),
        (n, H1, one),
        (n, H2, one),
        (nh, n, one),
        (n, H1, H2, one),
        (nh, n, H1, one),
        (n2, n, H1, one),
        (n2, n, H2, one),
        (nh, n, H2, one),
        (n2, nh, n, H1, one),
        (n2, n, H1, H2, one),
        (n2h, n2, n, one),
        (n2h, n2, nh, n, H1, one),
        (H1_SQUARED, H1, H2, one),
        (H1_SQUARED, H2, H1),
        (n, H1_SQUARED, H1, H2, one),
        (nh, n, H1_SQUARED, H2, H1, one),
        (n2, SHIFTED_H2, SHIFTED, n),
        (n2, SHIFTED_H2, SHIFTED, n, one),
        (n2, times_power(H2, 2), times_power(H2, 1), H2, nh, n, H1, one),
        (H1, one, inverse),
        (H1, one, h_n),
        (H1, h_n, inverse),
        (H1, one, h_n, inverse),
        (n, H1, one, inverse),
        (n, H1, one, h_n),
        (n, H1, one, h_n, inverse),
        (nh, n, H1, one, inverse),
        (nh, n, H1, one, h_n, inverse),
    ]
    return tuple(Form("harmonic", terms, growth="harmonic") for terms in sets)
