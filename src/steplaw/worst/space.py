"""Stored elements: what a subject holds at its peak, beside the steps that it takes."""

from __future__ import annotations

import platform
from typing import Any

from steplaw.errors import CallError, SubjectError
from steplaw.host.asking import RunFailed
from steplaw.host.runner import Runner
from steplaw.record import SpaceRecord
from steplaw.study import Study
from steplaw.worst.counting import Counts
from steplaw.worst.job import law_of
from steplaw.worst.search import Report

SIZES = (*range(0, 25), 32, 40, 48, 64, 80, 96)
NOTES = (
    "Elements are those in lists, tuples, dictionaries, sets and deques that the frames under way "
    "reach before each line and at each return, the input's own not counted; what an instruction "
    "makes and drops again is not seen.",
    "Memory is the peak of what Python's allocator gave (tracemalloc); it differs by version.",
)


def space(study: Study, report: Report | None = None) -> SpaceRecord:
    """Find the laws of what a subject holds at its peak.

    Parameters
    ----------
    study : Study
        Subject, feed and sizes; one draw is run at each size.
    report : callable, optional
        Told what is done, at which size, and the elements held.

    Returns
    -------
    SpaceRecord
        The finished record, `steplaw.space/1`.

    Raises
    ------
    SubjectError
        If the subject fails.
    CallError
        If subject or feed cannot be used.
    """
    from steplaw import __version__

    if study.every or len(study.plan.names) > 1:
        raise CallError("what is held is found for one size and one input at each", "give --feed")
    name = study.plan.names[0]
    sizes = sorted({at[name] for at in study.asked} or set(SIZES))
    rows: list[dict[str, Any]] = []
    failed = ""
    with Runner(study.subject, study.feed, (name,), study.limits, first={name: 3}) as runner:
        about = runner.load()
        counts = Counts(runner, study.figure, name)
        for n in sizes:
            try:
                steps = runner.count({name: n}).tally.steps
                rows.append({"n": n, "steps": steps, **counts.held(n)})
            except RunFailed as error:
                failed = f"{error.failure.message} at n={n}"
                if rows:
                    break
                continue
            if report is not None:
                report("looking", n, rows[-1]["elements"])
    if not rows:
        raise SubjectError(f"{study.subject} {failed}")
    notes = [*NOTES, *([f"Left out: the subject {failed}."] if failed else [])]
    return SpaceRecord(
        {
            "schema": "steplaw.space/1",
            "steplaw": __version__,
            "python": platform.python_version(),
            "subject": {k: about["loaded"][k] for k in ("name", "file", "line")},
            "figure": "elements and memory",
            "feed": about["feed"],
            "sizes": [{k: row[k] for k in ("n", "steps", "elements", "memory")} for row in rows],
            "laws": {
                key: law_of({row["n"]: row[key] for row in rows})
                for key in ("steps", "elements", "memory")
            },
            "notes": notes,
            "run_again": study.again,
        }
    )
