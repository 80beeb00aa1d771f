"""Where a record goes: the terminal, a JSON file or standard output, a page."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import IO, TYPE_CHECKING

from steplaw.errors import CallError
from steplaw.record import Record

if TYPE_CHECKING:
    from rich.console import Console


def deliver(
    record: Record,
    json_path: str | None,
    page_path: str | None = None,
    plot_path: str | None = None,
    *,
    error: bool = False,
) -> None:
    """Show a record's sheet and write the record to where it was asked for.

    The sheet comes first, so that a file that cannot be written loses nothing of it.

    Parameters
    ----------
    record : Record
        The finished record.
    json_path : str or None
        A path, or ``-`` for standard output, which then holds the record alone.
    page_path : str or None
        Path of an HTML page.
    plot_path : str or None
        Path of a picture of the plots, ``.svg`` or ``.png``.
    error : bool
        Whether the sheet goes to standard error in any case.
    """
    if json_path == "-":
        say(record.to_json())
    show(record, error=error or json_path == "-")
    if json_path not in (None, "-"):
        record.write(str(json_path))
    if page_path is not None:
        from steplaw.faces import render

        write(page_path, str(render(record, "page")))
    if plot_path is not None:
        from steplaw.faces.plot import kind_of, picture

        write(plot_path, picture(record, kind_of(plot_path)))


def check_outputs(json_path: str | None, page_path: str | None, plot_path: str | None) -> None:
    """Find out before long work whether its results can be written.

    Parameters
    ----------
    json_path, page_path, plot_path : str or None
        As given.

    Raises
    ------
    CallError
        If one of them cannot.
    """
    if plot_path is not None:
        from steplaw.faces.plot import kind_of

        kind_of(plot_path)
    must_be_writable(json_path, page_path, plot_path)


def say_faults(faults: Sequence[str], status: int) -> int:
    """Say what did not end well, and give the exit status on.

    Parameters
    ----------
    faults : sequence of str
        One line each.
    status : int
        The exit status.
    """
    for fault in faults:
        print(f"steplaw: {fault}", file=sys.stderr)
    return status


def must_be_writable(*paths: str | None) -> None:
    """Find out before long work whether its result can be written.

    Parameters
    ----------
    *paths : str or None
        As given after ``--json`` or ``--page``; None and ``-`` are no files.

    Raises
    ------
    CallError
        If one of them cannot be opened.
    """
    for path in paths:
        if path in (None, "-"):
            continue
        file = Path(str(path))
        if file.exists() and not file.is_file() and not file.is_dir():
            continue  # a pipe or a device would be changed by opening it
        was_there = file.exists()
        try:
            with file.open("ab"):
                pass
        except OSError as error:
            hint = "give a path in a folder that can be written"
            raise CallError(f"cannot write {path}: {error.strerror or error}", hint) from None
        if not was_there:
            file.unlink()


def show(record: Record, *, error: bool = False) -> None:
    """Show a record's sheet in the terminal.

    Parameters
    ----------
    record : Record
        The finished record.
    error : bool
        Whether it goes to standard error.
    """
    from steplaw.faces.terminal import show as show_sheet
    from steplaw.faces.terminal_derive import show_derivation
    from steplaw.faces.terminal_forecast import show_forecast
    from steplaw.faces.terminal_life import show_life, show_space, show_typical
    from steplaw.faces.terminal_tally import show_tally
    from steplaw.faces.terminal_versus import show_versus
    from steplaw.faces.terminal_worst import show_worst

    faces = {
        "steplaw.tally/1": show_tally,
        "steplaw.derive/1": show_derivation,
        "steplaw.forecast/1": show_forecast,
        "steplaw.versus/1": show_versus,
        "steplaw.worst/1": show_worst,
        "steplaw.life/1": show_life,
        "steplaw.typical/1": show_typical,
        "steplaw.space/1": show_space,
    }
    faces.get(record["schema"], show_sheet)(record, screen(error=error))


def screen(*, error: bool = False) -> Console:
    """Give the terminal, which stays quiet when nobody reads it any more.

    Parameters
    ----------
    error : bool
        Whether it is standard error.
    """
    from rich.console import Console

    class Screen(Console):
        def on_broken_pipe(self) -> None:
            self.quiet = True
            nobody_reads(self.file)

    return Screen(stderr=error, highlight=False)


def say(text: str) -> None:
    """Write a text to standard output, for as long as someone reads it.

    Parameters
    ----------
    text : str
        Written as it is.
    """
    try:
        sys.stdout.write(text)
        sys.stdout.flush()
    except BrokenPipeError:
        nobody_reads(sys.stdout)


def say_bytes(data: bytes) -> None:
    """Write bytes to standard output, for as long as someone reads them.

    Parameters
    ----------
    data : bytes
        Written as they are.
    """
    try:
        sys.stdout.buffer.write(data)
        sys.stdout.buffer.flush()
    except BrokenPipeError:
        nobody_reads(sys.stdout)


def nobody_reads(stream: IO[str]) -> None:
    """Send to nowhere what a reader that has gone would have got.

    Parameters
    ----------
    stream : file
        Standard output or error.
    """
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, stream.fileno())
    os.close(nowhere)


def write(path: str, content: str | bytes) -> None:
    """Write a file, text as UTF-8.

    Raises
    ------
    CallError
        If it cannot be written.
    """
    try:
        data = content.encode("utf-8") if isinstance(content, str) else content
        Path(path).write_bytes(data)
    except OSError as error:
        hint = "give a path in a folder that can be written"
        raise CallError(f"cannot write {path}: {error.strerror or error}", hint) from None
