"""Patterns of ranks for any length: orders that are known to hurt, and orders grown by a rule."""

from __future__ import annotations

from collections.abc import Callable, Sequence

#: A step of a rule: where the next element goes, what rank it gets among those there are, and how.
Step = tuple[str, str, str]

PLACES = ("front", "second", "middle", "before last", "end")
RANKS = ("least", "second least", "median", "second largest", "largest")
WAYS = ("insert", "exchange")


def _organ_pipe(n: int) -> list[int]:
    return [2 * i if 2 * i < n else 2 * (n - 1 - i) + 1 for i in range(n)]


def _zigzag(n: int) -> list[int]:
    return [i // 2 if i % 2 == 0 else n - 1 - i // 2 for i in range(n)]


def _interleaved(n: int) -> list[int]:
    half = (n + 1) // 2
    return [i // 2 if i % 2 == 0 else half + i // 2 for i in range(n)]


def _exchanged(n: int, a: int, b: int) -> list[int]:
    out = list(range(n))
    if n > 1:
        out[a % n], out[b % n] = out[b % n], out[a % n]
    return out


def _bit_reversed(n: int) -> list[int]:
    bits = max(n - 1, 1).bit_length()
    order = sorted(range(n), key=lambda i: int(format(i, f"0{bits}b")[::-1], 2))
    out = [0] * n
    for rank, place in enumerate(order):
        out[place] = rank
    return out


NAMED: dict[str, Callable[[int], list[int]]] = {
    "sorted": lambda n: list(range(n)),
    "reversed": lambda n: list(range(n - 1, -1, -1)),
    "organ pipe": _organ_pipe,
    "valley": lambda n: [n - 1 - x for x in _organ_pipe(n)],
    "alternating low and high": _zigzag,
    "two sorted halves interleaved": _interleaved,
    "sorted, rotated by one": lambda n: [*range(1, n), *range(min(n, 1))],
    "sorted, rotated back by one": lambda n: [*range(n - 1, n), *range(n - 1)] if n else [],
    "sorted, rotated by half": lambda n: [*range(n // 2, n), *range(n // 2)],
    "sorted, first and last exchanged": lambda n: _exchanged(n, 0, -1),
    "sorted, two in the middle exchanged": lambda n: _exchanged(n, n // 2, n // 2 - 1),
    "bit reversal": _bit_reversed,
}


def grown(n: int, rule: Sequence[Step]) -> list[int]:
    """Grow an order element by element, the steps of the rule taken in turn.

    Parameters
    ----------
    n : int
        Length.
    rule : sequence of Step
        Each puts in one element; an ``exchange`` puts it at the place and what was there last.

    Returns
    -------
    list of int
        A permutation of 0 to n-1.
    """
    out: list[float] = []
    ordered: list[float] = []
    for k in range(n):
        place, rank, way = rule[k % len(rule)]
        at = _place(place, k)
        r = _rank(rank, k)
        value = _between(ordered, r)
        ordered.insert(r, value)
        if way == "insert" or at >= k:
            out.insert(at, value)
        else:
            out.append(out[at])
            out[at] = value
        if k % 40 == 39:  # before halving has used up the digits
            where = {v: float(i) for i, v in enumerate(ordered)}
            out = [where[v] for v in out]
            ordered = [float(i) for i in range(k + 1)]
    where_last = {v: i for i, v in enumerate(ordered)}
    return [where_last[v] for v in out]


def _between(ordered: Sequence[float], r: int) -> float:
    low = ordered[r - 1] if r > 0 else (ordered[0] - 2 if ordered else 0.0)
    high = ordered[r] if r < len(ordered) else low + 2
    return (low + high) / 2


def _place(name: str, k: int) -> int:
    places = {"front": 0, "second": 1, "middle": k // 2, "before last": k - 1, "end": k}
    return max(min(places[name], k), 0)


def _rank(name: str, k: int) -> int:
    ranks = {"least": 0, "second least": 1, "median": k // 2, "second largest": k - 1, "largest": k}
    return max(min(ranks[name], k), 0)


def said(rule: Sequence[Step]) -> str:
    """Say a rule in words."""
    return "grown: " + ", then ".join(f"{w} the {r} at the {p}" for p, r, w in rule)
