"""The text of ``steplaw --help``, kept in a file that is shown without importing click.

``python -m steplaw.commands.helptext`` writes the file anew after a change to the commands.
"""

from __future__ import annotations

from pathlib import Path

import click

from steplaw.commands import steplaw

FILE = Path(__file__).with_name("help.txt")
WIDTH = 80


def rendered() -> str:
    """Give the help page as click renders it, at a fixed width."""
    settings = {**steplaw.context_settings, "terminal_width": WIDTH}
    context = click.Context(steplaw, info_name="steplaw", **settings)
    return steplaw.get_help(context) + "\n"


def main() -> None:
    """Write the file."""
    FILE.write_text(rendered(), encoding="utf-8")


if __name__ == "__main__":
    main()
