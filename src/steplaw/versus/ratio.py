"""The ratio of two leading terms, and what it tends to."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

Json = Mapping[str, Any]


def ratio(a: Json, b: Json, names: Sequence[str]) -> dict[str, Any] | None:
    """Give the ratio of the leading terms of two laws.

    Parameters
    ----------
    a, b : mapping
        Two LAWs of a record.
    names : sequence of str
        The size names.

    Returns
    -------
    dict or None
        ``formula``, and ``limit`` as all sizes grow: a number, a fraction as text, ``"oo"`` where
        the first outgrows the second, null where there is none. None where a law is open.
    """
    if a["leading"] is None or b["leading"] is None:
        return None
    import sympy

    from steplaw.law import Law, ratio_limit

    symbols = {k: sympy.Symbol(k, positive=True) for k in names}
    one, other = (sympy.sympify(x["leading"], locals=symbols) for x in (a, b))
    formula = None if other == 0 else str(sympy.expand(one / other))
    laws = [Law(x["formula"], x["leading"], x["grade"], names=tuple(names)) for x in (a, b)]
    return {"formula": formula, "limit": _written(ratio_limit(*laws))}


def _written(limit: Fraction | float | None) -> int | float | str | None:
    if isinstance(limit, Fraction):
        return limit.numerator if limit.denominator == 1 else str(limit)
    if limit is None or math.isnan(limit):
        return None
    if math.isinf(limit):
        return "oo" if limit > 0 else "-oo"
    return float(f"{limit:.6g}")
