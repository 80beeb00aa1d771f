"""``steplaw show``."""

from __future__ import annotations

import click

from steplaw.commands.output import say, show


@click.command("show")
@click.argument("record_path", metavar="RECORD.json")
@click.option(
    "--as",
    "face",
    type=click.Choice(["terminal", "page", "markdown"]),
    default="terminal",
    show_default=True,
    help="How to show it.",
)
def command(record_path: str, face: str) -> int:
    """Show a stored record: the sheet in the terminal, as a page, or as Markdown."""
    from steplaw.record import read

    record = read(record_path)
    if face == "terminal":
        show(record)
        return 0
    from steplaw.faces import render

    say(f"{render(record, face)}\n")
    return 0
