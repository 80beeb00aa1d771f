"""Mixtures: two terms of different families beside a short polynomial."""

from __future__ import annotations

from functools import lru_cache
from itertools import combinations

from steplaw.law.dyadic import branching, dyadic_log
from steplaw.law.factorials import ARRANGEMENTS, CATALAN, CENTRAL, FACTORIAL
from steplaw.law.harmonic import H1, H2
from steplaw.law.logs import floor_log, log_term, power_term, root_term
from steplaw.law.polynomial import monomial
from steplaw.law.powers import exponential
from steplaw.law.quasi import floor_term
from steplaw.law.recurrence import fibonacci_terms
from steplaw.law.terms import Form, Term, over, times_power


@lru_cache(maxsize=64)
def mixtures(kinds: frozenset[str]) -> tuple[Form, ...]:
    """Give the mixtures of any two terms beside 1, n and n**2.

    Parameters
    ----------
    kinds : frozenset of str
        The kinds of family that are worth trying on the values.

    Returns
    -------
    tuple of Form
        With two to five coefficients each.
    """
    one, n, n2 = monomial(0), monomial(1), monomial(2)
    forms = []
    for a, b in combinations(_pool(kinds), 2):
        levels = _binary_levels if "log(" in a.text + b.text else None
        for rest in ((one,), (n, one), (n2, n, one)):
            forms.append(Form("mixture", (a, b, *rest), levels=levels))
    return tuple(forms)


def _binary_levels(n: int) -> int:
    return floor_log(n, 2) if n > 0 else -1


def _pool(kinds: frozenset[str]) -> list[Term]:
    pool: list[Term] = []
    if "dyadic" in kinds:
        pool += [dyadic_log(a, b) for a in (0, 1, 2) for b in (1, 2)]
        pool += [branching(parts) for parts in (3, 5, 6, 7)]
    else:
        pool += [floor_term(period) for period in (2, 3, 4, 5)]
        pool += [times_power(floor_term(2), 1), root_term("floor")]
        pool.append(times_power(root_term("floor"), 1))
        for rounding in ("floor", "ceiling"):
            log = log_term(rounding, 2)
            pool += [log, times_power(log, 1), log_term(rounding, 2, 2)]
            pool += [power_term(rounding, 2, 2), power_term(rounding, 2, 4)]
        pool += [log_term("floor", 3), log_term("floor", 10)]
    if "harmonic" in kinds:
        pool += [H1, H2, times_power(H1, 1), times_power(H2, 1), times_power(H2, 2), over(H1, 1)]
    if "rational" in kinds:
        pool += [monomial(-1), monomial(-2)]
    if "exponential" in kinds:
        pool += [exponential(base) for base in (2, 3, 4, -1, -2)]
        pool += [times_power(exponential(2), 1), FACTORIAL, times_power(FACTORIAL, 1)]
        pool += [ARRANGEMENTS, CENTRAL, CATALAN, *fibonacci_terms()]
    return pool
