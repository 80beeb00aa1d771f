"""``steplaw audit``."""

from __future__ import annotations

import shlex
import sys
from typing import Any

import click

from steplaw.commands.output import check_outputs, deliver, say_faults
from steplaw.commands.project import PROJECT
from steplaw.errors import CallError
from steplaw.record import Record
from steplaw.study import make_study


@click.command("audit")
@click.argument("subject", required=False)
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
@click.option("--costs", metavar="FILE.toml", help="Weights: the figure is the cost they make.")
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
@click.option("--fresh", is_flag=True, help="Run everything anew, whatever the store has.")
@click.option(
    "--processes", type=int, metavar="N", help="Runs made at once; all processors by default."
)
@click.option("--cluster", metavar="ADDRESS", help="A Dask scheduler whose workers make the runs.")
@PROJECT
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
@click.option("--page", "page_path", metavar="PATH", help="Write the sheet as an HTML page.")
@click.option("--plot", "plot_path", metavar="PATH", help="Write the plots, .svg or .png.")
def command(
    subject: str | None,
    json_path: str | None,
    page_path: str | None,
    plot_path: str | None,
    sizes: tuple[str, ...],
    project: str,
    **given: Any,
) -> int:
    """Find the law that the step count of SUBJECT follows.

    SUBJECT is path/to/file.py:name, package.module:name, either with Class.method, or the name of
    a study in the project's configuration. Without it all studies are audited, and PATH is a
    folder.
    """
    given["sizes"] = sizes or None
    paths = (json_path, page_path, plot_path)
    if subject is None or _names_a_study(subject):
        from steplaw.commands.studies import audit_studies

        typed = {key: value for key, value in given.items() if _is_typed(key)}
        return audit_studies(subject, typed, paths, again(), project)
    if _is_typed("project"):
        raise CallError("--project is for studies by name", "leave it out beside a function")
    study = make_study(subject, again=again(), **given)
    check_outputs(*paths)
    from steplaw.commands.progress import progress
    from steplaw.job import run

    with progress() as report:
        record = run(study, report)
    deliver(record, *paths)
    return say_what_failed(record, subject)


def say_what_failed(record: Record, subject: str) -> int:
    """Give one line for each thing that did not end well, and the exit status."""
    from steplaw.review.outcomes import faults_of

    return say_faults(*faults_of(record, subject))


def _names_a_study(subject: str) -> bool:
    return ":" not in subject and "/" not in subject and not subject.endswith(".py")


def _is_typed(name: str) -> bool:
    source = click.get_current_context().get_parameter_source(name)
    return source is click.core.ParameterSource.COMMANDLINE


#: Where the record goes and where the runs are made: no part of what is audited.
_WITH_VALUE = ("--json", "--page", "--plot", "--processes", "--cluster")


def again() -> str:
    """Give the command as it was typed, without where the record goes."""
    words = sys.argv[1:]
    kept: list[str] = []
    skip = False
    for word in words:
        if skip:
            skip = False
        elif word in _WITH_VALUE:
            skip = True
        elif word != "--fresh" and not word.startswith(tuple(f"{w}=" for w in _WITH_VALUE)):
            kept.append(word)
    return shlex.join(["steplaw", *kept])
