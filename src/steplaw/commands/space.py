"""``steplaw space``."""

from __future__ import annotations

from typing import Any

import click

from steplaw.commands.output import deliver, must_be_writable
from steplaw.commands.searching import again, searching
from steplaw.study import make_study


@click.command("space")
@click.argument("subject")
@click.option(
    "--feed",
    metavar="EXPR|FILE.py:FUNCTION",
    help="What builds the arguments. Without it, type hints are used.",
)
@click.option("--sizes", metavar="SPEC", multiple=True, help="Sizes, as for audit.")
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
def command(subject: str, json_path: str | None, sizes: tuple[str, ...], **given: Any) -> int:
    """Find the laws of the elements and the memory that SUBJECT holds at its peak.

    SUBJECT is path/to/file.py:name, package.module:name, or either with Class.method.
    """
    study = make_study(subject, sizes=sizes or None, again=again(), clock=False, **given)
    must_be_writable(json_path)
    from steplaw.worst.space import space

    with searching() as report:
        record = space(study, report)
    deliver(record, json_path)
    return 0
