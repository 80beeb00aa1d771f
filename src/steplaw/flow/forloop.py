"""Loops over an iterator."""

from __future__ import annotations

from steplaw.flow import trips
from steplaw.flow.looping import Loop
from steplaw.flow.names import Beyond
from steplaw.flow.pieces import NOTHING, ONCE, Pieces, restricted, sum_over, times
from steplaw.flow.values import Items, Obj, State
from steplaw.flow.walk import Flow, Weight


class ForLoop(Loop):
    """A loop over an iterator."""

    def run(self) -> list[Flow]:
        """Run it; give the ways out of it."""
        walk = self.walk
        iterator = self.state.stack[-1]
        self.iterator = iterator if isinstance(iterator, Obj) else None
        self.items = walk.items.get(self.iterator.key, Items()) if self.iterator else Items()
        self.extent = self.state.extents.get(self.iterator.key) if self.iterator else None
        if self.iterator is not None:
            self.state.extents[self.iterator.key] = None
        start = self.settle()
        if self.extent is not None and self._is_changed():
            self.extent = None
            self.reason = f"line {self.line}: what is looped over may change in the loop"
        _, leaving = self.trial(start)
        if self.weight is None or (not walk.frame.record and self.weight is None):
            return self._after(start, leaving)
        return self._counted(start, leaving)

    reason = ""

    def _is_changed(self) -> bool:
        return any(("extent", k) in self.changing for k in self.items.over)

    def trial(self, start: State) -> tuple[list[Flow], list[Flow]]:
        """Run the body without counting."""
        return self.body(start, None, False)

    def enter(self, state: State, weight: Weight | None) -> tuple[list[Flow], list[Flow]]:
        """Run the blocks of the body once."""
        walk = self.walk
        inner = state.copy()
        if self.extent is not None:
            conditions = trips.at(self.names, self.extent, self.place)
            inner.known |= {c for c in conditions if c.constant is None}
            inner.known |= {self.place}
        item = self.items.at(self.place) if self.items.at and self.extent is not None else None
        inner.stack.append(item if item is not None else walk.other(inner, ""))
        number, target = self._edge("fall")
        if walk.frame.record and weight is not None:
            walk._record_block(self.head, weight)
            walk._record_edges([(number, target, inner, weight)])
        return walk.region(self.head, target, [(number, target, inner, weight)])

    def _edge(self, kind: str) -> tuple[int, int]:
        edges = self.walk.frame.graph.edges
        return next(w for w in self.walk.frame.nest.ways[self.head] if edges[w[0]].kind == kind)

    def _after(self, start: State, leaving: list[Flow], ended: Weight | None = None) -> list[Flow]:
        """Give the ways out: the end of the iterator, and early exits."""
        out = [(n, t, self.outside(s), w) for n, t, s, w in leaving]
        edges = self.walk.frame.graph.edges
        ways = [w for w in self.walk.frame.nest.ways[self.head] if edges[w[0]].kind == "branch"]
        for number, target in ways:
            last = None
            if self.extent is not None:
                try:
                    last = trips.length(self.names, self.extent, self.state.known)
                except Beyond:
                    last = None
            state = self.outside(start, last)
            state.known = self.state.known
            state.stack.pop()
            out.append((number, target, state, ended))
        return out

    def _counted(self, start: State, leaving: list[Flow]) -> list[Flow]:
        walk, frame = self.walk, self.walk.frame
        weight = self.weight
        assert weight is not None
        entered = walk.sum(weight)
        if self.items.code is not None:
            self._generator()
        early = bool(leaving) or frame.partial
        inside = None if early else self._exact(weight)
        if inside is None:
            inside = Weight(NOTHING, self._passes_unknown(start, early))
        _, leaving = self.body(start, inside, frame.record)
        left = NOTHING
        for _, _, _, w in leaving:
            left = left + (NOTHING if w is None else w.total)
        ended = Weight(weight.local, weight.total - left)
        if frame.partial:
            ended = Weight(NOTHING, self.unknown("the end is reached", entered - left))
        out = self._after(start, leaving, ended)
        if frame.record:
            walk._record_block(self.head, ended)
            walk._record_edges([f for f in out if f[3] is ended])
        return out

    def _generator(self) -> None:
        """Run the code of the generator that is looped over."""
        walk = self.walk
        assert self.items.code is not None
        state = self.state.copy()
        walk.weight = self.weight
        walk.line = self.line
        walk.generate(state, self.items.code, list(self.items.args), whole=self.extent is not None)

    def _exact(self, weight: Weight) -> Weight | None:
        """Give how often the body is run, None where there is no formula for it."""
        walk, names = self.walk, self.names
        if self.extent is None:
            return None
        conditions = trips.at(names, self.extent, self.place)
        walk.passes = (*self.outer, self.passes)
        try:
            if not walk._settled(conditions):
                self.reason = f"line {self.line}: how many items there are differs by pass"
                return None
            local = restricted(names, weight.local, conditions)
            total = NOTHING
            if weight.total:
                if names.scope(conditions) & set(self.outer):
                    self.reason = "passes that depend on where the data lead"
                    return None
                total = times(
                    weight.total, sum_over(names, restricted(names, ONCE, conditions), self.passes)
                )
            found = Weight(local, total)
            walk.sum(found)
        except Beyond as beyond:
            self.reason = str(beyond)
            return None
        finally:
            walk.passes = self.outer
        return found

    def _passes_unknown(self, start: State, early: bool) -> Pieces:
        walk = self.walk
        most = None
        if self.extent is not None:
            walk.passes = (*self.outer, self.passes)
            state = start.copy()
            conditions = trips.at(self.names, self.extent, self.place)
            state.known |= {*conditions, self.place}
            most = walk.cap(state) if walk._settled(conditions) else None
            walk.passes = self.outer
        what = "passes, which the loop may leave early" if early else "passes"
        if most is None:
            reason = self.reason or "how many items there are is not known"
            walk.ledger.stop(self.line, reason.removeprefix(f"line {self.line}: "))
        number, _ = self._edge("fall")
        return self.unknown(what, most, edge=number)
