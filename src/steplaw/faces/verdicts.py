"""Verdicts on studies in plain words."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.faces.notation import pretty
from steplaw.faces.text import number, size

Json = Mapping[str, Any]


def law_in_words(law: Json, unicode: bool = True) -> str:
    """Give a law with its grade.

    Parameters
    ----------
    law : mapping
        A LAW of a record.
    unicode : bool
        As for `pretty`.
    """
    if law.get("formula") is None:
        return "no law claimed (open)"
    if law["grade"] == "fitted":
        return f"~ {pretty(law.get('leading') or law['formula'], unicode)} (fitted)"
    return f"{pretty(law['formula'], unicode)} ({law['grade']})"


def change_in_words(change: Json, unicode: bool = True) -> list[str]:
    """Give a change of one figure: the two laws, and what tells them apart.

    Parameters
    ----------
    change : mapping
        One of a verdict's ``changes``.
    unicode : bool
        As for `pretty`.
    """
    before, after = (law_in_words(change[k], unicode) for k in ("before", "after"))
    if before == after:
        out = [f"{change['figure']} {after}"]
    else:
        out = [f"{change['figure']} was {before}", f"{change['figure']} is {after}"]
    if change["kind"] != "same law" or "tolerance" in change["why"]:
        out.append(f"told by: {change['why']}")
    counted = change["counted"]
    if counted is not None and counted["before"] != counted["after"]:
        out.append(
            f"at {size(counted['at'])}: {number(counted['before'])} before, "
            f"{number(counted['after'])} now"
        )
    return out
