"""What every face says of a comparison, in plain words and in the same order."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.faces.notation import pretty
from steplaw.faces.text import clean, number

Json = Mapping[str, Any]
MOST_ROWS = 12


def label(record: Json, side: str) -> str:
    """Name one of the two: A or B with the subject's name."""
    return f"{side.upper()} {clean(record['subjects'][side]['name'])}"


def verdict(record: Json) -> str:
    """Say in one line which has less, and from where on."""
    figure = next(iter(record["figures"]))
    told = record["figures"][figure]
    if not told["spans"]:
        return f"no crossing of the {clean(figure)} is claimed"
    last = told["spans"][-1]
    what = _of(figure)
    if last["less"] == "same":
        return f"both take the same number of {clean(figure)}"
    if last["less"] not in "ab":
        return f"neither stays below the other in {clean(figure)}"
    who = label(record, last["less"])
    if len(told["spans"]) == 1:
        return f"{who} takes {what} at every size{_up_to(last)} ({told['grade']})"
    name = record["sizes"]["searched"]
    reach = f"from {name} = {number(last['first'])} on"
    if last["last"] is not None and told["grade"] == "fitted":
        reach = f"from {name} = {number(last['first'])} to {number(last['last'])}"
    return f"{who} takes {what} {reach} ({told['grade']})"


def _of(figure: str) -> str:
    return "fewer steps" if figure == "steps" else f"less of {clean(figure)}"


def _up_to(span: Json) -> str:
    return "" if span["last"] is None else f" up to {number(span['last'])}"


def stretches(record: Json, told: Json, time: bool = False) -> list[list[str]]:
    """Give a row for each stretch of sizes: sizes, which is less, and how that is known."""
    name = record["sizes"]["searched"]
    rows = []
    for span in told["spans"][:MOST_ROWS]:
        first, last = span["first"], span["last"]
        sizes = f"{name} = {number(first)}"
        if last is None:
            sizes = f"{name} = {number(first)} on"
        elif last > first:
            sizes += f" to {number(last)}"
        known = "clock" if time else "counts" if span["counted"] else told["grade"]
        rows.append(
            [sizes, _less(record, span["less"]), "" if span["less"] == "unknown" else known]
        )
    if len(told["spans"]) > MOST_ROWS:
        more = len(told["spans"]) - MOST_ROWS
        rows.append([f"and {more} more in the record", "", ""])
    return rows


def _less(record: Json, less: str) -> str:
    return {
        "same": "both the same",
        "turns": "they take turns, size by size",
        "unknown": "not told apart",
    }.get(less) or label(record, less)


def overtakings(record: Json, told: Json) -> list[str]:
    """Say of each crossing where it lies."""
    name = record["sizes"]["searched"]
    out = []
    for crossing in told["crossings"][:MOST_ROWS]:
        who, other = (label(record, x) for x in (crossing["less"], _other(crossing["less"])))
        after, at = number(crossing["after"]), number(crossing["at"])
        if crossing["sharp"]:
            text = f"{who} overtakes {other} at {name} = {at}"
            if crossing["at"] - crossing["after"] > 1:
                text += f" (the same since {name} = {number(crossing['after'] + 1)})"
        else:
            text = f"{who} overtakes {other} between {name} = {after} and {at}"
        run = record["sizes"]["both_run_to"][name]
        if crossing["extrapolates"]:
            text += f"; this extrapolates: both were run to {name} = {number(run)}"
        out.append(text)
    more = len(told["crossings"]) - MOST_ROWS
    if more > 0:
        out.append(f"and {more} more in the record")
    return out


def _other(side: str) -> str:
    return "b" if side == "a" else "a"


def no_further(record: Json, told: Json) -> str:
    """Say how far no other crossing is."""
    if told["why"]:
        return clean(told["why"])
    name = record["sizes"]["searched"]
    if told["searched_to"] is None:
        text = f"no other crossing at any size: {told['method']}"
        if told.get("grade") != "proved":
            text += "; that the laws go on is not proved"
        return text
    return f"looked at up to {name} = {number(told['searched_to'])}: {told['method']}"


def laws(record: Json, told: Json, unicode: bool = True) -> list[tuple[str, str]]:
    """Give both laws and the ratio of their leading terms, as labelled texts."""
    rows = []
    for side in "ab":
        law = told["laws"][side]
        text = "open" if law["formula"] is None else pretty(law["formula"], unicode)
        rows.append((label(record, side), f"{text}   {law['grade']}"))
    found = told["ratio"]
    if found is not None and found["formula"] is not None:
        rows.append(("leading A/B", f"{pretty(found['formula'], unicode)}{_limit(found, unicode)}"))
    return rows


def _limit(found: Json, unicode: bool) -> str:
    limit = found["limit"]
    if limit in ("oo", "-oo"):
        return ", which grows without bound"
    if limit is None or str(limit) == found["formula"]:
        return ""
    return f", which tends to {pretty(str(limit), unicode)}"
