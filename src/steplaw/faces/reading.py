"""What every face says of a record, in plain words and in the same order."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

from steplaw.faces.notation import pretty
from steplaw.faces.text import clean, duration, number, percent, size, sizes

Json = Mapping[str, Any]

GRADES = {
    "proved": "the code's structure fixes the form, and exact counts settle every coefficient",
    "exact": "gives every count to the last digit, also at sizes it was not found from; "
    "nothing proves that it goes on",
    "fitted": "least squares over sizes run; it comes near the counts and no more",
    "open": "nothing fits well enough, so no formula is claimed",
}


def size_names(record: Json) -> list[str]:
    """Give the size names of a record."""
    return [str(name) for name in (record.get("sizes") or {}).get("names") or []]


def title(record: Json) -> list[tuple[str, str]]:
    """Give the title block: label and text, untrusted text made harmless.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    list of (str, str)
        In the order to show them.
    """
    subject, feed = record["subject"], record["feed"]
    names = size_names(record)
    draws = feed.get("draws", 1)
    shown = clean(feed.get("text") or feed["kind"])
    made = {
        "expression": shown,
        "function": f"function {shown}",
        "hints": f"from the type hints: {shown}" if feed.get("text") else "from the type hints",
        "every": f"every one of {shown}",
        "python": shown,
    }[feed["kind"]]
    how = "the same in every draw" if not feed.get("varies") else f"{draws} draws a size"
    if feed["kind"] == "every":
        how = "each counted once"
    digest = clean(subject["digest"]).removeprefix("sha256:")
    return [
        ("subject", clean(subject["name"])),
        ("place", f"{clean(subject['file'])}:{subject['line']}"),
        ("python", clean(record["python"])),
        ("digest", digest[:12]),
        ("steplaw", clean(record["steplaw"])),
        ("feed", f"{made} ({how})"),
        ("sizes", sizes((record.get("sizes") or {}).get("plan") or [], names)),
    ]


def law_text(law: Json | None, unicode: bool = True, most: int | None = None) -> str:
    """Write a law in one cell: its formula, else its leading term, else its grade.

    Parameters
    ----------
    law : mapping or None
        A LAW of the record.
    unicode : bool
        As for `pretty`.
    most : int, optional
        Width to keep to.

    Returns
    -------
    str
        Such as ``n²/2 − n/2`` or, when that is too wide, ``~ n²/2``.
    """
    if not law:
        return "-"
    if law.get("formula") is None:
        return str(law.get("grade", "open"))
    whole = pretty(law["formula"], unicode)
    fits = most is None or len(whole) <= most
    if fits and law.get("grade") != "fitted":
        return whole
    if fits or not law.get("leading"):
        return whole if whole.startswith("~") else f"~ {whole}"
    return f"~ {pretty(law['leading'], unicode)}"


def verdict(record: Json, unicode: bool = True) -> list[str]:
    """Give the verdict: the law, the line that carries most, the clock.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    unicode : bool
        As for `pretty`.

    Returns
    -------
    list of str
        Clauses to join in one line.
    """
    figure = record["figure"]
    law = figure["law"]
    name = clean(figure["name"], unicode)
    leading = law.get("leading") or law.get("formula")
    if leading is None:
        out = [f"{name}: no law claimed (open)"]
    else:
        same = law.get("formula") == leading and law["grade"] in ("exact", "proved")
        out = [f"{name} {'=' if same else '~'} {pretty(leading, unicode)} ({law['grade']})"]
    leads = native_leads(record, unicode)
    if leads is not None:
        out.append(leads)
    line = next((x for x in record.get("lines") or [] if x.get("dominant")), None)
    if line is not None and line.get("share") is not None:
        out.append(f"line {line['line']} carries {percent(line['share'])}")
    clock = record.get("clock")
    if clock is not None:
        out.append(
            {
                True: "time follows the " + ("whole" if clock.get("held") == "work" else "steps"),
                False: "TIME DEPARTS FROM THE "
                + ("WHOLE" if clock.get("held") == "work" else "STEPS"),
            }.get(clock["agrees"], "the clock cannot tell")
        )
    repeatable = record.get("repeatable")
    if repeatable and not repeatable["holds"]:
        out.append("COUNTS DIFFER FROM RUN TO RUN")
    if record.get("stopped"):
        out.append("STOPPED EARLY")
    return out


def ledger_rows(record: Json, unicode: bool = True, most: int | None = None) -> list[list[str]]:
    """Give the native ledger: line, operation, times, visits, how charged, share of all work.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    unicode : bool
        As for `pretty`.
    most : int, optional
        Width that each law keeps to.

    Returns
    -------
    list of list of str
        Costliest first.
    """
    rows = (record.get("ledger") or {}).get("rows") or []
    return [
        [
            f"{clean(row['file']).rsplit('/', 1)[-1]}:{row['line']}",
            clean(row["operation"], unicode),
            law_text(row["times"], unicode, most),
            law_text(row["visits"], unicode, most),
            row["charge"],
            percent(row["share"]),
        ]
        for row in sorted(rows, key=lambda row: -row["share"])
    ]


def not_charged(record: Json) -> list[str]:
    """Give one line for each C call that the native ledger has no rule for."""
    rows = (record.get("ledger") or {}).get("not_charged") or []
    return [
        f"{clean(row['operation'])} at {clean(row['file']).rsplit('/', 1)[-1]}:{row['line']}, "
        f"{number(row['times'])} times, on at most {number(row['largest'])} elements"
        + (", growing with the size" if row["grows"] else "")
        for row in rows
    ]


def is_loud(clause: str) -> bool:
    """Whether a clause of the verdict is one that must not be overlooked."""
    return clause.isupper() or clause.startswith(("TIME DEPARTS", "NATIVE VISITS LEAD"))


def evidence(law: Json, names: Sequence[str], unicode: bool = True) -> list[tuple[str, str]]:
    """Give what a law rests on: label and text.

    Parameters
    ----------
    law : mapping
        A LAW of the record.
    names : sequence of str
        The size names.
    unicode : bool
        As for `pretty`.

    Returns
    -------
    list of (str, str)
        Grade, sizes that settled and checked it, from where it holds, error, intervals of its
        coefficients, note.
    """
    grade = law["grade"]
    out = [("grade", f"{grade}: {GRADES.get(grade, '')}")]
    if law.get("settled_by"):
        out.append(("settled by", sizes(law["settled_by"], names)))
    if law.get("formula") is not None:
        out.append(("checked at", sizes(law.get("checked_at") or [], names)))
    start = law.get("holds_from")
    if start not in (None, 0, [], [0] * len(names)):
        low = size(start, names) if not isinstance(start, int) else f"{', '.join(names)} = {start}"
        out.append(("holds from", low))
    if law.get("error") is not None and grade == "fitted":
        out.append(("error", f"at most {100 * law['error']:.2g} % at the sizes checked"))
    intervals = _intervals(law, unicode)
    if intervals:
        out.append(("intervals", intervals))
    if law.get("note"):
        out.append(("note", clean(law["note"], unicode)))
    return out


def _intervals(law: Json, unicode: bool) -> str:
    """Write the intervals of a fitted law's coefficients, term by term."""
    out = []
    for term in (law.get("details") or {}).get("terms") or ():
        low, high = (_minus(f"{term[key]:.4g}", unicode) for key in ("low", "high"))
        name = "the constant" if term["term"] == "1" else pretty(term["term"], unicode)
        out.append(f"{name}: {low} to {high}")
    return f"{'; '.join(out)} (95 %)" if out else ""


def _minus(text: str, unicode: bool) -> str:
    return text.replace("-", "−") if unicode else text


def named_laws(record: Json) -> list[tuple[str, Json]]:
    """Give the laws that stand beside the main one, under the names a reader knows them by."""
    figure, laws = record["figure"], record["laws"]
    parts = laws.get("parts") or {}
    found = [
        ("exact part", parts.get("exact")),
        ("data part", parts.get("data")),
        *_spread(figure),
        *whole_laws(record),
    ]
    if figure["name"] != "steps":
        found.insert(0, ("all steps", laws.get("steps")))
    return [(name, law) for name, law in found if law]


def _spread(figure: Json) -> list[tuple[str, Json | None]]:
    """Give the laws of the spread; none where every input gave the same."""
    named = [(name, figure.get(name)) for name in ("least", "most", "variance")]
    formulas = [(law or {}).get("formula") for _, law in named]
    same = formulas == [figure["law"].get("formula")] * 2 + ["0"]
    return [] if same else named


def whole_laws(record: Json) -> list[tuple[str, Json | None]]:
    """Give the laws of native visits and of the whole, none where nothing was charged."""
    laws = record["laws"]
    native = laws.get("native")
    if not native or native.get("formula") == "0":
        return []
    return [("native", native), ("work", laws.get("work"))]


def native_leads(record: Json, unicode: bool = True) -> str | None:
    """Say that native visits have the leading term of the whole, None where they do not."""
    ledger, native = record.get("ledger") or {}, record["laws"].get("native") or {}
    if not ledger.get("leads") or not native.get("leading"):
        return None
    return f"NATIVE VISITS LEAD, ~ {pretty(native['leading'], unicode)} ({native['grade']})"


def value_rows(record: Json) -> list[tuple[str, str, str, str, str]]:
    """Give the values by size: size, draws, mean, least to most, ratio to half the size.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    list of tuple of str
        A row for each size, smallest first as the record has them.
    """
    values = record["figure"].get("values") or []
    means = {tuple(v["at"].values()): Fraction(str(v["mean"])) for v in values}
    rows = []
    for value in values:
        key = tuple(value["at"].values())
        half = tuple(x // 2 for x in key)
        doubled = all(x % 2 == 0 and x > 0 for x in key) and means.get(half)
        ratio = f"{float(means[key] / means[half]):.3f}" if doubled else ""
        spread = "all the same" if value["least"] == value["most"] else ""
        if value["draws"] == 1:
            spread = ""
        elif not spread:
            spread = f"{number(value['least'])} to {number(value['most'])}"
        shown = ", ".join(str(x) for x in key)
        rows.append((shown, str(value["draws"]), number(value["mean"]), spread, ratio))
    return rows


def line_rows(record: Json, most: int = 14) -> tuple[list[Json], int]:
    """Give the lines to show, in source order, and how many are left out.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    most : int
        Lines to show; those with the greatest shares are kept.

    Returns
    -------
    list of mapping, int
        Lines of the record, and the number left out.
    """
    lines = list(record.get("lines") or [])
    ranked = sorted(range(len(lines)), key=lambda i: -(lines[i].get("share") or 0.0))
    kept = sorted(ranked[:most])
    return [lines[i] for i in kept], len(lines) - len(kept)


def clock_rows(record: Json, unicode: bool = True) -> list[list[str]]:
    """Give the clock check by size: size, steps, time, ns a step, growth of steps and of time.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    unicode : bool
        As for `pretty`.

    Returns
    -------
    list of list of str
        A row for each size timed.
    """
    clock = record.get("clock") or {}
    rows = []
    for place, at in enumerate(clock.get("sizes") or []):
        rate = clock["ns_per_step"][place]
        growth = [
            clock[key][place - 1] if place else None for key in ("exponent_steps", "exponent_clock")
        ]
        rows.append(
            [
                ", ".join(str(x) for x in at.values()),
                number(clock["steps"][place]),
                duration(clock["seconds"][place], unicode),
                "-" if rate is None else f"{rate:.3g}",
                *("" if x is None else f"{x:.2f}" for x in growth),
            ]
        )
    return rows


def hidden_cost(record: Json) -> str | None:
    """Say what may be behind a clock that departs from the steps."""
    clock = record.get("clock")
    if not clock or clock.get("agrees") is not False:
        return None
    if (record.get("ledger") or {}).get("rows"):
        return (
            "Native visits are among what was held against the clock. What is left is work that "
            "the ledger does not charge, named there, or the cost of memory."
        )
    return (
        "Steps leave out the work done inside C code, such as a scan of a list with `in`, a slice "
        "or a sort, and the cost of memory. The clock sees both: look at the calls and the element "
        "reads of the lines that carry most."
    )


def dominance(record: Json) -> str:
    """Say which line leads as the size grows without bound, and from which size on.

    Parameters
    ----------
    record : mapping
        An audit record.
    """
    found = record.get("dominance")
    if not found:
        return ""
    name = record["sizes"]["names"][0]
    share = found["share"]
    told = percent(share_number(share)) + (f" ({share})" if isinstance(share, str) else "")
    since = f"from {name} = {found['from']} on" if found["from"] is not None else "beyond these"
    return f"as {name} grows, line {found['line']} tends to {told}; it leads {since}"


def share_number(share: Any) -> float:
    """Give a share that the record holds as a number or as the text of a fraction."""
    top, _, below = str(share).partition("/")
    return float(top) / float(below or 1)
