"""Nests of `range` loops with affine bounds, for the slowdown and for its limits."""

from __future__ import annotations


def triples(n: int) -> int:
    """Count i < j < k; the innermost line runs n(n-1)(n-2)/6 times (a binomial coefficient)."""
    found = 0
    for i in range(n):
        for j in range(i + 1, n):
            for k in range(j + 1, n):
                found += (i ^ j ^ k) & 1
    return found


def matrix_product(n: int) -> float:
    """The product by its definition: n^3 multiplications (Golub & Van Loan, 1.1)."""
    a = [[(i * 7 + j) % 11 / 11 for j in range(n)] for i in range(n)]
    b = [[(i + j * 5) % 13 / 13 for j in range(n)] for i in range(n)]
    c = [[0.0] * n for _ in range(n)]
    for i in range(n):
        row, out = a[i], c[i]
        for j in range(n):
            total = 0.0
            for k in range(n):
                total += row[k] * b[k][j]
            out[j] = total
    return sum(map(sum, c))


def cheapest_transfers(n: int) -> int:
    """Floyd-Warshall with `if`: n^3 inner comparisons."""
    cost = [[(i * 17 + j * 31) % 97 + 1 for j in range(n)] for i in range(n)]
    for k in range(n):
        by = cost[k]
        for i in range(n):
            row = cost[i]
            first = row[k]
            for j in range(n):
                if first + by[j] < row[j]:
                    row[j] = first + by[j]
    return sum(map(sum, cost))


def stencil(n: int) -> float:
    grid = [[float((i * j) % 7) for j in range(n)] for i in range(n)]
    for _ in range(12):
        for i in range(1, n - 1):
            up, row, down = grid[i - 1], grid[i], grid[i + 1]
            for j in range(1, n - 1):
                row[j] = (up[j] + down[j] + row[j - 1] + row[j + 1]) * 0.25
    return sum(map(sum, grid))


def triangular_sums(n: int) -> int:
    total = 0
    for i in range(n):
        for j in range(0, i, 2):
            total += i - j
        for j in range(i, n, 3):
            total ^= j
    return total


def short_rows(n: int) -> int:
    """Many inner loops of four rounds: the outer block weighs as much as the inner."""
    total = 0
    for i in range(n):
        for j in range(4):
            total += i * j
    return total


#: Name, function, size of about half a second, size for the referee.
NESTS = (
    ("triples", triples, 360, 24),
    ("matrix_product", matrix_product, 240, 12),
    ("cheapest_transfers", cheapest_transfers, 280, 12),
    ("stencil", stencil, 700, 12),
    ("triangular_sums", triangular_sums, 4500, 60),
    ("short_rows", short_rows, 1_800_000, 600),
)
