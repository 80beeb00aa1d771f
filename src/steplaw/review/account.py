"""What two audits are compared by: each figure's law, and its counts by size."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from steplaw.law.model import Law
from steplaw.tally.classes import CLASSES

Size = tuple[tuple[str, int], ...]

#: Figures that count the interpreter's own instructions, whose kinds differ between versions.
OF_THE_VERSION = ("steps", "work", "cost")
#: All operations and native visits together: the whole, where versions differ.
OPERATIONS = "operations"
COUNTED = ("proved", "exact")


@dataclass(frozen=True, slots=True)
class Figure:
    """One figure of an audit.

    Parameters
    ----------
    law : mapping
        A LAW of the record.
    counts : mapping of Size to Fraction
        The figure, or its mean over draws, at each size that was run.
    names : tuple of str
        The size names.
    """

    law: Mapping[str, Any]
    counts: Mapping[Size, Fraction]
    names: tuple[str, ...]

    @property
    def formula(self) -> str | None:
        """The formula, None where the law is open."""
        found: str | None = self.law.get("formula")
        return found

    @property
    def is_counted(self) -> bool:
        """Whether the formula gives every count to the last digit."""
        return self.law.get("grade") in COUNTED

    def as_law(self, *names: str) -> Law:
        """Give the law as the arithmetic of laws takes it.

        Parameters
        ----------
        *names : str
            The sizes that grow; the others are held. All of them by default.
        """
        grade = self.law["grade"]
        return Law(self.formula, self.law.get("leading"), grade, names=names or self.names)

    def at(self, size: Size) -> Fraction | None:
        """Give the exact figure at a size: as counted, or by a formula that gives every count.

        Parameters
        ----------
        size : Size
            The size.
        """
        if size in self.counts:
            return self.counts[size]
        if not self.is_counted or not self._holds_at(size):
            return None
        from steplaw.law.evaluate import value

        found = value(self.as_law(), dict(size))
        return found if isinstance(found, Fraction) else None

    @property
    def largest(self) -> tuple[int, ...] | None:
        """The largest size that the formula was seen at, None where it was seen at none."""
        seen = [_numbers(e) for key in ("settled_by", "checked_at") for e in self.law[key]]
        return tuple(max(column) for column in zip(*seen, strict=False)) if seen else None

    @property
    def least(self) -> tuple[int, ...]:
        """The size from which on the formula holds."""
        held = _numbers(self.law.get("holds_from") or 0) or (0,)
        return held if len(held) == len(self.names) else held * len(self.names)

    def _holds_at(self, size: Size) -> bool:
        """Whether a size lies between the sizes at which the formula was seen to hold."""
        largest = self.largest
        if largest is None or len(largest) != len(size):
            return False
        between = zip(self.least, size, largest, strict=True)
        return all(low <= x <= high for low, (_, x), high in between)


@dataclass(frozen=True, slots=True)
class Account:
    """What an audit is compared by.

    Parameters
    ----------
    figure : str
        The figure that the study is about.
    figures : mapping of str to Figure
        All figures, by name.
    python : str
        The Python version of the runs.
    feed : str
        What built the inputs.
    """

    figure: str
    figures: Mapping[str, Figure]
    python: str
    feed: str


def minor(python: str) -> tuple[str, ...]:
    """Give a Python version without its last part, which leaves instructions as they are.

    Parameters
    ----------
    python : str
        Such as ``3.11.7``.
    """
    return tuple(python.split(".")[:2])


def account_of(record: Mapping[str, Any]) -> Account:
    """Read what an audit is compared by from its record.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    """
    names = tuple(record["sizes"]["names"])
    laws, tallies = record["laws"], record["tallies"]
    figures: dict[str, Figure] = {}
    for name in ("steps", "native", "work"):
        if laws.get(name) is not None:
            figures[name] = Figure(laws[name], _means(tallies, name, names), names)
    for name in CLASSES:
        if name in laws["operations"]:
            figures[name] = Figure(laws["operations"][name], _means(tallies, name, names), names)
    own = record["figure"]
    counts = {_size(v["at"], names): Fraction(v["mean"]) for v in own["values"]}
    figures[own["name"]] = Figure(own["law"], counts, names)
    return Account(own["name"], figures, record["python"], record["feed"]["text"])


def whole_of(account: Account) -> Figure | None:
    """Give all operations and native visits together, which mean the same on every version.

    Parameters
    ----------
    account : Account
        Of one audit.
    """
    parts = [account.figures[name] for name in (*CLASSES, "native") if name in account.figures]
    if not parts:
        return None
    counts = {}
    for size in sorted({size for part in parts for size in part.counts}):
        known = [count for part in parts if (count := part.at(size)) is not None]
        if len(known) == len(parts):
            counts[size] = sum(known, Fraction(0))
    grades = {part.law["grade"] for part in parts}
    weakest = next(g for g in ("open", "fitted", "exact", "proved") if g in grades)
    formula = None if weakest == "open" else " + ".join(f"({p.formula})" for p in parts)
    seen = [part.largest for part in parts if part.largest is not None]
    law = {
        "formula": formula,
        "leading": formula,
        "grade": weakest,
        "holds_from": [max(column) for column in zip(*(p.least for p in parts), strict=True)],
        "settled_by": [],
        "checked_at": [[min(c) for c in zip(*seen, strict=True)]]
        if len(seen) == len(parts)
        else [],
        "error": None,
        "note": "operation classes and native visits added up",
    }
    return Figure(law, counts, parts[0].names)


def _means(tallies: Any, name: str, names: tuple[str, ...]) -> dict[Size, Fraction]:
    """Give the mean of a figure at each size, each input counted as often as there are such."""
    sums: dict[Size, list[int]] = {}
    for tally in tallies:
        times = tally.get("inputs", 1)
        total = sums.setdefault(_size(tally["at"], names), [0, 0])
        total[0] += times * _read(tally, name)
        total[1] += times
    return {size: Fraction(total, times) for size, (total, times) in sums.items()}


def _read(tally: Mapping[str, Any], name: str) -> int:
    native = int(tally.get("native") or 0)
    if name == "native":
        return native
    if name in ("steps", "work"):
        return int(tally["steps"]) + (native if name == "work" else 0)
    return int(tally["operations"].get(name, 0))


def _size(at: Mapping[str, int], names: tuple[str, ...]) -> Size:
    return tuple((name, int(at[name])) for name in names)


def _numbers(evidence: Any) -> tuple[int, ...]:
    if isinstance(evidence, Mapping):
        return tuple(evidence.values())
    return tuple(evidence) if isinstance(evidence, list | tuple) else (int(evidence),)
