"""What all loops have in common: what changes from pass to pass, and what holds behind them."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from steplaw.flow import trips
from steplaw.flow.names import Beyond, Kind
from steplaw.flow.pieces import Pieces, pass_number
from steplaw.flow.poly import ZERO, Poly, summed, var
from steplaw.flow.values import HERE, Num, Obj, State, Test, Tup, Value
from steplaw.flow.walk import Flow, Walk, Weight

#: A part of the state: ``local``, ``cell``, ``extent``, ``epoch`` or ``loose``, and which one.
Key = tuple[str, Any]


class Loop:
    """A loop that is run as a whole.

    Parameters
    ----------
    walk : Walk
        What runs it.
    head : int
        Its head.
    state : State
        What is known at its entry.
    weight : Weight or None
        How often it is entered; None for a trial run.
    """

    def __init__(self, walk: Walk, head: int, state: State, weight: Weight | None) -> None:
        self.walk, self.head = walk, head
        self.state, self.weight = state, weight
        self.names = walk.names
        self.outer = walk.passes
        self.line = walk.frame.nest.line(head) or walk.line
        scope = frozenset(self.outer)
        self.passes = pass_number(self.names, f"pass of line {self.line}", scope)
        self.place = var(self.passes)
        self.changing: set[Key] = set()
        self.steady: dict[Key, Poly] = {}
        self.scaled: dict[str, tuple[Key, str, int]] = {}

    # -- what changes from pass to pass ----------------------------------------------------

    def settle(self) -> State:
        """Find what the body changes; give the state at the start of any pass."""
        walk = self.walk
        key = (walk.decoded.code, self.head)
        # Variables stay the same from one trial of an outer loop to the next; objects do not.
        variables = walk.changing.setdefault(key, set())
        self.changing = changing = set(variables)
        while True:
            mark = walk.mark
            start, symbols = self._loosened(changing, {})
            back, _ = self.trial(start)
            found = {
                k for _, _, after, _ in back for k in _differences(walk, start, after, mark)
            } - changing
            if not found:
                break
            changing |= found
            variables |= {k for k in found if k[0] == "local"}
        self.steady = self._closed(symbols, back)
        scaled = self._scaled(symbols, back)
        start, symbols = self._loosened(changing, self.steady)
        self.scaled = {symbols[k]: (k, *how) for k, how in scaled.items() if k in symbols}
        return start

    def _scaled(self, symbols: dict[Key, str], back: list[Flow]) -> dict[Key, tuple[str, int]]:
        """Give the numbers that each pass multiplies or divides by a constant."""
        out: dict[Key, tuple[str, int]] = {}
        for key, symbol in symbols.items():
            found = {self._number_after(key, after) for _, _, after, _ in back}
            value = found.pop() if len(found) == 1 else None
            if value is None or len(value.whole) != 1 or key in self.steady:
                continue
            ((monomial, factor),) = value.terms.items()
            if monomial == ((symbol, 1),) and factor > 1 and factor.denominator == 1:
                out[key] = ("times", int(factor))
            elif len(monomial) == 1 and monomial[0][1] == 1 and factor == 1:
                known = self.names.known[monomial[0][0]]
                if known.kind == "floor" and known.parts == (var(symbol),):
                    out[key] = ("over", known.divisor)
        return out

    def _loosened(
        self, changing: set[Key], steady: dict[Key, Poly]
    ) -> tuple[State, dict[Key, str]]:
        """Give the state at the start of a pass, a new name for each number that changes."""
        walk = self.walk
        state = self.state.copy()
        symbols: dict[Key, str] = {}
        walk.passes = (*self.outer, self.passes)
        for key in sorted(changing, key=str):
            kind, at = key
            if kind == "known":
                continue
            self._loosen_one(state, str(kind), at, steady.get(key), symbols)
        walk.passes = self.outer
        return state, symbols

    def _loosen_one(
        self, state: State, kind: str, at: Any, steady: Poly | None, symbols: dict[Key, str]
    ) -> None:
        walk = self.walk
        if kind == "local" or kind == "cell":
            table: dict[Any, Value] = state.local if kind == "local" else state.cells
            if at not in table:
                return
            text = walk._slot_text(at) if kind == "local" else ""
            if steady is not None:
                table[at] = Num(steady)
                return
            before = self.initial(kind, at)
            if before is None:
                old = table[at]
                alias = frozenset({old.key, *old.alias}) if isinstance(old, Obj) else frozenset()
                table[at] = Obj(walk.other(state, text).key, text, "other", alias)
                return
            symbol = self._symbol(text)
            symbols[kind, at] = symbol
            table[at] = Num(var(symbol))
        elif kind == "extent":
            if steady is not None:
                state.extents[str(at)] = trips.counted(steady)
                return
            extent = state.extents.get(str(at))
            if extent is None or self.initial(kind, at) is None:
                state.extents[str(at)] = None
                return
            symbol = self._symbol("len", "size")
            symbols[kind, at] = symbol
            state.extents[str(at)] = trips.counted(var(symbol))
        elif kind == "epoch":
            state.epochs[str(at)] = walk.fresh("e")
        elif kind == "loose":
            state.loose |= {str(at)}

    def _symbol(self, text: str, kind: Kind = "whole") -> str:
        scope = frozenset((*self.outer, self.passes))
        poly = self.names.add(kind, text, "", scope)
        (name,) = poly.names
        return name

    def initial(self, kind: str, at: Any) -> Poly | None:
        """Give the number that a variable or a size begins with."""
        walk, state = self.walk, self.state
        if kind == "extent":
            extent = state.extents.get(str(at))
            if extent is None or str(at).startswith("it#"):
                return None
            try:
                return trips.length(self.names, extent, state.known)
            except Beyond:
                return None
        table: dict[Any, Value] = state.local if kind == "local" else state.cells
        value = table.get(at)
        if value is None:
            return None
        tentative = walk._tentative(value)
        return walk.number(state, value) if tentative is None else tentative

    def _closed(self, symbols: dict[Key, str], back: list[Flow]) -> dict[Key, Poly]:
        """Give the numbers that change by a known amount in each pass, by its number."""
        out: dict[Key, Poly] = {}
        for key, symbol in symbols.items():
            steps = {self._step(key, symbol, after) for _, _, after, _ in back}
            if len(steps) != 1:
                continue
            step = steps.pop()
            first = self.initial(*key)
            if step is None or first is None or not self._usable(step, symbols):
                continue
            kind, at = key
            value = self.state.local.get(at) if kind == "local" else None
            if isinstance(value, Obj):
                self.walk.number(self.state, value, "likely")
            total = summed(step, self.passes, ZERO, self.place - 1)
            out[key] = first + total
        return out

    def _step(self, key: Key, symbol: str, after: State) -> Poly | None:
        value = self._number_after(key, after)
        return None if value is None else value - var(symbol)

    def _number_after(self, key: Key, after: State) -> Poly | None:
        kind, at = key
        if kind == "extent":
            extent = after.extents.get(at)
            if extent is None or len(extent) != 1 or extent[0].coefficient(HERE) != -1:
                return None
            return extent[0].put({HERE: ZERO}) + 1
        table: dict[Any, Value] = after.local if kind == "local" else after.cells
        value = table.get(at)
        return value.poly if isinstance(value, Num) else None

    def _usable(self, step: Poly, symbols: dict[Key, str]) -> bool:
        """Whether a step is a polynomial in the number of the pass and in what is fixed."""
        for name in step.names:
            if name == self.passes:
                continue
            if self.names.known[name].scope & {self.passes}:
                return False
        return not step.names & set(symbols.values())

    # -- running the body ------------------------------------------------------------------

    def trial(self, start: State) -> tuple[list[Flow], list[Flow]]:
        """Run the body without counting."""
        raise NotImplementedError

    def body(
        self, state: State, weight: Weight | None, record: bool
    ) -> tuple[list[Flow], list[Flow]]:
        """Run the body with the number of the pass among the names."""
        walk, frame = self.walk, self.walk.frame
        kept = walk.passes, frame.record, len(frame.returns), len(frame.yields)
        walk.passes, frame.record = (*self.outer, self.passes), record
        try:
            back, leaving = self.enter(state, weight)
        finally:
            walk.passes, frame.record = kept[0], kept[1]
        if weight is None:
            del frame.returns[kept[2] :], frame.yields[kept[3] :]
        else:
            self._returned_early(kept[2])
        return back, leaving

    def _returned_early(self, first: int) -> None:
        returns = self.walk.frame.returns
        for k in range(first, len(returns)):
            value, state, weight = returns[k]
            state.stack = [value]
            after = self.outside(state)
            returns[k] = (after.stack[0], after, weight)

    def enter(self, state: State, weight: Weight | None) -> tuple[list[Flow], list[Flow]]:
        """Run the blocks of the body once."""
        raise NotImplementedError

    # -- behind the loop -------------------------------------------------------------------

    def outside(self, state: State, last: Poly | None = None) -> State:
        """Take the number of the pass out of a state that leaves the loop.

        Parameters
        ----------
        state : State
            The state in a pass.
        last : Poly or None
            The number of that pass; None where it is not known.
        """
        walk = self.walk
        out = state.copy()
        out.stack = [self._outside(out, v, last, "") for v in out.stack]
        for slot, value in out.local.items():
            out.local[slot] = self._outside(out, value, last, walk._slot_text(slot))
        for key, value in out.cells.items():
            out.cells[key] = self._outside(out, value, last, "")
        for name, extent in list(out.extents.items()):
            if extent is None or not self._inside(extent):
                continue
            if last is not None and self._only_pass(extent):
                out.extents[name] = tuple(self.names.put(p, {self.passes: last}) for p in extent)
            elif name in self.state.extents:
                walk._unsettle(out, name, "it")
            else:
                walk._unsettle(out, name, "it")
        out.known = frozenset(c for c in out.known if not self._inside([c]))
        return out

    def _inside(self, polys: Iterable[Poly]) -> bool:
        return self.passes in self.names.scope(polys)

    def _only_pass(self, polys: Iterable[Poly]) -> bool:
        return all(
            n == self.passes
            or not self.names.known[n].scope & {self.passes}
            or (self.names.known[n].parts and self._only_pass(self.names.known[n].parts))
            for p in polys
            for n in p.names
        )

    def _outside(self, state: State, value: Value, last: Poly | None, text: str) -> Value:
        if isinstance(value, Num) and self._inside([value.poly]):
            if last is not None and self._only_pass([value.poly]):
                return Num(self.names.put(value.poly, {self.passes: last}))
            return self.walk.other(state, text)
        if isinstance(value, Tup):
            return Tup(tuple(self._outside(state, v, last, "") for v in value.items))
        if isinstance(value, Test):
            return self.walk.other(state, "")
        if isinstance(value, Obj):
            scope = self.walk._scopes.get(value.key, frozenset())
            if self.passes in scope and value.kind in ("other",):
                fresh = self.walk.other(state, value.text or text)
                return Obj(fresh.key, fresh.text, "other", value.alias | {value.key})
        return value

    def unknown(self, what: str, most: Pieces | None, *, block: int = -1, edge: int = -1) -> Pieces:
        """Add an unknown number of passes."""
        walk = self.walk
        return walk.ledger.unknown(self.line, what, most, walk.decoded.code, block=block, edge=edge)


def _differences(walk: Walk, before: State, after: State, mark: int) -> set[Key]:
    """Give what differs between two states, of what the first one has."""
    out: set[Key] = set()
    for slot, value in before.local.items():
        if after.local.get(slot) != value:
            out.add(("local", slot))
    for key, cell in before.cells.items():
        if after.cells.get(key) != cell:
            out.add(("cell", key))
    for key, extent in before.extents.items():
        if after.extents.get(key) != extent:
            out.add(("extent", key))
    for key in after.extents.keys() - before.extents.keys() - walk.born:
        if after.extents[key] != walk.default_extent(key) and not walk.is_newer(key, mark):
            out.add(("extent", key))
    for key in after.epochs:
        if after.epochs[key] != before.epochs.get(key, "") and not walk.is_newer(key, mark):
            out.add(("epoch", key))
    for key in after.loose - before.loose:
        if not walk.is_newer(key, mark):
            out.add(("loose", key))
    return out
