"""What a law says of one size: a number where it is exact, an interval where it is fitted."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from typing import Any

from steplaw.forecast.counts import observations
from steplaw.forecast.domain import Domain, domains
from steplaw.forecast.fan import Fan, fan
from steplaw.law.evaluate import Number, value
from steplaw.law.model import Observation

Json = Mapping[str, Any]
UNTAKEN = (
    "every draw of a size took the same steps; a way through the code that none of them took is "
    "not in the law"
)
MOST_DIGITS = 1000
"""Longer numbers are told by their length."""


@dataclass(frozen=True, slots=True)
class Amount:
    """A figure at one size, as far as it is known.

    Parameters
    ----------
    grade : {"proved", "exact", "fitted", "open"}
        Grade of the law that it follows from; open where nothing follows.
    number : Fraction, float or None
        What the law gives: the count, or its mean where draws differ.
    low, high : float or None
        Where one run lies, at 95 in 100, where runs of that size may differ or the law is fitted.
    mean_low, mean_high : float or None
        Where the mean lies, where the law is fitted.
    bound : Fraction, float or None
        What the count is proved never to exceed.
    why : str
        Why there is no number, or what may be amiss with it.
    """

    grade: str
    number: Number | None = None
    low: float | None = None
    high: float | None = None
    mean_low: float | None = None
    mean_high: float | None = None
    bound: Number | None = None
    why: str = ""

    @property
    def span(self) -> tuple[float, float] | None:
        """Give the least and the most of one run; None where nothing is known."""
        if self.low is not None and self.high is not None:
            return self.low, self.high
        return None if self.number is None else (_float(self.number), _float(self.number))

    def as_json(self) -> dict[str, Any]:
        """Give the amount as plain JSON values."""
        return {
            "grade": self.grade,
            "value": written(self.number),
            "interval": _pair(self.low, self.high),
            "mean_interval": _pair(self.mean_low, self.mean_high),
            "bound": written(self.bound),
            "why": self.why or None,
        }


class Figure:
    """One figure of an audit, ready to be foretold.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    name : str
        The record's own figure, ``steps`` or ``native``.
    """

    def __init__(self, record: Json, name: str) -> None:
        own = record["figure"]["name"] == name
        self.name = name
        self.record = record
        self.names: list[str] = record["sizes"]["names"]
        self.law: Json = record["figure"]["law"] if own else _law(record, name)
        self.domains: dict[str, Domain] = domains(self.law, self.names)
        self._extremes = [record["figure"][k] for k in ("least", "most")] if own else [None, None]
        self._bound = record["laws"].get("bound") if name == "steps" else None

    @cached_property
    def counted(self) -> dict[tuple[int, ...], Observation]:
        """Give what was counted, by size."""
        return {o.at: o for o in observations(self.record, self.name)}

    @cached_property
    def fan(self) -> Fan | None:
        """Give the models that a fitted law stands for."""
        return fan(list(self.counted.values()))

    @property
    def spread(self) -> bool:
        """Whether runs of one size differ."""
        return any(o.variance for o in self.counted.values())

    def at(self, at: Mapping[str, int]) -> Amount:
        """Say what the figure is at a size.

        Parameters
        ----------
        at : mapping of str to int
            The size.

        Returns
        -------
        Amount
            A number where the law is exact or proved, with the interval of one run where runs
            differ; an interval where it is fitted; else why there is none.
        """
        point = tuple(at[name] for name in self.names)
        if self.law["formula"] is None:
            why = "the law is open" + (f": {self.law['note']}" if self.law["note"] else "")
            return self._counted(point) or Amount("open", bound=self._bound_at(at), why=why)
        why = next(filter(None, (self.domains[k].why_not(k, at[k]) for k in self.names)), "")
        if why:
            return self._counted(point) or Amount("open", bound=self._bound_at(at), why=why)
        number = _worked_out(self.law["formula"], at)
        if number is None:
            return Amount("open", why=_too_long(self.law))
        if self.law["grade"] == "fitted":
            return self._fitted(point, at, number)
        low, high = self._one_run(point, at, number)
        why = UNTAKEN if self._may_vary else ""
        return Amount(self.law["grade"], number, low, high, bound=self._bound_at(at), why=why)

    @property
    def _may_vary(self) -> bool:
        """Whether inputs are drawn that all took the same steps, and nothing proves that all do."""
        unproved = self.law["grade"] == "exact" and not self.spread
        return bool(unproved and self.record["feed"]["varies"])

    def _counted(self, point: tuple[int, ...]) -> Amount | None:
        """Give what was counted at a size that the law does not speak of."""
        o = self.counted.get(point)
        if o is None:
            return None
        differ = o.variance != 0
        low, high = (float(o.least), float(o.most)) if differ else (None, None)
        return Amount("exact", o.value, low, high, why="counted there, not by the law")

    def _fitted(self, point: tuple[int, ...], at: Mapping[str, int], number: Number) -> Amount:
        bound = self._bound_at(at)
        if self.fan is None:
            return Amount(
                "open", bound=bound, why="the record holds too few counts for an interval"
            )
        i = self.fan.at(point, _float(number))
        if not all(map(math.isfinite, (i.low, i.high, i.mean_low, i.mean_high))):
            return Amount("open", bound=bound, why="no model that fits can be worked out so far on")
        high, mean_high = i.high, i.mean_high
        if bound is not None:
            high, mean_high = min(high, _float(bound)), min(mean_high, _float(bound))
        return Amount("fitted", number, i.low, high, i.mean_low, mean_high, bound)

    def _one_run(
        self, point: tuple[int, ...], at: Mapping[str, int], number: Number
    ) -> tuple[float | None, float | None]:
        """Give where one run lies although the mean is known exactly."""
        if not self.spread:
            return None, None
        ends = [
            _worked_out(law["formula"], at)
            if law is not None and law["grade"] in ("exact", "proved")
            else None
            for law in self._extremes
        ]
        low, high = (None if end is None else _float(end) for end in ends)
        if (low is None or high is None) and self.fan is not None and min(point) >= 2:
            mean = _float(number)
            own = self.fan.scatter.deviation(mean)
            low = max(0.0, mean - self.fan.scatter.below * own) if low is None else low
            high = mean + self.fan.scatter.above * own if high is None else high
        return (None, None) if low is None or high is None else (low, high)

    def _bound_at(self, at: Mapping[str, int]) -> Number | None:
        law = self._bound
        if law is None or law["formula"] is None:
            return None
        starts = law["holds_from"]
        if isinstance(starts, int) and min(at.values()) < starts:
            return None
        return _worked_out(law["formula"], at)


def written(number: Number | None) -> int | float | str | None:
    """Give a number as the record holds it: whole, a fraction as text, or a float."""
    if number is None or isinstance(number, float):
        return number
    return number.numerator if number.denominator == 1 else str(number)


def _law(record: Json, name: str) -> Json:
    law = record["laws"].get(name) or record["laws"]["operations"].get(name)
    empty: dict[str, Any] = {
        "settled_by": [],
        "checked_at": [],
        "holds_from": None,
        "leading": None,
    }
    unknown = {"formula": None, "grade": "open", "note": f"{name} has no law", "error": None}
    return law if law is not None else {**empty, **unknown}


def _worked_out(formula: str, at: Mapping[str, int]) -> Number | None:
    """Work a formula out; None where the number is too long to write."""
    try:
        number = value(formula, at)
    except (OverflowError, ValueError, ZeroDivisionError, RecursionError):
        return None
    if isinstance(number, float):
        return number if math.isfinite(number) else None
    longest = max(abs(number.numerator), number.denominator).bit_length()
    return number if longest * math.log10(2) <= MOST_DIGITS else None


def _too_long(law: Json) -> str:
    return f"the number has over {MOST_DIGITS} digits or is beyond floats: {law['formula']}"


def _float(number: Fraction | float) -> float:
    try:
        return float(number)
    except OverflowError:
        return math.inf


def _pair(low: float | None, high: float | None) -> list[float] | None:
    if low is None or high is None or not (math.isfinite(low) and math.isfinite(high)):
        return None
    return [low, high]


def figures(record: Json) -> Sequence[str]:
    """Give the names of the figures that a forecast shows: steps, and the study's own."""
    own = record["figure"]["name"]
    return ("steps",) if own == "steps" else (own, "steps")
