"""The sizes that a law speaks of: those of the kind that it was found on."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

Json = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Domain:
    """Sizes of one name that a law speaks of.

    Parameters
    ----------
    first : int
        The smallest.
    kind : {"every", "even", "odd", "power"}
        Which sizes from there on.
    """

    first: int
    kind: str = "every"

    def holds(self, size: int) -> bool:
        """Say whether the law speaks of a size."""
        if size < self.first:
            return False
        if self.kind == "power":
            return size > 0 and size & (size - 1) == 0
        return self.kind == "every" or size % 2 == (self.kind == "odd")

    def count(self, size: int) -> int:
        """Give how many sizes of the domain are at most this one."""
        if size < self.first:
            return 0
        if self.kind == "power":
            return size.bit_length() - (max(1, self.first) - 1).bit_length()
        if self.kind == "every":
            return size - self.first + 1
        start = self.size(0)
        return 0 if size < start else (size - start) // 2 + 1

    def size(self, index: int) -> int:
        """Give the size with this index, counted from 0."""
        if self.kind == "power":
            return 1 << ((max(1, self.first) - 1).bit_length() + index)
        if self.kind == "every":
            return self.first + index
        start = self.first + (self.first % 2 != (self.kind == "odd"))
        return start + 2 * index

    def why_not(self, name: str, size: int) -> str:
        """Say why the law does not speak of a size; nothing where it does."""
        if self.holds(size):
            return ""
        if size < self.first:
            return f"the law holds from {name} = {self.first} on"
        if self.kind != "power":
            return f"the law was found on {self.kind} sizes alone: ask at {name} = {size + 1}"
        below = 1 << max(0, size.bit_length() - 1)
        near = f"{name} = " + (f"{below} or {2 * below}" if size > below else f"{below}")
        return f"the law was found on powers of two alone: ask at {near}"


def domains(law: Json, names: Sequence[str]) -> dict[str, Domain]:
    """Give the sizes that a law speaks of, by size name.

    Parameters
    ----------
    law : mapping
        A LAW of a record.
    names : sequence of str
        The size names.

    Returns
    -------
    dict
        A proved law speaks of all sizes from its first on. Another whose sizes were all powers
        of two, or all even, or all odd, speaks of such sizes alone.
    """
    seen = [_point(entry, names) for entry in (*law["settled_by"], *law["checked_at"])]
    starts = law["holds_from"]
    first = dict.fromkeys(names, 0) if starts is None else _point(starts, names)
    out = {}
    for name in names:
        values = {at[name] for at in seen}
        kind = "every" if law["grade"] == "proved" else _kind(values)
        least = first[name]
        if law["grade"] == "fitted":
            least = max(2, least)
        out[name] = Domain(least, kind)
    return out


def _kind(values: set[int]) -> str:
    if len(values) < 3 or max(values) <= 2:
        return "every"
    if all(n > 0 and n & (n - 1) == 0 for n in values):
        return "power"
    return {frozenset({0}): "even", frozenset({1}): "odd"}.get(
        frozenset(n % 2 for n in values), "every"
    )


def _point(entry: Any, names: Sequence[str]) -> dict[str, int]:
    if isinstance(entry, Mapping):
        return {name: int(entry[name]) for name in names}
    values = entry if isinstance(entry, list | tuple) else [entry] * len(names)
    return dict(zip(names, values, strict=True))
