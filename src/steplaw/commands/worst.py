"""``steplaw worst``."""

from __future__ import annotations

from typing import Any

import click

from steplaw.commands.output import deliver, must_be_writable
from steplaw.commands.searching import again, searching
from steplaw.errors import SubjectError
from steplaw.study import make_study


@click.command("worst")
@click.argument("subject")
@click.option("--at", "n", type=int, required=True, metavar="N", help="The size.")
@click.option(
    "--feed",
    metavar="EXPR|FILE.py:FUNCTION",
    help="What builds the arguments; its draws show what may vary. Without it, type hints are "
    "used.",
)
@click.option("--every", metavar="EXPR", help="An expression that gives every input of size n.")
@click.option(
    "--figure",
    default="steps",
    show_default=True,
    metavar="NAME",
    help="steps, an operation class such as comparison, or line:N.",
)
@click.option("--seed", type=int, default=0, show_default=True, help="Another search.")
@click.option(
    "--exhaust",
    type=click.IntRange(0, 8),
    default=7,
    show_default=True,
    metavar="N",
    help="Run every order up to this size.",
)
@click.option(
    "--limit-seconds",
    "seconds",
    type=float,
    metavar="S",
    help="End the search after so long; otherwise counts alone end it.",
)
@click.option("--write", metavar="FILE.py", help="Write the worst inputs there, as a feed.")
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
def command(
    subject: str,
    n: int,
    seed: int,
    exhaust: int,
    seconds: float | None,
    write: str | None,
    json_path: str | None,
    **given: Any,
) -> int:
    """Find the input of size N on which SUBJECT costs most.

    SUBJECT is path/to/file.py:name, package.module:name, or either with Class.method.
    """
    study = make_study(subject, again=again(), clock=False, **given)
    must_be_writable(json_path, write)
    from steplaw.worst.job import worst

    with searching() as report:
        record = worst(
            study, n, seed=seed, seconds=seconds, exhaust=exhaust, write=write, report=report
        )
    deliver(record, json_path)
    if record["search"]["ended"] == "interrupted":
        click.echo("steplaw: the search was interrupted; the worst so far is shown", err=True)
        return SubjectError.exit_status
    return 0
