"""``steplaw audit``."""

from __future__ import annotations

import shlex
import sys
from collections.abc import Mapping
from typing import Any

import click

from steplaw.commands.output import deliver, must_be_writable
from steplaw.errors import CallError, SubjectError
from steplaw.record import Record
from steplaw.study import make_study
from steplaw.wording import listing


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
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
@click.option("--page", "page_path", metavar="PATH", help="Write the sheet as an HTML page.")
@click.option("--plot", "plot_path", metavar="PATH", help="Write the plots, .svg or .png.")
def command(
    subject: str,
    json_path: str | None,
    page_path: str | None,
    plot_path: str | None,
    sizes: tuple[str, ...],
    **given: Any,
) -> int:
    """Find the law that the step count of SUBJECT follows.

    SUBJECT is path/to/file.py:name, package.module:name, or either with Class.method.
    """
    study = make_study(subject, sizes=sizes or None, again=again(), **given)
    _check_outputs(json_path, page_path, plot_path)
    from steplaw.commands.progress import progress
    from steplaw.job import run

    with progress() as report:
        record = run(study, report)
    deliver(record, json_path, page_path, plot_path)
    return say_what_failed(record, subject)


def _check_outputs(json_path: str | None, page_path: str | None, plot_path: str | None) -> None:
    if plot_path is not None:
        from steplaw.faces.plot import kind_of

        kind_of(plot_path)
    must_be_writable(json_path, page_path, plot_path)


def say_what_failed(record: Record, subject: str) -> int:
    """Give one line for each thing that did not end well, and the exit status."""
    status = 0
    repeatable, stopped = record["repeatable"], record["stopped"]
    if repeatable is not None and not repeatable["holds"]:
        places = sorted({(x["file"], x["line"]) for x in repeatable["lines"]})
        at = f", at {listing(f'{file}:{line}' for file, line in places)}" if places else ""
        click.echo(f"steplaw: the tally of {subject} changes from run to run{at}", err=True)
        status = SubjectError.exit_status
    if stopped is not None:
        click.echo(f"steplaw: {_told(stopped, subject)}", err=True)
        is_call = stopped["kind"] == "feed"
        status = CallError.exit_status if is_call else SubjectError.exit_status
    return status


def _told(stopped: Mapping[str, Any], subject: str) -> str:
    if stopped["kind"] == "feed":
        return str(stopped["message"])
    size = ", ".join(f"{name}={value}" for name, value in stopped["at"].items())
    who = "the audit" if stopped["kind"] == "interrupted" else subject
    return f"{who} {stopped['message']} (at {size})"


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
