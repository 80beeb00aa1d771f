"""The day's timetable: which sailings clash, which one vessel could serve, which is next."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from typing import NamedTuple


class Sailing(NamedTuple):
    """A sailing, by minutes of the day.

    A vessel needs to be in port before its next departure, not on the very minute.
    """

    departure: int
    crossing: int


def trios(sailings: list[Sailing]) -> int:
    """Count the trios of sailings that one vessel could serve, since no two of them overlap."""
    n = len(sailings)
    day = sorted(sailings)
    leaves = [sailing.departure for sailing in day]
    in_port = [sailing.departure + sailing.crossing for sailing in day]
    found = 0
    for i in range(n):
        for j in range(i + 1, n):
            for k in range(j + 1, n):
                if in_port[i] < leaves[j] and in_port[j] < leaves[k]:
                    found += 1
    return found


def trios_fast(sailings: list[Sailing]) -> int:
    """Count the same trios by their middle sailing: those over before it, those still to leave."""
    leaves = sorted(sailing.departure for sailing in sailings)
    in_port = sorted(sailing.departure + sailing.crossing for sailing in sailings)
    found = 0
    for departure, crossing in sailings:
        before = bisect_left(in_port, departure)
        after = len(leaves) - bisect_right(leaves, departure + crossing)
        found += before * after
    return found


def clashes(sailings: list[Sailing]) -> list[tuple[int, int]]:
    """List the pairs of sailings, by place in the list, that need a vessel each."""
    pairs = []
    for i in range(len(sailings)):
        for j in range(i):
            first, second = sailings[j], sailings[i]
            if (
                first.departure <= second.departure + second.crossing
                and second.departure <= first.departure + first.crossing
            ):
                pairs.append((j, i))
    return pairs


def next_sailing(departures: list[int], minute: int) -> int:
    """Find the place of the first departure at or after a minute, in an ordered timetable."""
    low, high = 0, len(departures)
    while low < high:
        middle = (low + high) // 2
        if departures[middle] < minute:
            low = middle + 1
        else:
            high = middle
    return low


def in_order(departures: list[int]) -> list[int]:
    """Order departures by inserting each among those before it."""
    ordered = list(departures)
    for i in range(1, len(ordered)):
        departure = ordered[i]
        j = i
        while j > 0 and ordered[j - 1] > departure:
            ordered[j] = ordered[j - 1]
            j -= 1
        ordered[j] = departure
    return ordered


def in_order_fast(departures: list[int]) -> list[int]:
    """Order departures by halves: order each half, then merge the two."""
    if len(departures) < 2:
        return list(departures)
    middle = len(departures) // 2
    early = in_order_fast(departures[:middle])
    late = in_order_fast(departures[middle:])
    merged = []
    i = j = 0
    while i < len(early) and j < len(late):
        if late[j] < early[i]:
            merged.append(late[j])
            j += 1
        else:
            merged.append(early[i])
            i += 1
    merged += early[i:]
    merged += late[j:]
    return merged
