"""Typical cases: how the figure is spread over draws, or over every input, size by size."""

from __future__ import annotations

import math
import platform
from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import partial
from typing import Any

from steplaw.errors import SubjectError
from steplaw.host.asking import Run
from steplaw.host.runner import Runner
from steplaw.law import find_law
from steplaw.law.model import Observation
from steplaw.record import TypicalRecord
from steplaw.study import Study
from steplaw.sweep import sweep
from steplaw.worst.search import Report
from steplaw.worst.whole import figure_of

Weighted = list[tuple[int, int]]
QUANTILES = {"lower": (1, 4), "median": (1, 2), "upper": (3, 4), "high": (19, 20)}
WITH_LAWS = ("lower", "median", "upper")


def typical(study: Study, report: Report | None = None) -> TypicalRecord:
    """Find the distribution of a figure at each size, and its laws.

    Parameters
    ----------
    study : Study
        What to run; its draws, or every input, make the distribution.
    report : callable, optional
        Told what is done, at which size, and the steps so far.

    Returns
    -------
    TypicalRecord
        The finished record, `steplaw.typical/1`.

    Raises
    ------
    SubjectError
        If nothing ends well.
    CallError
        If subject or feed cannot be used.
    """
    from steplaw import __version__

    names = study.plan.names

    def tell(at: Any, done: int, rest: int | None) -> None:
        if report is not None:
            report("counting", at[names[0]], done)

    with Runner(study.subject, study.feed, names, study.limits, first=study.plan.points[0]) as host:
        about = host.load()
        swept = sweep(
            host, study.plan, draws=study.draws, every=study.every, asked=study.asked, report=tell
        )
    if not swept.runs:
        why = "nothing was run" if swept.stopped is None else swept.stopped.message
        raise SubjectError(f"{study.subject}: {why}")
    file = about["loaded"]["file"]
    spread = {
        point[0]: _weighted(runs, lambda run: figure_of(run, study.figure, file))
        for point, runs in sorted(swept.runs.items())
    }
    notes = [f"Quantiles are of {'every input' if study.every else f'{study.draws} draws'}."]
    if swept.stopped is not None:
        notes.append(f"Stopped at {swept.stopped.at}: {swept.stopped.message}.")
    return TypicalRecord(
        {
            "schema": "steplaw.typical/1",
            "steplaw": __version__,
            "python": platform.python_version(),
            "subject": {k: about["loaded"][k] for k in ("name", "file", "line")},
            "figure": study.figure,
            "feed": about["feed"],
            "whole": study.every,
            "sizes": [_row(n, values) for n, values in spread.items()],
            "laws": _laws(spread, study.every),
            "notes": notes,
            "run_again": study.again,
        }
    )


def _weighted(runs: Sequence[Run], read: Callable[[Run], int]) -> Weighted:
    return sorted((read(run), run.times) for run in runs)


def mean_of(values: Weighted) -> Fraction:
    """Give the mean."""
    return Fraction(sum(v * t for v, t in values), sum(t for _, t in values))


def variance_of(values: Weighted) -> Fraction:
    """Give the variance about the mean, over all of them."""
    mean = mean_of(values)
    return sum((t * (v - mean) ** 2 for v, t in values), Fraction(0)) / sum(t for _, t in values)


def quantile_of(values: Weighted, share: tuple[int, int]) -> int:
    """Give the least value that at least a share of all values do not exceed.

    Parameters
    ----------
    values : list of pair
        Values in order, and how often each is there.
    share : pair of int
        Numerator and denominator.
    """
    total = sum(t for _, t in values)
    seen = 0
    for value, times in values:
        seen += times
        if seen * share[1] >= total * share[0]:
            return value
    return values[-1][0]


def _row(n: int, values: Weighted) -> dict[str, Any]:
    return {
        "n": n,
        "draws": sum(t for _, t in values),
        "mean": str(mean_of(values)),
        "spread": math.sqrt(variance_of(values)),
        "least": values[0][0],
        **{name: quantile_of(values, share) for name, share in QUANTILES.items()},
        "most": values[-1][0],
    }


def _laws(spread: dict[int, Weighted], whole: bool) -> dict[str, Any]:
    mean = [
        Observation(
            (n,),
            mean_of(v),
            draws=sum(t for _, t in v),
            variance=variance_of(v),
            least=v[0][0],
            most=v[-1][0],
            whole=whole,
        )
        for n, v in spread.items()
    ]
    laws = {"mean": find_law(mean, exhaustive=True).as_json()}
    figures: dict[str, Callable[[Weighted], Fraction | int]] = {
        "variance": variance_of,
        **{name: partial(quantile_of, share=QUANTILES[name]) for name in WITH_LAWS},
    }
    for name, read in figures.items():
        # Of draws these are estimates: a variance keeps exact forms away from them.
        noise = Fraction(0) if whole else Fraction(1)
        seen = [
            Observation((n,), Fraction(read(v)), variance=noise, whole=whole)
            for n, v in spread.items()
        ]
        laws[name] = find_law(seen).as_json()
    return laws
