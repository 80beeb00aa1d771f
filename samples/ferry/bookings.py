"""Bookings: without repeats, by sailing, and what is left to sell."""

from __future__ import annotations

from typing import NamedTuple


class Booking(NamedTuple):
    """Seats that a party has taken on a sailing, by its place in the timetable."""

    reference: int
    sailing: int
    seats: int


def without_repeats(references: list[int]) -> list[int]:
    """Keep the first of each booking reference, in the order they came in."""
    seen: list[int] = []
    for reference in references:
        if reference not in seen:
            seen.append(reference)
    return seen


def without_repeats_fast(references: list[int]) -> list[int]:
    """Keep the same references by means of a set."""
    seen: set[int] = set()
    kept = []
    for reference in references:
        if reference not in seen:
            seen.add(reference)
            kept.append(reference)
    return kept


def seats_by_sailing(bookings: list[Booking]) -> dict[int, int]:
    """Add up the seats taken on each sailing."""
    taken: dict[int, int] = {}
    for booking in bookings:
        taken[booking.sailing] = taken.get(booking.sailing, 0) + booking.seats
    return taken


def parties_in_touch(bookings: list[Booking]) -> list[list[int]]:
    """Group the references of those who share a sailing, sailing by sailing."""
    groups: dict[int, list[int]] = {}
    for booking in bookings:
        groups.setdefault(booking.sailing, []).append(booking.reference)
    return [groups[sailing] for sailing in sorted(groups)]


def busiest_stretch(seats: list[int], days: int) -> int:
    """Find the most seats sold in so many days on end, each stretch added up anew."""
    best = 0
    for first in range(len(seats) - days + 1):
        total = 0
        for day in range(first, first + days):
            total += seats[day]
        best = max(best, total)
    return best
