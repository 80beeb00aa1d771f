"""Which exact forms are worth trying, fewest coefficients first."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from functools import lru_cache

from steplaw.law.dyadic import dyadic_forms
from steplaw.law.exactmath import bits
from steplaw.law.factorials import factorial_forms, factorial_mean_forms
from steplaw.law.harmonic import harmonic_forms
from steplaw.law.logs import log_forms, root_forms
from steplaw.law.mixture import mixtures
from steplaw.law.polynomial import polynomials
from steplaw.law.powers import power_forms, rational_forms, shrinking_forms
from steplaw.law.quasi import quasi_polynomials
from steplaw.law.terms import Form

MOST_EXPONENTIAL = 80
MOST_HARMONIC = 400
MOST_PERIODIC = 20


def forms_for(
    sizes: tuple[int, ...], values: Sequence[Fraction], exhaustive: bool = False
) -> tuple[Form, ...]:
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
    tuple of Form
        Fewest coefficients first.
    """
    largest = sizes[-1]
    parts = any(v.denominator != 1 for v in values)
    steep = 0 < largest <= MOST_EXPONENTIAL and max(map(bits, values)) >= 0.4 * largest - 6
    dyadic = all(n > 0 and n & (n - 1) == 0 for n in sizes)
    kinds = frozenset(
        kind
        for kind, wanted in (
            ("rational", parts),
            ("harmonic", parts and largest <= MOST_HARMONIC),
            ("shrinking", parts and largest <= MOST_EXPONENTIAL),
            ("exponential", steep),
            ("dyadic", dyadic),
            ("mixture", exhaustive),
        )
        if wanted
    )
    return _forms(len(sizes), kinds)


@lru_cache(maxsize=256)
def _forms(count: int, kinds: frozenset[str]) -> tuple[Form, ...]:
    most = 2 * count // 3
    forms = [*polynomials(min(10, most))]
    if "dyadic" in kinds:
        forms += dyadic_forms()
    else:
        forms += [*log_forms(), *root_forms(), *quasi_polynomials(min(most, MOST_PERIODIC))]
    if "rational" in kinds:
        forms += rational_forms()
    if "harmonic" in kinds:
        forms += harmonic_forms()
    if "shrinking" in kinds:
        forms += [*shrinking_forms(), *factorial_mean_forms()]
    if "exponential" in kinds:
        forms += [*power_forms(), *factorial_forms()]
    if "mixture" in kinds:
        forms += mixtures(kinds)
    return tuple(sorted(forms, key=lambda form: len(form.terms)))
