"""Progress of a search on standard error, and the command that repeats it."""

from __future__ import annotations

import shlex
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager


@contextmanager
def searching() -> Iterator[Callable[[str, int, int], None] | None]:
    """Show what is searched; nothing where standard error is no terminal.

    Yields
    ------
    callable or None
        Takes what is done, the size, and the largest figure so far.
    """
    if not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.status import Status

    with Status("loading the subject", console=Console(stderr=True)) as status:

        def report(what: str, n: int, most: int) -> None:
            status.update(f"{what}: n={n} done, {most:,} the most".replace(",", " "))

        yield report


def again() -> str:
    """Give the command as it was typed, without where the record goes."""
    kept: list[str] = []
    skip = False
    for word in sys.argv[1:]:
        if skip or word == "--json":
            skip = not skip
        elif not word.startswith("--json="):
            kept.append(word)
    return shlex.join(["steplaw", *kept])
