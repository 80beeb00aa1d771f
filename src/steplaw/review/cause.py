"""The line to look at: the one that carries most of a figure, read off a finished record."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True, slots=True)
class Place:
    """A line of the code.

    Parameters
    ----------
    file : str
        Its source file.
    line : int
        Its number.
    source : str
        Its text.
    """

    file: str
    line: int
    source: str

    def __str__(self) -> str:
        return f"{self.file}:{self.line}: {self.source}"


def line_to_look_at(record: Mapping[str, Any], figure: str) -> Place | None:
    """Give the line that carries most of a figure at the largest size run.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    figure : str
        ``native`` and, where C code does most of the work, ``work`` are looked up in the native
        ledger; any other among the steps by line.
    """
    ledger = record.get("ledger") or {}
    in_c = figure == "native" or (figure in ("work", "elements") and ledger.get("leads"))
    rows = (ledger.get("rows") or []) if in_c else record["lines"]
    rows = [row for row in rows if row.get("line")]
    if not rows:
        return None
    most = max(rows, key=lambda row: float(row.get("share") or 0))
    return Place(str(most["file"]), int(most["line"]), str(most.get("source") or "").strip())
