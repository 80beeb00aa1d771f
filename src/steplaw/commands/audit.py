"""``steplaw audit``."""

from __future__ import annotations

import shlex
import sys
from typing import Any

import click

from steplaw.commands.output import deliver
from steplaw.study import make_study


@click.command("audit")
@click.argument("subject")
@click.option(
    "--feed",
    metavar="EXPR|FILE.py:FUNCTION",
    help="What builds the arguments: an expression in n and rng (args(a, b) for several), or a "
    "function of these. Without it, type hints are used.",
)
@click.option("--every", metavar="EXPR", help="An expression that gives every input of size n.")
@click.option(
    "--sizes",
    metavar="SPEC",
    multiple=True,
    help="4,8,15 a list; 8..4096 doubling; 10..100+10 in equal steps; n=4..64 m=4..64 a grid.",
)
@click.option("--only-sizes", is_flag=True, help="Run the given sizes alone.")
@click.option("--draws", type=int, default=5, show_default=True, help="Inputs at each size.")
@click.option(
    "--figure",
    default="steps",
    show_default=True,
    metavar="NAME",
    help="steps, an operation class such as comparison, or line:N.",
)
@click.option("--clock/--no-clock", default=True, help="Hold the law against the clock, or not.")
@click.option(
    "--limit-seconds",
    type=float,
    default=60,
    show_default=True,
    metavar="S",
    help="Longest time of one run.",
)
@click.option(
    "--limit-memory",
    type=int,
    default=4096,
    show_default=True,
    metavar="MB",
    help="Most memory of one run.",
)
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
@click.option("--page", "page_path", metavar="PATH", help="Write the sheet as an HTML page.")
def command(
    subject: str, json_path: str | None, page_path: str | None, sizes: tuple[str, ...], **given: Any
) -> int:
    """Find the law that the step count of SUBJECT follows.

    SUBJECT is path/to/file.py:name, package.module:name, or either with Class.method.
    """
    study = make_study(subject, sizes=sizes or None, again=_again(), **given)
    from steplaw.audit import run
    from steplaw.commands.progress import progress

    with progress() as report:
        record = run(study, report)
    deliver(record, json_path, page_path)
    stopped = record["stopped"]
    if not record["repeatable"]["holds"]:
        lines = sorted({f"{x['file']}:{x['line']}" for x in record["repeatable"]["lines"]})
        click.echo(
            f"steplaw: the tally of {subject} changes from run to run, at {', '.join(lines)}",
            err=True,
        )
    if stopped is not None:
        size = ", ".join(f"{name}={value}" for name, value in stopped["at"].items())
        click.echo(f"steplaw: {subject} {stopped['message']} (at {size})", err=True)
        return 3
    return 0


def _again() -> str:
    words = sys.argv[1:]
    kept: list[str] = []
    skip = False
    for word in words:
        if skip:
            skip = False
        elif word in ("--json", "--page"):
            skip = True
        elif not word.startswith(("--json=", "--page=")):
            kept.append(word)
    return shlex.join(["steplaw", *kept])
