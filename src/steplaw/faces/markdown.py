"""The verdict as Markdown, short enough for a review comment."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

from steplaw.faces import dominance, reading
from steplaw.faces.text import clean, percent, sizes

LINES_MOST = 6
# All of ASCII punctuation may be escaped by a backslash (CommonMark 0.31, 2.4).
SPECIAL = re.compile(r"([!-/:-@\[-`{-~])")
HARMLESS = re.compile(r"(?<!\\)\\([/:,;%=])")


def comment(record: Mapping[str, Any]) -> str:
    """Give an audit as a Markdown comment.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    str
        Markdown; untrusted text is escaped so that it shows as it is and does nothing.
    """
    subject, law = record["subject"], record["figure"]["law"]
    names = reading.size_names(record)
    place = f"{clean(subject['file'])}:{subject['line']}"
    out = [
        f"**{escape(subject['name'])}** ({escape(place)})",
        "",
        " · ".join(escape(clause) for clause in reading.verdict(record)),
        "",
    ]
    rows = []
    if law.get("formula") is not None:
        rows.append(["law", escape(reading.law_text(law))])
    rows += [[label, escape(value)] for label, value in reading.evidence(law, names)]
    rows += [
        [label, f"{escape(reading.law_text(other))} ({escape(other['grade'])})"]
        for label, other in reading.named_laws(record)
    ]
    rows += [[label, escape(value)] for label, value in dominance.told(record)]
    if record.get("clock"):
        rows.append(["clock", escape(record["clock"]["reason"])])
    plan = (record.get("sizes") or {}).get("plan") or []
    rows.append(["sizes", escape(sizes(plan, names))])
    out += table(["", ""], rows)
    out += _lines(record)
    out += _ledger(record)
    out += _faults(record)
    return "\n".join(out).rstrip() + "\n"


def escape(text: object) -> str:
    """Make untrusted text show as it is inside Markdown, and in a table's cell.

    Parameters
    ----------
    text : object
        A name, a source line, a message.

    Returns
    -------
    str
        One line without active Markdown, HTML, mentions or links.
    """
    flat = SPECIAL.sub(r"\\\1", clean(text))
    # Mentions, issue numbers and bare addresses are linked even where the character is escaped.
    flat = flat.replace("\\<", "&lt;").replace("\\&", "&amp;").replace("\\@", "&#64;\u2060")
    flat = flat.replace("\\#", "&#35;\u2060").replace("\\:\\/\\/", ":\u2060//")
    # These mean nothing inside a line, and formulas are easier to read without a backslash.
    return HARMLESS.sub(r"\1", flat).replace("www", "w\u2060ww")


def code(text: object, cell: bool = False) -> str:
    """Give untrusted text as a code span that it cannot end.

    Parameters
    ----------
    text : object
        A source line.
    cell : bool
        Whether it stands in a table, where a bar must be escaped even in a code span.

    Returns
    -------
    str
        A code span.
    """
    flat = clean(text).strip() or " "
    longest = max((len(run) for run in re.findall("`+", flat)), default=0)
    fence = "`" * (longest + 1)
    pad = " " if longest else ""
    span = f"{fence}{pad}{flat}{pad}{fence}"
    return span.replace("|", "\\|") if cell else span


def table(heads: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Give the lines of a table; the cells are Markdown already."""
    lines = [heads, ["---"] * len(heads), *rows]
    return ["| " + " | ".join(cells) + " |" for cells in lines] + [""]


def _lines(record: Mapping[str, Any]) -> list[str]:
    shown, _ = reading.line_rows(record, LINES_MOST)
    if not shown:
        return []
    rows = []
    for line in shown:
        share = percent(line.get("share") or 0.0)
        rows.append(
            [
                str(line["line"]),
                code(line.get("source") or "", cell=True),
                escape(reading.law_text(line.get("frequency"))),
                f"**{share}**" if line.get("dominant") else share,
            ]
        )
    return table(["line", "source", "frequency", "share of steps"], rows)


def _ledger(record: Mapping[str, Any]) -> list[str]:
    rows = reading.ledger_rows(record)[:LINES_MOST]
    if not rows:
        return []
    heads = ["line", "in C", "times", "element visits", "charged", "share of all work"]
    return table(heads, [[escape(cell) for cell in row] for row in rows])


def _faults(record: Mapping[str, Any]) -> list[str]:
    out = []
    stopped, repeatable = record.get("stopped"), record.get("repeatable")
    if stopped:
        out += [f"Stopped early: {escape(stopped['message'])}", ""]
    if repeatable and not repeatable["holds"]:
        places = [f"{line['file']}:{line['line']}" for line in repeatable["lines"][:LINES_MOST]]
        out += [f"Counts differ from run to run at {escape(', '.join(places))}", ""]
    hidden = reading.hidden_cost(record)
    if hidden:
        out += [escape(hidden), ""]
    out.append(f"Again: {code(record['run_again'])}")
    return out
