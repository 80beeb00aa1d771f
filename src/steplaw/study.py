"""A study: subject, feed, sizes and settings of one audit."""

from __future__ import annotations

import shlex
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from steplaw import feed as feeds
from steplaw import subject as subjects
from steplaw.costs import WHOLE, Costs, read_costs
from steplaw.errors import CallError
from steplaw.feed import FeedSpec
from steplaw.host.limits import Limits
from steplaw.loading import under_way
from steplaw.sizes import SizePlan, plan
from steplaw.subject import SubjectRef
from steplaw.tally.classes import CLASSES

DRAWS = 5


@dataclass(frozen=True, slots=True)
class Study:
    """Everything that decides an audit.

    Parameters
    ----------
    subject : SubjectRef
        The function.
    feed : FeedSpec or None
        What builds its arguments; None makes them from its type hints.
    plan : SizePlan
        The sizes, in order.
    asked : tuple of mapping
        Those that a person named.
    draws : int
        Inputs at each size where they differ from draw to draw.
    figure : str
        ``steps``, an operation class, ``line:N``, or ``cost`` by the team's own weights.
    costs : Costs, optional
        These weights.
    clock : bool
        Whether the clock check is made.
    limits : Limits
        Limits on one run.
    again : str
        The command that runs the study again.
    fresh : bool
        Whether everything is run anew, whatever the store has.
    processes : int, optional
        Runs made at once; as many as there are processors by default.
    cluster : str, optional
        Address of a Dask scheduler whose workers make the runs.
    only_sizes : bool
        Whether no sizes are added to the plan.
    """

    subject: SubjectRef
    feed: FeedSpec | None
    plan: SizePlan
    asked: tuple[Mapping[str, int], ...] = ()
    draws: int = DRAWS
    figure: str = "steps"
    costs: Costs | None = None
    clock: bool = True
    limits: Limits = field(default_factory=Limits)
    again: str = ""
    fresh: bool = False
    processes: int | None = None
    cluster: str | None = None
    only_sizes: bool = False

    @property
    def every(self) -> bool:
        """Whether every input of each size is run."""
        return self.feed is not None and self.feed.kind == "every"


def make_study(
    subject: str | Callable[..., Any],
    *,
    feed: str | Callable[..., Any] | None = None,
    every: str | None = None,
    sizes: str | Sequence[str] | Iterable[int] | Mapping[str, Iterable[int]] | None = None,
    only_sizes: bool = False,
    draws: int = DRAWS,
    figure: str = "steps",
    costs: str | None = None,
    clock: bool = True,
    limit_seconds: float = 60.0,
    limit_memory: int = 4096,
    again: str = "",
    fresh: bool = False,
    processes: int | None = None,
    cluster: str | None = None,
) -> Study:
    """Check what was asked for and make a study of it.

    Parameters
    ----------
    subject : str or callable
        As in ``steplaw audit``, or the function itself.
    feed : str or callable, optional
        An expression, ``FILE.py:FUNCTION``, or a function of the size names and ``rng``.
    every : str, optional
        An expression that gives every input of a size.
    sizes : str, sequence, or mapping, optional
        As ``--sizes``, or the numbers themselves.
    only_sizes : bool
        Run these sizes alone.
    draws : int
        Inputs at each size where they differ from draw to draw.
    figure : str
        The figure that the study is about.
    costs : str, optional
        A TOML file of weights; the study is about the figure `cost` that they make.
    clock : bool
        Whether to hold the law against the clock.
    limit_seconds : float
        Wall-clock time of one run, in seconds.
    limit_memory : int
        Memory that one run may take, in megabytes.
    again : str
        The command that runs the study again.
    fresh : bool
        Whether everything is run anew, whatever the store has.
    processes : int, optional
        Runs made at once; as many as there are processors by default.
    cluster : str, optional
        Address of a Dask scheduler whose workers make the runs.

    Raises
    ------
    CallError
        If any of it cannot be used.
    """
    if feed is not None and every is not None:
        raise CallError("--feed and --every cannot be given together", "leave one of them out")
    if draws < 1:
        raise CallError(f"--draws {draws} makes no input", "give 1 or more")
    if limit_seconds <= 0 or limit_memory <= 0:
        raise CallError("a limit must be above 0", "as in --limit-seconds 10 --limit-memory 2048")
    if processes is not None and processes < 1:
        raise CallError(f"--processes {processes} makes no run", "give 1 or more")
    weights = None if costs is None else read_costs(costs)
    if weights is None:
        check_figure(figure)
    elif figure == "steps":
        figure = "cost"
    else:
        raise CallError("--costs and --figure cannot be given together", "leave one of them out")
    if isinstance(sizes, int):
        sizes = [sizes]
    asked = plan(sizes, True).points if _names_numbers(sizes) else ()
    ref, spec = subject_ref(subject), feed_spec(feed, every)
    return Study(
        subject=ref,
        feed=spec,
        plan=plan(sizes, only_sizes),
        asked=tuple(asked),
        draws=draws,
        figure=figure,
        costs=weights,
        clock=clock,
        limits=Limits(float(limit_seconds), int(limit_memory)),
        again=again or _command(ref, spec, asked, only_sizes, draws, figure),
        fresh=fresh,
        processes=processes,
        cluster=cluster,
        only_sizes=only_sizes,
    )


def _command(
    ref: SubjectRef,
    feed: FeedSpec | None,
    asked: Sequence[Mapping[str, int]],
    only_sizes: bool,
    draws: int,
    figure: str,
) -> str:
    """Give the command that makes the same audit as a call from Python."""
    words = ["steplaw", "audit", str(ref)]
    if feed is not None:
        words += ["--every" if feed.kind == "every" else "--feed", feed.text]
    values: dict[str, list[str]] = {}
    for at in asked:
        for name, value in at.items():
            if str(value) not in values.setdefault(name, []):
                values[name].append(str(value))
    for name, listed in values.items():
        words += ["--sizes", f"{name}={','.join(listed)}"]
    words += ["--only-sizes"] * only_sizes
    words += ["--draws", str(draws)] * (draws != DRAWS)
    words += ["--figure", figure] * (figure != "steps")
    return shlex.join(words)


def _names_numbers(sizes: Any) -> bool:
    if sizes is None:
        return False
    try:
        plan(sizes, True)
    except CallError:
        plan(sizes, False)
        return False
    return True


def subject_ref(subject: str | Callable[..., Any]) -> SubjectRef:
    """Give the reference of a subject named or at hand."""
    if under_way() is not None:
        raise CallError(
            f"an audit is begun while {under_way()} is being imported as the subject",
            "put that call under: if __name__ == '__main__':",
        )
    if isinstance(subject, str):
        return subjects.parse(subject)
    return subjects.from_function(subject).ref


def feed_spec(feed: str | Callable[..., Any] | None, every: str | None) -> FeedSpec | None:
    """Give the feed that was asked for, None for one from type hints."""
    if every is not None:
        return feeds.parse_every(every)
    if feed is None:
        return None
    if isinstance(feed, str):
        return feeds.parse_feed(feed)
    if not callable(feed):
        raise CallError(
            f"a feed is an expression, FILE.py:FUNCTION or a function, not {feed!r}",
            "as in feed='[rng.random() for _ in range(n)]'",
        )
    return feeds.from_callable(feed)


def check_figure(figure: str) -> None:
    """Refuse a figure that there is not.

    Raises
    ------
    CallError
        With the figures that there are.
    """
    if figure in WHOLE or figure in CLASSES:
        return
    kind, _, number = figure.partition(":")
    if kind == "line" and number.isdigit():
        return
    raise CallError(
        f"there is no figure '{figure}'",
        "figures are line:N (N a line number), " + ", ".join((*WHOLE, *CLASSES)),
    )
