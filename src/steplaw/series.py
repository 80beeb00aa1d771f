"""Runs turned into observations: values by size for each figure, line and function."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from fractions import Fraction
from typing import TypeVar

from steplaw.host.asking import Run
from steplaw.law.model import Observation
from steplaw.sweep import Point, Sweep

K = TypeVar("K")
Values = dict[Point, list[tuple[int | Fraction, int]]]
Site = tuple[str, str, int, int, int]


def observations(values: Values, whole: bool) -> list[Observation]:
    """Give one observation a size.

    Parameters
    ----------
    values : dict
        Pairs of value and number of inputs, by size.
    whole : bool
        Whether the inputs are all inputs of the size.
    """
    out = []
    for point, pairs in values.items():
        inputs = sum(times for _, times in pairs)
        mean = Fraction(sum(v * times for v, times in pairs)) / inputs
        square = Fraction(sum(v * v * times for v, times in pairs)) / inputs
        out.append(
            Observation(
                at=point,
                value=mean,
                draws=inputs,
                variance=square - mean * mean,
                least=min(v for v, _ in pairs),
                most=max(v for v, _ in pairs),
                whole=whole,
            )
        )
    return sorted(out, key=lambda o: o.at)


def of(sweep: Sweep, read: Callable[[Run], int | Fraction]) -> list[Observation]:
    """Give the observations of one figure of every run.

    Parameters
    ----------
    sweep : Sweep
        The runs.
    read : callable
        Gives the figure of one run.
    """
    values = {p: [(read(r), r.times) for r in runs] for p, runs in sweep.runs.items()}
    return observations(values, sweep.whole)


def of_many(sweep: Sweep, read: Callable[[Run], Mapping[K, int]]) -> dict[K, list[Observation]]:
    """Give the observations of many figures at once, absent ones taken as 0."""
    read_once = {p: [(read(r), r.times) for r in runs] for p, runs in sweep.runs.items()}
    keys = dict.fromkeys(k for pairs in read_once.values() for m, _ in pairs for k in m)
    return {
        key: observations(
            {p: [(m.get(key, 0), times) for m, times in pairs] for p, pairs in read_once.items()},
            sweep.whole,
        )
        for key in keys
    }


def lines(run: Run) -> dict[tuple[str, int], tuple[int, int]]:
    """Give frequency and steps by file and line."""
    return {(x.file, x.line): (x.frequency, x.steps) for x in run.tally.lines}


def functions(run: Run) -> dict[tuple[str, str, int], tuple[int, int]]:
    """Give calls and steps by file, name and first line."""
    return {(f.file, f.name, f.line): (f.calls, f.steps) for f in run.tally.functions}


def parts(sweep: Sweep) -> tuple[list[Observation], list[Observation]]:
    """Split the steps into those that the size alone fixes and those that the data decide.

    Returns
    -------
    fixed, decided : list of Observation
        A block belongs to the fixed part if at every size all inputs gave it the same steps.
    """
    by_run = {
        p: [({tuple(s[:5]): s[5] for s in r.sites}, r.times) for r in runs]
        for p, runs in sweep.runs.items()
    }
    sites = dict.fromkeys(k for rows in by_run.values() for m, _ in rows for k in m)
    decided = {
        site
        for site in sites
        if any(len({m.get(site, 0) for m, _ in rows}) > 1 for rows in by_run.values())
    }

    def total(chosen: Iterable[tuple[object, ...]]) -> list[Observation]:
        keys = list(chosen)
        return observations(
            {
                p: [(sum(m.get(k, 0) for k in keys), times) for m, times in rows]
                for p, rows in by_run.items()
            },
            sweep.whole,
        )

    return total(k for k in sites if k not in decided), total(decided)
