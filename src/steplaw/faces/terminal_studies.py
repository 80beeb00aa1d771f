"""Many studies in the terminal: a line of verdict for each, as it ends."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from steplaw.faces import reading
from steplaw.faces.sheet import ACCENT, BAD, HEAD, QUIET, UNSURE, Sheet

if TYPE_CHECKING:
    from rich.console import Console

WIDEST_NAME = 24


class Studies:
    """Prints the studies of a project.

    Parameters
    ----------
    console : rich.console.Console
        Where to.
    names : sequence of str
        Names of all studies that may follow.
    """

    def __init__(self, console: Console, names: Sequence[str]) -> None:
        self._sheet = Sheet(console)
        longest = max((len(name) for name in names), default=0)
        self._name_width = min(longest, WIDEST_NAME)

    def heading(self, text: str, aside: str) -> None:
        """Print what is begun, and for which configuration file."""
        from rich.text import Text

        line = Text(f"{text} ", style=HEAD)
        line.append(self._sheet.clean(aside), style=QUIET)
        self._sheet.emit(line)

    def audited(self, name: str, record: Mapping[str, Any] | None, faults: Sequence[str]) -> None:
        """Print how the audit of a study ended.

        Parameters
        ----------
        name : str
            The study.
        record : mapping or None
            Its `steplaw.audit/1` record, as far as it was finished.
        faults : sequence of str
            What did not end well.
        """
        said = "" if record is None else " · ".join(reading.verdict(record, self._sheet.unicode))
        rows = [(said, "")] if said else []
        if record is None and not faults:
            rows = [("interrupted before the first size", UNSURE)]
        rows += [(fault, BAD) for fault in faults]
        self.row(name, rows)

    def row(self, name: str, texts: Sequence[tuple[str, str]]) -> None:
        """Print a study's name and, beside it, paragraphs with their styles."""
        from rich.table import Table
        from rich.text import Text

        table = Table.grid(padding=(0, 2, 0, 0))
        table.add_column(width=self._name_width, no_wrap=True, overflow="ellipsis")
        table.add_column(overflow="fold")
        for place, (text, style) in enumerate(texts):
            label = Text(self._sheet.clean(name), style=ACCENT) if not place else Text("")
            table.add_row(label, Text(self._sheet.clean(text), style=style))
        self._sheet.emit(table)

    def total(self, text: str) -> None:
        """Print the last line."""
        self._sheet.say(text, QUIET, indent=0)
