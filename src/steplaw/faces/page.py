"""The sheet as a page: one self-contained piece of HTML, for a file or a notebook."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from html import escape as html_escape
from importlib.resources import files
from typing import Any

from steplaw.faces import reading
from steplaw.faces.notation import terms
from steplaw.faces.text import clean, percent

Json = Mapping[str, Any]


def page(record: Json, whole: bool = True) -> str:
    """Give an audit as HTML.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    whole : bool
        A whole document; otherwise the part that a notebook puts in a cell.

    Returns
    -------
    str
        HTML that asks for nothing from anywhere; untrusted text is escaped.
    """
    parts = [
        _title(record),
        _verdict(record),
        _law(record),
        _values(record),
        _lines(record),
        _functions(record),
        _clock(record),
        _foot(record),
    ]
    body = f'<article class="steplaw">{"".join(parts)}</article>'
    if not whole:
        return f"<style>{_style()}</style>{body}"
    name = escape(record["subject"]["name"])
    return (
        '<!doctype html>\n<html lang="en"><head><meta charset="utf-8">'
        '<meta name="viewport" content="width=device-width, initial-scale=1">'
        f"<title>Step law of {name}</title><style>{_style()}"
        "@media (prefers-color-scheme:dark){body{background:#0f1618}}</style></head>"
        f"<body><main>{body}</main></body></html>\n"
    )


def escape(text: object) -> str:
    """Make untrusted text harmless in HTML, in an attribute too.

    Parameters
    ----------
    text : object
        A name, a source line, a message.

    Returns
    -------
    str
        Escaped text without control or bidi characters.
    """
    return html_escape(clean(text), quote=True)


def _style() -> str:
    return files("steplaw.faces").joinpath("page.css").read_text(encoding="utf-8")


def _title(record: Json) -> str:
    rows = dict(reading.title(record))
    subject = rows.pop("subject")
    cells = "".join(
        f"<div{' class=wide' if label in ('place', 'feed', 'sizes') else ''}>"
        f"<b>{label}</b>{escape(value)}</div>"
        for label, value in rows.items()
    )
    return f"<header><h1>{escape(subject)}</h1>{cells}</header>"


def _verdict(record: Json) -> str:
    clauses = []
    for clause in reading.verdict(record):
        loud = clause.isupper() or clause.startswith("TIME DEPARTS")
        clauses.append(f"<span{' class=bad' if loud else ''}>{escape(clause)}</span>")
    return f'<p class="verdict">{" · ".join(clauses)}</p>'


def _law(record: Json) -> str:
    figure = record["figure"]
    law = figure["law"]
    names = reading.size_names(record)
    formula = ""
    if law.get("formula") is not None:
        relation = "=" if law["grade"] in ("exact", "proved") else "~"
        pieces = " ".join(f"<span>{escape(term)}</span>" for term in terms(law["formula"]))
        formula = f'<p class="law">{escape(figure["name"])} {relation} {pieces}</p>'
    rows = reading.evidence(law, names) + [
        (label, f"{reading.law_text(other)} ({other['grade']})")
        for label, other in reading.named_laws(record)
    ]
    listed = "".join(f"<dt>{escape(label)}</dt><dd>{escape(value)}</dd>" for label, value in rows)
    return f"<h2>Law</h2>{formula}<dl>{listed}</dl>"


def _table(heads: Sequence[str], rows: Sequence[Sequence[str]], left: Sequence[int] = ()) -> str:
    """Give a table of cells that are HTML already; the columns in `left` hold text."""

    def row(tag: str, cells: Sequence[str], extra: str = "") -> str:
        made = "".join(
            f"<{tag}{extra}{'' if place in left else ' class=n'}>{cell}</{tag}>"
            for place, cell in enumerate(cells)
        )
        return made

    head = row("th", heads, " scope=col")
    body = "".join(
        f"<tr{' class=heavy' if cells[-1].startswith('<b>') else ''}>{row('td', cells)}</tr>"
        for cells in rows
    )
    return (
        f'<div class="scroll" tabindex="0"><table><thead><tr>{head}</tr></thead>'
        f"<tbody>{body}</tbody></table></div>"
    )


def _values(record: Json) -> str:
    rows = reading.value_rows(record)
    if not rows:
        return ""
    heads = [escape(", ".join(reading.size_names(record)) or "size"), "draws"]
    heads += [f"mean {escape(record['figure']['name'])}", "least to most", "doubling ratio"]
    return "<h2>Values</h2>" + _table(heads, [[escape(cell) for cell in row] for row in rows])


def _lines(record: Json) -> str:
    shown, left_out = reading.line_rows(record, 40)
    if not shown:
        return ""
    rows = []
    for line in shown:
        share = percent(line.get("share") or 0.0)
        rows.append(
            [
                str(line["line"]),
                f"<code>{escape(line.get('source') or '')}</code>",
                escape(reading.law_text(line.get("frequency"))),
                escape(reading.law_text(line.get("steps"))),
                f"<b>{share}</b>" if line.get("dominant") else share,
            ]
        )
    more = f"<small>and {left_out} lines with smaller shares</small>" if left_out else ""
    heads = ["line", "source", "frequency", "steps", "share"]
    return "<h2>Lines</h2>" + _table(heads, rows, left=(1, 2, 3)) + more


def _functions(record: Json) -> str:
    found = record.get("functions") or []
    if len(found) < 2:
        return ""
    rows = [
        [
            escape(row["name"]),
            f"{escape(row['file'])}:{row['line']}",
            escape(reading.law_text(row.get("calls"))),
            escape(reading.law_text(row.get("steps"))),
            percent(row.get("share") or 0.0),
        ]
        for row in found
    ]
    heads = ["function", "place", "calls", "own steps", "share"]
    return "<h2>Functions</h2>" + _table(heads, rows, left=(0, 1, 2, 3))


def _clock(record: Json) -> str:
    clock = record.get("clock")
    if not clock:
        return ""
    hidden = reading.hidden_cost(record)
    rows = [[escape(cell) for cell in row] for row in reading.clock_rows(record)]
    names = escape(", ".join(reading.size_names(record)) or "size")
    heads = [names, "steps", "time", "ns a step", "steps grow", "time grows"]
    return (
        f"<h2>Clock check</h2><p>{escape(clock['reason'])}</p>"
        + (_table(heads, rows) if rows else "")
        + (f"<small>{escape(clock['machine'])}</small>" if clock.get("machine") else "")
        + (f"<p>{escape(hidden)}</p>" if hidden else "")
    )


def _foot(record: Json) -> str:
    out = ""
    stopped, repeatable = record.get("stopped"), record.get("repeatable")
    if stopped:
        out += f"<h2>Stopped early</h2><p>{escape(stopped['message'])}</p>"
    if repeatable and not repeatable["holds"]:
        items = "".join(
            f"<li>{escape(line['file'])}:{line['line']}: "
            f"{escape(', '.join(str(count) for count in line['counts']))}</li>"
            for line in repeatable["lines"]
        )
        out += f"<h2>Counts differ from run to run</h2><ul>{items}</ul>"
    notes = "".join(f"<p><small>{escape(note)}</small></p>" for note in record.get("notes") or [])
    out += f"<h2>Notes</h2>{notes}" if notes else ""
    return out + f'<p class="again">Again: <code>{escape(record["run_again"])}</code></p>'
