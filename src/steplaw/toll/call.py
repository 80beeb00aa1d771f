"""One call of a C function that has a rule."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import compress, repeat
from operator import length_hint
from sys import maxsize
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.hidden import hidden


class Call:
    """A call that a rule makes and charges.

    Parameters
    ----------
    function : callable
        What is called.
    owner : object
        The object that a method is called of, the first argument of an unbound one.
    args : tuple
        Its arguments, without the owner.
    kwargs : dict
        Its keyword arguments.
    bound : bool
        Whether `function` holds the owner already.

    Attributes
    ----------
    visits : int
        Element visits charged so far.
    exact : bool
        Whether they are exact, or at most so many.
    """

    __slots__ = ("args", "bound", "exact", "function", "kwargs", "owner", "visits")

    def __init__(
        self,
        function: Callable[..., Any],
        owner: Any,
        args: tuple[Any, ...],
        kwargs: dict[str, Any],
        bound: bool,
    ) -> None:
        self.function = function
        self.owner = owner
        self.args = args
        self.kwargs = kwargs
        self.bound = bound
        self.visits = 0
        self.exact = True

    @hidden
    def run(self) -> Any:
        """Make the call."""
        if self.bound:
            return self.function(*self.args, **self.kwargs)
        return self.function(self.owner, *self.args, **self.kwargs)

    def at_most(self, visits: int) -> None:
        """Charge at most so many visits."""
        self.visits = visits
        self.exact = False

    def argument(self, number: int, name: str = "", default: Any = None) -> Any:
        """Give an argument by place or name."""
        if number < len(self.args):
            return self.args[number]
        return self.kwargs.get(name, default)

    def items(self, number: int, *, early: bool = False) -> Callable[[], int]:
        """Give what tells, after the call, how many items of an argument were read.

        Parameters
        ----------
        number : int
            Which argument.
        early : bool
            Whether reading may end before the last item.

        Returns
        -------
        callable
            Gives the number. What Python code makes item by item is paid for in steps; where it
            cannot be counted either, it is taken as none.
        """
        if number >= len(self.args):
            return int
        value = self.args[number]
        if not early:
            length = kinds.length(value)
            if length is not None:
                return lambda: length
        if kinds.length(value) is None and type(value) not in kinds.ITERATORS:
            return int
        probe = repeat(True, maxsize)
        counted = compress(value, probe)
        self.args = (*self.args[:number], counted, *self.args[number + 1 :])
        return lambda: maxsize - length_hint(probe)


@dataclass(frozen=True, slots=True)
class Rule:
    """How a C function is charged.

    Parameters
    ----------
    operation : str
        What it does, for people.
    charge : callable
        Makes the call and sets its visits.
    least, most : int
        It is charged with so many positional arguments, the owner not counted.
    """

    operation: str
    charge: Callable[[Call], Any]
    least: int = 0
    most: int = maxsize
