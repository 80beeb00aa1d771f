"""What the page shows of a finished record, as plain values for its template."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

from steplaw.faces import along as ways
from steplaw.faces import evidence, reading
from steplaw.faces.along import Along
from steplaw.faces.chart import growth_chart, layers, shares_chart
from steplaw.faces.dominance import bands, line_shares, term_shares
from steplaw.faces.growth import growth
from steplaw.faces.live import live
from steplaw.faces.notation import pretty, terms
from steplaw.faces.text import clean, grouped, percent, size

Json = Mapping[str, Any]


def view(record: Json) -> dict[str, Any]:
    """Give the parts of the page.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    dict
        A value for each part; texts are harmless but not yet escaped, drawings are markup.
    """
    found = ways.ways(record)
    return {
        "title": reading.title(record),
        "doc": clean(record["subject"].get("doc") or ""),
        "verdict": [(clause, reading.is_loud(clause)) for clause in reading.verdict(record)],
        "names": ", ".join(clean(name) for name in reading.size_names(record)) or "size",
        "law": _law(record),
        "growth": _growth(record, found),
        "terms": _shares(record, found, "terms"),
        "by_line": _shares(record, found, "lines"),
        "in_the_limit": clean(reading.dominance(record)),
        "no_law_lines": line_shares(record, found[0])[1] if found else [],
        "lines": _lines(record),
        "files": sorted({clean(line["file"]) for line in record.get("lines") or []}),
        "functions": _functions(record),
        "operations": _operations(record),
        "native": _native(record),
        "clock": _clock(record),
        "evidence": evidence.rows(record),
        "drawn": any(value["draws"] > 1 for value in record["figure"].get("values") or []),
        "stopped": _stopped(record),
        "unsteady": _unsteady(record),
        "notes": [clean(note) for note in record.get("notes") or []],
        "again": clean(record["run_again"]),
        "live": live(record),
    }


def _law(record: Json) -> dict[str, Any]:
    figure = record["figure"]
    law = figure["law"]
    claimed = law.get("formula") is not None
    sure = law["grade"] in ("exact", "proved")
    return {
        "name": clean(figure["name"]),
        "grade": law["grade"],
        "relation": "=" if sure else "~",
        "terms": terms(law["formula"]) if claimed else [],
        "leading": pretty(law["leading"]) if law.get("leading") else "",
        "evidence": reading.evidence(law, reading.size_names(record)),
        "others": [
            (label, reading.law_text(other), other["grade"])
            for label, other in reading.named_laws(record)
        ],
    }


def _growth(record: Json, found: Sequence[Along]) -> list[dict[str, Any]]:
    out = []
    for place, along in enumerate(found):
        points = growth(record, along)
        if points is not None:
            out.append(
                {
                    "svg": growth_chart(points, place),
                    "says": points.says,
                    "where": clean(along.where),
                    "beyond": len(points.beyond) > 1,
                    "timed": bool(points.time),
                }
            )
    return out


def _shares(record: Json, found: Sequence[Along], what: str) -> list[dict[str, Any]]:
    out = []
    for place, along in enumerate(found):
        shares = term_shares(record, along) if what == "terms" else line_shares(record, along)[0]
        if shares is not None:
            out.append(
                {
                    "svg": shares_chart(shares, place, what),
                    "bands": bands(shares),
                    "key": [(clean(label), colour) for label, _, colour in layers(shares)],
                    "where": clean(along.where),
                    "labels": shares.labels,
                    "looked": grouped(shares.sizes[-1]),
                    "name": clean(along.name),
                }
            )
    return out


def _lines(record: Json) -> list[dict[str, Any]]:
    sources = outdented([clean(line.get("source") or "") for line in record.get("lines") or []])
    return [
        {
            "place": place,
            "file": clean(line["file"]),
            "line": line["line"],
            "source": sources[place],
            "frequency": kept_whole(reading.law_text(line.get("frequency"))),
            "steps": kept_whole(reading.law_text(line.get("steps"))),
            "grade": (line.get("steps") or {}).get("grade", ""),
            "share": percent(line.get("share") or 0.0),
            "limit": ""
            if line.get("share_limit") is None
            else percent(reading.share_number(line["share_limit"])),
            "width": round(100 * (line.get("share") or 0.0), 1),
            "heavy": bool(line.get("dominant")),
        }
        for place, line in enumerate(record.get("lines") or [])
    ]


def kept_whole(formula: str) -> str:
    """Let a formula be broken over lines between its terms alone."""
    return re.sub(r"(?<![+−]) (?![+−])", "\u00a0", formula)


def outdented(sources: Sequence[str]) -> list[str]:
    """Take the indentation that all lines share off each of them.

    Parameters
    ----------
    sources : sequence of str
        Source lines.

    Returns
    -------
    list of str
        The same lines, further to the left.
    """
    least = min((len(s) - len(s.lstrip()) for s in sources if s.strip()), default=0)
    return [source[least:] for source in sources]


def _functions(record: Json) -> list[dict[str, Any]]:
    rows = record.get("functions") or []
    return [
        {
            "name": clean(row["name"]),
            "own": bool(row.get("own")),
            "place": f"{clean(row['file']).rsplit('/', 1)[-1]}:{row['line']}",
            "calls": reading.law_text(row.get("calls")),
            "steps": reading.law_text(row.get("steps")),
            "share": percent(row.get("share") or 0.0),
        }
        for row in (rows if len(rows) > 1 else [])
    ]


def _operations(record: Json) -> dict[str, Any] | None:
    tallies = record.get("tallies") or []
    if not tallies:
        return None
    last = tallies[-1]
    laws = record["laws"].get("operations") or {}
    counts = sorted(last["operations"].items(), key=lambda item: -item[1])
    rows = [
        (
            clean(name).replace("_", " "),
            grouped(count),
            percent(count / last["steps"]) if last["steps"] else "-",
            reading.law_text(laws.get(name)),
        )
        for name, count in counts
        if count
    ]
    return {"at": size(last["at"]), "rows": rows} if rows else None


def _native(record: Json) -> dict[str, Any]:
    laws, ledger = record["laws"], record.get("ledger")
    native, work = laws.get("native"), laws.get("work")
    if not native and not ledger:
        return {"counted": False, "out": "not counted"}
    visits = reading.law_text(native)
    return {
        "counted": True,
        "out": "no visits" if visits == "0" else (native or {}).get("grade", ""),
        "law": visits,
        "work": reading.law_text(work) if work else "",
        "work_grade": work["grade"] if work else "",
        "at": size(ledger["at"]) if ledger else "",
        "rows": reading.ledger_rows(record),
        "not_charged": reading.not_charged(record),
    }


def _clock(record: Json) -> dict[str, Any] | None:
    clock = record.get("clock")
    if not clock:
        return None
    between = clock.get("ns_per_step_interval")
    return {
        "word": {True: "agrees", False: "departs"}.get(clock["agrees"], "cannot tell"),
        "agrees": clock["agrees"],
        "reason": clean(clock["reason"]),
        "unit": "whole" if clock.get("held") == "work" else "steps",
        "alone": clean((clock.get("steps_alone") or {}).get("reason") or ""),
        "visit_rate": clean(clock.get("visit_rate") or ""),
        "rows": reading.clock_rows(record),
        "rate": f"{between[0]:.3g} to {between[1]:.3g} ns a step" if between else "",
        "machine": clean(clock.get("machine") or ""),
        "rounds": clock.get("rounds"),
        "hidden": reading.hidden_cost(record),
    }


def _stopped(record: Json) -> dict[str, str] | None:
    stopped = record.get("stopped")
    if not stopped:
        return None
    where = size(stopped["at"], reading.size_names(record)) if stopped.get("at") else "the start"
    return {"where": where, "message": clean(stopped["message"])}


def _unsteady(record: Json) -> list[tuple[str, str]] | None:
    repeatable = record.get("repeatable")
    if not repeatable or repeatable["holds"]:
        return None
    return [
        (f"{clean(line['file'])}:{line['line']}", ", ".join(grouped(c) for c in line["counts"]))
        for line in repeatable["lines"]
    ]
