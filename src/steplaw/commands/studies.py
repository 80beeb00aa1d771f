"""Studies of the project's configuration, audited by name or all of them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from steplaw.commands.output import check_outputs, deliver, say_faults, screen, write
from steplaw.commands.progress import progress
from steplaw.errors import CallError
from steplaw.job import Report
from steplaw.record import AuditRecord
from steplaw.reference import parse
from steplaw.review.configuration import Configuration, NamedStudy, NoConfiguration, read
from steplaw.review.outcomes import Outcome, run_all
from steplaw.wording import listing

Paths = tuple[str | None, str | None, str | None]
ENDINGS = (".json", ".html", ".svg")


def audit_studies(
    name: str | None, settings: Mapping[str, Any], paths: Paths, again: str, project: str
) -> int:
    """Audit one study by name, or all.

    Parameters
    ----------
    name : str or None
        The study; None for all.
    settings : mapping
        What was typed beside it, which goes before the configuration.
    paths : tuple of str or None
        Where records, pages and plots go; for all studies, folders.
    again : str
        The command that audits the one study again.
    project : str
        Folder of the configuration, or below it.

    Returns
    -------
    int
        The exit status, the worst of all.
    """
    try:
        configuration = read(project)
    except NoConfiguration as none:
        if name is not None:
            parse(name)  # says how a function is written
        raise CallError(f"no function is named, and {none.message}", none.hint) from None
    if name is None:
        return _all(configuration, settings, paths)
    study = configuration.study(name)
    check_outputs(*paths)
    (outcome,) = run_all([study], watching, {**settings, "again": again})
    if outcome.record is None:
        return say_faults(outcome.faults or ("interrupted",), outcome.status)
    deliver(outcome.record, *paths)
    return say_faults(outcome.faults, outcome.status)


def _all(configuration: Configuration, settings: Mapping[str, Any], paths: Paths) -> int:
    from steplaw.faces.terminal_studies import Studies

    studies = must_have_studies(configuration)
    folders = [_folder(path) for path in paths]
    shown = Studies(screen(), [study.name for study in studies])
    shown.heading(f"{len(studies)} studies of", str(configuration.file))
    outcomes = []
    for outcome in run_all(studies, watching, settings):
        shown.audited(outcome.study.name, outcome.record, outcome.faults)
        if outcome.record is not None:
            _keep(outcome.record, outcome.study.name, folders)
        outcomes.append(outcome)
    shown.total(summary(outcomes, studies))
    return max(outcome.status for outcome in outcomes)


def must_have_studies(configuration: Configuration) -> Sequence[NamedStudy]:
    """Give all studies of a configuration.

    Parameters
    ----------
    configuration : Configuration
        As read.

    Raises
    ------
    CallError
        If there is none.
    """
    if not configuration.studies:
        raise CallError(
            f"{configuration.file} has no studies",
            'write [tool.steplaw.studies.NAME] and under it subject = "path/to/file.py:name"',
        )
    return configuration.studies


def summary(outcomes: Sequence[Outcome], studies: Sequence[NamedStudy]) -> str:
    """Say how many studies ended how.

    Parameters
    ----------
    outcomes : sequence of Outcome
        Those that were begun.
    studies : sequence of NamedStudy
        All of them.
    """
    finished = sum(not outcome.faults and not outcome.interrupted for outcome in outcomes)
    parts = [f"{finished} of {len(studies)} finished"]
    failed = [o.study.name for o in outcomes if o.faults and not o.interrupted]
    if failed:
        parts.append(f"failed: {listing(failed)}")
    left = [s.name for s in studies[finished + len(failed) :]]
    if left:
        parts.append(f"not finished: {listing(left)}")
    return ", ".join(parts)


@contextmanager
def watching(study: NamedStudy, place: int, count: int) -> Iterator[Report | None]:
    """Show the progress of one study among several.

    Parameters
    ----------
    study : NamedStudy
        The study.
    place, count : int
        Its place, and how many there are.
    """
    label = f"{study.name} ({place} of {count}): " if count > 1 else ""
    with progress(label) as report:
        yield report


def _folder(path: str | None) -> Path | None:
    if path is None:
        return None
    if path == "-":
        raise CallError("--json - holds one record", "name a study, or give a folder for all")
    folder = Path(path).resolve()
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as fault:
        raise CallError(
            f"cannot write into {path}: {fault.strerror}", "for all studies, give a folder"
        ) from None
    return folder


def _keep(record: AuditRecord, name: str, folders: Sequence[Path | None]) -> None:
    into_json, into_page, into_plot = (
        None if folder is None else folder / f"{name}{ending}"
        for folder, ending in zip(folders, ENDINGS, strict=True)
    )
    if into_json is not None:
        record.write(into_json)
    if into_page is not None:
        from steplaw.faces import render

        write(str(into_page), str(render(record, "page")))
    if into_plot is not None:
        from steplaw.faces.plot import picture

        write(str(into_plot), picture(record, "svg"))
