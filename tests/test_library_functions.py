"""Audits of code that no one here wrote, held against what is known of its algorithms.

The subjects are the standard library's and networkx's own functions; the source of each expected
growth stands beside it.
"""

from __future__ import annotations

import inspect
import re
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest
import sympy

import steplaw

networkx = pytest.importorskip("networkx")


def _line(module: ModuleType, pattern: str) -> int:
    """Give the number of the first line of a module that matches a pattern."""
    lines = Path(inspect.getsourcefile(module) or "").read_text(encoding="utf-8").splitlines()
    return next(k for k, text in enumerate(lines, 1) if re.search(pattern, text))


def _audit(subject: str, feed: str, figure: str = "steps", sizes: str = "2..32") -> Any:
    record = steplaw.audit(subject, feed=feed, figure=figure, sizes=sizes, clock=False)
    assert record["stopped"] is None
    assert record["repeatable"]["holds"]
    record.validate()
    return record


def _is(formula: str, expected: str) -> bool:
    return sympy.simplify(sympy.sympify(formula) - sympy.sympify(expected)) == 0


def _degree(formula: str) -> int:
    return int(sympy.degree(sympy.sympify(formula).replace(sympy.floor, lambda x: x)))


def test_floyd_warshall_compares_every_trio_of_nodes() -> None:
    """n**3 inner comparisons (common practice; Floyd, CACM 5, 1962, from memory)."""
    from networkx.algorithms.shortest_paths import dense

    record = _audit(
        f"{dense.__name__}:floyd_warshall_predecessor_and_distance",
        "networkx.complete_graph(n)",
        f"line:{_line(dense, r'if dist_u.v. > d')}",
        "4..16",
    )
    assert record.figure.law.grade == "exact"
    assert _is(record.figure.law.formula, "n**3")
    assert _degree(record.laws.steps.leading) == 3


def test_longest_match_of_equal_letters_looks_at_every_pair() -> None:
    """The module's own documentation: 'quadratic time for the worst case'."""
    import difflib

    line = _line(difflib, r"k = newj2len\[j\] = ")
    record = _audit(
        "difflib:SequenceMatcher.find_longest_match",
        "args(difflib.SequenceMatcher(None, 'a' * n, 'a' * n, False), 0, n, 0, n)",
        f"line:{line}",
    )
    assert record.figure.law.grade == "exact"
    assert _is(record.figure.law.formula, "n**2")


@pytest.mark.parametrize(
    ("subject", "feed", "degree"),
    [
        # Kahn, Topological sorting of large networks, CACM 5, 1962: every node and edge once.
        (
            "graphlib:TopologicalSorter.static_order",
            "graphlib.TopologicalSorter({i: [i - 1] for i in range(1, n)})",
            1,
        ),
        # Merging m and n items takes at most m + n - 1 comparisons: Knuth, TAOCP vol. 3, 5.2.4.
        ("heapq:merge", "args(list(range(n)), list(range(n)))", 1),
        # Every vertex once, every edge twice (common practice); a path has n - 1 edges.
        (
            "networkx.algorithms.components.connected:connected_components",
            "networkx.path_graph(n)",
            1,
        ),
        # A complete graph has n(n - 1)/2 edges, each of which Kruskal's method looks at once
        # (Kruskal 1956; sorting them is done in C).
        (
            "networkx.algorithms.tree.mst:minimum_spanning_tree",
            "networkx.complete_graph(n)",
            2,
        ),
        # A copy makes every element once (the language's documents, module copy).
        ("copy:deepcopy", "[[i] for i in range(n)]", 1),
        # A mean adds every element once (common practice).
        ("statistics:mean", "[2.0 for _ in range(n)]", 1),
    ],
)
def test_growth_is_that_of_the_algorithm(subject: str, feed: str, degree: int) -> None:
    record = _audit(subject, feed)
    law = record.laws.steps
    assert law.grade == "exact", law
    assert _degree(law.leading) == degree
    for value in record.figure["values"]:
        if value["at"]["n"] >= law.holds_from:
            n = sympy.Symbol("n")
            assert sympy.sympify(law.formula).subs(n, value["at"]["n"]) == value["mean"]
