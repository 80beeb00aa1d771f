"""The counts of a stored audit, as observations again."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from typing import Any

from steplaw.law.model import Observation

Json = Mapping[str, Any]


def observations(record: Json, figure: str) -> list[Observation]:
    """Give the values of a figure by size, smallest first.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    figure : str
        The record's own figure, ``steps``, ``native`` or an operation class.

    Returns
    -------
    list of Observation
        One for each size.
    """
    names = record["sizes"]["names"]
    whole = record["feed"]["kind"] == "every"
    if figure == record["figure"]["name"]:
        found = [_stored(value, names, whole) for value in record["figure"]["values"]]
    else:
        runs: dict[tuple[int, ...], list[tuple[Fraction, int]]] = {}
        for tally in record["tallies"]:
            at = tuple(tally["at"][name] for name in names)
            entry = Fraction(_read(tally, figure)), int(tally.get("inputs", 1))
            runs.setdefault(at, []).append(entry)
        found = [_pooled(at, values, whole) for at, values in runs.items()]
    return sorted(found, key=lambda o: o.at)


def _stored(value: Json, names: list[str], whole: bool) -> Observation:
    mean = Fraction(value["mean"])
    least, most = (mean if value[k] is None else Fraction(value[k]) for k in ("least", "most"))
    return Observation(
        tuple(value["at"][name] for name in names),
        mean,
        value["draws"],
        Fraction(value["variance"] or 0),
        least,
        most,
        whole,
    )


def _read(tally: Json, figure: str) -> int:
    if figure in ("steps", "native"):
        return int(tally.get(figure) or 0)
    return int(tally["operations"].get(figure, 0))


def _pooled(at: tuple[int, ...], values: list[tuple[Fraction, int]], whole: bool) -> Observation:
    draws = sum(times for _, times in values)
    mean = sum((v * times for v, times in values), Fraction(0)) / draws
    variance = sum(((v - mean) ** 2 * times for v, times in values), Fraction(0)) / draws
    every = [v for v, _ in values]
    return Observation(at, mean, draws, variance, min(every), max(every), whole)
