"""The fleet: days in the yard, shared cycles, records, and rosters of crews."""

from __future__ import annotations


def vessels_in_yard(days: int) -> list[int]:
    """Count the vessels in the yard on each day, vessel k being there every k-th day.

    There are as many vessels as days; place 0 of the list is no day and stays 0.
    """
    in_yard = [0] * (days + 1)
    for vessel in range(1, days + 1):
        for day in range(vessel, days + 1, vessel):
            in_yard[day] += 1
    return in_yard


def days_until_together(first: int, second: int) -> int:
    """Find after how many days two vessels are in port together again, from their cycles."""
    a, b = first, second
    while b:
        a, b = b, a % b
    return first * second // a if a else 0


def record_loads(loads: list[int]) -> int:
    """Count how often a sailing carried more than any before it."""
    records = 0
    most = -1
    for load in loads:
        if load > most:
            most = load
            records += 1
    return records


def crew_pairs(crews: int) -> list[tuple[int, int]]:
    """List the pairs of crews that hand over to each other once in a season."""
    pairs = []
    for first in range(crews):
        for second in range(first + 1, crews):
            pairs.append((first, second))
    return pairs


def relief_points(miles: int) -> list[int]:
    """List where a relief crew could board: half the way, then half of what is left."""
    points = []
    gone = 0
    while miles - gone > 1:
        gone += (miles - gone) // 2
        points.append(gone)
    return points
