"""The native ledger of a sweep, as parts of the audit record."""

from __future__ import annotations

import linecache
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from fractions import Fraction
from typing import Any

from steplaw import series
from steplaw.host.asking import Run
from steplaw.law import order
from steplaw.law.model import Law, Observation
from steplaw.sweep import Sweep

FindLaw = Callable[[Sequence[Observation], bool], Law]
Key = tuple[str, int, str]

#: Rows outside the subject's file are listed from this share of the work on.
SHARE_LISTED = 0.01
BOUND = "at most: some native visits are a bound"


class NativeFindings:
    """The laws of what C code does inside single instructions.

    Parameters
    ----------
    swept : Sweep
        The runs.
    find : callable
        Finds a law of observations; whether they change between equal runs.
    file : str
        The subject's file.
    unsteady : bool
        Whether counts change between equal runs.
    """

    def __init__(self, swept: Sweep, find: FindLaw, file: str, unsteady: bool) -> None:
        self._swept = swept
        self._find = find
        self._file = file
        self._unsteady = unsteady
        self._runs = [run for runs in swept.runs.values() for run in runs]
        self.looked = bool(self._runs) and all(r.tally.ledger is not None for r in self._runs)
        self._visits = series.of_many(swept, lambda run: _read(run, "visits"))
        self._times = series.of_many(swept, lambda run: _read(run, "times"))
        self._inexact = {
            (x.file, x.line, x.operation)
            for run in self._runs
            for x in run.tally.ledger or ()
            if not x.exact
        }

    @property
    def exact(self) -> bool:
        """Whether every charge is exact."""
        return not any(
            any(o.value for o in self._visits[key]) for key in self._inexact if key in self._visits
        )

    def law(self, read: Callable[[Run], int | Fraction]) -> dict[str, Any] | None:
        """Give the law of a figure that native visits are part of, None where none were sought."""
        if not self.looked:
            return None
        found = self._find(series.of(self._swept, read), self._unsteady)
        return self.bounded(found).as_json()

    def bounded(self, law: Law) -> Law:
        """Give a law with a note where what it gives is a bound."""
        if self.exact or law.formula is None:
            return law
        return replace(law, note="; ".join(filter(None, (law.note, BOUND))))

    def ledger(self) -> dict[str, Any] | None:
        """Give the record's ``ledger``, None where operands were not looked at."""
        if not self.looked:
            return None
        largest = max(self._swept.runs)
        total = _at(series.of(self._swept, _work), largest)
        rows = []
        for key, visits in self._visits.items():
            share = float(_at(visits, largest) / total) if total else 0.0
            if not any(o.value for o in visits):
                continue
            if key[0] != self._file and share < SHARE_LISTED:
                continue
            rows.append(self._row(key, visits, round(share, 4)))
        rows.sort(key=lambda row: (-row["share"], row["file"], row["line"], row["operation"]))
        return {
            "at": self._swept.at(largest),
            "leads": self._leads(),
            "rows": rows,
            "not_charged": self._not_charged(),
        }

    def _leads(self) -> bool:
        """Tell whether native visits have the leading term of the whole, as their laws say."""
        native = self._find(series.of(self._swept, lambda run: run.tally.native or 0), False)
        steps = self._find(series.of(self._swept, lambda run: run.tally.steps), False)
        known = native.formula is not None and steps.formula is not None
        return known and native.formula != "0" and order(native) > order(steps)

    def _row(self, key: Key, visits: Sequence[Observation], share: float) -> dict[str, Any]:
        file, line, operation = key
        law = self._find(visits, self._unsteady)
        exact = key not in self._inexact
        if not exact and law.formula is not None:
            law = replace(law, note="; ".join(filter(None, (law.note, "at most"))))
        return {
            "file": file,
            "line": line,
            "source": linecache.getline(file, line).strip("\n"),
            "operation": operation,
            "times": self._find(self._times[key], self._unsteady).as_json(),
            "visits": law.as_json(),
            "charge": "exact" if exact else "at most",
            "share": share,
        }

    def _not_charged(self) -> list[dict[str, Any]]:
        """Give the C calls without a rule: how often, and whether their operands grow."""
        seen: dict[Key, dict[Any, list[int]]] = {}
        for point, runs in self._swept.runs.items():
            for run in runs:
                for x in run.tally.not_charged:
                    entry = seen.setdefault((x.file, x.line, x.operation), {})
                    best = entry.setdefault(point, [0, 0])
                    best[0] = max(best[0], x.times)
                    best[1] = max(best[1], x.largest)
        rows = []
        for (file, line, operation), by_point in sorted(seen.items()):
            first, last = by_point[min(by_point)], by_point[max(by_point)]
            rows.append(
                {
                    "file": file,
                    "line": line,
                    "operation": operation,
                    "times": last[0],
                    "largest": last[1],
                    "grows": last[1] > 2 * max(first[1], 1),
                }
            )
        return rows


def _work(run: Run) -> int:
    return run.tally.steps + (run.tally.native or 0)


def _read(run: Run, what: str) -> Mapping[Key, int]:
    return {(x.file, x.line, x.operation): getattr(x, what) for x in run.tally.ledger or ()}


def _at(observations: Sequence[Observation], point: tuple[int, ...]) -> Fraction:
    return next((o.value for o in observations if o.at == point), Fraction(0))
