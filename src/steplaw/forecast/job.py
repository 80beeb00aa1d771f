"""The forecast: from a finished audit to the forecast record. Nothing is run."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from fractions import Fraction
from typing import Any

from steplaw.errors import CallError
from steplaw.forecast.amount import Amount, Figure, figures
from steplaw.forecast.asked import Limit, parse_held, parse_limit, parse_size
from steplaw.forecast.domain import Domain
from steplaw.forecast.pace import Pace, pace
from steplaw.forecast.search import AHEAD, Fit, largest
from steplaw.record import ForecastRecord

Json = Mapping[str, Any]
CAUTIONS = (
    "A forecast extrapolates: what the sizes run did not show is not in it.",
    "It holds for inputs such as the feed makes, and for time on the machine that was timed.",
    "It is not a worst-case execution time, and no base for a safety-related deadline; that "
    "belongs to the qualified process that the applicable standard asks for.",
)


def forecast(
    record: Json,
    at: Sequence[str | int | Mapping[str, int]] | str | int | Mapping[str, int] = (),
    within: Sequence[str] | str = (),
    hold: Sequence[str] | str = (),
    again: str = "",
) -> ForecastRecord:
    """Foretell steps and time at sizes, and the largest sizes within limits.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record; it is read and nothing is run.
    at : str, int, mapping, or a sequence of these
        Sizes, such as ``10000000`` or ``"n=1000,m=50"``.
    within : str or sequence of str
        Limits, such as ``"2s"`` or ``"1e9steps"``.
    hold : str or sequence of str
        Sizes that the search for a limit holds, such as ``"m=50"``, where a law has several.
    again : str
        The command that makes this forecast again.

    Returns
    -------
    ForecastRecord
        The record, `steplaw.forecast/1`.

    Raises
    ------
    CallError
        If nothing is asked for, a size or limit cannot be read, or a time is asked of a record
        without a clock check.

    Notes
    -----
    Steps follow exactly from an exact or proved law; a fitted law gives an interval for one run
    at 95 in 100, and an open one nothing but a proved bound, where there is one. Time is the
    steps, with native visits where the clock was held against both, times the nanoseconds a step
    that the clock check gave.
    """
    names: list[str] = record["sizes"]["names"]
    sizes, limits, held = check_asked(at, within, hold, names, clock=record["clock"] is not None)
    teller = Teller(record)
    return ForecastRecord(
        {
            "schema": "steplaw.forecast/1",
            "steplaw": record["steplaw"],
            "python": record["python"],
            "subject": {k: record["subject"][k] for k in ("name", "file", "line", "digest")},
            "feed": record["feed"],
            "figure": record["figure"]["name"],
            "sizes": {"names": names, "largest": teller.largest_run},
            "laws": {name: dict(figure.law) for name, figure in teller.shown.items()},
            "clock": teller.clock(),
            "at": [teller.at(one) for one in sizes],
            "within": [teller.within(limit, held) for limit in limits],
            "notes": list(CAUTIONS),
            "run_again": again or record["run_again"],
        }
    )


def check_asked(
    at: Any, within: Any, hold: Any, names: Sequence[str], clock: bool
) -> tuple[list[dict[str, int]], list[Limit], dict[str, int]]:
    """Read what is asked for, before anything is run for it.

    Parameters
    ----------
    at, within, hold
        As for `forecast`.
    names : sequence of str
        The size names.
    clock : bool
        Whether there is a clock check.

    Returns
    -------
    tuple
        The sizes, the limits, and the sizes that are held.

    Raises
    ------
    CallError
        If any of it cannot be read or answered.
    """
    sizes = [_size(one, names) for one in _listed(at)]
    limits = [parse_limit(text) for text in _listed(within)]
    if not sizes and not limits:
        raise CallError("nothing is asked for", "give --at 10000000 or --within 2s")
    if not limits and _listed(hold):
        raise CallError("--hold is for --within alone", "give all sizes after --at")
    if not clock and any(limit.kind == "time" for limit in limits):
        raise CallError(
            "without a clock check nothing can be said of what fits a time",
            "audit with the clock, or give --within 1e9steps",
        )
    return sizes, limits, parse_held(_listed(hold), names) if limits else {}


class Teller:
    """What one audit foretells.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    """

    def __init__(self, record: Json) -> None:
        self.record = record
        self.names: list[str] = record["sizes"]["names"]
        self.shown = {name: Figure(record, name) for name in figures(record)}
        self.steps = self.shown["steps"]
        self.pace: Pace | None
        self.pace, self.slow = pace(record["clock"])
        self.rate = Fraction(0)
        if (record["clock"] or {}).get("held") == "work":
            self.rate = Fraction(record["clock"].get("visit_rate") or 1)
        self.native = Figure(record, "native") if self.rate else None
        self.largest_run = self._largest([v["at"] for v in record["figure"]["values"]])

    def _largest(self, points: Sequence[Mapping[str, int]]) -> dict[str, int]:
        return {name: max((at[name] for at in points), default=0) for name in self.names}

    def at(self, at: Mapping[str, int]) -> dict[str, Any]:
        """Give a size's entry of the record's ``at``."""
        amounts = {name: figure.at(at) for name, figure in self.shown.items()}
        between, why = self._seconds(at, amounts["steps"])
        return {
            "at": dict(at),
            "beyond": self._beyond(at, self.largest_run),
            "figures": {name: amount.as_json() for name, amount in amounts.items()},
            "seconds": None if between is None else list(between),
            "why_no_seconds": why if between is None else None,
        }

    def _seconds(
        self, at: Mapping[str, int], steps: Amount
    ) -> tuple[tuple[float, float] | None, str]:
        if self.pace is None:
            return None, self.slow
        between = steps.span
        if between is None:
            return None, "no time is foretold where no steps are"
        low, high = between
        if self.native is not None:
            visits = self.native.at(at)
            more = visits.span
            if more is None:
                return None, f"no time is foretold without the native visits: {visits.why}"
            low, high = low + float(self.rate) * more[0], high + float(self.rate) * more[1]
        found = self.pace.seconds(at, low, high)
        if not found[1] < 1e300:
            return None, "the time is beyond any number"
        return found, ""

    def within(self, limit: Limit, held: Mapping[str, int]) -> dict[str, Any]:
        """Give a limit's entry of the record's ``within``."""
        name = next(n for n in self.names if n not in held)
        entry: dict[str, Any] = {
            "limit": limit.text,
            "kind": limit.kind,
            "most": float(limit.most),
            "name": name,
            "held": dict(held),
        }
        why = self._why_no_search(limit, held)
        if why:
            return entry | _none(why)
        domain = self._domain(name)
        ahead = 0 if self._fitted(limit) else AHEAD

        def fits(size: int, end: int) -> bool:
            return self._fits(limit, {**held, name: size}, end)

        sure = largest(lambda n: fits(n, 1), domain, ahead)
        perhaps = largest(lambda n: fits(n, 0), domain, ahead)
        if sure.size is None and perhaps.size is None:
            return entry | _none(f"no size from {name} = {domain.size(0)} on fits")
        return entry | {
            "sure": self._found(sure, name, held),
            "perhaps": self._found(perhaps, name, held),
            "why": None,
        }

    def _why_no_search(self, limit: Limit, held: Mapping[str, int]) -> str:
        if self.steps.law["formula"] is None:
            return self.steps.at({**dict.fromkeys(self.names, 10**18), **held}).why
        if limit.kind == "time" and self.pace is None:
            return self.slow
        if limit.kind == "time" and self.native is not None and self.native.law["formula"] is None:
            return "no time is foretold without the native visits, whose law is open"
        return next(
            filter(None, (self.steps.domains[k].why_not(k, n) for k, n in held.items())), ""
        )

    def _domain(self, name: str) -> Domain:
        """Give the sizes that all laws which are needed speak of."""
        first = self.steps.domains[name]
        if self.native is None:
            return first
        other = self.native.domains[name]
        kind = first.kind if first.kind != "every" else other.kind
        return replace(first, first=max(first.first, other.first), kind=kind)

    def _fitted(self, limit: Limit) -> bool:
        needed = [self.steps, *([self.native] if self.native and limit.kind == "time" else [])]
        return any(figure.law["grade"] == "fitted" for figure in needed)

    def _fits(self, limit: Limit, at: Mapping[str, int], end: int) -> bool:
        steps = self.steps.at(at)
        if limit.kind == "time":
            seconds, _ = self._seconds(at, steps)
            return seconds is not None and seconds[end] <= limit.most
        if steps.low is None and steps.number is not None:
            return steps.number <= limit.most
        return steps.span is not None and steps.span[end] <= limit.most

    def _found(self, fit: Fit, name: str, held: Mapping[str, int]) -> dict[str, Any] | None:
        if fit.size is None:
            return None
        at = {n: {**held, name: fit.size}[n] for n in self.names}
        return {
            "at": at,
            "unlimited": fit.unlimited,
            "beyond": self._beyond(at, self.largest_run),
        }

    def _beyond(self, at: Mapping[str, int], run: Mapping[str, int]) -> float | None:
        """Give how many times a size is the largest one run: of the name that is farthest out."""
        if not all(run.values()):
            return None
        return round(max(at[name] / run[name] for name in self.names), 4)

    def clock(self) -> dict[str, Any] | None:
        """Give the record's ``clock``: what the times rest on."""
        clock = self.record["clock"]
        if clock is None:
            return None
        timed = clock.get("sizes") or []
        return {
            "agrees": clock["agrees"],
            "reason": clock["reason"],
            "held": clock.get("held"),
            "visit_rate": clock.get("visit_rate"),
            "ns_per_step": None if self.pace is None else [self.pace.low, self.pace.high],
            "largest": self._largest(timed) if timed else None,
            "machine": clock.get("machine"),
            "wide": self.slow if self.pace is not None and self.slow else None,
        }


def _none(why: str) -> dict[str, Any]:
    return {"sure": None, "perhaps": None, "why": why}


def _size(one: str | int | Mapping[str, int], names: Sequence[str]) -> dict[str, int]:
    if isinstance(one, Mapping):
        one = ",".join(f"{name}={number}" for name, number in one.items())
    return parse_size(str(one), names)


def _listed(given: Any) -> list[Any]:
    return [given] if isinstance(given, str | int | Mapping) else list(given)
