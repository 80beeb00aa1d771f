"""Figures from outside the project, each with its source, the function and the line that it counts.

Sources are named as they are remembered; each figure was confirmed by counting, which is what the
tests do. 'common practice' stands where a fact of the trade has no one source.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

ORDERS = "(list(p) for p in permutations(range(n)))"
ONE_UP = "(args(list(range(n)), k) for k in range(n))"


@dataclass(frozen=True)
class Row:
    """One published figure.

    Parameters
    ----------
    name, source : str
        What is counted, and who says so.
    function, line : str
        The function of `algorithms`, and the comment of the line whose frequency it is.
    expected : str
        The figure, read by sympy; `n` is the size.
    reads : {"law", "most", "least", "variance"}
        Which law of the record it is.
    settings : dict
        Feed, sizes and the like.
    tail : bool
        Whether only the leading term is published.
    at : str
        What `n` of the law is in the published figure, where it is not the size itself.
    """

    name: str
    source: str
    function: str
    line: str
    expected: str
    reads: str = "law"
    settings: dict[str, Any] = field(default_factory=dict)
    tail: bool = False


def _every(feed: str = ORDERS, last: int = 7, first: int = 0) -> dict[str, Any]:
    return {"every": feed, "sizes": list(range(first, last + 1)), "only_sizes": True}


def _feed(
    feed: str, sizes: Any = (1, 2, 3, 4, 5, 6, 8, 12, 16), only: bool = True
) -> dict[str, Any]:
    return {"feed": feed, "sizes": list(sizes), "only_sizes": only}


KNUTH_3 = "Knuth, The Art of Computer Programming, vol. 3"
KNUTH_1 = "Knuth, The Art of Computer Programming, vol. 1"
COMMON = "common practice"
POWERS = [1, 2, 4, 8, 16, 32, 64]

ROWS = (
    Row(
        "triples i < j < k of n",
        "binomial coefficient",
        "triples",
        "one of i < j < k",
        "n*(n-1)*(n-2)/6",
        settings=_feed("n"),
    ),
    Row(
        "selection sort, comparisons",
        f"{KNUTH_3}, 5.2.3",
        "selection_sort",
        "comparison",
        "n*(n-1)/2",
        settings=_feed("list(range(n, 0, -1))"),
    ),
    Row(
        "selection sort, exchanges",
        f"{KNUTH_3}, 5.2.3",
        "selection_sort",
        "exchange",
        "n-1",
        settings=_feed("list(range(n, 0, -1))"),
    ),
    Row(
        "insertion sort, comparisons, mean",
        f"{KNUTH_3}, 5.2.1",
        "insertion_sort",
        "comparison",
        "n*(n-1)/4 + n - harmonic(n)",
        settings=_every(first=1),
    ),
    Row(
        "insertion sort, comparisons, most",
        f"{KNUTH_3}, 5.2.1",
        "insertion_sort",
        "comparison",
        "n*(n-1)/2",
        reads="most",
        settings=_every(),
    ),
    Row(
        "inversions, mean",
        f"{KNUTH_3}, 5.1.1",
        "insertion_sort",
        "move",
        "n*(n-1)/4",
        settings=_every(),
    ),
    Row(
        "inversions, variance",
        f"{KNUTH_3}, 5.1.1",
        "insertion_sort",
        "move",
        "n*(n-1)*(2*n+5)/72",
        reads="variance",
        settings=_every(),
    ),
    Row(
        "changes of the running maximum, mean",
        f"{KNUTH_1}, 1.2.10",
        "running_maximum",
        "change",
        "harmonic(n) - 1",
        settings=_every(first=1),
    ),
    Row(
        "changes of the running maximum, variance",
        f"{KNUTH_1}, 1.2.10",
        "running_maximum",
        "change",
        "harmonic(n) - harmonic(n, 2)",
        reads="variance",
        settings=_every(first=1),
    ),
    Row(
        "quicksort, comparisons, mean",
        "Sedgewick & Flajolet, An Introduction to the Analysis of Algorithms, ch. 1",
        "quicksort",
        "comparison",
        "2*(n+1)*harmonic(n) - 4*n",
        settings=_every(),
    ),
    Row(
        "quicksort, comparisons, most",
        COMMON,
        "quicksort",
        "comparison",
        "n*(n-1)/2",
        reads="most",
        settings=_every(),
    ),
    Row(
        "search tree, comparisons to insert, mean",
        f"{KNUTH_3}, 6.2.2",
        "search_tree",
        "comparison",
        "2*(n+1)*harmonic(n) - 4*n",
        settings=_every(),
    ),
    Row(
        "merge sort, most comparisons",
        f"{KNUTH_3}, 5.2.4 and 5.3.1",
        "merge_sort",
        "comparison",
        "n*ceiling(log(n, 2)) - 2**ceiling(log(n, 2)) + 1",
        settings=_feed("unmerged(list(range(n)))", range(1, 40)),
    ),
    Row(
        "binary search, most probes",
        f"{KNUTH_3}, 6.2.1",
        "binary_search",
        "probe",
        "floor(log(n, 2)) + 1",
        reads="most",
        settings=_every(ONE_UP, last=24, first=1),
    ),
    Row(
        "calls of the doubly recursive Fibonacci function",
        COMMON,
        "fibonacci",
        "call",
        "2*fibonacci(n+1) - 1",
        settings=_feed("n", range(1, 17)),
    ),
    Row(
        "moves of n discs on three pegs",
        COMMON,
        "hanoi",
        "move",
        "2**n - 1",
        settings=_feed("n", range(1, 13)),
    ),
    Row(
        "matrix product, multiplications but for the first",
        "Golub & Van Loan, Matrix Computations, 1.1 (n^3, of which n^2 begin a sum)",
        "matrix_product",
        "multiplication but for the first",
        "n**3 - n**2",
        settings=_feed("n"),
    ),
    Row(
        "Cholesky factor, multiplications below the diagonal",
        "Golub & Van Loan, 4.2; from memory",
        "cholesky",
        "multiplication",
        "n**3/6",
        settings=_feed("n"),
        tail=True,
    ),
    Row(
        "Floyd-Warshall, inner comparisons",
        COMMON,
        "floyd_warshall",
        "comparison",
        "n**3",
        settings=_feed("n"),
    ),
    Row(
        "fast Fourier transform, multiplications",
        "Cooley & Tukey 1965",
        "fourier",
        "multiplication",
        "n*log(n, 2)/2",
        settings=_feed("[1j] * n", [*POWERS, 128, 256]),
    ),
    Row(
        "Karatsuba product of n digits, digit products",
        "Karatsuba & Ofman 1962",
        "karatsuba",
        "digit product",
        "n**log(3, 2)",
        settings=_feed("args([3] * n, [5] * n)", POWERS),
    ),
    Row(
        "Horner's rule, degree n",
        "Knuth, The Art of Computer Programming, vol. 2, 4.6.4",
        "horner",
        "step",
        "n",
        settings=_feed("[1] * (n + 1)"),
    ),
    Row(
        "breadth-first search, edge ends",
        COMMON,
        "breadth_first",
        "edge end",
        "2*(n - 1)",
        settings=_feed("[[j for j in (i - 1, i + 1) if 0 <= j < n] for i in range(n)]"),
    ),
    Row(
        "random permutation by exchanging",
        "Knuth, The Art of Computer Programming, vol. 2, 3.4.2",
        "shuffle",
        "exchange",
        "n-1",
        settings=_feed("n"),
    ),
    # Found beyond the list.
    Row(
        "bubble sort without a test for order, comparisons",
        f"{KNUTH_3}, 5.2.2; from memory",
        "bubble_sort",
        "comparison",
        "n*(n-1)/2",
        settings=_feed("list(range(n))"),
    ),
    Row(
        "bubble sort, exchanges, mean",
        f"{KNUTH_3}, 5.2.2",
        "bubble_sort",
        "exchange",
        "n*(n-1)/4",
        settings=_every(),
    ),
    Row(
        "cycles of a random permutation, mean",
        f"{KNUTH_1}, 1.3.3; Stirling numbers",
        "cycles",
        "cycle",
        "harmonic(n)",
        settings=_every(),
    ),
    Row(
        "fixed points of a random permutation, variance",
        "Montmort 1708; from memory",
        "fixed_points",
        "fixed point",
        "1",
        reads="variance",
        settings=_every(first=2),
    ),
    Row(
        "fixed points of a random permutation, mean",
        "Montmort 1708; from memory",
        "fixed_points",
        "fixed point",
        "1",
        settings=_every(first=1),
    ),
    Row(
        "descents of a random permutation, mean",
        f"{KNUTH_3}, 5.1.3; Eulerian numbers",
        "descents",
        "descent",
        "(n-1)/2",
        settings=_every(first=1),
    ),
    Row(
        "descents of a random permutation, variance",
        f"{KNUTH_3}, 5.1.3; from memory",
        "descents",
        "descent",
        "(n+1)/12",
        reads="variance",
        settings=_every(first=2),
    ),
    Row(
        "least and greatest of 2m keys, pairs",
        "Pohl, A sorting problem and its complexity, CACM 15, 1972: 3n/2 - 2 comparisons in all",
        "least_and_greatest",
        "second of three",
        "n - 1",
        settings=_feed("list(range(2 * n - 1))"),
    ),
    Row(
        "Strassen's products, n = 2^k",
        "Strassen, Gaussian elimination is not optimal, 1969",
        "strassen",
        "product",
        "n**log(7, 2)",
        settings=_feed("n", [1, 2, 4, 8, 16, 32]),
    ),
    Row(
        "Gaussian elimination, multiplications",
        "Golub & Van Loan, 3.2; from memory",
        "eliminate",
        "multiplication",
        "n*(n-1)*(2*n-1)/6",
        settings=_feed("n"),
    ),
    Row(
        "edit distance of two words of n letters, cells",
        "Wagner & Fischer, J. ACM 21, 1974",
        "edit_distance",
        "cell",
        "n**2",
        settings=_feed("args('a' * n, 'b' * n)"),
    ),
    Row(
        "subsets of n things",
        COMMON,
        "subsets",
        "subset",
        "2**n",
        settings=_feed("n", range(1, 12)),
    ),
    Row(
        "orders of n things",
        COMMON,
        "orders",
        "order",
        "factorial(n)",
        settings=_feed("n", range(1, 8)),
    ),
    Row(
        "bracketings with n pairs",
        "Catalan 1838",
        "bracketings",
        "bracketing",
        "binomial(2*n, n)/(n + 1)",
        settings=_feed("n", range(1, 10)),
    ),
    Row(
        "Gray code of n bits, flips",
        "Gray 1953, US patent 2632058",
        "gray_code",
        "flip",
        "2**n - 1",
        settings=_feed("n", range(1, 12)),
    ),
    Row(
        "halvings of n",
        COMMON,
        "trailing_divisions",
        "halving",
        "floor(log(n, 2))",
        settings=_feed("n", range(1, 40)),
    ),
    Row(
        "handshakes of n people",
        COMMON,
        "handshakes",
        "handshake",
        "n*(n-1)/2",
        settings=_feed("n"),
    ),
    Row(
        "squares in an n by n board",
        "Faulhaber 1631; from memory",
        "bounded_squares",
        "square",
        "n*(n+1)*(2*n+1)/6",
        settings=_feed("n"),
    ),
    Row(
        "pairs in the rows of an n by n board",
        "binomial coefficient",
        "queens_pairs",
        "pair in a row",
        "n**2*(n-1)/2",
        settings=_feed("n"),
    ),
)
