from __future__ import annotations

import bisect
import collections
import itertools
import math
import random
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import networkx
import numpy
import pytest
import sympy

from steplaw.feed import bind, parse_feed
from steplaw.reference import SubjectRef
from steplaw.subject import Subject, call, locate

SAMPLES = Path(__file__).parent.parent / "samples"
SIZES = [0, 1, 2, 3, 5, 8, 13]

NAMES = [
    f"{module}.py:{name}"
    for module, names in {
        "timetable": "trios trios_fast clashes next_sailing in_order in_order_fast",
        "bookings": "without_repeats without_repeats_fast seats_by_sailing parties_in_touch "
        "busiest_stretch",
        "transfers": "cheapest two_leg_trips legs_from is_symmetric",
        "cargo": "loading_plans berth_fillings restacking_moves best_load heaviest_first",
        "fleet": "vessels_in_yard days_until_together record_loads crew_pairs relief_points",
    }.items()
    for name in names.split()
]


@pytest.fixture(autouse=True)
def path_undone() -> Iterator[None]:
    path = list(sys.path)
    yield
    sys.path[:] = path


def sample(text: str) -> Subject:
    place, _, name = text.rpartition(":")
    return locate(SubjectRef(str(SAMPLES / "ferry" / place), name, True))


def function(text: str) -> Callable[..., Any]:
    return sample(text).function


def made(subject: str, feed: str, draw: int = 0, **at: int) -> tuple[Any, ...]:
    spec = parse_feed(f"{SAMPLES / 'feeds.py'}:{feed}")
    given = bind(spec, sample(subject), tuple(at)).make(at, draw)
    assert not given.kwargs
    return given.args


@pytest.mark.parametrize("name", NAMES)
def test_needs_no_feed(name: str) -> None:
    subject = sample(name)
    feed = bind(None, subject)
    for n in (0, 1, 2, 7):
        given = feed.make({"n": n})
        call(subject, given.args, given.kwargs)


def test_every_function_is_listed_here_and_in_the_readme() -> None:
    import ast

    found = [
        f"{file.name}:{node.name}"
        for file in sorted((SAMPLES / "ferry").glob("*.py"))
        for node in ast.parse(file.read_text()).body
        if isinstance(node, ast.FunctionDef)
    ]
    assert sorted(found) == sorted(NAMES)
    readme = (SAMPLES / "README.md").read_text()
    assert all(f"`{name}`" in readme for name in NAMES)


class TestTimetable:
    @pytest.mark.parametrize("feed", ["sailings", "even_sailings", "long_sailings"])
    @pytest.mark.parametrize("n", SIZES)
    def test_trios_are_those_of_which_no_two_overlap(self, feed: str, n: int) -> None:
        (sailings,) = made("timetable.py:trios", feed, n=n)

        def apart(a: Any, b: Any) -> bool:
            return bool(
                a.departure + a.crossing < b.departure or b.departure + b.crossing < a.departure
            )

        expected = sum(
            all(apart(a, b) for a, b in itertools.combinations(trio, 2))
            for trio in itertools.combinations(sailings, 3)
        )
        assert function("timetable.py:trios")(sailings) == expected
        assert function("timetable.py:trios_fast")(sailings) == expected

    def test_trios_of_hints_agree_too(self) -> None:
        subject = sample("timetable.py:trios")
        feed = bind(None, subject)
        for n, draw in itertools.product(range(12), range(5)):
            (sailings,) = feed.make({"n": n}, draw).args
            fast = function("timetable.py:trios_fast")(sailings)
            assert subject.function(sailings) == fast

    @pytest.mark.parametrize("n", [0, 1, 2, 3, 12])
    @pytest.mark.parametrize("feed", ["sailings", "even_sailings"])
    def test_innermost_test_runs_once_for_each_trio(self, feed: str, n: int) -> None:
        # n(n-1)(n-2)/6, the number of trios i < j < k of n: binomial coefficient.
        subject = sample("timetable.py:trios")
        (sailings,) = made("timetable.py:trios", feed, n=n)
        (inner,) = [
            number
            for number, line in enumerate(subject.source_lines, 1)
            if line.strip().startswith("if in_port[i]") and line.endswith(":")
        ]
        hits = 0

        def watch(frame: Any, event: str, argument: Any) -> Any:
            nonlocal hits
            hits += event == "line" and frame.f_lineno == inner
            return watch if frame.f_code is subject.code.__code__ else None

        before = sys.gettrace()
        sys.settrace(watch)
        try:
            subject.function(sailings)
        finally:
            sys.settrace(before)
        assert hits == math.comb(n, 3)

    def test_even_sailings_all_go_together(self) -> None:
        (sailings,) = made("timetable.py:trios", "even_sailings", n=20)
        assert function("timetable.py:trios")(sailings) == math.comb(20, 3)

    @pytest.mark.parametrize("n", SIZES)
    def test_clashes_against_an_interval_overlap(self, n: int) -> None:
        (sailings,) = made("timetable.py:clashes", "sailings", n=n)
        expected = [
            (j, i)
            for i in range(n)
            for j in range(i)
            if max(sailings[i].departure, sailings[j].departure)
            <= min(sum(sailings[i]), sum(sailings[j]))
        ]
        assert function("timetable.py:clashes")(sailings) == expected

    @pytest.mark.parametrize("n", SIZES)
    def test_next_sailing_is_a_bisection(self, n: int) -> None:
        # The reference is the standard library's bisect.
        for draw in range(10):
            departures, minute = made(
                "timetable.py:next_sailing", "timetable_and_minute", draw, n=n
            )
            expected = bisect.bisect_left(departures, minute)
            assert function("timetable.py:next_sailing")(departures, minute) == expected

    @pytest.mark.parametrize("name", ["in_order", "in_order_fast"])
    def test_sorts_every_order(self, name: str) -> None:
        for n in range(7):
            for order in itertools.permutations(range(n)):
                given = list(order)
                assert function(f"timetable.py:{name}")(given) == list(range(n))
                assert given == list(order)

    @pytest.mark.parametrize("name", ["in_order", "in_order_fast"])
    def test_sorts_with_repeats(self, name: str) -> None:
        given = random.Random(4).choices(range(9), k=50)
        assert function(f"timetable.py:{name}")(given) == sorted(given)


class TestBookings:
    @pytest.mark.parametrize("name", ["without_repeats", "without_repeats_fast"])
    @pytest.mark.parametrize("n", SIZES)
    def test_without_repeats_keeps_the_first(self, name: str, n: int) -> None:
        (references,) = made(f"bookings.py:{name}", "repeated_references", n=n)
        # A dict keeps the first of equal keys in order: Python language reference, 3.7 on.
        assert function(f"bookings.py:{name}")(references) == list(dict.fromkeys(references))

    def test_repeats_do_occur(self) -> None:
        (references,) = made("bookings.py:without_repeats", "repeated_references", n=40)
        assert len(set(references)) < 40
        (references,) = made("bookings.py:without_repeats", "new_references", n=40)
        assert len(set(references)) == 40

    @pytest.mark.parametrize("n", SIZES)
    def test_seats_and_parties(self, n: int) -> None:
        (bookings,) = made("bookings.py:seats_by_sailing", "bookings", n=n)
        taken: collections.Counter[int] = collections.Counter()
        for booking in bookings:
            taken[booking.sailing] += booking.seats
        assert function("bookings.py:seats_by_sailing")(bookings) == taken
        groups = function("bookings.py:parties_in_touch")(bookings)
        ordered = sorted(bookings, key=lambda b: b.sailing)
        expected = [
            [b.reference for b in group]
            for _, group in itertools.groupby(ordered, key=lambda b: b.sailing)
        ]
        assert groups == expected

    def test_busiest_stretch_against_a_convolution(self) -> None:
        seats = random.Random(1).choices(range(100), k=30)
        for days in range(1, 31):
            expected = max(numpy.convolve(seats, numpy.ones(days, dtype=int), "valid"))
            assert function("bookings.py:busiest_stretch")(seats, days) == expected


class TestTransfers:
    @pytest.mark.parametrize("n", SIZES)
    def test_cheapest_against_networkx(self, n: int) -> None:
        (fares,) = made("transfers.py:cheapest", "fares", n=n)
        graph = networkx.DiGraph()
        graph.add_nodes_from(range(n))
        graph.add_weighted_edges_from(
            (a, b, fares[a][b]) for a in range(n) for b in range(n) if a != b
        )
        expected = networkx.floyd_warshall(graph)
        found = function("transfers.py:cheapest")(fares)
        assert found == [[expected[a][b] for b in range(n)] for a in range(n)]

    def test_even_fares_need_no_transfer(self) -> None:
        (fares,) = made("transfers.py:cheapest", "even_fares", n=6)
        found = function("transfers.py:cheapest")(fares)
        assert found == [[0 if a == b else 10 for b in range(6)] for a in range(6)]

    @pytest.mark.parametrize("n", [1, 2, 5, 9])
    def test_two_leg_trips_against_numpy(self, n: int) -> None:
        (table,) = made("transfers.py:two_leg_trips", "fares", n=n)
        found = function("transfers.py:two_leg_trips")(table)
        assert found == (numpy.array(table) @ numpy.array(table)).tolist()

    @pytest.mark.parametrize("n", [1, 2, 5, 30])
    def test_legs_against_networkx(self, n: int) -> None:
        (links,) = made("transfers.py:legs_from", "port_links", n=n)
        graph = networkx.from_dict_of_lists(links)
        expected = networkx.single_source_shortest_path_length(graph, 0)
        assert function("transfers.py:legs_from")(links) == dict(expected)
        assert len(expected) == n

    def test_is_symmetric(self) -> None:
        symmetric = function("transfers.py:is_symmetric")
        assert symmetric([]) and symmetric([[1, 2], [2, 5]]) and not symmetric([[1, 2], [3, 5]])


class TestCargo:
    @pytest.mark.parametrize("n", [0, 1, 2, 5, 9])
    def test_loading_plans_against_all_subsets(self, n: int) -> None:
        weights, room = made("cargo.py:loading_plans", "lots_and_room", n=n)
        subsets = itertools.chain.from_iterable(
            itertools.combinations(weights, k) for k in range(n + 1)
        )
        fitting = sum(sum(subset) <= room for subset in subsets)
        assert function("cargo.py:loading_plans")(weights, room) == fitting

    def test_light_lots_all_fit(self) -> None:
        assert (
            function("cargo.py:loading_plans")(*made("cargo.py:loading_plans", "light_lots", n=9))
            == 2**9
        )

    @pytest.mark.parametrize("n", range(15))
    def test_berth_fillings_are_fibonacci_numbers(self, n: int) -> None:
        # Tilings of a strip by squares and dominoes: F(n+1); Graham, Knuth & Patashnik,
        # Concrete Mathematics, 6.6 (from memory). The reference is sympy's fibonacci.
        assert function("cargo.py:berth_fillings")(n) == sympy.fibonacci(n + 1)

    @pytest.mark.parametrize("n", range(11))
    def test_restacking_takes_the_moves_of_a_disc_tower(self, n: int) -> None:
        # 2^n - 1 moves for n discs on three pegs: common practice.
        assert function("cargo.py:restacking_moves")(n) == 2**n - 1

    @pytest.mark.parametrize("n", [0, 1, 4, 9])
    @pytest.mark.parametrize("m", [0, 10, 37])
    def test_best_load_against_all_subsets(self, n: int, m: int) -> None:
        weights, room = made("cargo.py:best_load", "lots_on_deck", n=n, m=m)
        sums = {sum(s) for k in range(n + 1) for s in itertools.combinations(weights, k)}
        expected = max(total for total in sums if total <= room)
        assert function("cargo.py:best_load")(weights, room) == expected

    def test_heaviest_first(self) -> None:
        given = random.Random(2).choices(range(30), k=40)
        assert function("cargo.py:heaviest_first")(given) == sorted(given, reverse=True)


class TestFleet:
    def test_vessels_in_yard_are_the_divisors(self) -> None:
        # Divisors of 1..12: OEIS A000005 (from memory); the rest against sympy.
        found = function("fleet.py:vessels_in_yard")(60)
        assert found[1:13] == [1, 2, 2, 3, 2, 4, 2, 4, 3, 4, 2, 6]
        assert found == [0] + [sympy.divisor_count(day) for day in range(1, 61)]

    def test_days_until_together_is_the_least_common_multiple(self) -> None:
        for first, second in itertools.product(range(0, 31), repeat=2):
            expected = math.lcm(first, second)
            assert function("fleet.py:days_until_together")(first, second) == expected
        given = made("fleet.py:days_until_together", "neighbouring_cycles", n=20)
        assert given == (sympy.fibonacci(22), sympy.fibonacci(21))

    def test_record_loads_over_all_orders_have_the_harmonic_mean(self) -> None:
        # Mean number of left-to-right maxima is H(n): Knuth, TAOCP vol. 1, 1.2.10, whose count
        # of changes, H(n) - 1, leaves out the first.
        for n in range(1, 7):
            counts = [
                function("fleet.py:record_loads")(list(order))
                for order in itertools.permutations(range(n))
            ]
            assert sympy.Rational(sum(counts), len(counts)) == sympy.harmonic(n)

    @pytest.mark.parametrize("n", SIZES)
    def test_crew_pairs(self, n: int) -> None:
        assert function("fleet.py:crew_pairs")(n) == list(itertools.combinations(range(n), 2))

    def test_relief_points(self) -> None:
        assert function("fleet.py:relief_points")(16) == [8, 12, 14, 15]
        for miles in range(1, 200):
            points = function("fleet.py:relief_points")(miles)
            # What is left is halved, rounded up, until one mile is left: ceil(lg n) times.
            assert len(points) == math.ceil(math.log2(miles))
