"""The comparison: from two finished audits to the versus record. Nothing is run."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

from steplaw.errors import CallError
from steplaw.forecast.amount import Figure, figures
from steplaw.forecast.asked import parse_size
from steplaw.forecast.domain import Domain
from steplaw.forecast.job import Teller
from steplaw.record import VersusRecord
from steplaw.versus.formulas import Settled, settle
from steplaw.versus.overlap import Known, less, looked_at, of_amount, spans
from steplaw.versus.ratio import ratio
from steplaw.versus.spans import Span, crossings, joined

Json = Mapping[str, Any]
GRADES = ("proved", "exact", "fitted", "open")
FARTHEST = 1000
"""Times the largest size run that a crossing by intervals is looked for."""
MOST_TOLD = 200
"""Spans and crossings that a record holds of one figure."""
CAUTIONS = (
    "Both laws hold for the inputs that the feed makes; another feed may put the crossing "
    "elsewhere.",
    "Beyond the sizes that both were run at, a crossing extrapolates.",
    "Times hold for the machine that was timed; none of this is a worst-case execution time for "
    "a safety-related deadline.",
)


def versus(a: Json, b: Json, hold: Sequence[str] = (), again: str = "") -> VersusRecord:
    """Compare the laws of two audits, and find where one overtakes the other.

    Parameters
    ----------
    a, b : mapping
        Two `steplaw.audit/1` records of the same figure on the same feed.
    hold : sequence of str
        Sizes that are held, such as ``"m=50"``, where the laws have several.
    again : str
        The command that makes this comparison again.

    Returns
    -------
    VersusRecord
        The record, `steplaw.versus/1`.

    Raises
    ------
    CallError
        If the two were not audited alike, or the sizes to hold cannot be read.

    Notes
    -----
    Proved and exact laws give crossings to the size; a fitted law gives two sizes between which
    the crossing lies, where the intervals of the two settle it; an open law gives none.
    """
    _must_be_alike(a, b)
    names: list[str] = a["sizes"]["names"]
    held, name = _held(hold, names)
    pair = _Pair(Teller(a), Teller(b), name, held)
    return VersusRecord(
        {
            "schema": "steplaw.versus/1",
            "steplaw": a["steplaw"],
            "python": a["python"],
            "subjects": {
                k: {x: r["subject"][x] for x in ("name", "file", "line", "digest")}
                for k, r in (("a", a), ("b", b))
            },
            "feed": dict(a["feed"]),
            "figure": a["figure"]["name"],
            "sizes": {"names": names, "searched": name, "held": held, "both_run_to": pair.run_to},
            "figures": {figure: pair.figure(figure) for figure in figures(a)},
            "time": pair.time(),
            "notes": [*_notes(pair), *CAUTIONS],
            "run_again": again,
        }
    )


def _must_be_alike(a: Json, b: Json) -> None:
    alike: tuple[tuple[str, Callable[[Json], Any], str], ...] = (
        ("fed differently", lambda r: r["feed"]["text"], "audit both with one --feed"),
        ("counted by different figures", lambda r: r["figure"]["name"], "give both one --figure"),
        ("audited in different sizes", lambda r: r["sizes"]["names"], "audit both in one size"),
        (
            "audited on different versions of Python",
            lambda r: r["python"].rpartition(".")[0],
            "steps are those of a version: audit both on one",
        ),
    )
    for what, read, hint in alike:
        one, other = read(a), read(b)
        if one != other:
            first, second = (x if isinstance(x, str) else " and ".join(x) for x in (one, other))
            raise CallError(f"the two are {what}: {first} / {second}", hint)


def _held(hold: Sequence[str], names: Sequence[str]) -> tuple[dict[str, int], str | None]:
    held: dict[str, int] = {}
    for text in (part for one in hold for part in one.split(",")):
        name = text.partition("=")[0].strip()
        if "=" not in text:
            raise CallError(f"--hold {text} names no size", f"as in --hold {names[-1]}=50")
        held |= parse_size(text, [name] if name in names else names, "--hold")
    free = [name for name in names if name not in held]
    if not free:
        raise CallError("--hold leaves no size to search", "leave one of them out")
    return held, free[0] if len(free) == 1 else None


class _Pair:
    """Two audits, and the one size that is searched."""

    def __init__(self, a: Teller, b: Teller, name: str | None, held: Mapping[str, int]) -> None:
        self.a, self.b, self.name, self.held = a, b, name, held
        self.names = a.names
        self.run_to = {k: min(a.largest_run[k], b.largest_run[k]) for k in self.names}
        self._run = sorted(
            {v["at"][name] for t in (a, b) for v in t.record["figure"]["values"]} if name else ()
        )

    def at(self, size: int) -> dict[str, int]:
        return {k: {**self.held, str(self.name): size}[k] for k in self.names}

    def figure(self, figure: str) -> dict[str, Any]:
        one, other = self.a.shown[figure], self.b.shown[figure]
        grade = max(one.law["grade"], other.law["grade"], key=GRADES.index)
        told = {
            "laws": {"a": dict(one.law), "b": dict(other.law)},
            "grade": grade,
            "ratio": ratio(one.law, other.law, self.names),
        }
        why = self._why_none(one, other)
        if why:
            return told | _nothing(why)
        if grade == "fitted" or _domain(one, other, str(self.name)).kind == "power":
            return told | self._by_intervals(one, other, grade)
        return told | self._by_formulas(one, other, grade)

    def _why_none(self, one: Figure, other: Figure) -> str:
        if self.name is None:
            others = " ".join(f"--hold {k}=50" for k in self.names[1:])
            return f"a crossing is searched along one size: hold the others, as in {others}"
        for label, figure in (("A", one), ("B", other)):
            if figure.law["formula"] is None:
                return f"the law of {label} is open, so no crossing is claimed"
            for k, n in self.held.items():
                why = figure.domains[k].why_not(k, n)
                if why:
                    return f"no crossing is claimed at {k} = {n}: {label}'s {why}"
        kinds = {f.domains[str(self.name)].kind for f in (one, other)} - {"every"}
        if len(kinds) > 1:
            return f"one law speaks of {kinds.pop()} sizes and the other of {kinds.pop()} ones"
        return ""

    def _by_formulas(self, one: Figure, other: Figure, grade: str) -> dict[str, Any]:
        name = str(self.name)
        domain = _domain(one, other, name)
        settled = settle(one.law["formula"], other.law["formula"], name, domain, self.held)
        below = self._counted_below(one, other, domain.size(0))
        return self._told(Settled(joined([*below, *settled.spans]), settled.method), grade)

    def _counted_below(self, one: Figure, other: Figure, first: int) -> list[Span]:
        """Compare the counts themselves below the sizes that both laws speak of."""
        out = []
        for size in range(min(first, 1000)):
            known = [of_amount(figure.at(self.at(size))) for figure in (one, other)]
            out.append(Span(size, size, less(*known), counted=True))
        return out

    def _by_intervals(self, one: Figure, other: Figure, grade: str) -> dict[str, Any]:
        name = str(self.name)
        domain = _domain(one, other, name)
        most = min(FARTHEST * max(self.run_to[name], 1), 10**18)
        sizes = [n for n in looked_at(most, self._run) if domain.kind != "power" or domain.holds(n)]

        def known(figure: Figure) -> Callable[[int], Known | None]:
            return lambda size: of_amount(figure.at(self.at(size)))

        found = spans(known(one), known(other), sizes)
        return self._told(Settled(found, "intervals at 95 in 100 held against each other"), grade)

    def _told(self, settled: Settled, grade: str) -> dict[str, Any]:
        found = _without_open_end(settled.spans)
        return {
            "spans": [
                {"first": s.first, "last": s.last, "less": s.less, "counted": s.counted}
                for s in found[:MOST_TOLD]
            ],
            "crossings": [
                {
                    "after": c.after,
                    "at": c.at,
                    "less": c.less,
                    "sharp": c.sharp and grade != "fitted",
                    "extrapolates": c.at > self.run_to[str(self.name)],
                }
                for c in crossings(found)[:MOST_TOLD]
            ],
            "searched_to": found[-1].last if found else 0,
            "method": settled.method,
            "why": None if len(found) <= MOST_TOLD else f"the first {MOST_TOLD} alone are told",
        }

    def time(self) -> dict[str, Any] | None:
        """Compare the times that the clock checks foretell."""
        clocks = [t.record["clock"] for t in (self.a, self.b)]
        if None in clocks:
            return None
        machines = [clock.get("machine") for clock in clocks]
        if self.name is None:
            return _nothing("a crossing is searched along one size")
        if machines[0] != machines[1]:
            return _nothing("the two were timed on different machines")
        for label, teller in (("A", self.a), ("B", self.b)):
            if teller.pace is None:
                return _nothing(f"{label}: {teller.slow}")
        most = min(FARTHEST * max(self.run_to[self.name], 1), 10**18)
        sizes = looked_at(most, self._run)

        def known(teller: Teller) -> Callable[[int], Known | None]:
            def at(size: int) -> Known | None:
                between = teller.at(self.at(size))["seconds"]
                return None if between is None else Known(*between)

            return at

        found = spans(known(self.a), known(self.b), sizes)
        return self._told(Settled(found, "times foretold by the clock checks"), "fitted")


def _domain(one: Figure, other: Figure, name: str) -> Domain:
    first, second = one.domains[name], other.domains[name]
    kind = first.kind if first.kind != "every" else second.kind
    return Domain(max(first.first, second.first), kind)


def _without_open_end(found: list[Span]) -> list[Span]:
    """Take off what nothing is known of behind the last size that was settled."""
    while found and found[-1].less == "unknown":
        found = found[:-1]
    return found


def _nothing(why: str) -> dict[str, Any]:
    return {"spans": [], "crossings": [], "searched_to": 0, "method": None, "why": why}


def _notes(pair: _Pair) -> list[str]:
    out = []
    for label, teller in (("A", pair.a), ("B", pair.b)):
        native = teller.record["laws"].get("native") or {}
        steps = teller.steps.law
        if native.get("leading") and steps["leading"]:
            from steplaw.law import compare_order

            if compare_order(native["leading"], steps["leading"]) > 0:
                out.append(
                    f"{label} visits {native['leading']} elements inside C code, which outgrows "
                    "its steps: go by the clock too."
                )
    if pair.a.record["feed"]["varies"]:
        out.append("Inputs differ from draw to draw: the laws, and the crossings, are of the mean.")
    return out
