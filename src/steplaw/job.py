"""The whole job: from a study to the audit record."""

from __future__ import annotations

import os
import platform
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import ExitStack, contextmanager
from dataclasses import dataclass
from typing import Any

from steplaw.errors import CallError
from steplaw.feed import size_text
from steplaw.findings import Findings, is_undecided
from steplaw.host.asking import Asker
from steplaw.host.crew import Crew, Crewed
from steplaw.host.limits import Failure
from steplaw.host.runner import Runner
from steplaw.record import AuditRecord
from steplaw.repeat import Repeat, run_again
from steplaw.store import Kept, machine, open_store
from steplaw.structure import Forms, Plan, plan_for
from steplaw.study import Study, make_study
from steplaw.sweep import Sweep, extend, interrupted, larger, sweep
from steplaw.timed import hold_against_clock, points_to_time, undecided
from steplaw.wording import listing

CAUTIONS = (
    "Auditing runs the subject's code.",
    "A law holds for the inputs it was found on.",
    "A forecast beyond the sizes run extrapolates.",
    "None of this is a worst-case execution time for a safety-related deadline; that belongs to "
    "the qualified process that the applicable standard asks for.",
)

#: Times that the largest size may be doubled to settle the choice between laws.
ROUNDS_TO_DECIDE = 2

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
    fresh: bool = False,
    processes: int | None = None,
    cluster: str | None = None,
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
    fresh : bool
        Whether everything is run anew, whatever the store has.
    processes : int, optional
        Runs made at once; as many as there are processors by default.
    cluster : str, optional
        Address of a Dask scheduler whose workers make the runs.

    Returns
    -------
    AuditRecord
        The record, a mapping with the names of ``steplaw.audit/1``.

    Raises
    ------
    CallError
        If subject, feed or sizes cannot be used.
    KeyboardInterrupt
        If the audit is interrupted.

    Notes
    -----
    Runs are made in child processes, which import the subject again. A failure of the subject is
    kept in the record's ``stopped``.
    """
    record = run(
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
            fresh=fresh,
            processes=processes,
            cluster=cluster,
        )
    )
    if record["stopped"] is not None and record["stopped"]["kind"] == "interrupted":
        raise KeyboardInterrupt
    return record


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
        The finished record. An interrupt ends the runs; what was finished is in it.

    Raises
    ------
    CallError
        If subject or feed cannot be used.
    """
    with _hosts(study) as hosts:
        about = hosts.counting.about
        plan = plan_for(study.subject)
        swept = _sweep(study, hosts.counting, report)
        _run_what_proofs_want(study, hosts.counting, plan, swept, report)
        _run_what_a_choice_wants(study, hosts.counting, swept, report)
        repeat = _run_again(hosts.again, swept)
        _keep_what_repeats(hosts, repeat)
        forms = Forms(plan, swept)
        findings = Findings(
            swept, study.figure, about["loaded"], repeat, forms=forms, own=study.costs
        )
        timed = _hold_against_clock(study, hosts.timing, swept, report)
    return AuditRecord(_record(study, about, swept, findings, repeat, timed))


@dataclass(frozen=True, slots=True)
class _Hosts:
    """What runs the subject of an audit; the others load it while the first runs it."""

    counting: Asker
    again: Asker
    timing: Asker | None


@contextmanager
def _hosts(study: Study) -> Iterator[_Hosts]:
    store = None if study.fresh else open_store()
    first = study.plan.points[min(2, len(study.plan.points) - 1)]
    asked = (study.subject, study.feed, study.plan.names, study.limits)

    with ExitStack() as stack:
        crew = _crew(study, stack)
        ahead = 0 if crew is None else 2 * crew.size

        def host(question: Mapping[str, Any], **settings: Any) -> Asker:
            def make() -> Asker:
                if crew is None or not settings.get("probes", True):
                    return Runner(*asked, **settings)
                return Crewed(crew, *asked, **settings)

            if store is None:
                return make()
            settings["kept"] = True
            return Kept(store, make, question, *asked, ahead=ahead, **settings)

        counting = stack.enter_context(host({}, first=first))
        counting.load()
        again = stack.enter_context(host({"again": True}, first=first))
        timing = None
        if study.clock:
            timing = stack.enter_context(host({"clock": machine()}, probes=False))
        yield _Hosts(counting, again, timing)


def _crew(study: Study, stack: ExitStack) -> Crew | None:
    """Give what makes runs at once, None where they are made one after the other."""
    if study.cluster is None and (study.processes or os.cpu_count() or 1) == 1:
        return None
    return stack.enter_context(Crew(study.processes, study.cluster))


def _sweep(study: Study, runner: Asker, report: Report | None) -> Sweep:
    swept = sweep(
        runner,
        study.plan,
        draws=study.draws,
        every=study.every,
        asked=study.asked,
        report=_counting(report),
    )
    if not swept.runs and swept.stopped is not None:
        _refuse_if_not_the_subjects(swept.stopped)
    return swept


def _run_what_proofs_want(
    study: Study, runner: Asker, plan: Plan | str, swept: Sweep, report: Report | None
) -> None:
    """Add the sizes with which counts settle every coefficient of a form that the code fixes."""
    if study.only_sizes or swept.stopped is not None or not swept.runs:
        return
    try:
        missing = Forms(plan, swept).missing()
        if missing:
            extend(runner, swept, missing, study.draws, _counting(report))
    except KeyboardInterrupt:
        swept.stopped = interrupted(swept.at(max(swept.runs)))


def _run_what_a_choice_wants(
    study: Study, runner: Asker, swept: Sweep, report: Report | None
) -> None:
    """Add larger sizes where orders of growth fit alike at those that were run."""
    if study.only_sizes or swept.whole or len(swept.names) > 1 or swept.stopped is not None:
        return
    try:
        for _ in range(ROUNDS_TO_DECIDE):
            if not swept.runs or not is_undecided(swept):
                return
            more = larger(swept, study.draws)
            if not more:
                return
            extend(runner, swept, more[:1], study.draws, _counting(report))
    except KeyboardInterrupt:
        swept.stopped = interrupted(swept.at(max(swept.runs)))


def _counting(report: Report | None) -> Callable[[Mapping[str, int], int, int | None], None]:
    def tell(at: Mapping[str, int], done: int, rest: int | None) -> None:
        if report is not None:
            report("counting", at, done, rest)

    return tell


def _refuse_if_not_the_subjects(stopped: Failure) -> None:
    """Raise where nothing at all was run and the subject is not the cause."""
    if stopped.kind == "feed":
        raise CallError(stopped.message)
    if stopped.kind == "interrupted":
        raise KeyboardInterrupt


def _run_again(runner: Asker, swept: Sweep) -> Repeat | None:
    if _is_interrupted(swept):
        return None
    try:
        return run_again(runner, swept)
    except KeyboardInterrupt:
        swept.stopped = interrupted(swept.at(max(swept.runs)))
        return None


def _hold_against_clock(
    study: Study, runner: Asker | None, swept: Sweep, report: Report | None
) -> dict[str, Any] | None:
    chosen = points_to_time(swept)
    if runner is None or not chosen:
        return None
    if _is_interrupted(swept):
        return undecided("the audit was interrupted before the clock check")
    if report is not None:
        report("timing", swept.at(chosen[-1].at), 0, None)
    try:
        return hold_against_clock(runner, swept, chosen, study.draws)
    except KeyboardInterrupt:
        swept.stopped = interrupted(swept.at(chosen[-1].at))
        return undecided("the clock check was interrupted")


def _keep_what_repeats(hosts: _Hosts, repeat: Repeat | None) -> None:
    """Take runs that turned out to differ out of the store again."""
    if repeat is not None and not repeat.holds:
        for host in (hosts.counting, hosts.again):
            if isinstance(host, Kept):
                host.forget()


def _is_interrupted(swept: Sweep) -> bool:
    return swept.stopped is not None and swept.stopped.kind == "interrupted"


def _record(
    study: Study,
    about: Mapping[str, Any],
    swept: Sweep,
    findings: Findings,
    repeat: Repeat | None,
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
        "dominance": findings.dominance(),
        "functions": findings.functions(),
        "ledger": findings.native.ledger(),
        "clock": timed,
        "repeatable": None if repeat is None else repeat.as_json(),
        "stopped": None if swept.stopped is None else swept.stopped.as_json(),
        "notes": [*_notes(loaded, swept, repeat), *CAUTIONS],
        "run_again": study.again,
    }


def _points(swept: Sweep, sizes: Sequence[Any]) -> list[dict[str, int]]:
    return [swept.at(tuple(s) if isinstance(s, list | tuple) else (s,)) for s in sizes]


def _notes(loaded: Mapping[str, Any], swept: Sweep, repeat: Repeat | None) -> Iterator[str]:
    yield from loaded["notes"]
    by_message: dict[str, list[str]] = {}
    for failure in swept.passed_over:
        by_message.setdefault(_told(failure), []).append(size_text(failure.at))
    for message, sizes in by_message.items():
        yield f"Left out {listing(sizes)}: there {message}."
    unread = next((r.unread for runs in swept.runs.values() for r in runs if r.unread), None)
    if unread is not None:
        yield f"The subject {unread}."
    for failure in repeat.failures if repeat is not None else ():
        yield f"Run again at {size_text(failure.at)}, {_told(failure)}; it had not before."
    if repeat is None and swept.runs:
        yield "Nothing was run again in a second process, to see that equal runs count equally."


def _told(failure: Failure) -> str:
    return failure.message if failure.kind == "feed" else f"the subject {failure.message}"
