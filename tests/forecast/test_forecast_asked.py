from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from steplaw.errors import CallError
from steplaw.forecast.asked import parse_held, parse_limit, parse_size


@given(st.integers(0, 10**18))
def test_a_whole_number_is_read_back(n: int) -> None:
    assert parse_size(str(n), ["n"]) == {"n": n}
    assert parse_size(f"n={n:_}", ["n"]) == {"n": n}


@pytest.mark.parametrize(
    ("text", "names", "size"),
    [
        ("1e7", ["n"], {"n": 10_000_000}),
        ("2.5e3", ["n"], {"n": 2500}),
        ("0", ["n"], {"n": 0}),
        ("m=4,n=3", ["n", "m"], {"n": 3, "m": 4}),
    ],
)
def test_sizes(text: str, names: list[str], size: dict[str, int]) -> None:
    assert parse_size(text, names) == size


@pytest.mark.parametrize(
    ("text", "names", "told"),
    [
        ("-1", ["n"], "a size is not below 0"),
        ("many", ["n"], "'many' is no number"),
        ("", ["n"], "'' is no number"),
        ("1e", ["n"], "'1e' is no number"),
        ("2.5", ["n"], "a size is a whole number; give 2"),
        ("1e19", ["n"], "too large; give at most 1e18"),
        ("1e999", ["n"], "too large"),
        ("k=3", ["n"], "the law has no size 'k'; its sizes are n, as in --at 1e7"),
        ("3", ["n", "m"], "names no size; as in --at n=1000,m=1000"),
        ("n=3", ["n", "m"], "has no m"),
        ("n=3,n=4", ["n"], "gives n twice"),
    ],
)
def test_sizes_that_cannot_be_read(text: str, names: list[str], told: str) -> None:
    with pytest.raises(CallError) as error:
        parse_size(text, names)
    assert told in str(error.value)
    assert "\n" not in str(error.value)


@pytest.mark.parametrize(
    ("text", "kind", "most"),
    [
        ("2s", "time", Fraction(2)),
        ("500ms", "time", Fraction(1, 2)),
        ("250 us", "time", Fraction(1, 4000)),
        ("90min", "time", Fraction(5400)),
        ("1h", "time", Fraction(3600)),
        ("1e9steps", "steps", Fraction(10**9)),
        ("1_000 steps", "steps", Fraction(1000)),
    ],
)
def test_limits(text: str, kind: str, most: Fraction) -> None:
    limit = parse_limit(text)
    assert (limit.kind, limit.most) == (kind, most)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("2", "has no unit"),
        ("2weeks", "there is no unit 'weeks'"),
        ("fast", "is no number with a unit"),
        ("0s", "it is not above 0"),
        ("-2s", "it is not above 0"),
    ],
)
def test_limits_that_cannot_be_read(text: str, told: str) -> None:
    with pytest.raises(CallError) as error:
        parse_limit(text)
    assert told in str(error.value)
    assert "as in --within 2s" in str(error.value)


def test_a_search_holds_all_sizes_but_one() -> None:
    assert parse_held((), ["n"]) == {}
    assert parse_held(["m=1e3"], ["n", "m"]) == {"m": 1000}
    assert parse_held(["m=4,k=5"], ["n", "m", "k"]) == {"m": 4, "k": 5}


@pytest.mark.parametrize(
    ("held", "names", "told"),
    [
        ([], ["n", "m"], "hold the others, as in --hold m=50"),
        (["n=3"], ["n"], "leaves no size to search for"),
        (["n=3", "m=4"], ["n", "m"], "leaves no size to search for"),
        (["3"], ["n", "m"], "--hold 3 names no size"),
        (["k=3"], ["n", "m"], "the law has no size 'k'"),
    ],
)
def test_what_cannot_be_held(held: list[str], names: list[str], told: str) -> None:
    with pytest.raises(CallError, match=told):
        parse_held(held, names)
