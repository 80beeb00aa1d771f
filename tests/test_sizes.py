from __future__ import annotations

import math
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from steplaw.errors import CallError
from steplaw.sizes import MOST_POINTS, SizePlan, parse_sizes, plan


def ns(made: SizePlan) -> list[int]:
    return [point["n"] for point in made.points]


class TestSpec:
    @pytest.mark.parametrize(
        ("spec", "sizes"),
        [
            ("4,8,15", (4, 8, 15)),
            ("15,4,8,4", (4, 8, 15)),
            ("0", (0,)),
            ("8..64", (8, 16, 32, 64)),
            ("8..100", (8, 16, 32, 64)),
            ("0..8", (0, 1, 2, 4, 8)),
            ("5..5", (5,)),
            ("10..40+10", (10, 20, 30, 40)),
            ("10..45+10", (10, 20, 30, 40)),
            ("1,8..16,20..22+1", (1, 8, 16, 20, 21, 22)),
            ("1_000", (1000,)),
        ],
    )
    def test_forms(self, spec: str, sizes: tuple[int, ...]) -> None:
        assert parse_sizes(spec) == sizes

    def test_doubling_reaches_the_contracts_example(self) -> None:
        assert parse_sizes("8..4096") == tuple(2**k for k in range(3, 13))

    @pytest.mark.parametrize(
        ("spec", "part"),
        [
            ("", "is empty"),
            ("4,,8", "has an empty part"),
            ("-4", "negative size -4"),
            ("4,-8..8", "negative size -8"),
            ("four", "'four' is not a size"),
            ("4.5", "'4.5' is not a size"),
            ("1e3", "'1e3' is not a size"),
            ("8..", "'8..' is not a size"),
            ("8-16", "'8-16' is not a size"),
            ("16..8", "goes down; write 8..16"),
            ("16..8+2", "goes down; write 8..16+2"),
            ("1..9+0", "a step of 0; write 1..9+1"),
            ("1..9+-2", "a step of -2; write 1..9+1"),
            ("9" * 5000, "99999999… has over 18 digits"),
            ("0..100000000+1", f"over {MOST_POINTS} sizes"),
        ],
    )
    def test_refusals(self, spec: str, part: str) -> None:
        with pytest.raises(CallError) as caught:
            parse_sizes(spec)
        line = str(caught.value)
        assert part in line and "\n" not in line and caught.value.hint

    @given(st.lists(st.integers(0, 10**6), min_size=1, max_size=30))
    def test_a_list_reads_back(self, sizes: list[int]) -> None:
        assert parse_sizes(",".join(map(str, sizes))) == tuple(sorted(set(sizes)))

    @given(st.integers(0, 500), st.integers(0, 500), st.integers(1, 60))
    def test_equal_steps_are_a_range(self, first: int, more: int, step: int) -> None:
        spec = f"{first}..{first + more}+{step}"
        assert parse_sizes(spec) == tuple(range(first, first + more + 1, step))


class TestDefault:
    def test_has_small_growing_and_off_grid_sizes(self) -> None:
        made = plan()
        assert made.names == ("n",) and not made.given
        assert ns(made)[:14] == list(range(14))
        assert {2**k for k in range(4, 13)} <= set(ns(made))
        held_out = [point["n"] for point in made.held_out]
        assert held_out[:5] == [13, 23, 47, 95, 191]
        assert not any(math.log2(n).is_integer() for n in held_out)
        assert max(ns(made)) == 4096

    def test_goes_up(self) -> None:
        assert ns(plan()) == sorted(set(ns(plan())))

    def test_two_names(self) -> None:
        made = plan("n m")
        assert made.names == ("n", "m") and not made.given
        points = {(p["n"], p["m"]) for p in made.points}
        assert {(a, b) for a in range(7) for b in range(7)} <= points
        assert {(8, 256), (256, 8), (256, 256)} <= points
        work = [(p["n"] + 1) * (p["m"] + 1) for p in made.points]
        assert work == sorted(work) and len(points) == len(made.points)
        assert any(p["n"] != p["m"] for p in made.held_out)

    def test_only_sizes_needs_sizes(self) -> None:
        with pytest.raises(CallError, match="--only-sizes needs sizes"):
            plan(None, only_sizes=True)


class TestGiven:
    def test_small_and_off_grid_sizes_are_added(self) -> None:
        made = plan("16..128")
        assert made.given
        assert ns(made) == [0, 1, 2, 3, 4, 5, 6, 7, 8, 16, 23, 32, 47, 64, 95, 128]
        assert [p["n"] for p in made.held_out] == [23, 47, 95]

    def test_only_sizes(self) -> None:
        made = plan("15,4,8", only_sizes=True)
        assert ns(made) == [4, 8, 15] and made.held_out == ()

    @given(st.sets(st.integers(0, 3000), min_size=1, max_size=12))
    def test_never_beyond_what_was_given(self, sizes: set[int]) -> None:
        made = plan(sizes)
        assert sizes <= set(ns(made))
        assert max(ns(made)) == max(sizes) and ns(made) == sorted(set(ns(made)))
        assert not {p["n"] for p in made.held_out} & sizes

    def test_many_steps_get_a_few_off_grid_sizes(self) -> None:
        assert len(plan("10..1000+10").held_out) == 6

    @pytest.mark.parametrize(
        "sizes",
        [
            "n=4..8 m=2,3",
            ["n=4..8", "m=2,3"],
            ["n = 4 .. 8  m = 2, 3"],
            {"n": [4, 8], "m": [2, 3]},
        ],
    )
    def test_a_grid(self, sizes: Any) -> None:
        made = plan(sizes, only_sizes=True)
        assert made.names == ("n", "m")
        assert made.points == (
            {"n": 4, "m": 2},
            {"n": 4, "m": 3},
            {"n": 8, "m": 2},
            {"n": 8, "m": 3},
        )

    def test_a_grid_with_more(self) -> None:
        made = plan("n=4..64 m=4..64")
        points = {(p["n"], p["m"]) for p in made.points}
        assert {(a, b) for a in range(5) for b in range(5)} <= points
        assert len(made.held_out) > 3
        assert all(p["n"] < 64 and p["m"] < 64 for p in made.held_out)

    def test_repeated_options_join(self) -> None:
        assert ns(plan(["4,8", "16"], only_sizes=True)) == [4, 8, 16]

    @pytest.mark.parametrize(
        ("sizes", "part"),
        [
            ("", "--sizes is empty"),
            ([], "sizes is empty"),
            ({}, "sizes is empty"),
            ({"n": []}, "sizes is empty"),
            ([4, -8], "negative size -8"),
            ([4.5], "'4.5' is not a size"),
            ("n=", "is empty"),
            ("2x=4", "'2x' is not a size name"),
            ("for=4", "'for' is not a size name"),
            ("rng=4", "has a meaning of its own in feeds"),
            ("n=4..64 m", "no values for 'm'; as in --sizes 'm=4..64'"),
            ("a=1..9+1 b=1..99+1 c=1..99+1", f"a grid of over {MOST_POINTS} points"),
        ],
    )
    def test_refusals(self, sizes: Any, part: str) -> None:
        with pytest.raises(CallError) as caught:
            plan(sizes)
        assert part in str(caught.value) and "\n" not in str(caught.value)
