"""Forms that the structure of the code fixes, for each figure of an audit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from steplaw.law.model import Observation
from steplaw.law.shape import Shape
from steplaw.structure.premises import Plan, objection, polynomials, sizes_by_name, told

if TYPE_CHECKING:
    from steplaw.flow.pieces import Pieces
    from steplaw.sweep import Sweep

#: Sizes that may be added to a plan so that counts settle every coefficient, and those among them
#: that test the form.
SIZES_ADDED, FURTHER = 48, 3


@dataclass(frozen=True, slots=True)
class Bound:
    """An upper bound that holds whatever the data decide.

    Parameters
    ----------
    formula : str
        In the sizes of the study.
    main : str
        Without special cases at small sizes.
    holds_from : int
        Size from which it holds.
    """

    formula: str
    main: str
    holds_from: int


class Forms:
    """What the code fixes, as far as the runs bear it out.

    Parameters
    ----------
    plan : Plan or str
        The derivation, or why there is none.
    swept : Sweep
        The runs.

    Attributes
    ----------
    why_not : str
        What keeps everything from being proved; empty where nothing does.
    """

    def __init__(self, plan: Plan | str, swept: Sweep) -> None:
        self._names = swept.names
        self._run = frozenset(swept.runs)
        self._fails_below = min(swept.runs, default=(0,))[0] if swept.passed_over else 0
        self._counts: dict[tuple[object, ...], Pieces] = {}
        self.why_not = plan if isinstance(plan, str) else objection(plan, swept)
        if self.why_not or isinstance(plan, str) or not swept.runs:
            return
        rules = sizes_by_name(plan, swept)
        self._premise = told(plan, rules, swept.names)
        self._plan = plan
        names = plan.derived.ledger.names
        self._sizes = [next(iter(names.add("size", n, "").names)) for n in swept.names]
        self._known = frozenset(rules)
        self._values = polynomials(rules, self._sizes)
        self._count()
        self._hold_against(swept)

    def _count(self) -> None:
        """Add up the frequencies of blocks for every figure."""
        from steplaw.flow.lineflow import line_frequencies, steps_of
        from steplaw.flow.pieces import NOTHING
        from steplaw.tally.classes import classes_of

        counts = self._counts

        def add(key: tuple[object, ...], more: Pieces) -> None:
            counts[key] = counts.get(key, NOTHING) + more

        for code, found in self._plan.derived.ledger.codes.items():
            place = (code.co_filename, code.co_qualname, code.co_firstlineno)
            steps = steps_of(found)
            add(("steps",), steps)
            add(("steps", *place), steps)
            add(("calls", *place), found.calls)
            for line, (often, taken) in line_frequencies(found).items():
                add((code.co_filename, line, "frequency"), often)
                add((code.co_filename, line, "steps"), taken)
            decoded = found.graph.decoded
            for block, often in zip(found.graph.blocks, found.blocks, strict=True):
                for k in range(block.first + block.setup, block.last + 1):
                    for operation in classes_of(decoded, k):
                        add(("operation", operation), often)

    def _hold_against(self, swept: Sweep) -> None:
        """Drop everything where one derived frequency of a line is not what was counted."""
        for point, runs in swept.runs.items():
            for run in runs:
                for x in run.tally.lines:
                    derived = self._at((x.file, x.line, "frequency"), point)
                    if derived is not None and derived != x.frequency:
                        self._counts.clear()
                        self.why_not = (
                            f"line {x.line} was derived to run {derived} times at "
                            f"{', '.join(map(str, point))}, and ran {x.frequency} times"
                        )
                        return

    def _at(self, key: tuple[object, ...], point: Sequence[int]) -> int | None:
        from steplaw.flow.pieces import evaluate

        pieces = self._in_sizes(key)
        if isinstance(pieces, str):
            return None
        ledger = self._plan.derived.ledger
        return int(evaluate(ledger.names, pieces, dict(zip(self._sizes, point, strict=True))))  # type: ignore[call-overload, no-any-return]

    def _in_sizes(self, key: tuple[object, ...]) -> Pieces | str:
        """Give a count in the sizes of the study, or what it rests on besides."""
        from steplaw.flow.pieces import put, simplified

        pieces = self._counts.get(key)
        if pieces is None:
            return "it is not derived"
        ledger = self._plan.derived.ledger
        beside = ledger.names.roots(pieces.polys()) - self._known
        if beside:
            return self._beside(beside)
        return simplified(ledger.names, put(ledger.names, pieces, self._values))

    def _beside(self, beside: frozenset[str]) -> str:
        ledger = self._plan.derived.ledger
        unknown = next((u for u in ledger.unknowns if u.name in beside), None)
        if unknown is not None:
            return f"the data decide how often line {unknown.line} goes which way"
        stopped = ledger.stopped[0] if ledger.stopped else None
        if stopped is not None:
            return f"line {stopped.line}: {stopped.reason}"
        text = ledger.names.known[min(beside)].text
        return f"{text} does not follow from {', '.join(self._names)}"

    def shape(self, *key: object) -> tuple[Shape | None, str]:
        """Give the form of a figure.

        Parameters
        ----------
        *key : object
            ``"steps"``; ``"operation", name``; ``file, line, "frequency"`` or ``"steps"``;
            ``"calls"`` or ``"steps", file, name, line`` of a function.

        Returns
        -------
        (Shape or None, str)
            None, and why, where the structure does not fix it.
        """
        if self.why_not:
            return None, self.why_not
        pieces = self._in_sizes(key)
        if isinstance(pieces, str):
            return None, pieces
        found = self._shape(pieces)
        return found, "" if found is not None else "its form is none that counts can prove"

    def _shape(self, pieces: Pieces) -> Shape | None:
        from steplaw.flow.formula import FAR, tail

        reason = "loops and branches of the code fix the form"
        if self._premise:
            reason += f", with {self._premise} as in every run"
        names = self._plan.derived.ledger.names
        if not names.roots(pieces.polys()):
            if len(self._sizes) > 1:
                return Shape((0,) * len(self._sizes), reason=reason)
            return Shape(0, holds_from=self._fails_below, reason=reason)
        if len(self._sizes) == 1:
            found = tail(names, pieces)
            if found is None or found.start >= FAR:
                return None
            start = max(found.start, self._fails_below)
            return Shape(found.degree, found.period, start, reason)
        if any(x.when or any(names.known[n].parts for n in x.poly.names) for x in pieces.parts):
            return None
        degrees = [
            max((len(x.poly.in_powers(key)) - 1 for x in pieces.parts), default=0)
            for key in self._sizes
        ]
        return Shape(tuple(degrees), reason=reason)

    def missing(self, most: int = SIZES_ADDED) -> list[int]:
        """Give the sizes that proofs still want, the smallest first.

        Parameters
        ----------
        most : int
            Sizes to ask for at most: a figure that wants more stays unproved.
        """
        if self.why_not or len(self._sizes) != 1:
            return []
        wanted: set[int] = set()
        largest = max(self._run)[0]
        for key in self._counts:
            shape, _ = self.shape(*key)
            if shape is not None:
                more = [n for n in shape.sizes(FURTHER) if (n,) not in self._run]
                if len(more) <= most and (not more or more[-1] < largest):
                    wanted.update(more)
        return sorted(wanted)[:most]

    def most(self, observations: Sequence[Observation]) -> Bound | None:
        """Give an upper bound of all steps that holds whatever the data decide.

        Parameters
        ----------
        observations : sequence of Observation
            The counted steps, none of which may be above it.
        """
        from steplaw.flow.formula import written
        from steplaw.flow.names import Beyond
        from steplaw.flow.pieces import evaluate, put, simplified

        if self.why_not or ("steps",) not in self._counts:
            return None
        ledger = self._plan.derived.ledger
        pieces = self._without_unknowns(self._counts["steps",])
        if pieces is None or ledger.names.roots(pieces.polys()) - self._known:
            return None
        pieces = simplified(ledger.names, put(ledger.names, pieces, self._values))
        for key, name in zip(self._sizes, self._names, strict=True):
            ledger.names.spelt[key] = name
        try:
            formula = written(ledger.names, pieces)
        except Beyond:
            return None
        for o in observations:
            at = dict(zip(self._sizes, o.at, strict=True))
            if o.most > evaluate(ledger.names, pieces, at):  # type: ignore[operator]
                return None
        return Bound(formula.text, formula.main, formula.holds_from)

    def _without_unknowns(self, pieces: Pieces) -> Pieces | None:
        """Put the bound of each unknown in its place, from below where it is taken off."""
        from steplaw.flow.pieces import NOTHING, Piece, Pieces, times
        from steplaw.flow.poly import Poly

        most = {u.name: u.most for u in self._plan.derived.ledger.unknowns}
        for _ in range(len(most) + 1):
            if not any(n in most for x in pieces.polys() for n in x.names):
                return pieces
            out = NOTHING
            for x in pieces.parts:
                if any(n in most for c in x.when for n in c.names):
                    return None
                for monomial, factor in x.poly.terms.items():
                    unknown = next((n for n, _ in monomial if n in most), None)
                    if unknown is None:
                        out = out + Pieces((Piece(x.when, Poly({monomial: factor})),))
                        continue
                    bound = most[unknown]
                    rest = tuple((n, k) for n, k in monomial if n != unknown)
                    if dict(monomial)[unknown] != 1 or bound is None:
                        return None
                    if factor > 0:
                        part = Pieces((Piece(x.when, Poly({rest: factor})),))
                        out = out + times(part, bound)
            pieces = out
        return None
