"""``steplaw store``."""

from __future__ import annotations

import json
from datetime import datetime
from pathlib import Path

import click

from steplaw.commands.output import must_be_writable, say
from steplaw.errors import CallError
from steplaw.store import Store
from steplaw.store.database import VARIABLE, default_path


def _store() -> Store:
    path = default_path()
    if path is None:
        raise CallError(f"the store is turned off by {VARIABLE}", f"unset {VARIABLE}")
    return Store(path)


@click.group("store")
def command() -> None:
    """List, prune or export the finished runs that are kept."""


@command.command("list")
def list_() -> int:
    """List what is kept, by subject, the last used first."""
    if default_path() is None:
        say(f"the store is turned off by {VARIABLE}\n")
        return 0
    store = _store()
    entries = store.entries()
    say(f"{store.path}\n")
    if not entries:
        say("nothing is kept there\n")
        return 0
    width = max(len(e.subject) for e in entries)
    say(f"{'subject':<{width}}  python   answers      bytes  last used\n")
    for e in entries:
        used = datetime.fromtimestamp(e.used).astimezone().strftime("%Y-%m-%d")
        say(f"{e.subject:<{width}}  {e.python:<7} {e.answers:>8} {e.bytes:>10}  {used}\n")
    return 0


@command.command("prune")
@click.option(
    "--days",
    type=click.FloatRange(min=0),
    default=90.0,
    show_default=True,
    metavar="D",
    help="Take out what was not used for so many days; 0 for everything.",
)
def prune(days: float) -> int:
    """Take out what has not been used for some time."""
    store = _store()
    gone = store.prune(days)
    say(f"{gone} answers taken out of {store.path}\n")
    return 0


@command.command("export")
@click.argument("path", metavar="PATH|-")
@click.option("--subject", metavar="SUBJECT", help="What is kept of this subject alone.")
def export(path: str, subject: str | None) -> int:
    """Write what is kept as JSON, one answer a line."""
    store = _store()
    must_be_writable(path)
    lines = (json.dumps(answer) + "\n" for answer in store.export(subject))
    if path == "-":
        for line in lines:
            say(line)
        return 0
    with Path(path).open("w", encoding="utf-8") as file:
        file.writelines(lines)
    return 0
