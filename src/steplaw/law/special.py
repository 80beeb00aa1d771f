"""Special numbers in whole arithmetic."""

from __future__ import annotations

import math
from fractions import Fraction
from functools import lru_cache

MOST_EXACT = 1500
MOST_DIGITS = 200_000


def harmonic(n: int, order: int = 1) -> Fraction | float:
    """Give the harmonic number of an order, the sum of 1/k**order for k = 1..n.

    Parameters
    ----------
    n : int
        Terms of the sum.
    order : int
        The power.

    Returns
    -------
    Fraction or float
        Exact up to n = 1500; beyond that by the Euler-Maclaurin formula (Knuth, The Art of
        Computer Programming, vol. 1, 1.2.11.2), to the precision of floats.
    """
    if n <= MOST_EXACT:
        return _harmonic_exact(n, order)
    tail = 1.0 / (2.0 * float(n) ** order)
    correction = order / (12.0 * float(n) ** (order + 1))
    if order == 1:
        return math.log(n) + 0.5772156649015329 + tail - correction
    zeta = {2: math.pi**2 / 6, 3: 1.2020569031595942, 4: math.pi**4 / 90}
    limit = zeta.get(order)
    if limit is None:
        return math.fsum(1.0 / k**order for k in range(1, 2000))
    head = 1.0 / ((order - 1) * float(n) ** (order - 1))
    return limit - head + tail - correction


@lru_cache(maxsize=8192)
def _harmonic_exact(n: int, order: int) -> Fraction:
    total = Fraction(0)
    for k in range(n, 0, -1):
        total += Fraction(1, k**order)
    return total


def factorial(n: int) -> int:
    """Give n factorial; OverflowError where it has more than 200000 digits or so."""
    if n > 40_000:
        raise OverflowError
    return math.factorial(n)


def arrangements(n: int) -> int:
    """Give the number of arrangements of any of n things, the sum of n!/k! for k = 0..n.

    It is floor(e * n!) from n = 1 on.
    """
    if n > 20_000:
        raise OverflowError
    total = 1
    for k in range(1, n + 1):
        total = total * k + 1
    return total


def binomial(n: int, k: int) -> int:
    """Give the binomial coefficient; 0 where k is outside 0..n."""
    if k < 0 or n < 0 or k > n:
        return 0
    if min(k, n - k) > MOST_DIGITS // 2:
        raise OverflowError
    return math.comb(n, k)


def catalan(n: int) -> int:
    """Give the Catalan number of n."""
    return binomial(2 * n, n) // (n + 1)


def fibonacci(n: int) -> int:
    """Give the Fibonacci number of n by doubling."""
    if n < 0:
        return fibonacci(-n) if n % 2 else -fibonacci(-n)
    if n > 1_000_000:
        raise OverflowError
    a, b = 0, 1
    for bit in bin(n)[2:]:
        a, b = a * (2 * b - a), a * a + b * b
        if bit == "1":
            a, b = b, a + b
    return a


def lucas(n: int) -> int:
    """Give the Lucas number of n."""
    return 2 * fibonacci(n + 1) - fibonacci(n)


def tribonacci(n: int) -> int:
    """Give the n-th of 0, 1, 1, 2, 4, 7, 13, ..., each the sum of the three before it."""
    if n > 100_000:
        raise OverflowError
    a, b, c = 0, 1, 1
    for _ in range(n):
        a, b, c = b, c, a + b + c
    return a


def subfactorial(n: int) -> int:
    """Give the number of orders of n things that leave none in its place."""
    if n > 20_000:
        raise OverflowError
    total = 1
    for k in range(1, n + 1):
        total = total * k + (-1 if k % 2 else 1)
    return total
