"""An adversary for methods that compare: it decides the order of the elements as they are compared.

M. D. McIlroy, A Killer Adversary for Quicksort, Software: Practice and Experience 29 (1999). All
elements begin undecided ('gas'), each larger than any decided one. Where two undecided ones meet,
one of them is decided as the least still free, preferably the one that was compared last, since
that is likely the pivot: it will split off next to nothing.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import suppress
from typing import TYPE_CHECKING

from steplaw import subject as subjects
from steplaw.host.fork import Reply

if TYPE_CHECKING:
    from steplaw.host.counted import CountedSubject


class Order:
    """The order as far as it is decided.

    Parameters
    ----------
    size : int
        How many elements there are.
    """

    def __init__(self, size: int) -> None:
        self.size = size
        self.values = [size] * size
        self.decided = 0
        self.candidate = -1

    def difference(self, a: int, b: int) -> int:
        """Compare two elements: below, at or above 0."""
        values, gas = self.values, self.size
        if a == b:
            return 0
        if values[a] == gas and values[b] == gas:
            one = a if a == self.candidate else b
            values[one] = self.decided
            self.decided += 1
        if values[a] == gas:
            self.candidate = a
        elif values[b] == gas:
            self.candidate = b
        return values[a] - values[b]

    def settle(self) -> list[int]:
        """Decide what is left, in the order of the places."""
        for place, value in enumerate(self.values):
            if value == self.size:
                self.values[place] = self.decided
                self.decided += 1
        return self.values


class Element:
    """An element whose value is decided when it is compared."""

    __slots__ = ("order", "place")

    def __init__(self, order: Order, place: int) -> None:
        self.order = order
        self.place = place

    def __lt__(self, other: Element) -> bool:
        return self.order.difference(self.place, other.place) < 0

    def __le__(self, other: Element) -> bool:
        return self.order.difference(self.place, other.place) <= 0

    def __gt__(self, other: Element) -> bool:
        return self.order.difference(self.place, other.place) > 0

    def __ge__(self, other: Element) -> bool:
        return self.order.difference(self.place, other.place) >= 0

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Element) and self.place == other.place

    def __hash__(self) -> int:
        return hash(self.place)


def adversary(counted: CountedSubject, size: int, rest: Sequence[object]) -> Iterator[Reply]:
    """Run the subject on undecided elements and give the order that it brought about.

    Parameters
    ----------
    counted : CountedSubject
        A subject whose first argument is a list to be compared.
    size : int
        Elements of the list.
    rest : sequence
        The other arguments.

    Yields
    ------
    dict
        ``order``: the ranks of the elements. A subject that does more than compare them raises;
        the order is what was decided until then.
    """
    order = Order(size)
    elements = [Element(order, place) for place in range(size)]
    with suppress(Exception):
        subjects.call(counted.subject, (elements, *rest), {})
    yield {"order": order.settle()}
