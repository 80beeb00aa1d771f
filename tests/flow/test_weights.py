"""How often each edge is likely to be passed."""

from __future__ import annotations

from collections.abc import AsyncIterator, Callable, Iterator
from typing import Any

import pytest

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE, Blocks, Edge
from steplaw.flow.decode import Decoded
from steplaw.flow.weights import edge_weights


def weighed(function: Callable[..., Any]) -> tuple[Blocks, list[tuple[Edge, float]]]:
    graph = Blocks(Decoded(function.__code__))
    return graph, list(zip(graph.edges, edge_weights(graph), strict=True))


def rare(n: int) -> int:
    if n == 7:
        n += 1
    return n


def usual(n: int) -> int:
    if n != 7:
        n += 1
    return n


@pytest.mark.parametrize(("function", "entered"), [(rare, False), (usual, True)])
def test_equality_is_the_rarer_case(function: Callable[..., Any], entered: bool) -> None:
    _, edges = weighed(function)
    ways = {e.kind: w for e, w in edges if e.source == 0}
    assert (ways["fall"] > ways["branch"]) == entered


async def awaiting(ship: Any) -> Any:
    return await ship


async def listening(ships: AsyncIterator[int]) -> int:
    tons = 0
    async for load in ships:
        tons += load
    return tons


@pytest.mark.parametrize("function", [awaiting, listening])
def test_what_is_awaited_is_likely_to_be_ready(function: Callable[..., Any]) -> None:
    graph, edges = weighed(function)
    ops = graph.decoded.ops
    asked = [b for b, block in enumerate(graph.blocks) if ops[block.last] == isa.SEND]
    assert asked
    for b in asked:
        ready = sum(w for e, w in edges if e.source == b and e.kind == "branch")
        waiting = sum(w for e, w in edges if e.source == b and e.kind == "fall")
        assert ready > 5 * waiting


def numbers(n: int) -> Iterator[int]:
    for k in [*range(n)]:
        yield k + 1


def test_a_generator_is_resumed_as_often_as_it_is_suspended() -> None:
    graph, edges = weighed(numbers)
    ops = graph.decoded.ops
    yields = [b for b, block in enumerate(graph.blocks) if ops[block.last] == isa.YIELD_VALUE]
    assert yields
    for b in yields:
        suspended = next(w for e, w in edges if e.source == b and e.kind == "leave")
        resumed = next(w for e, w in edges if e.source == OUTSIDE and e.target == b + 1)
        assert suspended == resumed > 1
