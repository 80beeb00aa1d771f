"""Cargo: which lots go together, how a quay fills, how containers are moved."""

from __future__ import annotations


def loading_plans(weights: list[int], room: int, lot: int = 0) -> int:
    """Count the choices of lots, none at all included, that stay within the room on deck."""
    if room < 0:
        return 0
    if lot == len(weights):
        return 1
    without = loading_plans(weights, room, lot + 1)
    return without + loading_plans(weights, room - weights[lot], lot + 1)


def berth_fillings(length: int) -> int:
    """Count the ways to fill a quay with boats one berth and two berths long."""
    if length < 2:
        return 1
    return berth_fillings(length - 1) + berth_fillings(length - 2)


def restacking_moves(containers: int) -> int:
    """Count the crane's moves to shift a stack by way of one spare place.

    A container is never put on a lighter one.
    """
    if containers == 0:
        return 0
    return restacking_moves(containers - 1) + 1 + restacking_moves(containers - 1)


def best_load(weights: list[int], room: int) -> int:
    """Find the greatest weight of lots, each whole, that the deck can take."""
    reached = [False] * (room + 1)
    reached[0] = True
    for weight in weights:
        for load in range(room, weight - 1, -1):
            if reached[load - weight]:
                reached[load] = True
    best = 0
    for load in range(room + 1):
        if reached[load]:
            best = load
    return best


def heaviest_first(weights: list[int]) -> list[int]:
    """Order lots by picking the heaviest that is left, again and again."""
    lots = list(weights)
    for place in range(len(lots) - 1):
        heaviest = place
        for other in range(place + 1, len(lots)):
            if lots[other] > lots[heaviest]:
                heaviest = other
        lots[place], lots[heaviest] = lots[heaviest], lots[place]
    return lots
