"""Laws of the record read along one size name, the other sizes held."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from steplaw.faces.reading import size_names
from steplaw.faces.tree import tree

Json = Mapping[str, Any]
Number = Fraction | float
#: Beyond this a value is of no use to a reader, and costs more and more to work out.
MOST = 10**40
MOST_SIZE = 10**9


@dataclass(frozen=True, slots=True)
class Along:
    """One size name, and the sizes that the others are held at.

    Parameters
    ----------
    name : str
        The size that grows.
    held : mapping of str to int
        The other sizes.
    run : tuple of int
        Sizes of `name` that were run with the others held so, in rising order.
    names : tuple of str
        All size names, in the record's order.
    """

    name: str
    held: Mapping[str, int]
    run: tuple[int, ...]
    names: tuple[str, ...]

    def at(self, size: int) -> dict[str, int]:
        """Give the whole size where `name` is this one."""
        return {**self.held, self.name: size}

    @property
    def where(self) -> str:
        """Say where the others are held; nothing where there are none."""
        return ", ".join(f"{name} = {size}" for name, size in self.held.items())


def ways(record: Json) -> list[Along]:
    """Give a way through the sizes for each size name.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    list of Along
        The others are held where most sizes were run, at the greatest of these.
    """
    names = size_names(record)
    plan = [value["at"] for value in record["figure"].get("values") or []]
    out = []
    for name in names:
        others = [other for other in names if other != name]
        found = Counter(tuple(at[other] for other in others) for at in plan)
        if not found:
            continue
        held = max(found, key=lambda key: (found[key], key))
        fixed = dict(zip(others, held, strict=True))
        run = {at[name] for at in plan if all(at[k] == v for k, v in fixed.items())}
        out.append(Along(name, fixed, tuple(sorted(run)), tuple(names)))
    return out


def reader(law: Json | None, names: Sequence[str]) -> Callable[[Mapping[str, int]], Number] | None:
    """Give a function that works a law's formula out at a size.

    Parameters
    ----------
    law : mapping or None
        A LAW of the record.
    names : sequence of str
        The size names.

    Returns
    -------
    callable or None
        Takes a size and gives the value, not a number where the formula has none there. None
        where there is no formula, or it holds what is not part of the notation: a stored record is
        untrusted, and such a text is never handed on.
    """
    formula = (law or {}).get("formula")
    return None if formula is None else formula_reader(str(formula), names)


def formula_reader(
    formula: str, names: Sequence[str]
) -> Callable[[Mapping[str, int]], Number] | None:
    """Give the same for the text of a formula."""
    if tree(formula, names) is None:
        return None
    from steplaw.law import value

    def read(at: Mapping[str, int]) -> Number:
        try:
            return value(formula, at)
        except (ArithmeticError, ValueError, TypeError, RecursionError, AttributeError):
            return math.nan

    return read


def starts_at(law: Json, along: Along) -> int:
    """Give the size from which a law holds, along one name."""
    start = law.get("holds_from")
    if isinstance(start, Mapping):
        start = start.get(along.name, 0)
    if isinstance(start, list):
        place = along.names.index(along.name)
        start = start[place] if place < len(start) else 0
    return start if isinstance(start, int) else 0


def finite(number: Number) -> bool:
    """Whether a value can be drawn or compared."""
    return math.isfinite(number) and -MOST < number < MOST


def stops(low: int, most: int) -> list[int]:
    """Give sizes to look at: each small one, then twelve or so to a factor of ten.

    Parameters
    ----------
    low, most : int
        First and last size.

    Returns
    -------
    list of int
        In rising order, both ends included.
    """
    out = set(range(low, min(most, 20) + 1)) | {low, most}
    step = 13
    while 20 < (size := _round(10 ** (step / 10))) < most or size <= 20:
        out.add(max(size, low))
        step += 1
        if step > 200:
            break
    return sorted(size for size in out if low <= size <= most)


def _round(number: float) -> int:
    scale = 10 ** max(0, math.floor(math.log10(number)) - 1)
    return int(round(number / scale) * scale)
