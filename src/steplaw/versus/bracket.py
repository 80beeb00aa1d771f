"""Which of two formulas is less, size by size, settled by enclosures of whole stretches."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from steplaw.law.evaluate import value
from steplaw.versus.enclose import Unenclosed, enclose
from steplaw.versus.spans import Less, Span, joined, side

LARGEST = 10**18
SMALL = 64
"""Sizes below this are worked out one by one."""
MOST_ENCLOSED = 4000
MOST_WORKED_OUT = 4096
"""Sizes worked out one by one where no stretch can be enclosed."""


class Bracketing:
    """Settles the sign of a difference over all sizes up to `LARGEST`.

    Parameters
    ----------
    a, b : str
        The two formulas, in one size name.
    difference : str
        The first less the second, with what cancels taken out.
    name : str
        The size name.
    """

    def __init__(self, a: str, b: str, difference: str, name: str) -> None:
        self.a, self.b, self.difference, self.name = a, b, difference, name
        self.left = MOST_ENCLOSED

    def spans(self, first: int) -> list[Span]:
        """Give the spans from a size on; the last one ends where nothing more was settled.

        Parameters
        ----------
        first : int
            The smallest size.
        """
        out = [Span(n, n, self.at(n)) for n in range(first, max(first, SMALL))]
        start = max(first, SMALL)
        try:
            while start <= LARGEST:
                end = min(LARGEST, (1 << start.bit_length()) - 1)
                out += self._stretch(start, end)
                start = end + 1
        except Unenclosed:
            start = (out[-1].last or 0) + 1 if out else start  # what was settled stays
            stop = max(start, MOST_WORKED_OUT)
            out += [Span(n, n, self.at(n)) for n in range(start, stop)]
        return joined(out)

    def at(self, size: int) -> Less:
        """Say which is less at one size."""
        if size > 1:
            try:
                found = self._over(size, size)
            except Unenclosed:
                found = None
            if found is not None:
                return found
        a, b = (value(f, {self.name: size}) for f in (self.a, self.b))
        if isinstance(a, Fraction) and isinstance(b, Fraction):
            return side(a - b)
        return "unknown"

    def _over(self, low: int, high: int) -> Less | None:
        """Say which is surely less at every size of a stretch."""
        least, most = enclose(self.difference, self.name, low, high)
        if most < 0:
            return "a"
        return "b" if least > 0 else None

    def _stretch(self, low: int, high: int) -> Iterator[Span]:
        waiting = [(low, high)]
        while waiting:
            low, high = waiting.pop()
            if low == high:
                yield Span(low, low, self.at(low))
                continue
            self.left -= 1
            if self.left < 0:
                raise Unenclosed("too many stretches")
            found = self._over(low, high)
            if found is not None:
                yield Span(low, high, found)
                continue
            middle = (low + high) // 2
            waiting += [(middle + 1, high), (low, middle)]
