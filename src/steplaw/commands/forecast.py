"""``steplaw forecast``."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from steplaw.commands.audit import again, say_what_failed
from steplaw.commands.output import deliver, must_be_writable
from steplaw.errors import CallError
from steplaw.study import make_study

if TYPE_CHECKING:
    from steplaw.record import Record

Asked = tuple[tuple[str, ...], tuple[str, ...], tuple[str, ...]]
AUDIT_ALONE = ("feed", "every", "sizes", "only_sizes", "costs", "fresh", "processes", "cluster")


@click.command("forecast")
@click.argument("subject", metavar="SUBJECT|RECORD.json")
@click.option(
    "--at",
    metavar="N",
    multiple=True,
    help="A size, 10000000 or 1e7; n=1000,m=50 where there are several. May be given again.",
)
@click.option(
    "--within",
    metavar="LIMIT",
    multiple=True,
    help="Find the largest size that fits: 2s, 500ms, 5min, 1h or 1e9steps.",
)
@click.option(
    "--hold", metavar="m=N", multiple=True, help="A size that --within holds, where several are."
)
@click.option(
    "--feed",
    metavar="EXPR|FILE.py:FUNCTION",
    help="What builds the arguments. Without it, type hints are used.",
)
@click.option("--every", metavar="EXPR", help="An expression that gives every input of size n.")
@click.option("--sizes", metavar="SPEC", multiple=True, help="Sizes to run, as for audit.")
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
def command(
    subject: str,
    at: tuple[str, ...],
    within: tuple[str, ...],
    hold: tuple[str, ...],
    json_path: str | None,
    **given: Any,
) -> int:
    """Foretell steps and time of SUBJECT at sizes that are not run.

    SUBJECT is path/to/file.py:name, package.module:name, or either with Class.method; it is
    audited at small sizes first. A stored RECORD.json of an audit is read, and nothing is run.
    """
    must_be_writable(json_path)
    asked = at, within, hold
    status = 0
    if _is_record(subject):
        audit = _stored(subject, given)
    else:
        audit = _audited(subject, asked, given)
        status = say_what_failed(audit, subject)
    from steplaw.forecast import forecast

    deliver(forecast(audit, *asked, again()), json_path)
    return status


def _is_record(subject: str) -> bool:
    return subject.endswith(".json") and ":" not in subject


def _stored(path: str, given: dict[str, Any]) -> Record:
    from steplaw.record import read

    extra = next((name for name in AUDIT_ALONE if given[name]), None)
    if extra is not None:
        option = f"--{extra.replace('_', '-')}"
        raise CallError(
            f"{option} is for a subject, and {path} is a record that is read, not run",
            f"leave {option} out",
        )
    record = read(path)
    if record["schema"] != "steplaw.audit/1":
        raise CallError(
            f"{path} is no audit but a {record['schema']} record",
            "give what steplaw audit --json wrote",
        )
    return record


def _audited(subject: str, asked: Asked, given: dict[str, Any]) -> Record:
    from steplaw.commands.progress import progress
    from steplaw.forecast.job import check_asked
    from steplaw.job import run

    given["sizes"] = given["sizes"] or None
    study = make_study(subject, again=again(), **given)
    check_asked(*asked, names=study.plan.names, clock=study.clock and not study.every)
    with progress() as report:
        return run(study, report)
