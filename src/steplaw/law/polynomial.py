"""Polynomials over the rationals."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import lru_cache

from steplaw.law.terms import Form, Term, power


@lru_cache(maxsize=64)
def monomial(exponent: int) -> Term:
    """Give the term n to the power of a whole number, which may be negative.

    Parameters
    ----------
    exponent : int
        The power.

    Returns
    -------
    Term
        Defined from size 1 on where the power is negative.
    """
    if exponent < 0:
        return Term("", _reciprocal(-exponent), under=power(-exponent), least=1)
    return Term(power(exponent), _whole_power(exponent))


def _whole_power(exponent: int) -> Callable[[int], int]:
    return lambda n: n**exponent


def _reciprocal(exponent: int) -> Callable[[int], Fraction]:
    return lambda n: Fraction(1, n**exponent)


def polynomial_terms(degree: int) -> tuple[Term, ...]:
    """Give the powers from `degree` down to 0."""
    return tuple(monomial(k) for k in range(degree, -1, -1))


@lru_cache(maxsize=64)
def polynomial(degree: int) -> Form:
    """Give the form of a polynomial.

    Parameters
    ----------
    degree : int
        Largest power.

    Returns
    -------
    Form
        With ``degree + 1`` free coefficients.
    """
    return Form("polynomial", polynomial_terms(degree))


def polynomials(largest: int) -> list[Form]:
    """Give the forms of all polynomials up to a degree, lowest first."""
    return [polynomial(degree) for degree in range(largest + 1)]
