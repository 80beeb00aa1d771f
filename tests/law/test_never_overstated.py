"""Hard cases: the grade is never ``proved``, and ``exact`` only where that is true."""

from __future__ import annotations

import math
import random
from collections.abc import Callable
from fractions import Fraction

import pytest
from law_helpers import FROM_ONE, PLAN, SMALL, grid, observe

from steplaw.law import Observation, find_law, value

LONG = (*range(13), 16, 21, 32, 50, 64, 100, 128, 200, 256, 400, 512, 777, 1024, 2000, 2048, 4096)
DENSE = tuple(range(40))


def primes(n):
    return sum(all(k % d for d in range(2, math.isqrt(k) + 1)) for k in range(2, n + 1))


def divisor_sum(n):
    return sum(n // k for k in range(1, n + 1))


def crossings(n):
    """Crossings-out of the sieve of Eratosthenes."""
    crossed, count = [False] * (n + 1), 0
    for p in range(2, n + 1):
        if not crossed[p]:
            for q in range(2 * p, n + 1, p):
                crossed[q], count = True, count + 1
    return count


def resized(n):
    """Copies made by a table that grows by an eighth and a bit when it is full."""
    room, copies = 0, 0
    for k in range(n):
        if k == room:
            copies += k
            room += (room >> 3) + 6
    return copies


def euclid(n):
    a, b, count = n, (n * 5) // 8, 0
    while b:
        a, b, count = b, a % b, count + 1
    return count


def collatz(n):
    count = 0
    while n > 1:
        n, count = (n // 2 if n % 2 == 0 else 3 * n + 1), count + 1
    return count


def least_factor(n):
    return next((d for d in range(2, n + 1) if n % d == 0), 0)


def early_exit(n):
    rng = random.Random(n)
    return next((k for k in range(n) if rng.random() < 0.1), n)


def noisy(function: Callable[[int], float], share: float, seed: int = 1):
    rng = random.Random(seed)
    return lambda n: round(function(n) * (1 + rng.uniform(-share, share)))


NOT_EXACT = {
    "n**1.585": (lambda n: int(n**1.585), PLAN),
    "n**1.5 rounded down": (lambda n: int(n**1.5), PLAN),
    "n**1.5 rounded": (lambda n: round(n**1.5), LONG),
    "n**1.99": (lambda n: int(n**1.99), LONG),
    "n**2.01": (lambda n: int(n**2.01), LONG),
    "n log n rounded": (lambda n: round(n * math.log(n)) if n else 0, LONG),
    "n log2 n rounded down": (lambda n: int(n * math.log2(n)) if n else 0, LONG),
    "n log log n": (lambda n: int(n * math.log(math.log(n + 3))), LONG),
    "n log**2 n": (lambda n: int(n * math.log(n + 1) ** 2), PLAN),
    "log n rounded": (lambda n: round(10 * math.log(n + 1)), LONG),
    "log log n": (lambda n: int(10 * math.log(math.log(n + 3))), LONG),
    "cube root": (lambda n: round(n ** (1 / 3) * 10), LONG),
    "primes up to n": (primes, LONG),
    "primes, all small sizes": (primes, DENSE),
    "sums over divisors": (divisor_sum, PLAN),
    "sums over divisors, all small sizes": (divisor_sum, DENSE),
    "number of divisors": (lambda n: sum(n % d == 0 for d in range(1, n + 1)), DENSE),
    "sum of divisors": (lambda n: sum(d for d in range(1, n + 1) if n % d == 0), DENSE),
    "coprime numbers": (lambda n: sum(math.gcd(k, n) == 1 for k in range(1, n + 1)), DENSE),
    "is a prime": (lambda n: int(n > 1 and primes(n) > primes(n - 1)), DENSE),
    "least factor": (least_factor, DENSE),
    "sieve": (crossings, LONG),
    "sieve, all small sizes": (crossings, DENSE),
    "ones in binary": (lambda n: n.bit_count(), LONG),
    "2n less the ones in binary": (lambda n: 2 * n - n.bit_count(), PLAN),
    "trailing zeros": (lambda n: (n & -n).bit_length(), DENSE),
    "exclusive or": (lambda n: n ^ (n >> 1), DENSE),
    "digit sum past 100": (lambda n: sum(map(int, str(n))), range(120)),
    "a table that is resized": (resized, LONG),
    "a table that is resized, all small sizes": (resized, DENSE),
    "Euclid": (euclid, DENSE),
    "halve or triple": (collatz, DENSE),
    "a data-dependent exit": (early_exit, LONG),
    "a data-dependent exit, all small sizes": (early_exit, DENSE),
    "noise of 3 in 1000 on n**2": (noisy(lambda n: 50 * n * n + 3000, 0.003), PLAN),
    "noise of 1 in 1000 on n**3": (noisy(lambda n: n**3 + 5000, 0.001), PLAN),
    "noise of 5 in 1000 on 900 n": (noisy(lambda n: 900 * n + 1000, 0.005), PLAN),
    "noise of 2 in 1000 on a constant": (noisy(lambda n: 10000, 0.002), PLAN),
    "one more at a single size": (lambda n: 3 * n + (n == 100), PLAN),
    "one less at the largest size": (lambda n: n * n - (n == 256), PLAN),
    "min(n, 1000) seen on both sides": (lambda n: min(n, 1000), LONG),
    "min(n, 50) seen on both sides": (lambda n: min(n, 50), PLAN),
    "a cache that fills at 60": (lambda n: n * n if n <= 60 else 60 * n, PLAN),
    "a cutoff to another method": (lambda n: n * n if n < 32 else 9 * n, PLAN),
    "a step at 100": (lambda n: 5 * n + 70 * (n >= 100), PLAN),
    "the size modulo 64": (lambda n: n % 64, PLAN),
    "modulo 97": (lambda n: n * n % 97, DENSE),
    "random bits": (lambda n: random.Random(n * 7 + 1).randint(0, 1), DENSE),
    "random digits": (lambda n: random.Random(n * 7 + 1).randint(0, 9), PLAN),
    "a random walk": (lambda n: sum(random.Random(k).randint(0, 1) for k in range(n)), DENSE),
    "period 13": (lambda n: 2 * n + (n % 13 == 0), DENSE),
    "a sorted square": (lambda n: sum(1 for k in range(n) if k * k % 7 < 3), PLAN),
    "ackermann's little sister": (lambda n: n * [1, 2, 3, 5, 4][min(n.bit_length() // 2, 4)], PLAN),
}

SEEN_ONLY = {
    "min(n, 1000) below": (lambda n: min(n, 1000), PLAN),
    "a table resized beyond": (lambda n: n + (n if n > 5000 else 0), LONG),
    "a cache that fills beyond": (lambda n: n * n if n <= 300 else 300 * n, PLAN),
    "parity of the thousands": (lambda n: 7 * n + (n // 1000) % 2, PLAN),
    "an overflow beyond": (lambda n: (n * n) % 100003, PLAN),
    "a polynomial that vanishes at the sizes": (
        lambda n: 5 * n + math.prod(n - k for k in SMALL),
        SMALL,
    ),
    "digit sum below 100": (lambda n: sum(map(int, str(n))), DENSE),
    "only even sizes": (lambda n: n // 2, range(0, 40, 2)),
    "only powers of two": (lambda n: n.bit_length(), [2**k for k in range(11)]),
}


@pytest.mark.parametrize("name", NOT_EXACT)
def test_no_exact_law_is_claimed(name):
    function, sizes = NOT_EXACT[name]
    law = find_law(observe(function, sizes))
    assert law.grade in ("fitted", "open"), law.formula
    assert (law.formula is None) == (law.grade == "open")
    assert law.note


@pytest.mark.parametrize("name", SEEN_ONLY)
def test_what_changes_beyond_the_sizes_is_exact_at_most_and_says_how_far_it_was_seen(name):
    function, sizes = SEEN_ONLY[name]
    law = find_law(observe(function, sizes))
    assert law.grade == "exact"
    assert f"seen up to n = {max(sizes)}" in law.note
    for n in (*law.settled_by, *law.checked_at):
        assert value(law, n) == function(n)
    assert max(sizes) in law.checked_at


def test_there_are_enough_hard_cases():
    assert len(NOT_EXACT) + len(SEEN_ONLY) >= 40


def test_means_of_draws_are_never_exact():
    data = [
        Observation((n,), Fraction(n * n, 4), draws=10, variance=Fraction(n), least=0, most=n * n)
        for n in PLAN
    ]
    assert find_law(data).grade != "exact"


def test_one_size_that_varies_is_enough():
    data = observe(lambda n: 3 * n, PLAN)
    data[10] = Observation((PLAN[10],), data[10].value, draws=5, variance=Fraction(1, 10))
    assert find_law(data).grade != "exact"


def test_fitted_error_is_that_of_the_held_out_sizes():
    law = find_law(observe(lambda n: int(n**1.5), LONG))
    assert law.grade == "fitted"
    assert max(LONG) in law.checked_at
    assert not set(law.settled_by) & set(law.checked_at)
    assert law.error is not None and 0 < law.error < 0.02


def test_two_growths_that_fit_alike_are_named():
    law = find_law(observe(lambda n: int(n * math.log(math.log(n + 3))), PLAN))
    if law.grade == "open":
        assert "n*log(log(n))" in law.note


@pytest.mark.parametrize("sizes", [range(2), range(4), [10, 20, 40]])
def test_too_few_sizes_leave_it_open(sizes):
    law = find_law(observe(lambda n: n**3 + n, sizes))
    assert law.grade == "open"
    assert law.formula is None and law.leading is None
    assert "too few" in law.note


def test_a_narrow_range_of_sizes_leaves_it_open():
    law = find_law(observe(lambda n: int(n * math.log(n + 1) * 10), range(1, 9)))
    assert law.grade == "open"
    assert "close together" in law.note


def test_several_sizes():
    points = [(a, b) for a in (0, 1, 2, 3, 5, 9, 14) for b in (0, 1, 2, 4, 7, 15)]
    assert find_law(grid(math.gcd, points), ("n", "m")).grade == "open"
    noisy_law = find_law(
        grid(lambda n, m: 100 * n * m + random.Random(n * 99 + m).randint(0, 3), points), ("n", "m")
    )
    assert noisy_law.grade != "exact"


def test_the_range_of_every_exact_law_is_what_was_seen():
    for function in (lambda n: n * n, lambda n: max(0, n - 3), lambda n: n * n.bit_length()):
        law = find_law(observe(function, FROM_ONE))
        seen = sorted((*law.settled_by, *law.checked_at))
        assert law.holds_from == seen[0]
        assert seen == [n for n in FROM_ONE if n >= law.holds_from]
