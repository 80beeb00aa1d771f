"""``steplaw versus``."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import click

from steplaw.commands.audit import again, say_what_failed
from steplaw.commands.output import deliver, must_be_writable
from steplaw.errors import CallError
from steplaw.study import make_study

if TYPE_CHECKING:
    from steplaw.record import Record


@click.command("versus")
@click.argument("a", metavar="A")
@click.argument("b", metavar="B")
@click.option(
    "--hold", metavar="m=N", multiple=True, help="A size that is held, where there are several."
)
@click.option(
    "--feed",
    metavar="EXPR|FILE.py:FUNCTION",
    help="What builds the arguments of both. Without it, type hints are used.",
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
    help="steps, work, or an operation class such as comparison.",
)
@click.option("--costs", metavar="FILE.toml", help="Weights: the figure is the cost they make.")
@click.option("--clock/--no-clock", default=True, help="Hold the laws against the clock, or not.")
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
def command(a: str, b: str, hold: tuple[str, ...], json_path: str | None, **given: Any) -> int:
    """Compare two subjects on the same feed, and find where one overtakes the other.

    A and B are path/to/file.py:name, package.module:name, or either with Class.method; both are
    audited. Where each is a stored RECORD.json of an audit, nothing is run.
    """
    must_be_writable(json_path)
    audits, status = _audits((a, b), given)
    from steplaw.versus import versus

    deliver(versus(audits[0], audits[1], hold, again()), json_path)
    return status


def _audits(asked: Sequence[str], given: dict[str, Any]) -> tuple[list[Record], int]:
    stored = [one.endswith(".json") and ":" not in one for one in asked]
    if all(stored):
        return [_stored(one) for one in asked], 0
    if any(stored):
        which = asked[stored.index(True)]
        raise CallError(
            f"{which} is a record and the other one is a subject",
            "give two subjects, or two records of audits",
        )
    return _audited(asked, given)


def _stored(path: str) -> Record:
    from steplaw.record import read

    record = read(path)
    if record["schema"] != "steplaw.audit/1":
        raise CallError(
            f"{path} is no audit but a {record['schema']} record",
            "give what steplaw audit --json wrote",
        )
    return record


def _audited(asked: Sequence[str], given: dict[str, Any]) -> tuple[list[Record], int]:
    from steplaw.commands.progress import progress
    from steplaw.job import run

    given["sizes"] = given["sizes"] or None
    studies = [make_study(one, again=again(), **given) for one in asked]
    out: list[Record] = []
    status = 0
    for one, study in zip(asked, studies, strict=True):
        with progress() as report:
            out.append(run(study, report))
        status = max(status, say_what_failed(out[-1], one))
    return out, status
