"""The whole job: from a study to the audit record."""

from __future__ import annotations

import platform
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from steplaw import series
from steplaw.clock import Timing, check
from steplaw.findings import Findings
from steplaw.host.runner import Run, RunFailed, Runner
from steplaw.law.model import Observation
from steplaw.record import AuditRecord
from steplaw.study import Study, make_study
from steplaw.sweep import Sweep, sweep, unequal

CLOCK_SECONDS = 6.0
CAUTIONS = (
    "Auditing runs the subject's code.",
    "A law holds for the inputs it was found on.",
    "A forecast beyond the sizes run extrapolates.",
    "None of this is a worst-case execution time for a safety-related deadline; that belongs to "
    "the qualified process that the applicable standard asks for.",
)

Report = Callable[[str, Mapping[str, int], int, int | None], None]


def audit(
    subject: str | Callable[..., Any],
    *,
    feed: str | Callable[..., Any] | None = None,
    every: str | None = None,
    sizes: Any = None,
    only_sizes: bool = False,
    draws: int = 5,
    figure: str = "steps",
    clock: bool = True,
    limit_seconds: float = 60.0,
    limit_memory: int = 4096,
) -> AuditRecord:
    """Find the law that a function's step count follows.

    Parameters
    ----------
    subject : callable or str
        The function, or its name as in ``steplaw audit``.
    feed : str or callable, optional
        An expression in the size names and ``rng``, ``FILE.py:FUNCTION``, or a function of these;
        without, inputs are made from the type hints.
    every : str, optional
        An expression that gives every input of a size.
    sizes : str, sequence of int, or mapping, optional
        As ``--sizes``, or the numbers themselves.
    only_sizes : bool
        Run these sizes alone.
    draws : int
        Inputs at each size where they differ from draw to draw.
    figure : str
        ``steps``, an operation class, or ``line:N``.
    clock : bool
        Whether to hold the law against the clock.
    limit_seconds : float
        Wall-clock time of one run, in seconds.
    limit_memory : int
        Memory that one run may take, in megabytes.

    Returns
    -------
    AuditRecord
        The record, a mapping with the names of ``steplaw.audit/1``.

    Raises
    ------
    CallError
        If subject, feed or sizes cannot be used.

    Notes
    -----
    Runs are made in a child process, which imports the subject again. A failure of the subject is
    kept in the record's ``stopped``.
    """
    return run(
        make_study(
            subject,
            feed=feed,
            every=every,
            sizes=sizes,
            only_sizes=only_sizes,
            draws=draws,
            figure=figure,
            clock=clock,
            limit_seconds=limit_seconds,
            limit_memory=limit_memory,
        )
    )


def run(study: Study, report: Report | None = None) -> AuditRecord:
    """Do a study: count, find the laws, hold them against the clock.

    Parameters
    ----------
    study : Study
        What to do.
    report : callable, optional
        Told what is being done, at which size, the steps run and the steps still to run.

    Returns
    -------
    AuditRecord
        The finished record.
    """
    first = study.plan.points[min(2, len(study.plan.points) - 1)]
    with Runner(study.subject, study.feed, study.plan.names, study.limits, first=first) as runner:
        about = runner.about
        swept = _sweep(study, runner, report)
    repeat = _repeat(study, swept, first)
    findings = Findings(swept, study.figure, about["loaded"], repeat.changed)
    timed = _clock(study, swept, report) if study.clock else None
    return AuditRecord(_record(study, about, swept, findings, repeat, timed))


def _sweep(study: Study, runner: Runner, report: Report | None) -> Sweep:
    def tell(at: Mapping[str, int], done: int, rest: int | None) -> None:
        if report is not None:
            report("counting", at, done, rest)

    return sweep(
        runner,
        study.plan,
        draws=study.draws,
        every=study.every,
        asked=study.asked,
        report=tell,
    )


@dataclass(frozen=True, slots=True)
class Repeat:
    """Whether equal runs in a second process gave equal tallies.

    Parameters
    ----------
    checked_at : list of dict
        Sizes that were run again.
    lines : list of dict
        Lines whose counts differ.
    """

    checked_at: list[dict[str, int]]
    lines: list[dict[str, Any]]

    @property
    def changed(self) -> set[tuple[str, int]]:
        """File and line of what changed."""
        return {(x["file"], x["line"]) for x in self.lines}


def _repeat(study: Study, swept: Sweep, first: Mapping[str, int]) -> Repeat:
    points = list(swept.runs)
    chosen = sorted({0, len(points) // 2, len(points) - 1} & set(range(len(points))))
    if study.every:
        chosen = chosen[:2]
    if not chosen:
        return Repeat([], [])
    old: list[Run] = []
    new: list[Run] = []
    with Runner(study.subject, study.feed, study.plan.names, study.limits, first=first) as runner:
        for place in chosen:
            at = swept.at(points[place])
            kept = swept.runs[points[place]]
            try:
                again = runner.every(at) if study.every else [runner.count(at, 0)]
            except RunFailed:
                again = []
            if study.every:
                old += kept if len(kept) == len(again) else []
                new += again if len(kept) == len(again) else []
            elif again:
                old.append(kept[0])
                new += again
    return Repeat([swept.at(points[p]) for p in chosen], unequal(old, new))


def _clock(study: Study, swept: Sweep, report: Report | None) -> dict[str, Any] | None:
    steps = series.of(swept, lambda r: r.tally.steps)
    chosen = _spread([o for o in steps if all(o.at) and o.value > 0])
    if not chosen or study.every:
        return None
    points = [swept.at(o.at) for o in chosen]
    if report is not None:
        report("timing", points[-1], 0, None)
    draws = study.draws if swept.varies else 1
    try:
        with Runner(
            study.subject, study.feed, study.plan.names, study.limits, probes=False
        ) as runner:
            rows = runner.time(points, draws, CLOCK_SECONDS)
    except RunFailed as failed:
        return {"agrees": None, "reason": f"the timed run failed: {failed.failure.message}"}
    timings = [Timing(r["at"], r["best_ns"], tuple(r["samples"]), r["calls"]) for r in rows]
    return check(points, [o.value for o in chosen], timings)


def _spread(steps: Sequence[Observation]) -> list[Observation]:
    """Choose sizes whose steps grow by a quarter or more from one to the next."""
    chosen: list[Observation] = []
    for o in sorted(steps, key=lambda o: (o.value, o.at), reverse=True):
        if not chosen or o.value * 5 <= chosen[-1].value * 4:
            chosen.append(o)
    return chosen[::-1][-16:]


def _record(
    study: Study,
    about: Mapping[str, Any],
    swept: Sweep,
    findings: Findings,
    repeat: Repeat,
    timed: dict[str, Any] | None,
) -> dict[str, Any]:
    from steplaw import __version__

    loaded = about["loaded"]
    return {
        "schema": "steplaw.audit/1",
        "steplaw": __version__,
        "subject": {k: loaded[k] for k in ("name", "file", "line", "digest", "doc")},
        "python": platform.python_version(),
        "sizes": {
            "names": list(swept.names),
            "plan": [swept.at(p) for p in swept.runs],
            "left_out": [swept.at(p) for p in swept.left_out],
            "settled_by": _points(swept, findings.figure_law.settled_by),
            "held_out": _points(swept, findings.figure_law.checked_at),
        },
        "feed": {**about["feed"], "varies": swept.varies, "draws": swept.draws},
        "figure": findings.figure(),
        "tallies": findings.tallies(),
        "laws": findings.laws(),
        "lines": findings.lines(),
        "functions": findings.functions(),
        "clock": timed,
        "repeatable": {
            "holds": not repeat.lines,
            "checked_at": repeat.checked_at,
            "lines": repeat.lines,
        },
        "stopped": None if swept.stopped is None else swept.stopped.as_json(),
        "notes": [*_notes(loaded, swept), *CAUTIONS],
        "run_again": study.again or f"steplaw audit {study.subject}",
    }


def _points(swept: Sweep, sizes: Sequence[Any]) -> list[dict[str, int]]:
    return [swept.at(tuple(s) if isinstance(s, list | tuple) else (s,)) for s in sizes]


def _notes(loaded: Mapping[str, Any], swept: Sweep) -> list[str]:
    notes = list(loaded["notes"])
    for failure in swept.passed_over:
        size = ", ".join(f"{k}={v}" for k, v in failure.at.items())
        notes.append(f"Left out {size}: there the subject {failure.message}.")
    unread = next((r.unread for runs in swept.runs.values() for r in runs if r.unread), None)
    if unread is not None:
        notes.append(f"The subject {unread}.")
    return notes
