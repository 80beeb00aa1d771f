"""Which line carries the cost as the size grows: shares in the limit, and from which size on."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

from steplaw.law import ratio_limit
from steplaw.law.model import Law, Observation

#: File and line.
Place = tuple[str, int]


def share_limit(part: Law, whole: Law) -> str | int | float | None:
    """Give the share of a part as the size grows without bound.

    Parameters
    ----------
    part, whole : Law
        Laws of the steps of a line and of all steps, in one size.

    Returns
    -------
    str, int, float or None
        An exact share as a text of a fraction, 0 or 1; a number where a law is fitted; None where
        a law is open or the share has no limit.
    """
    if part.formula is None or whole.formula is None or len(whole.names) > 1:
        return None
    limit = ratio_limit(part, whole)
    if limit is None or not math.isfinite(limit):
        return None
    if isinstance(limit, Fraction) and part.grade != "fitted" and whole.grade != "fitted":
        return limit.numerator if limit.denominator == 1 else str(limit)
    share = round(float(limit), 4)
    return share if 0 <= share <= 1.0001 else None


def dominance(
    limits: Mapping[Place, Any], steps: Mapping[Place, Sequence[Observation]]
) -> dict[str, Any] | None:
    """Give the line with the greatest share in the limit.

    Parameters
    ----------
    limits : mapping
        What `share_limit` gives, by line.
    steps : mapping
        Steps of every line, by size.

    Returns
    -------
    dict or None
        ``file``, ``line``, ``share`` in the limit, and ``from``: the smallest size run from which
        on no other line has more steps, None where that is beyond the sizes run. None for all
        where one line's share is not known, or two share the lead.
    """
    if not limits or any(limit is None for limit in limits.values()):
        return None
    ranked = sorted(limits, key=lambda place: -_number(limits[place]))
    first = ranked[0]
    if len(ranked) > 1 and _number(limits[ranked[1]]) == _number(limits[first]):
        return None
    start = None
    for k in range(len(steps[first]) - 1, -1, -1):
        at = steps[first][k].at
        most = max((_at(values, at) for values in steps.values()), default=Fraction(0))
        if steps[first][k].value < most:
            break
        start = at[0]
    return {"file": first[0], "line": first[1], "share": limits[first], "from": start}


def _number(limit: Any) -> float:
    return float(Fraction(limit)) if isinstance(limit, str) else float(limit)


def _at(values: Sequence[Observation], at: tuple[int, ...]) -> Fraction:
    return next((o.value for o in values if o.at == at), Fraction(0))
