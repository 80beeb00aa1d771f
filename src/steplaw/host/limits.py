"""Limits on one run, and what became of a run that did not end well."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

MEGABYTE = 1 << 20


@dataclass(frozen=True, slots=True)
class Limits:
    """Limits on one run of the subject.

    Parameters
    ----------
    seconds : float
        Wall-clock time of one run.
    megabytes : int
        Memory that one run may take beyond what the process holds before it.
    """

    seconds: float = 60.0
    megabytes: int = 4096


@dataclass(frozen=True, slots=True)
class Failure:
    """A run that did not end well.

    Parameters
    ----------
    kind : str
        'raised', 'exit', 'time', 'memory' or 'crash' of the subject; 'feed' for a feed that
        raised, 'interrupted' for a person's interrupt, 'fault' for a defect of steplaw.
    message : str
        One line for the person.
    at : mapping of str to int
        The size.
    draw : int
        The draw.
    """

    kind: str
    message: str
    at: Mapping[str, int]
    draw: int = 0

    def as_json(self) -> dict[str, Any]:
        """Give the failure as the record's ``stopped``."""
        return {
            "at": dict(self.at),
            "draw": self.draw,
            "kind": self.kind,
            "message": self.message,
        }
