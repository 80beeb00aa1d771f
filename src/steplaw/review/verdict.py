"""Two audits of one study compared: same law, better, worse coefficient, worse order."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from steplaw.review.account import (
    OF_THE_VERSION,
    OPERATIONS,
    Account,
    Figure,
    account_of,
    minor,
    whole_of,
)
from steplaw.review.change import (
    BETTER,
    SAME,
    UNDECIDED,
    WORSE_COEFFICIENT,
    WORSE_ORDER,
    Change,
    compare_figure,
)
from steplaw.tally.classes import CLASSES

__all__ = [
    "BETTER",
    "SAME",
    "UNDECIDED",
    "WORSE_COEFFICIENT",
    "WORSE_ORDER",
    "Change",
    "Verdict",
    "compare",
    "compare_accounts",
]

#: From the best to the worst.
KINDS = (SAME, BETTER, UNDECIDED, WORSE_COEFFICIENT, WORSE_ORDER)
HOLDS = (SAME, BETTER)


@dataclass(frozen=True, slots=True)
class Verdict:
    """What became of a study's laws.

    Parameters
    ----------
    kind : {"same law", "better", "undecided", "worse coefficient", "worse order"}
        The worst of what counts.
    changes : tuple of Change
        One for each figure that was compared, the study's own first.
    decided_by : Change or None
        The change that the verdict rests on; None where nothing could be compared.
    python : tuple of str
        The Python versions before and after.
    notes : tuple of str
        What a reader must know beside it.
    """

    kind: str
    changes: tuple[Change, ...]
    decided_by: Change | None
    python: tuple[str, str]
    notes: tuple[str, ...] = ()

    @property
    def holds(self) -> bool:
        """Whether no law became worse."""
        return self.kind in HOLDS

    @property
    def figure(self) -> str | None:
        """The figure that the verdict rests on."""
        return None if self.decided_by is None else self.decided_by.figure

    @property
    def about_python(self) -> str | None:
        """What is compared where the Python versions differ, None where they do not."""
        if minor(self.python[0]) == minor(self.python[1]):
            return None
        return (
            f"Python was {'.'.join(minor(self.python[0]))} and is {'.'.join(minor(self.python[1]))}"
            ", with other instructions: operation classes are compared instead of steps"
        )

    def as_json(self) -> dict[str, Any]:
        """Give the verdict as plain JSON values."""
        return {
            "kind": self.kind,
            "holds": self.holds,
            "figure": self.figure,
            "python": {"before": self.python[0], "after": self.python[1]},
            "changes": [change.as_json() for change in self.changes],
            "notes": [*([self.about_python] if self.about_python else []), *self.notes],
        }


def compare(
    before: Mapping[str, Any],
    after: Mapping[str, Any],
    tolerance: Fraction | float | str = 0,
) -> Verdict:
    """Compare two audits of one study.

    Parameters
    ----------
    before, after : mapping
        `steplaw.audit/1` records, each of its own revision of the code.
    tolerance : Fraction, float or str
        Share by which a figure may rise and still count as the same: 0 by default, since counts
        are exact. An order of growth has no tolerance.

    Returns
    -------
    Verdict
        The worst of what counts. On one Python version these are the study's own figure, steps,
        native visits, and both together; where the versions differ, operation classes and native
        visits, since instructions differ from version to version for no reason of the program.
        A part that became worse does not count where the whole became better.
    """
    return compare_accounts(account_of(before), account_of(after), Fraction(tolerance))


def compare_accounts(before: Account, after: Account, tolerance: Fraction) -> Verdict:
    """Compare what is kept of two audits.

    Parameters
    ----------
    before, after : Account
        Of one study.
    tolerance : Fraction
        As for `compare`.
    """
    alike = minor(before.python) == minor(after.python)
    pairs = _of_one_version(before, after) if alike else _of_two_versions(before, after)
    same_inputs = before.feed == after.feed
    changes = tuple(compare_figure(name, a, b, tolerance, same_inputs) for name, a, b in pairs)
    notes = _notes(before, after)
    versions = (before.python, after.python)
    if not changes:
        return Verdict(UNDECIDED, (), None, versions, ("no figure is in both", *notes))
    counting = _counting(changes, "work" if alike else OPERATIONS, after.figure)
    decided = max(counting, key=lambda change: KINDS.index(change.kind))
    dropped = [c.figure for c in changes if c not in counting]
    if dropped:
        notes += (f"{' and '.join(dropped)} rose, but less than the rest fell",)
    return Verdict(decided.kind, changes, decided, versions, notes)


def _of_one_version(before: Account, after: Account) -> list[tuple[str, Figure, Figure]]:
    names = dict.fromkeys((after.figure, "steps", "native", "work"))
    return _in_both(before, after, names)


def _of_two_versions(before: Account, after: Account) -> list[tuple[str, Figure, Figure]]:
    own = () if after.figure in OF_THE_VERSION else (after.figure,)
    pairs = _in_both(before, after, dict.fromkeys((*own, *CLASSES, "native")))
    whole = whole_of(before), whole_of(after)
    if whole[0] is not None and whole[1] is not None:
        pairs.append((OPERATIONS, whole[0], whole[1]))
    return pairs


def _in_both(
    before: Account, after: Account, names: Mapping[str, None]
) -> list[tuple[str, Figure, Figure]]:
    pairs = []
    for name in names:
        a, b = before.figures.get(name), after.figures.get(name)
        if a is None and b is None:
            continue
        # An operation class that never occurs has no law: none of it is counted.
        if a is None and b is not None and name in CLASSES:
            a = _nothing(b)
        if b is None and a is not None and name in CLASSES:
            b = _nothing(a)
        if a is not None and b is not None:
            pairs.append((name, a, b))
    return pairs


def _nothing(other: Figure) -> Figure:
    sizes = [[x for _, x in size] for size in other.counts]
    law = {
        "formula": "0",
        "leading": "0",
        "grade": "exact",
        "holds_from": 0,
        "settled_by": sizes or [*other.law["settled_by"], *other.law["checked_at"]],
        "checked_at": [],
        "error": 0.0,
        "note": "never seen",
    }
    return Figure(law, dict.fromkeys(other.counts, Fraction(0)), other.names)


def _counting(changes: Sequence[Change], whole: str, own: str) -> list[Change]:
    """Give the changes that the verdict is made of.

    Steps may go into C code and native visits into Python: where both together became less, it
    does not count that one of them became more, unless the study is about that one.
    """
    of_whole = next((c for c in changes if c.figure == whole), None)
    if of_whole is None or of_whole.kind != BETTER:
        return list(changes)
    return [
        c
        for c in changes
        if c.kind in HOLDS or c.figure == whole or (c.figure == own and own != "steps")
    ]


def _notes(before: Account, after: Account) -> tuple[str, ...]:
    notes = []
    if before.feed != after.feed:
        notes.append("the feed is another one than before")
    if before.figure != after.figure:
        notes.append(f"the study was about {before.figure} before and is about {after.figure} now")
    return tuple(notes)
