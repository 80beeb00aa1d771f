"""Which exact forms are worth trying, fewest coefficients first."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from functools import lru_cache

from steplaw.law.polynomial import polynomials
from steplaw.law.quasi import quasi_polynomials
from steplaw.law.terms import Form


def forms_for(
    sizes: tuple[int, ...], values: Sequence[Fraction], exhaustive: bool = False
) -> list[Form]:
    """Give the exact forms to try on these values.

    Parameters
    ----------
    sizes : tuple of int
        In increasing order.
    values : sequence of Fraction
        Values at these sizes.
    exhaustive : bool
        Whether wider mixtures are wanted.

    Returns
    -------
    list of Form
        Fewest coefficients first.
    """
    return _forms(len(sizes))


@lru_cache(maxsize=64)
def _forms(count: int) -> list[Form]:
    most = 2 * count // 3
    forms = [*polynomials(min(10, most)), *quasi_polynomials(most)]
    return sorted(forms, key=lambda form: len(form.terms))
