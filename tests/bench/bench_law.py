"""How long it takes to find about 300 distinct laws over 20 sizes; prints the result.

Run with ``PYTHONPATH=src python tests/bench/bench_law.py``.
"""

from __future__ import annotations

import random
import time
from collections import Counter
from collections.abc import Callable
from fractions import Fraction

from steplaw.law import Observation, find_law

SIZES = (*range(13), 16, 21, 32, 50, 64, 100, 128)


def functions() -> list[Callable[[int], int]]:
    """Give 300 functions as the lines of a long function would have them."""
    rng = random.Random(20)
    made: list[Callable[[int], int]] = []
    for k in range(300):
        a, b, c = rng.randint(1, 30), rng.randint(0, 30), rng.randint(0, 30)
        kind = k % 10
        if kind < 4:
            made.append(lambda n, a=a, b=b, c=c, k=kind: a * n**k + b * n + c)
        elif kind == 4:
            made.append(lambda n, a=a, b=b: a * (n * (n - 1) * (n - 2) // 6) + b)
        elif kind == 5:
            made.append(lambda n, a=a, b=b: a * (n // 2) + b * n)
        elif kind == 6:
            made.append(lambda n, a=a, b=b: a * n.bit_length() + b)
        elif kind == 7:
            made.append(lambda n, a=a, b=b: a * n * max(0, n - 1).bit_length() + b)
        elif kind == 8:
            made.append(lambda n, a=a, b=b: a * max(0, n - 3) + b)
        else:
            made.append(lambda n, a=a, b=b: a * sum(n // d for d in range(1, n + 1)) + b)
    return made


def main() -> None:
    """Find the laws and print the time and the grades."""
    data = [[Observation((n,), Fraction(function(n))) for n in SIZES] for function in functions()]
    started = time.perf_counter()
    grades = Counter(find_law(observations).grade for observations in data)
    taken = time.perf_counter() - started
    print(f"{len(data)} laws over {len(SIZES)} sizes: {taken:.2f} s, {dict(grades)}")


if __name__ == "__main__":
    main()
