"""Lives of the office's structures: the operations of a day, for `steplaw life`."""

from __future__ import annotations

from typing import Any


class StandbyQueue:
    """Parties that wait for a seat, first come first served, kept on two stacks."""

    def __init__(self) -> None:
        self.arriving: list[int] = []
        self.waiting: list[int] = []

    def join(self, reference: int) -> None:
        self.arriving.append(reference)

    def serve(self) -> int:
        if not self.waiting:
            while self.arriving:
                self.waiting.append(self.arriving.pop())
        return self.waiting.pop()


def standby_day(n: int) -> list[tuple[Any, ...]]:
    """Give a day on which n parties join, and then all are served."""
    queue = StandbyQueue()
    return [*((queue.join, reference) for reference in range(n)), *([(queue.serve,)] * n)]
