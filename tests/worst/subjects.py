"""Subjects of the worst-case tests, written plainly."""

from __future__ import annotations

from difflib import SequenceMatcher
from os.path import commonprefix


def insertion_sort(a: list[int]) -> list[int]:
    for i in range(1, len(a)):
        j = i
        while j > 0:
            if a[j - 1] <= a[j]:
                break
            a[j - 1], a[j] = a[j], a[j - 1]
            j -= 1
    return a


def merge_sort(a: list[int]) -> list[int]:
    if len(a) < 2:
        return a
    half = len(a) // 2
    left, right = merge_sort(a[:half]), merge_sort(a[half:])
    out = []
    i = j = 0
    while i < len(left) and j < len(right):
        if left[i] <= right[j]:
            out.append(left[i])
            i += 1
        else:
            out.append(right[j])
            j += 1
    return out + left[i:] + right[j:]


def binary_search(a: list[int], key: int) -> int:
    low, high = 0, len(a) - 1
    while low <= high:
        middle = (low + high) // 2
        if a[middle] == key:
            return middle
        if a[middle] < key:
            low = middle + 1
        else:
            high = middle - 1
    return -1


def euclid(a: int, b: int) -> int:
    while b:
        a, b = b, a % b
    return a


def plain_quicksort(a: list[int]) -> list[int]:
    if len(a) < 2:
        return a
    pivot = a[0]
    less, more = [], []
    for x in a[1:]:
        if x < pivot:
            less.append(x)
        else:
            more.append(x)
    return [*plain_quicksort(less), pivot, *plain_quicksort(more)]


def first_pivot(a: list[int]) -> None:
    def sort(low: int, high: int) -> None:
        if low >= high:
            return
        pivot, last = a[low], low
        for k in range(low + 1, high + 1):
            if a[k] < pivot:
                last += 1
                a[last], a[k] = a[k], a[last]
        a[low], a[last] = a[last], a[low]
        sort(low, last - 1)
        sort(last + 1, high)

    sort(0, len(a) - 1)


def partition(a: list[int], low: int, high: int, pivot: int) -> tuple[int, int]:
    """Hoare's: everything up to the first is at most the pivot."""
    i, j = low, high
    while i <= j:
        while a[i] < pivot:
            i += 1
        while a[j] > pivot:
            j -= 1
        if i <= j:
            a[i], a[j] = a[j], a[i]
            i += 1
            j -= 1
    return i, j


def middle_pivot(a: list[int]) -> None:
    def sort(low: int, high: int) -> None:
        if low >= high:
            return
        i, j = partition(a, low, high, a[(low + high) // 2])
        sort(low, j)
        sort(i, high)

    sort(0, len(a) - 1)


def median_of_three(a: list[int]) -> None:
    def sort(low: int, high: int) -> None:
        if low >= high:
            return
        x, y, z = a[low], a[(low + high) // 2], a[high]
        pivot = max(min(x, y), min(max(x, y), z))
        i, j = partition(a, low, high, pivot)
        sort(low, j)
        sort(i, high)

    sort(0, len(a) - 1)


def matches(text: str) -> bool:
    """Whether the whole text is (a|aa)*b, tried by going back."""

    def rest(at: int) -> bool:
        if at < len(text) and text[at] == "a" and rest(at + 1):
            return True
        if text[at : at + 2] == "aa" and rest(at + 2):
            return True
        return text[at:] == "b"

    return rest(0)


def store_bookings(numbers: list[int]) -> int:
    """A table of 256 rows by the last bits of a booking number: that is the bad hash."""
    rows: list[list[int]] = [[] for _ in range(256)]
    kept = 0
    for number in numbers:
        row = rows[number & 255]
        for known in row:
            if known == number:
                break
        else:
            row.append(number)
            kept += 1
    return kept


def find_text(text: str, word: str) -> int:
    """The place of the last half of a word in a text, tried at every place."""
    half = word[len(word) // 2 :]
    for at in range(len(text) - len(half) + 1):
        k = 0
        while k < len(half) and text[at + k] == half[k]:
            k += 1
        if k == len(half):
            return at
    return -1


class GrowingArray:
    """Appends to a table of cells that doubles when it is full."""

    def __init__(self) -> None:
        self.cells: list[int | None] = [None]
        self.used = 0

    def append(self, value: int) -> None:
        if self.used == len(self.cells):
            larger: list[int | None] = [None] * (2 * len(self.cells))
            for k in range(self.used):
                larger[k] = self.cells[k]
            self.cells = larger
        self.cells[self.used] = value
        self.used += 1


def appends(n: int) -> list[tuple[object, ...]]:
    array = GrowingArray()
    return [(array.append, k) for k in range(n)]


class BinaryCounter:
    def __init__(self) -> None:
        self.bits: list[int] = [0] * 32

    def increment(self) -> None:
        k = 0
        while True:
            self.bits[k] ^= 1
            if self.bits[k]:
                return
            k += 1


def increments(n: int) -> list[object]:
    counter = BinaryCounter()
    return [counter.increment] * n


class Queue:
    """A queue of two stacks."""

    def __init__(self) -> None:
        self.back: list[int] = []
        self.front: list[int] = []

    def push(self, value: int) -> None:
        self.back.append(value)

    def pop(self) -> int:
        if not self.front:
            while self.back:
                self.front.append(self.back.pop())
        return self.front.pop()


def queueing(n: int) -> list[tuple[object, ...]]:
    """n values in, then n out."""
    queue = Queue()
    return [(queue.push, k) for k in range(n)] + [(queue.pop,)] * n


def similarity(a: str, b: str) -> float:
    return SequenceMatcher(None, a, b).ratio()


def shared_start(a: str, b: str) -> str:
    return commonprefix([a, b])  # noqa: RUF071


def pairs(n: int) -> list[tuple[int, int]]:
    out = []
    for i in range(n):
        for j in range(i):
            out.append((j, i))
    return out


def joined_groups(edges: list[tuple[int, int]]) -> int:
    """How many groups of ports the edges leave, joined by chains that are never shortened."""
    above: dict[int, int] = {}

    def top(port: int) -> int:
        while above.setdefault(port, port) != port:
            port = above[port]
        return port

    for a, b in edges:
        above[top(a)] = top(b)
    return sum(above[port] == port for port in above)
