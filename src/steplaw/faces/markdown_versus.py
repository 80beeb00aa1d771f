"""A comparison as Markdown, short enough for a review comment."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.faces import reading_versus as reading
from steplaw.faces.markdown import code, escape, table


def comment(record: Mapping[str, Any]) -> str:
    """Give a comparison as a Markdown comment.

    Parameters
    ----------
    record : mapping
        A `steplaw.versus/1` record.

    Returns
    -------
    str
        Markdown; untrusted text is escaped so that it shows as it is and does nothing.
    """
    out = [f"**{escape(reading.verdict(record))}**", ""]
    rows = [
        [
            escape(reading.label(record, side)),
            escape(f"{record['subjects'][side]['file']}:{record['subjects'][side]['line']}"),
        ]
        for side in "ab"
    ]
    out += table(["", ""], [*rows, ["feed", escape(record["feed"]["text"])]])
    for figure, told in record["figures"].items():
        laws = [[escape(x), escape(y)] for x, y in reading.laws(record, told)]
        out += table([escape(figure), ""], laws)
        out += _stretches(record, told)
    if record["time"] is not None:
        out += ["By the clock:", "", *_stretches(record, record["time"], time=True)]
    out += [*(escape(note) + "  " for note in record["notes"]), ""]
    if record["run_again"]:
        out.append(f"Again: {code(record['run_again'])}")
    return "\n".join(out) + "\n"


def _stretches(record: Mapping[str, Any], told: Mapping[str, Any], time: bool = False) -> list[str]:
    rows = reading.stretches(record, told, time)
    cells = [[escape(cell) for cell in row] for row in rows]
    out = table(["sizes", "less", "known by"], cells) if rows else []
    texts = [*reading.overtakings(record, told), reading.no_further(record, told)]
    return [*out, *(f"- {escape(text)}" for text in texts), ""]
