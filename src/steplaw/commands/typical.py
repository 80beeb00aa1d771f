"""``steplaw typical``."""

from __future__ import annotations

from typing import Any

import click

from steplaw.commands.output import deliver, must_be_writable
from steplaw.commands.searching import again, searching
from steplaw.study import make_study


@click.command("typical")
@click.argument("subject")
@click.option(
    "--feed",
    metavar="EXPR|FILE.py:FUNCTION",
    help="What builds the arguments. Without it, type hints are used.",
)
@click.option("--every", metavar="EXPR", help="An expression that gives every input of size n.")
@click.option("--draws", type=int, default=60, show_default=True, help="Inputs at each size.")
@click.option("--only-sizes", is_flag=True, help="Run the given sizes alone.")
@click.option("--sizes", metavar="SPEC", multiple=True, help="Sizes, as for audit.")
@click.option(
    "--figure",
    default="steps",
    show_default=True,
    metavar="NAME",
    help="steps, an operation class such as comparison, or line:N.",
)
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
@click.option("--plot", "plot_path", metavar="PATH", help="Write a picture, .svg or .png.")
def command(
    subject: str, json_path: str | None, plot_path: str | None, sizes: tuple[str, ...], **given: Any
) -> int:
    """Find how the figure of SUBJECT is spread over its inputs, and the laws of that.

    SUBJECT is path/to/file.py:name, package.module:name, or either with Class.method.
    """
    study = make_study(subject, sizes=sizes or None, again=again(), clock=False, **given)
    if plot_path is not None:
        from steplaw.faces.plot import kind_of

        kind_of(plot_path)
    must_be_writable(json_path, plot_path)
    from steplaw.worst.typical import typical

    with searching() as report:
        record = typical(study, report)
    deliver(record, json_path)
    if plot_path is not None:
        from steplaw.commands.output import write
        from steplaw.faces.plot_typical import picture

        write(plot_path, picture(record, kind_of(plot_path)))
    return 0
