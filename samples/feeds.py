"""Inputs for the ferry office's functions: functions of a size and a seeded generator."""

from __future__ import annotations

import random

from ferry.bookings import Booking
from ferry.timetable import Sailing
from steplaw.feed import Args, args

DAY = 24 * 60


def sailings(n: int, rng: random.Random) -> list[Sailing]:
    """Give n sailings at random minutes of the day, half an hour to two hours long."""
    return [Sailing(rng.randrange(DAY), rng.randrange(30, 121)) for _ in range(n)]


def even_sailings(n: int) -> list[Sailing]:
    """Give n sailings at every full hour, three quarters of an hour long."""
    return [Sailing(60 * i, 45) for i in range(n)]


def long_sailings(n: int) -> list[Sailing]:
    """Give n sailings at every full hour, each still under way when the next one leaves."""
    return [Sailing(60 * i, 90) for i in range(n)]


def departures(n: int, rng: random.Random) -> list[int]:
    """Give n departures in random order."""
    return rng.sample(range(n), n)


def timetable_and_minute(n: int, rng: random.Random) -> Args:
    """Give an ordered timetable of n departures and a minute to look for."""
    return args([10 * i for i in range(n)], rng.randrange(10 * n + 1))


def last_minute(n: int) -> Args:
    """Give an ordered timetable of n departures and a minute after all of them."""
    return args(list(range(n)), n)


def bookings(n: int, rng: random.Random) -> list[Booking]:
    """Give n bookings over a dozen sailings."""
    return [Booking(i, rng.randrange(12), rng.randrange(1, 6)) for i in range(n)]


def new_references(n: int) -> list[int]:
    """Give n booking references, each of them new."""
    return list(range(n))


def repeated_references(n: int, rng: random.Random) -> list[int]:
    """Give n booking references, many of them entered more than once."""
    return [rng.randrange(max(1, n // 2)) for _ in range(n)]


def fares(n: int, rng: random.Random) -> list[list[int]]:
    """Give the direct fares between n ports."""
    return [[rng.randrange(5, 100) for _ in range(n)] for _ in range(n)]


def even_fares(n: int) -> list[list[int]]:
    """Give n ports between which a transfer never saves anything."""
    return [[10] * n for _ in range(n)]


def port_links(n: int, rng: random.Random) -> dict[int, list[int]]:
    """Give n ports, each linked both ways to an earlier one, and n more links at random."""
    links: dict[int, list[int]] = {port: [] for port in range(n)}
    pairs = [(rng.randrange(port), port) for port in range(1, n)]
    pairs += [(rng.randrange(n), rng.randrange(n)) for _ in range(n)]
    for one, other in pairs:
        links[one].append(other)
        links[other].append(one)
    return links


def lots_and_room(n: int, rng: random.Random) -> Args:
    """Give n lots of up to 20 tonnes and a deck for half of them."""
    weights = [rng.randrange(1, 21) for _ in range(n)]
    return args(weights, sum(weights) // 2)


def light_lots(n: int) -> Args:
    """Give n lots that all fit, so that every choice of them is a loading plan."""
    return args([1] * n, n)


def lots_on_deck(n: int, m: int, rng: random.Random) -> Args:
    """Give n lots of up to 20 tonnes and a deck for m tonnes."""
    return args([rng.randrange(1, 21) for _ in range(n)], m)


def neighbouring_cycles(n: int) -> Args:
    """Give two cycles in days that need the most divisions: neighbours in Fibonacci's series."""
    a, b = 1, 1
    for _ in range(n):
        a, b = a + b, a
    return args(a, b)
