"""``steplaw derive``."""

from __future__ import annotations

import click

from steplaw.commands.output import deliver, must_be_writable


@click.command("derive")
@click.argument("subject")
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
def command(subject: str, json_path: str | None) -> int:
    """Work out how often each line of SUBJECT runs, from its source, running nothing.

    SUBJECT is path/to/file.py:name, package.module:name, or either with Class.method.
    """
    must_be_writable(json_path)
    from steplaw.derivation import derive

    deliver(derive(subject), json_path)
    return 0
