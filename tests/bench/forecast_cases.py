"""What the table of forecasts is made from: subjects, feeds, and the sizes to forecast from."""

from __future__ import annotations

from dataclasses import dataclass

SAMPLE = "samples/ferry/"
DRAWN = "tests/bench/drawn_work.py"
PUBLISHED = "tests/published/algorithms.py"
WORST = "tests/worst/subjects.py"


@dataclass(frozen=True, slots=True)
class Case:
    """One forecast that is held against a run.

    Parameters
    ----------
    group : {"sample", "real", "drawn"}
        Functions of `samples/`, functions that nobody here wrote, methods on drawn data.
    subject, feed, sizes : str
        As for ``steplaw audit``; an empty feed leaves it to the type hints.
    """

    group: str
    subject: str
    feed: str
    sizes: str


def _samples() -> list[Case]:
    feeds = "samples/feeds.py:"
    rows = [
        ("timetable.py:trios", "even_sailings", "4..64"),
        ("timetable.py:trios", "sailings", "4..48"),
        ("timetable.py:trios_fast", "sailings", "8..512"),
        ("timetable.py:clashes", "sailings", "8..256"),
        ("timetable.py:clashes", "even_sailings", "8..256"),
        ("timetable.py:next_sailing", "last_minute", "8..512"),
        ("timetable.py:in_order", "departures", "8..256"),
        ("timetable.py:in_order_fast", "departures", "8..512"),
        ("bookings.py:without_repeats", "new_references", "8..512"),
        ("bookings.py:without_repeats", "repeated_references", "8..512"),
        ("bookings.py:without_repeats_fast", "repeated_references", "8..512"),
        ("bookings.py:seats_by_sailing", "bookings", "8..512"),
        ("bookings.py:parties_in_touch", "bookings", "8..512"),
        ("bookings.py:busiest_stretch", "", "8..128"),
        ("cargo.py:loading_plans", "light_lots", "4..12"),
        ("cargo.py:berth_fillings", "", "4..12"),
        ("cargo.py:restacking_moves", "", "4..12"),
        ("cargo.py:best_load", "lots_and_room", "4..48"),
        ("cargo.py:heaviest_first", "departures", "8..256"),
        ("fleet.py:vessels_in_yard", "", "8..512"),
        ("fleet.py:days_until_together", "neighbouring_cycles", "8..512"),
        ("fleet.py:record_loads", "departures", "8..512"),
        ("fleet.py:crew_pairs", "", "8..128"),
        ("fleet.py:relief_points", "", "8..512"),
        ("transfers.py:cheapest", "even_fares", "4..24"),
        ("transfers.py:cheapest", "fares", "4..24"),
        ("transfers.py:two_leg_trips", "", "4..24"),
        ("transfers.py:legs_from", "port_links", "8..512"),
        ("transfers.py:is_symmetric", "even_fares", "4..64"),
    ]
    return [
        Case("sample", SAMPLE + subject, feeds + feed if feed else "", sizes)
        for subject, feed, sizes in rows
    ]


def _real() -> list[Case]:
    graph = "networkx.gnm_random_graph(n, 2 * n, seed=rng.randrange(10**9))"
    weighted = (
        f"networkx.Graph([(a, b, {{'weight': rng.randrange(1, 99)}}) for a, b in {graph}.edges])"
    )
    numbers = "[rng.randrange(10**6) for _ in range(n)]"
    text = "''.join(rng.choice('abcde     ') for _ in range(n))"
    rows = [
        ("statistics:pvariance", numbers, "8..256"),
        ("statistics:fmean", numbers, "8..256"),
        ("statistics:multimode", numbers, "8..256"),
        ("statistics:linear_regression", f"args({numbers}, list(range(n)))", "8..256"),
        ("textwrap:wrap", text, "16..512"),
        ("string:capwords", text, "16..512"),
        ("shlex:split", text, "16..512"),
        ("fnmatch:filter", "args([str(rng.randrange(10**4)) for _ in range(n)], '*7')", "8..256"),
        ("heapq:nsmallest", "args(5, [rng.random() for _ in range(n)])", "8..512"),
        ("random:Random.shuffle", "args(rng, list(range(n)))", "8..512"),
        ("base64:b85encode", "rng.randbytes(n)", "8..512"),
        (
            "difflib:SequenceMatcher.find_longest_match",
            "args(difflib.SequenceMatcher(None, *(''.join(rng.choice('abcd') "
            "for _ in range(n)) for _ in '12'), False), 0, n, 0, n)",
            "8..128",
        ),
        (
            "graphlib:TopologicalSorter.prepare",
            "graphlib.TopologicalSorter({i: {rng.randrange(i) for _ in range(3)} "
            "for i in range(1, n)})",
            "8..256",
        ),
        ("copy:deepcopy", "[[rng.randrange(9)] * 2 for _ in range(n)]", "8..256"),
        ("networkx.algorithms.core:core_number", graph, "8..128"),
        ("networkx.algorithms.coloring.greedy_coloring:greedy_color", graph, "8..128"),
        ("networkx.algorithms.cluster:triangles", graph, "8..128"),
        ("networkx.algorithms.components.connected:number_connected_components", graph, "8..128"),
        ("networkx.algorithms.bipartite.basic:is_bipartite", "networkx.path_graph(n)", "8..128"),
        ("networkx.algorithms.shortest_paths.unweighted:single_source_shortest_path_length",
         f"args({graph}, 0)", "8..128"),
        ("networkx.algorithms.shortest_paths.weighted:single_source_dijkstra_path_length",
         "args(networkx.path_graph(n), 0)", "8..128"),
        ("networkx.algorithms.tree.mst:minimum_spanning_tree", weighted, "8..128"),
        ("networkx.algorithms.shortest_paths.dense:floyd_warshall_predecessor_and_distance",
         "networkx.complete_graph(n)", "4..16"),
        ("networkx.algorithms.tournament:is_tournament",
         "networkx.DiGraph((a, b) for a in range(n) for b in range(a))", "4..24"),
    ]  # fmt: skip
    return [Case("real", *row) for row in rows]


def _drawn() -> list[Case]:
    order = "rng.sample(range(n), n)"
    repeated = "[rng.randrange(n) for _ in range(n)]"
    few = "[rng.randrange(6) for _ in range(n)]"
    nearly = "[i + rng.randrange(12) for i in range(n)]"
    wide = "[rng.randrange(10**6) for _ in range(n)]"
    gains = "[rng.randrange(-50, 51) for _ in range(n)]"
    letters = "''.join(rng.choice('ab') for _ in range(n))"
    four = "''.join(rng.choice('abcd') for _ in range(n))"
    linked = "[[rng.randrange(n) for _ in range(3)] for _ in range(n)]"
    points = "[(rng.randrange(10**6), rng.randrange(10**6)) for _ in range(n)]"
    square = "[[rng.randrange(2) for _ in range(n)] for _ in range(n)]"
    orders = "[rng.sample(range(n), n) for _ in range(n)]"
    sparse = "[{rng.randrange(n): 1 for _ in range(3)} for _ in range(n)]"
    lengths = "[[(rng.randrange(n), rng.randrange(1, 99)) for _ in range(3)] for _ in range(n)]"
    words = "[''.join(rng.choice('abcd') for _ in range(8)) for _ in range(n)]"
    small = "[(rng.randrange(n + 1), rng.randrange(n + 1)) for _ in range(n)]"
    spans = "[(x, x + rng.randrange(1, n)) for x in (rng.randrange(n) for _ in range(n))]"
    weights = "[[rng.randrange(99) for _ in range(n)] for _ in range(n)]"
    quadratic, quick, cubic = "8..256", "8..512", "4..32"
    rows: list[tuple[str, str, str]] = []
    for name in ("bubble_until_quiet", "gnome_sort"):
        rows += [(f"{DRAWN}:{name}", feed, "8..128") for feed in (order, repeated, few, nearly)]
    for name in ("comb_sort", "heap_sort", "binary_insertion", "shell_sort", "quickselect"):
        rows += [(f"{DRAWN}:{name}", feed, quick) for feed in (order, few, nearly)]
    rows += [(f"{DRAWN}:inversions", feed, quadratic) for feed in (order, few, nearly)]
    for name in ("rising_run", "next_greater"):
        rows += [(f"{DRAWN}:{name}", feed, quick) for feed in (order, few, nearly)]
    rows += [(f"{DRAWN}:treap_depths", feed, quick) for feed in (order, wide)]
    rows += [
        (f"{DRAWN}:{x}", feed, quick) for x in ("probing", "chaining") for feed in (wide, repeated)
    ]
    rows += [
        (f"{DRAWN}:distinct_pairs", f"args({wide}, 10**6)", quick),
        (f"{DRAWN}:distinct_pairs", f"args({repeated}, n)", quick),
        (f"{DRAWN}:dijkstra", lengths, quick),
        (f"{DRAWN}:prim_dense", weights, "4..64"),
        (f"{DRAWN}:reached", linked, quick),
        (f"{DRAWN}:joined", "[(rng.randrange(n), rng.randrange(n)) for _ in range(n)]", quick),
        (f"{DRAWN}:coloured", linked, quick),
        (f"{DRAWN}:triangles", square, cubic),
        (f"{DRAWN}:find_word", f"args({letters}, 'abab')", quick),
        (f"{DRAWN}:find_word", f"args({four}, 'abab')", quick),
        (f"{DRAWN}:find_word", f"args({letters}, 'a' * 20)", quick),
        (f"{DRAWN}:failure_table", letters, quick),
        (f"{DRAWN}:failure_table", four, quick),
        (f"{DRAWN}:palindromes", letters, quick),
        (f"{DRAWN}:palindromes", four, quick),
        (f"{DRAWN}:common", f"args({letters}, {letters})", "4..64"),
        (f"{DRAWN}:common", f"args({four}, {four})", "4..64"),
        (f"{DRAWN}:letters_tree", words, quadratic),
        (f"{DRAWN}:runs", letters, quick),
        (f"{DRAWN}:runs", four, quick),
        (f"{DRAWN}:common_divisors", points, quick),
        (f"{DRAWN}:common_divisors", small, quick),
        (f"{DRAWN}:halve_or_triple", "[rng.randrange(1, 10**5) for _ in range(n)]", quick),
        (f"{DRAWN}:set_bits", wide, quick),
        (f"{DRAWN}:set_bits", repeated, quick),
        (f"{DRAWN}:hull", points, quick),
        (f"{DRAWN}:overlaps", spans, "8..128"),
        (f"{DRAWN}:overlaps", "[(x, x + 9) for x in (rng.randrange(n) for _ in range(n))]", quick),
        (f"{DRAWN}:front", points, quadratic),
        (f"{DRAWN}:best_stretch", gains, quick),
        (f"{DRAWN}:best_pair_stretch", gains, "8..128"),
        (f"{DRAWN}:recent_only", "args([rng.randrange(20) for _ in range(n)], 8)", quick),
        (f"{DRAWN}:recent_only", f"args({repeated}, 8)", quick),
        (f"{DRAWN}:served", f"args({repeated}, 4)", quick),
        (f"{DRAWN}:first_fit", "args([rng.randrange(1, 50) for _ in range(n)], 100)", "8..128"),
        (f"{DRAWN}:stable_pairs", f"args({orders}, {orders})", "8..64"),
        (f"{DRAWN}:neighbours_alive", square, "4..64"),
        (f"{DRAWN}:sparse_product", f"args(*({sparse} for _ in '12'))", quadratic),
        (f"{PUBLISHED}:insertion_sort", order, "8..128"),
        (f"{PUBLISHED}:insertion_sort", repeated, "8..128"),
        (f"{PUBLISHED}:insertion_sort", nearly, quick),
        (f"{PUBLISHED}:selection_sort", order, "8..128"),
        (f"{PUBLISHED}:bubble_sort", order, "8..128"),
        (f"{PUBLISHED}:quicksort", order, quick),
        (f"{PUBLISHED}:quicksort", wide, quick),
        (f"{PUBLISHED}:merge_sort", order, quick),
        (f"{PUBLISHED}:merge_sort", few, quick),
        (f"{PUBLISHED}:merge_sort", nearly, quick),
        (f"{PUBLISHED}:search_tree", order, quick),
        (f"{PUBLISHED}:unmerged", order, quick),
        (f"{PUBLISHED}:running_maximum", order, quick),
        (f"{PUBLISHED}:cycles", order, quick),
        (f"{PUBLISHED}:descents", order, quick),
        (f"{PUBLISHED}:least_and_greatest", order, quick),
        (f"{PUBLISHED}:edit_distance", f"args({four}, {four})", "4..64"),
        (f"{WORST}:plain_quicksort", order, quick),
        (f"{WORST}:first_pivot", order, quick),
        (f"{WORST}:middle_pivot", order, quick),
        (f"{WORST}:middle_pivot", repeated, quick),
        (f"{WORST}:median_of_three", order, quick),
        (f"{WORST}:merge_sort", wide, quick),
        (f"{WORST}:insertion_sort", wide, "8..128"),
    ]  # fmt: skip
    for name in ("heap_sort", "binary_insertion"):
        rows += [(f"{DRAWN}:{name}", feed, quick) for feed in (wide, repeated)]
    for name in ("rising_run", "next_greater"):
        rows += [(f"{DRAWN}:{name}", feed, quick) for feed in (wide, repeated)]
    rows += [(f"{DRAWN}:inversions", feed, "8..128") for feed in (wide, repeated)]
    for count in (5, 8):
        links = f"[[rng.randrange(n) for _ in range({count})] for _ in range(n)]"
        rows += [(f"{DRAWN}:{name}", links, "8..256") for name in ("reached", "coloured")]
    rows += [
        (f"{PUBLISHED}:{name}", wide, quick) for name in ("merge_sort", "search_tree", "unmerged")
    ]
    rows += [(f"{PUBLISHED}:{name}", wide, quick) for name in ("running_maximum", "descents")]
    rows += [
        (f"{DRAWN}:{name}", "''.join(rng.choice('abc') for _ in range(n))", quick)
        for name in ("failure_table", "palindromes", "runs")
    ]
    return [Case("drawn", *row) for row in rows]


CASES = [*_samples(), *_real(), *_drawn()]
