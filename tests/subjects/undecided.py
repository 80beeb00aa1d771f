"""Functions whose counts change beyond small sizes, or follow the data: none may be proved."""

LIMIT = 4000
KEPT = {}


class Deck:
    @property
    def rows(self):
        return 5000


DECK = Deck()


def capped(n):
    seen = 0
    for _ in range(min(n, 1000)):
        seen += 1
    return seen


def square_root(n):
    i = 0
    while i * i < n:
        i += 1
    return i


def seldom(n):
    seen = 0
    for i in range(n):
        if hash(i) % 97 == 96:
            seen += 1
    return seen


def primes(n):
    seen = 0
    for i in range(2, n):
        for j in range(2, i):
            if i % j == 0:
                break
        else:
            seen += 1
    return seen


def left_early(n):
    for i in range(n):
        if i * i > 5000:
            return i
    return n


def filling_a_cache(n):
    seen = 0
    for i in range(n):
        if i not in KEPT and len(KEPT) < 500:
            KEPT[i] = i
        else:
            seen += 1
    return seen


def catching(n):
    seen, ports = 0, list(range(900))
    for i in range(n):
        try:
            seen += ports[i]
        except IndexError:
            seen += 2
    return seen


def above_a_limit(n):
    seen = 0
    for i in range(n):
        if i > LIMIT:
            seen += 1
    return seen


def through_a_property(n):
    seen = 0
    for _ in range(min(n, DECK.rows)):
        seen += 1
    return seen


def recursive(n):
    return n if n < 2 else recursive(n - 1) + 1


def growing_a_list(n):
    rows = [0]
    for i in range(n):
        if len(rows) < 3000:
            rows.append(i)
    for row in rows:
        n += row
    return n


def collatz(n):
    seen = 0
    n += 1
    while n != 1:
        n = n // 2 if n % 2 == 0 else 3 * n + 1
        seen += 1
    return seen


def divisors(n):
    seen = 0
    for i in range(1, n + 1):
        if n % i == 0:
            seen += 1
    return seen


def sums_of_divisors(n):
    seen = 0
    for i in range(1, n + 1):
        for j in range(0, n, i):
            seen += j
    return seen


def resized(n):
    room, moved = 8, 0
    for used in range(n):
        if used == room:
            for _ in range(used):
                moved += 1
            room *= 2
    return moved


def log_log(n):
    seen, i = 0, 2
    while i < n:
        i *= i
        seen += 1
    return seen


def digits(n):
    return sum(int(d) for d in str(n))


def bits(n):
    seen = 0
    while n:
        n &= n - 1
        seen += 1
    return seen


def greatest_divisor(n):
    a, b = 720, n
    while b:
        a, b = b, a % b
    return a
