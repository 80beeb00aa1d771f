"""The ledger of one process: what was charged at which place, and what was not."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

Taken = tuple[tuple[Any, ...], tuple[Any, ...]]

#: What no callable and no type is: a place that has not been passed yet.
NOTHING = object()
#: Passes of a place with nothing to charge, after which it is no longer looked at.
PASSES_SEEN = 4


class Place:
    """One instruction whose work may grow with its operands.

    Parameters
    ----------
    file : str
        Source file.
    line : int
        Line of the instruction.
    name : str
        Name of the method that is loaded there, empty otherwise.
    argument : int
        Argument of the instruction.

    Attributes
    ----------
    quiet : object
        The callable, or the type of the operand, that was seen last and has nothing to charge;
        while it is the same, nothing else is looked at.
    open : bool
        Whether a method call is still looked at.
    other : object
        The one seen before that.
    calm : object
        Type of the one argument with which a call of `other` has nothing to charge.
    known : object
        The callable that a rule was found for last; its type, where it is a method of C.
    rule : object
        That rule, where it depends on the callable alone.
    whole : bool
        Whether short whole numbers alone have met there: then the result is looked at.
    found : tuple or None
        The rule found for the call that is about to be made.
    """

    __slots__ = (
        "argument",
        "calm",
        "charges",
        "file",
        "found",
        "known",
        "line",
        "long",
        "name",
        "open",
        "other",
        "quiet",
        "rule",
        "seen",
        "whole",
    )

    def __init__(self, file: str, line: int, name: str = "", argument: int = 0) -> None:
        self.file = file
        self.line = line
        self.name = name
        self.argument = argument
        self.quiet: Any = NOTHING
        self.other: Any = NOTHING
        self.calm: Any = NOTHING
        self.known: Any = NOTHING
        self.rule: Any = None
        self.open = True
        self.whole = False
        self.long = False
        self.seen = 0
        self.found: Any = None
        self.charges: dict[str, list[Any]] = {}

    def passed(self) -> None:
        """Note a pass with nothing to charge."""
        self.seen += 1
        if self.seen >= PASSES_SEEN:
            self.open = False

    def settle(self, seen: object) -> None:
        """Keep what was seen and has nothing to charge."""
        if seen is not self.quiet:
            self.other, self.quiet = self.quiet, seen


class Ledger:
    """Charges since the last time they were taken.

    Attributes
    ----------
    long_met : bool
        Whether whole numbers have got long anywhere.
    short : list of Place
        Places that are passed in line as long as none has.
    """

    def __init__(self) -> None:
        self.long_met = False
        self.short: list[Place] = []
        self._charged: list[Place] = []
        self._uncharged: dict[tuple[str, int, str], list[Any]] = {}

    def charge(self, place: Place, operation: str, visits: int, exact: bool = True) -> None:
        """Charge the visits of one pass.

        Parameters
        ----------
        place : Place
            The instruction.
        operation : str
            What was done, for people.
        visits : int
            Element visits; at most so many where they are not exact.
        exact : bool
            Whether they are.
        """
        charges = place.charges
        entry = charges.get(operation)
        if entry is None:
            if not charges:
                self._charged.append(place)
            charges[operation] = [1, visits, exact]
            return
        entry[0] += 1
        entry[1] += visits
        if not exact:
            entry[2] = False

    def pass_over(self, place: Place, operation: str, sizes: Sequence[int]) -> None:
        """Note a C call that has no rule, with the sizes of its operands."""
        key = place.file, place.line, operation
        largest = max(sizes, default=0)
        entry = self._uncharged.get(key)
        if entry is None:
            self._uncharged[key] = [1, largest]
        else:
            entry[0] += 1
            entry[1] = max(entry[1], largest)

    def take(self) -> Taken:
        """Give all charges and what was not charged, and begin anew.

        Returns
        -------
        charged, uncharged : tuple
            File, line, operation, times, visits and whether they are exact; and file, line,
            operation, times and the largest operand.
        """
        sums: dict[tuple[str, int, str], list[Any]] = {}
        for place in self._charged:
            for operation, (times, visits, exact) in place.charges.items():
                entry = sums.setdefault((place.file, place.line, operation), [0, 0, True])
                entry[0] += times
                entry[1] += visits
                entry[2] = entry[2] and exact
            place.charges = {}
        charged = tuple((*key, *entry) for key, entry in sorted(sums.items()))
        uncharged = tuple((*key, *entry) for key, entry in sorted(self._uncharged.items()))
        self._charged.clear()
        self._uncharged.clear()
        return charged, uncharged


LEDGER = Ledger()
