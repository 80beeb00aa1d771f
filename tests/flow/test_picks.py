"""Functions of the standard library and networkx: what is derived is what the counts confirm.

A hundred functions were picked beforehand. `python tests/bench/derive_real.py` does all of them
and prints what stopped the others; a share is held here.
"""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent))

from confirm import confirm, derived, module_of
from picks import PICKS, arguments_of, function_of


def test_there_are_a_hundred_picks() -> None:
    assert len(dict(PICKS)) == 100


@pytest.mark.parametrize(("place", "text"), PICKS[::5], ids=[place for place, _ in PICKS[::5]])
def test_nothing_derived_is_contradicted_by_counts(place: str, text: str) -> None:
    if place.startswith("networkx"):
        pytest.importorskip("networkx")
    function = function_of(place)
    if function is None:
        pytest.skip("this version has no such function")
    found = derived(function, module_of(function))
    args, kwargs = arguments_of(place, text)
    result = confirm(found, function, args, kwargs)
    assert result.faults == []
    assert result.equations > result.solved


CONFIRMED = (
    "statistics:linear_regression",
    "random:Random.shuffle",
    "networkx.generators.community:ring_of_cliques",
    "networkx.algorithms.threshold:triangle_sequence",
)


@pytest.mark.parametrize("place", CONFIRMED)
def test_loops_of_real_functions_are_derived_whole(place: str) -> None:
    if place.startswith("networkx"):
        pytest.importorskip("networkx")
    function = function_of(place)
    assert function is not None
    found = derived(function, module_of(function))
    assert found.ledger.stopped == []
    args, kwargs = arguments_of(place, dict(PICKS)[place])
    result = confirm(found, function, args, kwargs)
    assert result.faults == []
    assert result.unsettled == 0
