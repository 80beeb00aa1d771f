"""``steplaw show``."""

from __future__ import annotations

import sys

import click

from steplaw.commands.output import say, say_bytes, show
from steplaw.errors import CallError
from steplaw.record import Record


@click.command("show")
@click.argument("record_path", metavar="RECORD.json")
@click.option(
    "--as",
    "face",
    type=click.Choice(["terminal", "page", "markdown", "svg", "png"]),
    default="terminal",
    show_default=True,
    help="How to show it.",
)
def command(record_path: str, face: str) -> int:
    """Show a stored record: in the terminal, as a page, as Markdown, or its plots."""
    from steplaw.record import read

    record = read(record_path)
    if face == "terminal":
        show(record)
        return 0
    if face == "png":
        say_bytes(_picture(record))
        return 0
    from steplaw.faces import render

    say(f"{render(record, face)}\n")
    return 0


def _picture(record: Record) -> bytes:
    if record["schema"] != "steplaw.audit/1":
        raise CallError("only an audit has plots", "give --as terminal")
    if sys.stdout.isatty():
        raise CallError("a picture is not for the terminal", "write --as png > plot.png")
    from steplaw.faces.plot import picture

    return picture(record, "png")
