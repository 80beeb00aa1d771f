"""Native visits against elements that count themselves, and against the length copied or moved.

The lengths are those of CPython's own documentation and sources (Objects/listobject.c,
Objects/setobject.c, Modules/_collectionsmodule.c); the comparisons are counted by the elements
while the operation runs untouched.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from steplaw.tally import counting
from steplaw.toll.ledger import LEDGER
from toll.elements import DONE
from toll.operations import BOUNDS, COUNTED, LENGTHS, LENGTHS_AT_MOST, ONE_MORE, Make

SIZES = [(n, at) for n in (0, 1, 2, 3, 7, 20, 65) for at in (0, 1, 3, 12, 64, 70)]


def truth(call: Callable[..., Any], made: tuple[Any, ...], kinds: tuple[str, ...]) -> int:
    """Count what the elements do when a call runs untouched."""
    DONE.clear()
    call(*made)
    return sum(DONE[kind] for kind in kinds)


Charged = list[tuple[tuple[int, int], int, bool]]


def charged(make: Make, call: Callable[..., Any], least: int = 0) -> Charged:
    """Give visits, and whether they are exact, by size and place; probes are set once for all."""
    out = []
    with counting(ledger=True):
        for n, at in SIZES:
            if n < least:
                continue
            made = make(n, at)
            LEDGER.take()
            call(*made)
            rows = LEDGER.take()[0]
            out.append(((n, at), sum(row[4] for row in rows), all(row[5] for row in rows)))
    return out


@pytest.mark.parametrize("name", sorted(COUNTED))
def test_visits_are_what_elements_count(name: str) -> None:
    make, call, kinds = COUNTED[name]
    for (n, at), visits, exact in charged(make, call):
        expected = truth(call, make(n, at), kinds) if kinds else n
        assert (visits, exact) == (expected, True), (n, at)


@pytest.mark.parametrize("name", sorted(ONE_MORE))
def test_the_first_item_is_visited_too(name: str) -> None:
    make, call, kinds = ONE_MORE[name]
    for (n, at), visits, _ in charged(make, call, least=1):
        assert visits == truth(call, make(n, at), kinds) + 1, (n, at)


def test_sorted_is_charged_items_and_comparisons() -> None:
    make, _, kinds = COUNTED["list.sort"]
    for (n, at), visits, _ in charged(make, lambda xs: sorted(xs)):
        assert visits == truth(sorted, make(n, at), kinds) + n, (n, at)


@pytest.mark.parametrize("name", sorted(LENGTHS))
def test_visits_are_the_length_copied_or_moved(name: str) -> None:
    make, call, length = LENGTHS[name]
    for (n, at), visits, exact in charged(make, call):
        assert (visits, exact) == (length(n, at), True), (n, at)


@pytest.mark.parametrize("name", sorted(BOUNDS))
def test_a_bound_is_never_below_the_truth(name: str) -> None:
    make, call, kinds = BOUNDS[name]
    for (n, at), visits, exact in charged(make, call):
        assert visits >= truth(call, make(n, at), kinds), (n, at)
        assert not visits or not exact, (n, at)


def test_a_pattern_is_charged_the_text_it_passes_over() -> None:
    make, call, length = LENGTHS_AT_MOST["re search"]
    for (n, at), visits, exact in charged(make, call):
        assert visits == length(n, at)
        assert not visits or not exact


def test_there_are_at_least_sixty_operations() -> None:
    assert len(COUNTED) + len(ONE_MORE) + len(LENGTHS) + len(BOUNDS) >= 60
