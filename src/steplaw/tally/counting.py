"""Counting in this process: one call, or a stretch of running."""

from __future__ import annotations

from collections.abc import Callable
from types import TracebackType
from typing import Any

from steplaw.tally.assembled import tally_of
from steplaw.tally.collector import Undisturbed
from steplaw.tally.install import Installation
from steplaw.tally.model import Tally
from steplaw.tally.registry import Registry
from steplaw.tally.snapshot import CodeCounts, Snapshot, counts_between
from steplaw.tally.waiting import Waiting
from steplaw.toll.ledger import LEDGER, Taken

_REGISTRY = Registry()
_WATCHED = Registry(watched=True)


class Counter:
    """What ran between two moments.

    Attributes
    ----------
    codes : list of CodeCounts
        Exact counts by code object.
    notes : list of str
        What keeps them from being exact.
    """

    def __init__(self) -> None:
        self.codes: list[CodeCounts] = []
        self.notes: list[str] = []
        self.taken: Taken | None = None
        self._tally: Tally | None = None

    @property
    def tally(self) -> Tally:
        """The tally of the stretch."""
        if self._tally is None:
            self._tally = tally_of(self.codes, self.notes, self.taken)
        return self._tally

    @property
    def probe_passes(self) -> int:
        """Probe passes in the stretch."""
        return sum(c.passes for c in self.codes)

    @property
    def blocks_run(self) -> int:
        """Basic blocks run in the stretch."""
        return sum(sum(c.entered) for c in self.codes)

    def instructions(self) -> dict[tuple[str, str, int], dict[int, int]]:
        """Give the count of every instruction.

        Returns
        -------
        dict
            Count by byte offset in the original code, by (file, qualified name, first line).
        """
        out: dict[tuple[str, str, int], dict[int, int]] = {}
        for item in self.codes:
            code, offsets = item.probed.original, item.probed.graph.decoded.offsets
            key = (code.co_filename, code.co_qualname, code.co_firstlineno)
            by_offset = out.setdefault(key, {})
            for k, n in enumerate(item.instructions):
                if n:
                    by_offset[2 * offsets[k]] = by_offset.get(2 * offsets[k], 0) + n
        return out


class counting:
    """Count all Python code that runs in a ``with`` block.

    Functions that run are counted, not the frame that holds the ``with`` block itself: its code
    was under way before.

    Parameters
    ----------
    ledger : bool
        Whether the element visits made in C are charged as well.
    """

    def __init__(self, ledger: bool = False) -> None:
        self._registry = _WATCHED if ledger else _REGISTRY
        self._installation = Installation(self._registry)

    def __enter__(self) -> Counter:
        self._counter = Counter()
        self._installation.enter()
        self._undisturbed = Undisturbed()
        self._undisturbed.__enter__()
        self._waiting = Waiting(self._registry)
        LEDGER.take()
        self._before = Snapshot(self._registry)
        return self._counter

    def __exit__(
        self,
        kind: type[BaseException] | None,
        value: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        if self._registry.watched:
            self._counter.taken = LEDGER.take()
        after = Snapshot(self._registry)
        self._undisturbed.__exit__(None, None, None)
        self._installation.leave()
        self._counter.notes = [
            *self._before.unsettled,
            *after.unsettled,
            *self._waiting.moved(),
        ]
        self._counter.codes = list(counts_between(self._before, after))


def count(function: Callable[..., Any], /, *args: Any, **kwargs: Any) -> Tally:
    """Run one call under probes and give its tally.

    Parameters
    ----------
    function : callable
        The subject.
    *args, **kwargs
        Its arguments.

    Returns
    -------
    Tally
        Steps of the call, all Python functions under it included.

    Raises
    ------
    BaseException
        What the call raises.
    """
    with counting(ledger=True) as counter:
        function(*args, **kwargs)
    return counter.tally
