"""Forecasts from sizes up to n, held against the run at 8n: steps and time.

Run it as ``PYTHONPATH=src python tests/bench/forecasts.py``. It takes about half an hour on
a quiet machine. Every finished case is a file in the folder that ``--into`` names, with its audit
and what was run, and a second run takes up where the first one ended. ``--show`` runs nothing: it
makes the forecasts anew from the stored audits. ``--table PATH`` writes the finished cases as the
page ``docs/forecasts.md``.
"""

from __future__ import annotations

import argparse
import hashlib
import json
import os
import subprocess
import sys
from collections.abc import Iterator, Mapping
from fractions import Fraction
from pathlib import Path
from typing import Any

ROOT = Path(__file__).parents[2]
sys.path.insert(0, str(ROOT / "tests"))

from bench.forecast_cases import CASES, Case  # noqa: E402

TIMES = 8
DRAW = 101
"""The draw that is run at 8n: none of those that the law was found on."""
SECONDS = 6.0
QUICK_SECONDS = 1.5
DRAWS = 5
MOST_STEPS = 3e9


def measured(case: Case, clock: bool = True) -> dict[str, Any]:
    """Audit a case and run it at eight times its largest size."""
    from steplaw.forecast import forecast
    from steplaw.host.runner import Runner
    from steplaw.job import run
    from steplaw.study import make_study

    study = make_study(
        case.subject, feed=case.feed or None, sizes=case.sizes, clock=clock, processes=1
    )
    record = run(study)
    at = {name: TIMES * n for name, n in largest(record).items()}
    out: dict[str, Any] = {
        "group": case.group,
        "subject": case.subject,
        "feed": case.feed,
        "at": at,
        "steps": None,
        "time": None,
        "audit": record,
    }
    told = forecast(record, at=at)["at"][0]["figures"]["steps"]
    expected = told["interval"][1] if told["interval"] else told["value"]
    if not isinstance(expected, int | float) or expected > MOST_STEPS:
        return out
    asked = study.subject, study.feed, study.plan.names, study.limits
    with Runner(*asked, first=at) as runner:
        runner.load()
        out["steps"] = runner.count(at, DRAW).tally.steps
    if clock:
        with Runner(*asked, probes=False) as runner:
            rows = runner.time([at], 1, SECONDS)
        out["time"] = rows[0]["best_ns"] / 1e9 if rows else None
    return out


def quickly_measured(case: Case, clock: bool = True) -> dict[str, Any]:
    """Do the same in this process, for one size name: counts in a child, then the clock.

    The plan of sizes, the draws, the counts, the search for the law, and the timing are those of
    an audit; what an audit finds for lines, functions and classes is left out, and the clock is
    held against the steps alone.
    """
    from steplaw.clock import check, measure
    from steplaw.feed import bind, parse_feed
    from steplaw.study import make_study
    from steplaw.subject import call, locate

    study = make_study(case.subject, feed=case.feed, sizes=case.sizes)
    subject = locate(study.subject)
    feed = bind(parse_feed(case.feed), subject, study.plan.names)
    runs, at, steps = counted(case, [at["n"] for at in study.plan.points])
    record = record_of(case, runs)
    out = {"group": case.group, "subject": case.subject, "feed": case.feed, "at": at}
    out |= {"steps": steps, "time": None, "audit": record}
    if not clock:
        return out

    def make(size: Mapping[str, int], draw: int) -> tuple[tuple[Any, ...], dict[str, Any]]:
        made = feed.make(size, draw)
        return made.args, made.kwargs

    def go(args: tuple[Any, ...], kwargs: dict[str, Any]) -> object:
        return call(subject, args, kwargs)

    sizes = timed_sizes(runs)
    timings = measure(go, make, sizes, budget_seconds=QUICK_SECONDS, draws=DRAWS)
    means = [Fraction(sum(runs[n["n"]]), len(runs[n["n"]])) for n in sizes]
    record["clock"] = check(sizes, means, timings) | {
        "held": "steps",
        "visit_rate": None,
        "steps_alone": None,
    }
    rows = measure(go, make, [at], budget_seconds=2 * QUICK_SECONDS)
    out["time"] = rows[0].best_ns / 1e9 if rows else None
    return out


def timed_sizes(runs: Mapping[int, list[int]]) -> list[dict[str, int]]:
    """Choose the sizes to time as an audit does: each a quarter more work than the one before."""
    chosen: list[int] = []
    for n in sorted(runs, reverse=True):
        if n and (not chosen or 5 * sum(runs[n]) <= 4 * sum(runs[chosen[-1]])):
            chosen.append(n)
    return [{"n": n} for n in chosen[::-1][-16:]]


def counted(case: Case, points: list[int]) -> tuple[dict[int, list[int]], dict[str, int], int]:
    """Count a case at its sizes, and at eight times the largest.

    Where several orders of growth fit alike, larger sizes are counted, as in an audit.
    """
    words = [sys.executable, str(ROOT / "tests" / "bench" / "forecast_counts.py")]
    pipe = subprocess.PIPE
    with subprocess.Popen(words, stdin=pipe, stdout=pipe, text=True, bufsize=1) as process:
        assert process.stdin is not None and process.stdout is not None
        process.stdin.write(json.dumps({"subject": case.subject, "feed": case.feed}) + "\n")

        def steps(n: int, draw: int) -> int:
            process.stdin.write(f"[{n}, {draw}]\n")
            return json.loads(process.stdout.readline())

        runs = {n: [steps(n, draw) for draw in range(DRAWS)] for n in points}
        runs = {n: values for n, values in runs.items() if None not in values}
        for _ in range(2):
            law = record_of(case, runs)["figure"]["law"]
            if "undecided" not in (law.get("details") or {}):
                break
            for n in (max(runs) * 3 // 2, max(runs) * 2):
                runs[n] = [steps(n, draw) for draw in range(DRAWS)]
        top = TIMES * max(runs)
        found = runs, {"n": top}, steps(top, DRAW)
        process.stdin.close()
    return found


def record_of(case: Case, runs: Mapping[int, list[int]]) -> dict[str, Any]:
    """Give the parts of an audit that a forecast reads."""
    from forecast.stored_audits import record_of_runs

    record = record_of_runs({(n,): values for n, values in runs.items()})
    record["subject"]["name"] = case.subject
    return dict(record)


def largest(record: Mapping[str, Any]) -> dict[str, int]:
    """Give the largest size run of each name."""
    run = [value["at"] for value in record["figure"]["values"]]
    return {name: max(at[name] for at in run) for name in record["sizes"]["names"]}


def held(found: Mapping[str, Any]) -> dict[str, Any]:
    """Forecast from the audit of a finished case, beside what was run."""
    from steplaw.forecast import forecast

    record = found["audit"]
    (entry,) = forecast(record, at=found["at"])["at"]
    told = entry["figures"]["steps"]
    return {
        **{key: found[key] for key in ("group", "subject", "feed", "at", "steps", "time")},
        "from": largest(record),
        "law": record["laws"]["steps"]["formula"],
        **{key: told[key] for key in ("grade", "why", "value", "interval")},
        "seconds": entry["seconds"],
        "agrees": (record["clock"] or {}).get("agrees"),
        "why_no_seconds": entry["why_no_seconds"],
    }


def steps_hold(row: Mapping[str, Any]) -> bool | None:
    """Whether the steps were as foretold; None where there was no forecast or no run."""
    if row["steps"] is None or row["grade"] == "open":
        return None
    if row["interval"] is not None:
        low, high = row["interval"]
        return bool(low <= row["steps"] <= high)
    return bool(row["steps"] == row["value"])


def time_holds(row: Mapping[str, Any]) -> bool | None:
    """Whether the time was in its interval; None where there was no forecast or no run."""
    if row["time"] is None or row["seconds"] is None:
        return None
    low, high = row["seconds"]
    return bool(low <= row["time"] <= high)


def summary(rows: list[dict[str, Any]]) -> Iterator[str]:
    """Give the figures that the table comes to."""
    sure = [steps_hold(r) for r in rows if r["grade"] in ("proved", "exact")]
    fitted = [steps_hold(r) for r in rows if r["grade"] == "fitted"]
    timed = [time_holds(r) for r in rows]
    for name, found in (("proved or exact", sure), ("fitted", fitted), ("time", timed)):
        known = [x for x in found if x is not None]
        yield f"{name}: {sum(known)} of {len(known)}"
    yield f"open, no forecast: {sum(r['grade'] == 'open' for r in rows)}"
    yield f"not run at 8n: {sum(r['steps'] is None and r['grade'] != 'open' for r in rows)}"


def table(rows: list[dict[str, Any]]) -> str:
    """Give the rows as Markdown."""
    from steplaw.faces.markdown import code, escape
    from steplaw.faces.reading_forecast import lasting, rounded, value

    marks = {True: "yes", False: "**no**", None: "-"}
    out = [
        "| subject | feed | n | grade | foretold at 8n | counted | holds | time foretold "
        "| measured | holds |",
        "| --- | --- | ---: | --- | ---: | ---: | --- | ---: | ---: | --- |",
    ]
    for row in rows:
        told, seconds = "-", "-"
        if row["interval"]:
            low, high = row["interval"]
            told = f"{rounded(low, False)} to {rounded(high, True)}"
        elif row["value"] is not None:
            told = value(row["value"])
        if row["seconds"]:
            seconds = " to ".join(lasting(x) for x in row["seconds"])
        cells = [
            escape(row["subject"].rpartition("/")[2]),
            code(row["feed"].rpartition("/")[2], cell=True) if row["feed"] else "type hints",
            ", ".join(str(n) for n in row["from"].values()),
            row["grade"],
            told,
            "-" if row["steps"] is None else value(row["steps"]),
            marks[steps_hold(row)],
            seconds,
            "-" if row["time"] is None else lasting(row["time"]),
            marks[time_holds(row)],
        ]
        out.append("| " + " | ".join(cells) + " |")
    return "\n".join(out) + "\n"


PAGE = """# Forecasts held against runs

[Forecasts](guide/forecast.md) from sizes up to n, held against one run at 8n. The script
`tests/bench/forecasts.py` makes this page; [DEVELOPERS.md](../DEVELOPERS.md#gates) has its
commands. Python {python}; times are of one machine, shared with other work while it was timed.

The samples and the functions that nobody here wrote go through the whole audit. The methods on
drawn data (`tests/bench/drawn_work.py`, `tests/published/algorithms.py`,
`tests/worst/subjects.py`) have the plan of sizes, the draws, the counts, the search for the law
and the timing of an audit, without its laws of lines, functions and classes; the clock is held
against the steps alone there, so that native visits weigh nothing. The run at 8n is a draw that
the law was not found on. Its time is that of draw 0, best of several rounds.

{summary}

Where a forecast missed:

{missed}

No forecast is made where the law is open; a dash stands for it, for a run at 8n that is too long
to be made, and for a time that no four sizes were long enough to tell.

{tables}"""
TITLES = {
    "sample": "Samples",
    "real": "Functions of the standard library and networkx",
    "drawn": "Methods on drawn data",
}


def page(rows: list[dict[str, Any]]) -> str:
    """Give the page of documentation."""
    import platform

    from steplaw.faces.markdown import escape
    from steplaw.faces.reading_forecast import amount, value

    missed = [
        f"- {escape(row['subject'].rpartition('/')[2])}, {row['grade']}: "
        + (
            f"steps {value(row['steps'])}, foretold {amount(row)}"
            if steps_hold(row) is False
            else f"time {row['time']:.3g} s, foretold {row['seconds'][0]:.3g} s to "
            f"{row['seconds'][1]:.3g} s"
        )
        for row in rows
        if steps_hold(row) is False or time_holds(row) is False
    ]
    tables = [
        f"## {title}\n\n{table([row for row in rows if row['group'] == group])}"
        for group, title in TITLES.items()
    ]
    return PAGE.format(
        python=platform.python_version(),
        summary="\n".join(f"- {line}" for line in summary(rows)),
        missed="\n".join(missed) or "- nowhere",
        tables="\n".join(tables),
    )


def place_of(case: Case, folder: Path) -> Path:
    """Give the file of a case."""
    digest = hashlib.sha256(f"{case.subject} {case.feed} {case.sizes}".encode()).hexdigest()[:12]
    return folder / f"{case.subject.rpartition(':')[2]}-{digest}.json"


def said(row: Mapping[str, Any]) -> str:
    """Give a line that tells how a case went."""
    told = row["interval"] or row["value"]
    return (
        f"{row['grade']:7} steps {steps_hold(row)!s:5} time {time_holds(row)!s:5} "
        f"{row['subject']} {row['feed'][:40]}: {told} {row['steps']}; "
        f"{row['seconds']} {row['time']} {row['why'] or ''}"
    )


def run_missing(cases: list[Case], folder: Path, clock: bool, quick: bool) -> None:
    """Run the cases that have no file yet."""
    for case in cases:
        place = place_of(case, folder)
        if place.exists():
            continue
        try:
            found = (quickly_measured if quick else measured)(case, clock)
        except Exception as error:
            print(f"FAILED {case.subject} {case.feed}: {error!r}", file=sys.stderr, flush=True)
            continue
        place.write_text(json.dumps(found), encoding="utf-8")
        print(said(held(found)), flush=True)


def main() -> None:
    """Hold every case, one line each, and print what they come to."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--into", default="/tmp/steplaw-forecasts", type=Path)
    parser.add_argument("--table", type=Path)
    parser.add_argument("--no-clock", action="store_true")
    parser.add_argument("--show", action="store_true", help="run nothing")
    parser.add_argument("--quick", action="store_true", help="count and time in this process")
    parser.add_argument("--groups", default="sample,real,drawn")
    parser.add_argument("--only", default="", help="cases whose subject holds this text")
    parser.add_argument("--share", default="1/1", help="K/N: every Nth case from the Kth on")
    given = parser.parse_args()
    os.chdir(ROOT)
    os.environ.setdefault("STEPLAW_STORE", "off")
    given.into.mkdir(parents=True, exist_ok=True)
    part, parts = map(int, given.share.split("/"))
    groups = given.groups.split(",")
    cases = [case for case in CASES if case.group in groups and given.only in case.subject]
    cases = cases[part - 1 :: parts]
    if not given.show:
        run_missing(cases, given.into, not given.no_clock, given.quick)
    places = [place_of(case, given.into) for case in cases]
    rows = [held(json.loads(p.read_text(encoding="utf-8"))) for p in places if p.exists()]
    if given.show:
        print("\n".join(map(said, rows)))
    print("\n".join(summary(rows)))
    if given.table is not None:
        given.table.write_text(page(rows), encoding="utf-8")


if __name__ == "__main__":
    main()
