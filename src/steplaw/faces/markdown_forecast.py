"""A forecast as Markdown, short enough for a review comment."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.faces import reading_forecast as reading
from steplaw.faces.markdown import code, escape, table
from steplaw.faces.text import clean


def comment(record: Mapping[str, Any]) -> str:
    """Give a forecast as a Markdown comment.

    Parameters
    ----------
    record : mapping
        A `steplaw.forecast/1` record.

    Returns
    -------
    str
        Markdown; untrusted text is escaped so that it shows as it is and does nothing.
    """
    subject = record["subject"]
    place = f"{clean(subject['file'])}:{subject['line']}"
    out = [f"**{escape(subject['name'])}** ({escape(place)}), forecast", ""]
    rows = [[escape(label), escape(text)] for label, text in reading.laws(record)]
    rows += [[label, escape(text)] for label, text in reading.clock(record)]
    rows.append(["run up to", escape(reading.size(record["sizes"]["largest"]))])
    out += table(["", ""], rows)
    if record["at"]:
        heads, cells = reading.table(record)
        out += table([escape(h) for h in heads], [[escape(c) for c in row] for row in cells])
        out += [f"- {escape(reason)}" for reason in reading.reasons(record)]
        out.append("")
    for entry in record["within"]:
        held = f", {reading.size(entry['held'])}" if entry["held"] else ""
        fits = "; ".join(f"{label} {text}" for label, text in reading.fits(entry))
        out += [f"Within {escape(entry['limit'])}{escape(held)}: {escape(fits)}", ""]
    out += [*(escape(note) + "  " for note in record["notes"]), ""]
    out.append(f"Again: {code(record['run_again'])}")
    return "\n".join(out) + "\n"
