"""More code that no one here wrote, by the exact number of times that one of its lines runs."""

from __future__ import annotations

import inspect
import itertools
from fractions import Fraction
from typing import Any

import pytest
import sympy

import steplaw
from running import ROOT
from steplaw.record import AuditRecord
from subjects import pure

n = sympy.Symbol("n")
PURE = str(ROOT / "tests/subjects/pure.py")


def audit_of_line(subject: str, function: Any, text: str, **given: Any) -> AuditRecord:
    """Audit the frequency of the first line of a function that has a text in it."""
    lines, first = inspect.getsourcelines(inspect.unwrap(function))
    line = next(first + k for k, source in enumerate(lines) if text in source)
    record = steplaw.audit(subject, figure=f"line:{line}", clock=False, **given)
    AuditRecord.from_json(record.to_json())
    assert record.stopped is None and record.repeatable.holds
    return record


def values(record: AuditRecord) -> dict[int, Fraction]:
    return {v.at.n: Fraction(v.mean) for v in record.figure["values"]}


def test_binary_search() -> None:
    # At most floor(lg n) + 1 probes (Knuth, TAOCP vol. 3, 6.2.1), here for a key below all.
    record = audit_of_line(
        f"{PURE}:bisect_right", pure.bisect_right, "mid = ", feed="args(range(n), -1)"
    )
    for size, probes in values(record).items():
        assert probes == size.bit_length()
    law = record.figure.law
    assert law.grade == "exact"
    for size in (1, 2, 1000, 4095, 4096, 10**6):
        assert sympy.sympify(law.formula).subs("n", size) == size.bit_length()


def test_building_a_heap() -> None:
    # Ascending keys are sifted down along the leftmost path, so that the steps down are the sum of
    # the heights of all nodes: n less the ones in the binary form of n (Knuth, TAOCP vol. 3,
    # 5.2.3; from memory). Python's sift goes down to a leaf and then up again.
    siftup = pure.heapify.__globals__["_siftup"]
    record = audit_of_line(
        f"{PURE}:heapify", siftup, "heap[pos] = heap[childpos]", feed="list(range(n))"
    )
    for size, moves in values(record).items():
        assert moves == size - size.bit_count()
    # That is no polynomial: whatever is claimed must not be called exact unless it holds.
    law = record.figure.law
    if law.grade == "exact":
        for size in (37, 100, 777):
            assert sympy.sympify(law.formula).subs("n", size) == size - size.bit_count()


def test_shuffling() -> None:
    import random

    # n - 1 exchanges (Fisher & Yates; Knuth, TAOCP vol. 2, 3.4.2).
    record = audit_of_line(
        "random:Random.shuffle",
        random.Random.shuffle,
        "x[i], x[j]",
        feed="args(Random(7), list(range(n)))",
        sizes="8..512",
    )
    assert sympy.expand(sympy.sympify(record.figure.law.formula) - (n - 1)) == 0
    assert record.figure.law.grade == "exact"


def test_gaussian_elimination_in_mpmath() -> None:
    linalg = pytest.importorskip("mpmath.matrices.linalg")
    # The sum of (n - k)^2 updates, k = 1..n-1: 2n^3/3 operations at two an update, to leading order
    # (Golub & Van Loan, Matrix Computations, 3.2; from memory).
    record = audit_of_line(
        "mpmath.matrices.linalg:LinearAlgebraMethods.LU_decomp",
        linalg.LinearAlgebraMethods.LU_decomp,
        "A[i,k] -= A[i,j]*A[j,k]",
        feed="args(mpmath.mp, mpmath.matrix([[1 + (i == j) * n for i in range(n)] "
        "for j in range(n)]))",
        sizes="2,3,4,5,6,7,8,10,12",
        only_sizes=True,
    )
    expected = n * (n - 1) * (2 * n - 1) / 6
    assert sympy.expand(sympy.sympify(record.figure.law.formula) - expected) == 0
    assert record.figure.law.grade == "exact"


def test_breadth_first_search_in_networkx() -> None:
    search = pytest.importorskip("networkx.algorithms.traversal.breadth_first_search")
    # Every vertex once, every edge twice (common practice). In a complete bipartite graph the
    # search from one of n nodes looks along its own m edges and the n edges of the first of those
    # m; then all have been seen, and networkx ends it.
    record = audit_of_line(
        "networkx.algorithms.traversal.breadth_first_search:generic_bfs_edges",
        search.generic_bfs_edges,
        "if child not in seen",
        feed="args(networkx.complete_bipartite_graph(n, m), 0)",
        sizes={"n": [2, 3, 4, 5, 6], "m": [1, 2, 3, 4, 5]},
        only_sizes=True,
    )
    assert sympy.expand(sympy.sympify(record.figure.law.formula) - n - sympy.Symbol("m")) == 0
    assert record.figure.law.grade == "exact"


def test_items_of_a_sorted_list() -> None:
    sorted_list = pytest.importorskip("sortedcontainers.sortedlist")
    # One step down a level at a time in a tree of which each node has two children: the position
    # index of a list of n segments is as deep as lg n (the library's own documents).
    record = audit_of_line(
        "sortedcontainers.sortedlist:SortedList._pos",
        sorted_list.SortedList._pos,
        "child = (pos << 1) + 1",
        feed="args((lambda s: (s._reset(4), s)[1])(SortedList(range(8 * n))), 4 * n + 1)",
        sizes="2,4,8,16,32,64,128,256",
        only_sizes=True,
    )
    found = values(record)
    steps = [found[2**k] for k in range(1, 9)]
    assert [b - a for a, b in itertools.pairwise(steps)] == [1] * 7
