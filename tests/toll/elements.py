"""Elements that count what is done with them: the reference that tolls are held to."""

from __future__ import annotations

from collections import Counter

DONE: Counter[str] = Counter()


class Element:
    """A number that counts its comparisons, hashes and additions."""

    def __init__(self, value: int) -> None:
        self.value = value

    def __eq__(self, other: object) -> bool:
        DONE["eq"] += 1
        return isinstance(other, Element) and self.value == other.value

    def __lt__(self, other: Element) -> bool:
        DONE["lt"] += 1
        return self.value < other.value

    def __gt__(self, other: Element) -> bool:
        DONE["gt"] += 1
        return self.value > other.value

    def __hash__(self) -> int:
        DONE["hash"] += 1
        return hash(self.value)

    def __add__(self, other: Element | int) -> Element:
        DONE["add"] += 1
        return Element(self.value + (other.value if isinstance(other, Element) else other))

    __radd__ = __add__

    def __mul__(self, other: Element | int) -> Element:
        DONE["mul"] += 1
        return Element(self.value * (other.value if isinstance(other, Element) else other))

    __rmul__ = __mul__


def elements(n: int) -> list[Element]:
    """Give elements 0 to n-1, no two of them one object."""
    return [Element(value) for value in range(n)]
