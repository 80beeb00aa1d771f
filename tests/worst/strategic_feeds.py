"""Feeds that give strategies of hypothesis."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

from steplaw import args


def bookings(n: int) -> Any:
    return st.lists(st.integers(0, 500), min_size=n, max_size=n)


def nested(n: int) -> Any:
    return args(
        st.recursive(st.just(()), lambda part: st.tuples(part, part), max_leaves=n + 1), 100
    )


def open_files(n: int) -> Any:
    return st.just(object())


def depth(tree: Any, limit: int) -> int:
    return 1 + max((depth(part, limit - 1) for part in tree), default=0)


def known(thing: object) -> bool:
    return thing is None
