"""Max and Min of series, settled by growth."""

from __future__ import annotations

from collections.abc import Sequence

from steplaw.law.growth import Series, dominates, growth_of, numeric


def settle_extreme(name: str, parts: Sequence[Series]) -> Series | None:
    """Give the part that is the largest (Max) or smallest (Min) in the long run.

    Parameters
    ----------
    name : {"Max", "Min"}
        Which one.
    parts : sequence of Series
        The arguments.

    Returns
    -------
    Series or None
        None where no part wins at every way of growing.
    """
    want = 1 if name == "Max" else -1
    best = parts[0]
    for part in parts[1:]:
        sign = _compare(best, part)
        if sign is None:
            return None
        if sign * want < 0:
            best = part
    return best


def _compare(a: Series, b: Series) -> int | None:
    """Give the sign of a - b in the long run; None where it is not settled."""
    gap = a + b.scaled(-1)
    if not gap.terms:
        return 0 if not gap.errors else None
    first = gap.leading()
    signs = set()
    for key, c in first.terms.items():
        number = numeric(c, key)
        if number is None or any(
            a.growth and "(" in a.text and "log" not in a.text for a, _ in key
        ):
            return None
        signs.add(1 if number > 0 else -1)
    others = [k for k in gap.terms if k not in first.terms]
    if len(signs) != 1 or any(
        not any(dominates(growth_of(k), growth_of(o)) for k in first.terms) for o in others
    ):
        return None
    return signs.pop()
