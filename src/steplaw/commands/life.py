"""``steplaw life``."""

from __future__ import annotations

from typing import Any

import click

from steplaw.commands.output import deliver, must_be_writable
from steplaw.commands.searching import again, searching
from steplaw.study import make_study


@click.command("life")
@click.argument("subject")
@click.option(
    "--feed",
    metavar="EXPR|FILE.py:FUNCTION",
    help="What builds the arguments. Without it, type hints are used.",
)
@click.option("--sizes", metavar="SPEC", multiple=True, help="Sizes, as for audit.")
@click.option(
    "--figure",
    default="steps",
    show_default=True,
    metavar="NAME",
    help="steps, an operation class such as comparison, or line:N.",
)
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
def command(subject: str, json_path: str | None, sizes: tuple[str, ...], **given: Any) -> int:
    """Count each operation of a life on one structure.

    SUBJECT gives the operations: an iterable of callables, or of tuples of a callable and its
    arguments, called one after the other and counted each by itself.
    """
    study = make_study(subject, sizes=sizes or None, again=again(), clock=False, **given)
    must_be_writable(json_path)
    from steplaw.worst.life import life

    with searching() as report:
        record = life(study, report)
    deliver(record, json_path)
    return 0
