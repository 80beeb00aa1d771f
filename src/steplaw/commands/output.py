"""Where a record goes: the terminal, a JSON file or standard output, a page."""

from __future__ import annotations

import sys
from pathlib import Path

from steplaw.errors import CallError
from steplaw.record import Record


def deliver(
    record: Record, json_path: str | None, page_path: str | None = None, *, error: bool = False
) -> None:
    """Write a record to where it was asked for and show its sheet.

    Parameters
    ----------
    record : Record
        The finished record.
    json_path : str or None
        A path, or ``-`` for standard output, which then holds the record alone.
    page_path : str or None
        Path of an HTML page.
    error : bool
        Whether the sheet goes to standard error in any case.
    """
    if json_path == "-":
        sys.stdout.write(record.to_json())
    elif json_path is not None:
        record.write(json_path)
    if page_path is not None:
        from steplaw.faces import render

        write(page_path, str(render(record, "page")))
    show(record, error=error or json_path == "-")


def show(record: Record, *, error: bool = False) -> None:
    """Show a record's sheet in the terminal.

    Parameters
    ----------
    record : Record
        The finished record.
    error : bool
        Whether it goes to standard error.
    """
    from rich.console import Console

    from steplaw.faces import terminal

    terminal.show(record, Console(stderr=error, highlight=False))


def write(path: str, text: str) -> None:
    """Write a text file.

    Raises
    ------
    CallError
        If it cannot be written.
    """
    try:
        Path(path).write_text(text, encoding="utf-8")
    except OSError as error:
        raise CallError(f"cannot write {path}: {error.strerror}", "give another path") from None
