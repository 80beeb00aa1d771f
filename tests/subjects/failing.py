"""Subjects that fail, each in its own way, once they are given more than a few numbers."""

from __future__ import annotations

import ctypes
import os
import random
import sys
import time

FEW = 12


class Ledger:
    def total(self, sums: list[int]) -> int:
        return sum(sums)


def well(sums: list[int]) -> int:
    total = 0
    for each in sums:
        total += each
    return total


def raises(sums: list[int]) -> int:
    if len(sums) > FEW:
        raise ValueError("too many\nsums")
    return well(sums)


def raises_always(sums: list[int]) -> int:
    raise KeyError(sums)


def raises_when_empty(sums: list[int]) -> int:
    sums[0]
    return well(sums)


def raises_its_own(sums: list[int]) -> int:
    class Storm(BaseException):
        pass

    if len(sums) > FEW:
        raise Storm("out at sea")
    return well(sums)


def recurs(sums: list[int]) -> int:
    return recurs(sums) if len(sums) > FEW else well(sums)


def never_ends(sums: list[int]) -> int:
    while len(sums) > FEW:
        pass
    return well(sums)


def takes_all_at_once(sums: list[int]) -> int:
    if len(sums) > FEW:
        bytearray(1 << 40)
    return well(sums)


def takes_more_and_more(sums: list[int]) -> int:
    kept: list[list[int]] = []
    while len(sums) > FEW:
        kept.append([0] * 10_000)
    return well(sums)


def leaves(sums: list[int]) -> int:
    if len(sums) > FEW:
        sys.exit("no more today")
    return well(sums)


def leaves_at_once(sums: list[int]) -> int:
    if len(sums) > FEW:
        os._exit(7)
    return well(sums)


def crashes(sums: list[int]) -> int:
    if len(sums) > FEW:
        ctypes.string_at(0)
    return well(sums)


def asks_the_system(sums: list[int]) -> int:
    heads = 0
    for _ in sums:
        if os.urandom(1)[0] & 1:
            heads += 1
    return heads


def draws_unseeded(sums: list[int]) -> int:
    heads = 0
    for _ in sums:
        if random.random() < 0.5:
            heads += 1
    return heads


def waits(sums: list[int]) -> int:
    rounds = 0
    end = time.perf_counter() + 0.001
    while time.perf_counter() < end:
        rounds += 1
    return rounds


def fails_by_chance(sums: list[int]) -> int:
    if len(sums) > FEW and os.getpid() % 2 == os.getppid() % 2:
        raise OSError("not this time")
    return well(sums)


def sleeps(sums: list[int]) -> int:
    if len(sums) > FEW:
        time.sleep(60)
    return well(sums)
