"""Published algorithms in plain Python; a comment names the line that a published figure counts."""

from __future__ import annotations

import cmath


def triples(n: int) -> int:
    seen = 0
    for i in range(n):
        for j in range(i + 1, n):
            for k in range(j + 1, n):
                seen += i + j + k  # one of i < j < k
    return seen


def selection_sort(keys: list[int]) -> None:
    for i in range(len(keys) - 1):
        least = i
        for j in range(i + 1, len(keys)):
            if keys[j] < keys[least]:  # comparison
                least = j
        keys[i], keys[least] = keys[least], keys[i]  # exchange


def insertion_sort(keys: list[int]) -> None:
    for i in range(1, len(keys)):
        key, j = keys[i], i - 1
        while j >= 0:
            if keys[j] <= key:  # comparison
                break
            keys[j + 1] = keys[j]  # move
            j -= 1
        keys[j + 1] = key


def running_maximum(keys: list[int]) -> int:
    greatest = keys[0]
    for key in keys[1:]:
        if key > greatest:
            greatest = key  # change
    return greatest


def quicksort(keys: list[int]) -> list[int]:
    if len(keys) < 2:
        return keys
    pivot, low, high = keys[0], [], []
    for key in keys[1:]:
        if key < pivot:  # comparison
            low.append(key)
        else:
            high.append(key)
    return [*quicksort(low), pivot, *quicksort(high)]


def search_tree(keys: list[int]) -> list:
    root = []
    for key in keys:
        node = root
        while node:
            node = node[1 if key < node[0] else 2]  # comparison
        node += [key, [], []]
    return root


def merge_sort(keys: list[int]) -> list[int]:
    if len(keys) < 2:
        return keys
    half = len(keys) // 2
    left, right = merge_sort(keys[:half]), merge_sort(keys[half:])
    out, i, j = [], 0, 0
    while i < len(left) and j < len(right):
        if right[j] < left[i]:  # comparison
            out.append(right[j])
            j += 1
        else:
            out.append(left[i])
            i += 1
    return [*out, *left[i:], *right[j:]]


def unmerged(keys: list[int]) -> list[int]:
    """Order sorted keys so that each merge of `merge_sort` takes from both sides in turn."""
    if len(keys) < 2:
        return keys
    return [*unmerged(keys[1::2]), *unmerged(keys[::2])]


def binary_search(keys: list[int], wanted: int) -> int:
    low, high = 0, len(keys)
    while low < high:
        middle = (low + high) // 2  # probe
        if keys[middle] == wanted:
            return middle
        if keys[middle] < wanted:
            low = middle + 1
        else:
            high = middle
    return -1


def fibonacci(n: int) -> int:
    if n < 2:  # call
        return n
    return fibonacci(n - 1) + fibonacci(n - 2)


def hanoi(n: int, a: str = "a", b: str = "b", c: str = "c") -> None:
    if n:
        hanoi(n - 1, a, c, b)
        n -= 0  # move
        hanoi(n - 1, c, b, a)


def matrix_product(n: int) -> list[list[int]]:
    rows = []
    for i in range(n):
        row = []
        for j in range(n):
            total = i * j
            for k in range(1, n):
                product = (i + k) * (k + j)  # multiplication but for the first
                total += product
            row.append(total)
        rows.append(row)
    return rows


def cholesky(n: int) -> list[list[float]]:
    a = [[1.0 / (i + j + 1) + (i == j) * n for j in range(n)] for i in range(n)]
    low = [[0.0] * n for _ in range(n)]
    for j in range(n):
        square = a[j][j]
        for k in range(j):
            square -= low[j][k] * low[j][k]  # diagonal multiplication
        low[j][j] = square**0.5
        for i in range(j + 1, n):
            total = a[i][j]
            for k in range(j):
                total -= low[i][k] * low[j][k]  # multiplication
            low[i][j] = total / low[j][j]
    return low


def floyd_warshall(n: int) -> list[list[int]]:
    cost = [[(i * 7 + j * 3) % 11 + 1 for j in range(n)] for i in range(n)]
    for k in range(n):
        for i in range(n):
            for j in range(n):
                if cost[i][k] + cost[k][j] < cost[i][j]:  # comparison
                    cost[i][j] = cost[i][k] + cost[k][j]
    return cost


def fourier(values: list[complex]) -> list[complex]:
    n = len(values)
    if n == 1:
        return values
    even, odd = fourier(values[::2]), fourier(values[1::2])
    out = [0j] * n
    for k in range(n // 2):
        turned = cmath.exp(-2j * cmath.pi * k / n) * odd[k]  # multiplication
        out[k] = even[k] + turned
        out[k + n // 2] = even[k] - turned
    return out


def karatsuba(a: list[int], b: list[int]) -> list[int]:
    n = len(a)
    if n == 1:
        return [a[0] * b[0], 0]  # digit product
    half = n // 2
    low = karatsuba(a[:half], b[:half])
    high = karatsuba(a[half:], b[half:])
    sums = [x + y for x, y in zip(a[:half], a[half:], strict=True)]
    more = [x + y for x, y in zip(b[:half], b[half:], strict=True)]
    middle = karatsuba(sums, more)
    out = [0] * (2 * n)
    for k in range(n):
        out[k] += low[k]
        out[k + n] += high[k]
    for k in range(n):
        out[k + half] += middle[k] - low[k] - high[k]
    return out


def horner(coefficients: list[int], x: int = 3) -> int:
    total = coefficients[0]
    for c in coefficients[1:]:
        total = total * x + c  # step
    return total


def euclid(a: int, b: int) -> int:
    while b:
        a, b = b, a % b  # division
    return a


def sieve(n: int) -> int:
    prime = [True] * (n + 1)
    for p in range(2, n + 1):
        if prime[p]:
            for multiple in range(p, n + 1, p):
                prime[multiple] = multiple == p  # crossing-out
    return sum(prime)


def breadth_first(edges: list[list[int]]) -> int:
    seen, queue = {0}, [0]
    for vertex in queue:
        for other in edges[vertex]:
            if other not in seen:  # edge end
                seen.add(other)
                queue.append(other)
    return len(seen)


def shuffle(n: int) -> list[int]:
    keys, state = list(range(n)), 1
    for i in range(n - 1, 0, -1):
        state = (state * 1103515245 + 12345) % 2147483648
        j = state % (i + 1)
        keys[i], keys[j] = keys[j], keys[i]  # exchange
    return keys


def bubble_sort(keys: list[int]) -> None:
    for last in range(len(keys) - 1, 0, -1):
        for j in range(last):
            if keys[j] > keys[j + 1]:  # comparison
                keys[j], keys[j + 1] = keys[j + 1], keys[j]  # exchange


def cycles(order: list[int]) -> int:
    seen, found = [False] * len(order), 0
    for start in range(len(order)):
        if not seen[start]:
            found += 1  # cycle
            at = start
            while not seen[at]:
                seen[at] = True
                at = order[at]
    return found


def fixed_points(order: list[int]) -> int:
    found = 0
    for place, value in enumerate(order):
        if place == value:
            found += 1  # fixed point
    return found


def descents(order: list[int]) -> int:
    found = 0
    for k in range(len(order) - 1):
        if order[k] > order[k + 1]:
            found += 1  # descent
    return found


def least_and_greatest(keys: list[int]) -> tuple[int, int]:
    least = greatest = keys[0]
    for i in range(0, len(keys) - 1, 2):
        a, b = keys[i], keys[i + 1]
        if a > b:  # first of three
            a, b = b, a
        if a < least:  # second of three
            least = a
        if b > greatest:  # third of three
            greatest = b
    return least, greatest


def strassen(n: int) -> int:
    if n == 1:
        return 1  # product
    return sum(strassen(n // 2) for _ in range(7))


def eliminate(n: int) -> list[list[float]]:
    a = [[1.0 / (i + j + 1) + (i == j) * n for j in range(n)] for i in range(n)]
    for k in range(n):
        for i in range(k + 1, n):
            factor = a[i][k] / a[k][k]
            for j in range(k + 1, n):
                a[i][j] -= factor * a[k][j]  # multiplication
    return a


def edit_distance(first: str, second: str) -> int:
    row = list(range(len(second) + 1))
    for i, a in enumerate(first, 1):
        above, row = row, [i]
        for j, b in enumerate(second, 1):
            row.append(min(above[j] + 1, row[j - 1] + 1, above[j - 1] + (a != b)))  # cell
    return row[-1]


def subsets(n: int) -> int:
    found, at = 0, [0]
    while at:
        k = at.pop()
        if k == n:
            found += 1  # subset
        else:
            at += [k + 1, k + 1]
    return found


def orders(n: int) -> int:
    found, at = 0, [0]
    while at:
        k = at.pop()
        if k == n:
            found += 1  # order
        else:
            at += [k + 1] * (n - k)
    return found


def catalan_trees(n: int) -> int:
    if n == 0:
        return 1
    total = 0
    for left in range(n):
        total += catalan_trees(left) * catalan_trees(n - 1 - left)
    return total


def bracketings(n: int) -> int:
    found, at = 0, [(0, 0)]
    while at:
        opened, closed = at.pop()
        if opened == closed == n:
            found += 1  # bracketing
        if opened < n:
            at.append((opened + 1, closed))
        if closed < opened:
            at.append((opened, closed + 1))
    return found


def gray_code(n: int) -> int:
    word = 0
    for k in range(1, 2**n):
        word ^= k & -k  # flip
    return word


def binary_counter(n: int) -> int:
    bits = [0] * (n.bit_length() + 1)
    for _ in range(n):
        i = 0
        while bits[i]:
            bits[i] = 0  # carry
            i += 1
        bits[i] = 1
    return sum(bits)


def trailing_divisions(n: int) -> int:
    found = 0
    while n > 1:
        n //= 2
        found += 1  # halving
    return found


def divisor_pairs(n: int) -> int:
    found = 0
    for d in range(1, n + 1):
        for _ in range(d, n + 1, d):
            found += 1  # multiple
    return found


def queens_pairs(n: int) -> int:
    found = 0
    for i in range(n):
        for j in range(n):
            for _ in range(j + 1, n):
                found += i  # pair in a row
    return found


def bounded_squares(n: int) -> int:
    found = 0
    for size in range(1, n + 1):
        for _ in range((n - size + 1) ** 2):
            found += 1  # square
    return found


def handshakes(n: int) -> int:
    found = 0
    for i in range(n):
        for _ in range(i):
            found += 1  # handshake
    return found
