"""Transfers between ports: fares, links, and travel in two legs."""

from __future__ import annotations

from collections import deque


def cheapest(fares: list[list[int]]) -> list[list[int]]:
    """Find the cheapest fare between all ports, with transfers anywhere.

    The fare from a port to another by a direct sailing is ``fares[origin][destination]``.
    """
    best = [list(row) for row in fares]
    ports = range(len(best))
    for port in ports:
        best[port][port] = 0
    for transfer in ports:
        for origin in ports:
            for destination in ports:
                by_way_of = best[origin][transfer] + best[transfer][destination]
                if by_way_of < best[origin][destination]:
                    best[origin][destination] = by_way_of
    return best


def two_leg_trips(departures: list[list[int]]) -> list[list[int]]:
    """Count the ways to travel between all ports in two legs, from daily departures."""
    n = len(departures)
    trips = []
    for origin in range(n):
        row = []
        for destination in range(n):
            ways = 0
            for transfer in range(n):
                ways += departures[origin][transfer] * departures[transfer][destination]
            row.append(ways)
        trips.append(row)
    return trips


def legs_from(links: dict[int, list[int]], home: int = 0) -> dict[int, int]:
    """Count the fewest legs from a home port to every port that can be reached."""
    legs = {home: 0}
    waiting = deque([home])
    while waiting:
        port = waiting.popleft()
        for neighbour in links.get(port, []):
            if neighbour not in legs:
                legs[neighbour] = legs[port] + 1
                waiting.append(neighbour)
    return legs


def is_symmetric(fares: list[list[int]]) -> bool:
    """Tell whether each trip costs the same both ways."""
    for origin in range(len(fares)):
        for destination in range(origin):
            if fares[origin][destination] != fares[destination][origin]:
                return False
    return True
