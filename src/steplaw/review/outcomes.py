"""Studies audited one after the other: one that fails stops no other, and no result is lost."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import AbstractContextManager
from dataclasses import dataclass
from typing import Any

from steplaw.errors import CallError, SteplawError, SubjectError
from steplaw.job import Report
from steplaw.record import AuditRecord
from steplaw.review.configuration import NamedStudy
from steplaw.wording import listing

#: Gives the reporter of one study, by its place among all.
Watching = Callable[[NamedStudy, int, int], AbstractContextManager[Report | None]]


@dataclass(frozen=True, slots=True)
class Outcome:
    """How the audit of one study ended.

    Parameters
    ----------
    study : NamedStudy
        The study.
    record : AuditRecord or None
        What was finished of it; None where it could not begin.
    faults : tuple of str
        One line for each thing that did not end well.
    status : int
        The exit status that it asks for: 0, 2 or 3.
    """

    study: NamedStudy
    record: AuditRecord | None
    faults: tuple[str, ...]
    status: int

    @property
    def interrupted(self) -> bool:
        """Whether a person ended it."""
        return self.record is None if not self.faults else is_interrupted(self.record)


def run_all(
    studies: Sequence[NamedStudy], watching: Watching, settings: Mapping[str, Any]
) -> Iterator[Outcome]:
    """Audit studies one after the other.

    Parameters
    ----------
    studies : sequence of NamedStudy
        In this order.
    watching : callable
        Gives the reporter of each study.
    settings : mapping
        Settings that go before those of the configuration.

    Yields
    ------
    Outcome
        As each study ends. After an interrupt there is no further one.
    """
    for place, study in enumerate(studies, 1):
        try:
            with watching(study, place, len(studies)) as report:
                record = study.audit(report, **settings)
        except SteplawError as fault:
            yield Outcome(study, None, (str(fault),), fault.exit_status)
            continue
        except KeyboardInterrupt:
            yield Outcome(study, None, (), SubjectError.exit_status)
            return
        faults, status = faults_of(record, study.name)
        yield Outcome(study, record, faults, status)
        if is_interrupted(record):
            return


def is_interrupted(record: Mapping[str, Any] | None) -> bool:
    """Whether a person ended an audit before its end.

    Parameters
    ----------
    record : mapping or None
        A `steplaw.audit/1` record.
    """
    stopped = None if record is None else record["stopped"]
    return stopped is not None and stopped["kind"] == "interrupted"


def faults_of(record: Mapping[str, Any], name: str) -> tuple[tuple[str, ...], int]:
    """Say what did not end well in an audit.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    name : str
        What messages call the subject.

    Returns
    -------
    tuple of tuple of str, and int
        One line for each thing, and the exit status.
    """
    faults, status = [], 0
    repeatable, stopped = record["repeatable"], record["stopped"]
    if repeatable is not None and not repeatable["holds"]:
        places = sorted({(x["file"], x["line"]) for x in repeatable["lines"]})
        at = f", at {listing(f'{file}:{line}' for file, line in places)}" if places else ""
        faults.append(f"the tally of {name} changes from run to run{at}")
        status = SubjectError.exit_status
    if stopped is not None:
        faults.append(_told(stopped, name))
        is_call = stopped["kind"] == "feed"
        status = CallError.exit_status if is_call else SubjectError.exit_status
    return tuple(faults), status


def _told(stopped: Mapping[str, Any], name: str) -> str:
    if stopped["kind"] == "feed":
        return str(stopped["message"])
    size = ", ".join(f"{size}={value}" for size, value in stopped["at"].items())
    who = "the audit" if stopped["kind"] == "interrupted" else name
    return f"{who} {stopped['message']} (at {size})"
