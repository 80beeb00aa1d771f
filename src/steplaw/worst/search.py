"""The search for the family that grows the most, guided by counts alone.

Families are counted at small sizes, the best of them changed a little, over and over; those that do
best are carried on to larger sizes, where growth tells. How far it goes depends on counts and on a
seeded generator, so the same search finds the same input on every machine.
"""

from __future__ import annotations

import itertools
import math
import random
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import Any

from steplaw.worst.counting import Counts, Given, values_of
from steplaw.worst.family import Family, changed, first, value
from steplaw.worst.kinds import Kind
from steplaw.worst.touch import touched

Candidate = tuple[Family, ...]
Report = Callable[[str, int, int], None]

RUNGS = (6, 8, 10, 12, 14, 16, 20, 24, 32, 48, 64, 96, 128, 192, 256, 384, 512, 768, 1024)
#: Figure from which on a run is not made, predicted from the rungs before.
FIGURE_MOST = 8_000_000
#: Candidates that are all combined; beyond, one argument is varied at a time.
COMBINED = 900


@dataclass(slots=True)
class Found:
    """What a search found.

    Parameters
    ----------
    reached : int
        The largest size that was counted.
    family : tuple of Family
        The worst family there, one pattern for each argument.
    values : dict of int to int
        The family's figure by size.
    best : Given
        The worst input of that size, which may be no member of the family.
    value : int
        Its figure.
    ended : str
        ``done``, ``time``, ``interrupted`` or ``steps``.
    """

    reached: int = 0
    family: Candidate = ()
    values: dict[int, int] = field(default_factory=dict)
    best: Given | None = None
    value: int = -1
    ended: str = "done"


class Search:
    """Searches for the worst input of a size.

    Parameters
    ----------
    counts : Counts
        Counts inputs.
    kinds : sequence of Kind
        What each argument is.
    n : int
        The size.
    seed : int
        Seeds the generator.
    until : float, optional
        Moment of `time.monotonic` at which to stop.
    report : callable, optional
        Told what is done, at which size, and the largest figure so far.
    """

    def __init__(
        self,
        counts: Counts,
        kinds: Sequence[Kind],
        n: int,
        seed: int = 0,
        until: float | None = None,
        report: Report | None = None,
    ) -> None:
        self.counts = counts
        self.kinds = tuple(kinds)
        self.n = n
        self.rng = random.Random(f"steplaw worst {seed}")
        self.until = until
        self.report = report
        self.found = Found()
        self._orders: dict[int, list[int] | None] = {}

    def go(self) -> Found:
        """Search; an interrupt or the end of the time keeps the best so far."""
        try:
            self._climb()
            self._touch_up()
        except _TimeUp:
            self.found.ended = "time"
        except KeyboardInterrupt:
            self.found.ended = "interrupted"
        return self.found

    def given(self, candidate: Candidate, n: int) -> Given:
        """Make the input of a candidate at a size."""
        base = self.counts.drawn(n, 1)[0]
        plain = values_of(base)
        made = []
        for family, kind, one, text in zip(candidate, self.kinds, plain, base.args, strict=True):
            if family.form == "as drawn":
                made.append(text)
                continue
            order = self._order(n, plain) if family.form == "decided" else None
            made.append(repr(value(family, kind, one, n, order)))
        return Given(tuple(made), base.kwargs)

    def _order(self, n: int, plain: Sequence[Any]) -> list[int] | None:
        if n not in self._orders:
            self._orders[n] = self.counts.decided(len(plain[0]), plain[1:])
        return self._orders[n]

    def _values(self, candidates: Sequence[Candidate], n: int) -> dict[Candidate, int]:
        if self.until is not None and time.monotonic() > self.until:
            raise _TimeUp
        values = self.counts.of([self.given(c, n) for c in candidates])
        return {c: v for c, v in zip(candidates, values, strict=True) if v is not None}

    def _climb(self) -> None:
        rungs = [*(r for r in RUNGS if r < self.n), self.n]
        alive = self._start()
        tops: list[tuple[int, int]] = []
        for n in rungs:
            if tops and predicted(tops, n) > FIGURE_MOST:
                self.found.ended = "steps"
                return
            values = self._values(alive, n)
            if not values:
                continue
            values = self._evolved(values, n)
            alive = _survivors(values, 60 if n < 24 else 24 if n < 64 else 10)
            worst = alive[0]
            tops.append((n, values[worst]))
            self._keep(worst, n, values[worst])

    def _keep(self, worst: Candidate, n: int, figure: int) -> None:
        found = self.found
        found.reached, found.family = n, worst
        found.best, found.value = self.given(worst, n), figure
        if self.report is not None:
            self.report("searching", n, figure)

    def _start(self) -> list[Candidate]:
        each = [self._first(place) for place in range(len(self.kinds))]
        if math.prod(len(e) for e in each) <= COMBINED:
            return [tuple(c) for c in itertools.product(*each)]
        drawn = tuple(Family("as drawn") for _ in each)
        out = [
            (*drawn[:place], family, *drawn[place + 1 :])
            for place, families in enumerate(each)
            for family in families
        ]
        alike = [
            tuple(f if k == kind else Family("as drawn") for k in self.kinds)
            for kind, families in zip(self.kinds, each, strict=True)
            for f in families
        ]
        mixed = (tuple(self.rng.choice(e) for e in each) for _ in range(COMBINED // 2))
        return list(dict.fromkeys([*out, *alike, *mixed]))

    def _first(self, place: int) -> list[Family]:
        kind = self.kinds[place]
        families = list(first(kind)) if kind.name != "fixed" else [Family("as drawn")]
        if place == 0 and kind.name in ("permutation", "multiset"):
            families.append(Family("decided"))
        return families

    def _evolved(self, values: dict[Candidate, int], n: int) -> dict[Candidate, int]:
        """Change the best, over and over, and add what comes of it."""
        rounds, children = (8, 60) if n <= 16 else (4, 40) if n <= 64 else (1, 8)
        for _ in range(rounds):
            parents = _survivors(values, 12)
            born = dict.fromkeys(
                self._child(self.rng.choice(parents), parents) for _ in range(children)
            )
            new = [c for c in born if c not in values]
            values = {**values, **self._values(new, n)}
        return values

    def _child(self, parent: Candidate, parents: Sequence[Candidate]) -> Candidate:
        free = [p for p, kind in enumerate(self.kinds) if kind.name != "fixed"]
        if not free:
            return parent
        place = self.rng.choice(free)
        roll = self.rng.random()
        if len(free) > 1 and roll < 0.2:
            family = self.rng.choice(parents)[place]
        elif len(free) > 1 and roll < 0.4:
            # Texts and words, rows and columns: arguments that are alike often hurt together.
            name = self.kinds[place].name
            family = parent[self.rng.choice([p for p in free if self.kinds[p].name == name])]
        else:
            family = changed(parent[place], self.kinds[place], self.rng)
        return (*parent[:place], family, *parent[place + 1 :])

    def _touch_up(self, rounds: int = 6, children: int = 16) -> None:
        """Change the worst input itself a little, where that makes it worse still."""
        found = self.found
        if found.best is None:
            return
        for _ in range(rounds):
            if self.until is not None and time.monotonic() > self.until:
                raise _TimeUp
            args = values_of(found.best)
            new = []
            for _ in range(children):
                made = touched(args, self.kinds, self.rng)
                new.append(Given(tuple(map(repr, made)), found.best.kwargs))
            for given, figure in zip(new, self.counts.of(new), strict=True):
                if figure is not None and figure > found.value:
                    found.best, found.value = given, figure


class _TimeUp(Exception):
    """The time given to the search is over."""


def _survivors(values: dict[Candidate, int], most: int) -> list[Candidate]:
    """Give the worst candidates, not many of the same figure, which may well be the same input."""
    ordered = sorted(values, key=lambda c: (-values[c], _length(c)))
    taken: dict[int, int] = {}
    out = []
    for candidate in ordered:
        figure = values[candidate]
        if taken.get(figure, 0) < 3:
            taken[figure] = taken.get(figure, 0) + 1
            out.append(candidate)
    return out[:most]


def _length(candidate: Candidate) -> int:
    """How long a candidate takes to say: of two that do equally well, the plainer is kept."""
    plain = {"as drawn": 50, "named": 0, "decided": 90}
    return sum(
        plain.get(f.form, 10 * len(f.rule) + sum(4 * len(p) for p in f.parts)) + (f.difference != 1)
        for f in candidate
    )


def predicted(tops: Sequence[tuple[int, int]], n: int) -> float:
    """Predict the largest figure at a size from the last two, as a power of the size.

    Parameters
    ----------
    tops : sequence of (int, int)
        Sizes and their largest figures.
    n : int
        The size.
    """
    (b, vb) = tops[-1]
    if len(tops) < 2 or not vb or not tops[-2][1] or b == tops[-2][0]:
        return vb
    (a, va) = tops[-2]
    exponent = max(math.log(vb / va) / math.log(b / a), 0.0)
    return float(vb * (n / b) ** exponent)


def law_sizes(reached: int) -> Iterator[int]:
    """Give the sizes at which a family is counted for its law: consecutive, then growing."""
    yield from range(min(reached, 16) + 1)
    for n in (*range(18, 33, 3), 37, 48, 53, 64, 80, 96, 127, 128, 150, 192, 256, 300, 384, 512):
        if n < reached:
            yield n
    if reached > 16:
        yield reached
