"""Functions whose step counts tempt a law finder into claiming too much. Standard library alone."""

from __future__ import annotations

import math
import random


def capped_call(n: int) -> int:
    total = 0
    for _ in range(min(n, 1000)):
        total += 1
    return total


def capped_branch(n: int) -> int:
    total = 0
    for i in range(n):
        if i < 1000:
            total += i
    return total


def capped_expression(n: int) -> int:
    total = 0
    for _ in range(n if n < 700 else 700):
        total += 1
    return total


def capped_break(n: int) -> int:
    total = 0
    for i in range(n):
        if i == 900:
            break
        total += 1
    return total


def larger_path(n: int) -> int:
    total = 0
    for i in range(n):
        total += i
    if n > 1500:
        for i in range(n):
            for _ in range(i):
                total += 1
    return total


def offset_start(n: int) -> int:
    total = 0
    for _ in range(n):
        total += 1
    for _ in range(max(0, n - 2000)):
        total += 3
    return total


def doubled_table(n: int) -> int:
    room, copies = 1, 0
    for used in range(n):
        if used == room:
            for _ in range(used):
                copies += 1
            room *= 2
    return copies


def grown_by_eighth(n: int) -> int:
    room, copies = 8, 0
    for used in range(n):
        if used == room:
            for _ in range(used):
                copies += 1
            room += (room >> 3) + 6
    return copies


def late_table(n: int) -> int:
    copies = 0
    for used in range(n):
        if used == 3000:
            for _ in range(used):
                copies += 1
    return copies


def filling_cache(n: int) -> int:
    cache: dict[int, int] = {}
    for i in range(n):
        key = i % 1200
        if key not in cache:
            total = 0
            for k in range(5):
                total += k
            cache[key] = total
    return len(cache)


def emptied_cache(n: int) -> int:
    cache: dict[int, int] = {}
    for i in range(n):
        if len(cache) >= 64:
            for key in list(cache):
                del cache[key]
        cache[i] = i
    return len(cache)


def parity(n: int) -> int:
    total = 0
    for i in range(n):
        if i % 2:
            total += i
    return total


def modulus_seven(n: int) -> int:
    total = 0
    for i in range(n):
        if i % 7 == 3:
            total += i
    return total


def modulus_97(n: int) -> int:
    total = 0
    for i in range(n):
        if i % 97 == 96:
            total += i
    return total


def parity_of_text(n: int) -> int:
    total = 0
    for i in range(n):
        if str(i)[-1] in "13579":
            total += i
    return total


def modulus_of_walk(n: int) -> int:
    total = place = 0
    for _ in range(n):
        place = (place * 5 + 3) % 8
        if place == 0:
            total += 1
    return total


def modulus_of_rest(n: int) -> int:
    total = 0
    for _ in range(n + divmod(n, 97)[1]):
        total += 1
    return total


def size_parity(n: int) -> int:
    total = 0
    for _ in range(n if n % 2 else n * n):
        total += 1
    return total


def size_power_of_two(n: int) -> int:
    total = 0
    for _ in range(n):
        total += 1
    if n & (n - 1) == 0:
        for _ in range(n):
            total += 1
    return total


def power_1585(n: int) -> int:
    total = 0
    for _ in range(int(n**1.585)):
        total += 1
    return total


def power_15(n: int) -> int:
    total = 0
    for _ in range(int(n**1.5)):
        total += 1
    return total


def power_199(n: int) -> int:
    total = 0
    for _ in range(int(n**1.99)):
        total += 1
    return total


def power_101(n: int) -> int:
    total = 0
    for _ in range(int(n**1.01)):
        total += 1
    return total


def n_root(n: int) -> int:
    total = 0
    for _ in range(n):
        for _ in range(math.isqrt(n)):
            total += 1
    return total


def roots_of_each(n: int) -> int:
    total = 0
    for i in range(n):
        for _ in range(math.isqrt(i)):
            total += 1
    return total


def log_log(n: int) -> int:
    total = 0
    for _ in range(n):
        k = n
        while k > 2:
            k = math.isqrt(k)
            total += 1
    return total


def log_log_rounded(n: int) -> int:
    total = 0
    for _ in range(int(n * math.log(max(1.0, math.log(max(n, 3)))))):
        total += 1
    return total


def log_squared(n: int) -> int:
    total = 0
    for _ in range(int(n * math.log(n + 1) ** 2)):
        total += 1
    return total


def n_over_log(n: int) -> int:
    total = 0
    for _ in range(int(n / math.log(n + 2))):
        total += 1
    return total


def divisor_sum(n: int) -> int:
    total = 0
    for i in range(1, n + 1):
        for _ in range(i, n + 1, i):
            total += 1
    return total


def divisors_of_size(n: int) -> int:
    total = 0
    for d in range(1, n + 1):
        if n % d == 0:
            total += d
    return total


def sieve(n: int) -> int:
    crossed, count = [False] * (n + 1), 0
    for p in range(2, n + 1):
        if not crossed[p]:
            for q in range(2 * p, n + 1, p):
                crossed[q] = True
                count += 1
    return count


def primes(n: int) -> int:
    count = 0
    for k in range(2, n + 1):
        if all(k % d for d in range(2, math.isqrt(k) + 1)):
            count += 1
    return count


def least_factor(n: int) -> int:
    for d in range(2, n):
        if n % d == 0:
            return d
    return n


def coprime_pairs(n: int) -> int:
    count = 0
    for i in range(1, min(n, 60) + 1):
        if math.gcd(i, n) == 1:
            count += 1
    return count


def euclid(n: int) -> int:
    a, b = n, n * 5 // 8
    while b:
        a, b = b, a % b
    return a


def collatz(n: int) -> int:
    steps, k = 0, max(n, 1)
    while k > 1:
        k = k // 2 if k % 2 == 0 else 3 * k + 1
        steps += 1
    return steps


def digits(n: int) -> int:
    total = 0
    for i in range(n):
        for _ in str(i):
            total += 1
    return total


def ones(n: int) -> int:
    total = 0
    for i in range(n):
        while i:
            i &= i - 1
            total += 1
    return total


def first_small(values: list[int]) -> int:
    for i, value in enumerate(values):
        if value < 100:
            return i
    return -1


def maximum_changes(values: list[int]) -> int:
    best, changes = -1, 0
    for value in values:
        if value > best:
            best, changes = value, changes + 1
    return changes


def insertion(values: list[int]) -> None:
    for i in range(1, len(values)):
        k = i
        while k and values[k - 1] > values[k]:
            values[k - 1], values[k] = values[k], values[k - 1]
            k -= 1


def rare_branch(values: list[int]) -> int:
    total = 0
    for value in values:
        if value < 3:
            total += value
    return total


def noise_of_thousandths(n: int) -> int:
    noise = random.Random(n).uniform(-0.003, 0.003)
    total = 0
    for _ in range(round(20 * n * (1 + noise))):
        total += 1
    return total


def noise_on_squares(n: int) -> int:
    noise = random.Random(n + 1).uniform(-0.002, 0.002)
    total = 0
    for _ in range(round(n * n * (1 + noise))):
        total += 1
    return total


def seen_all(values: list[int]) -> int:
    seen: set[int] = set()
    for i, value in enumerate(values):
        seen.add(value % 10)
        if len(seen) == 10:
            return i
    return -1
