"""Progress on standard error, where a person is watching."""

from __future__ import annotations

import sys
import time
from collections.abc import Iterator, Mapping
from contextlib import contextmanager

from steplaw.job import Report

#: Steps from which on their own rate tells the time left, and the rate that is taken before.
TELLING, USUAL_RATE = 2_000_000, 2e7


@contextmanager
def progress(label: str = "") -> Iterator[Report | None]:
    """Show what is being done and the time left; nothing where standard error is no terminal.

    Parameters
    ----------
    label : str
        Stands before what is being done.

    Yields
    ------
    callable or None
        The reporter that `steplaw.job.run` takes.
    """
    if not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn

    bar = Progress(
        TextColumn("{task.description}"),
        BarColumn(bar_width=24),
        TextColumn("{task.fields[left]}"),
        console=Console(stderr=True),
        transient=True,
    )
    started = time.monotonic()
    with bar:
        task = bar.add_task(f"{label}loading the subject", total=None, left="")

        def report(what: str, at: Mapping[str, int], done: int, rest: int | None) -> None:
            size = ", ".join(f"{name}={value}" for name, value in at.items())
            text = f"{what} at {size}" if what == "counting" else f"{what} up to {size}"
            total = None if rest is None else max(done + rest, 1)
            bar.update(
                task, description=label + text, completed=done, total=total, left=_left(done, rest)
            )

        def _left(done: int, rest: int | None) -> str:
            if not done or not rest:
                return ""
            rate = done / (time.monotonic() - started)
            if done < TELLING:  # the small sizes are all starting up and no steps
                rate = max(rate, USUAL_RATE)
            seconds = rest / rate
            return f"about {seconds:.0f} s left, by the law so far"

        yield report
