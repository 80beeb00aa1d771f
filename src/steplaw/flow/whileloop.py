"""Loops with a test: a counter that is stepped, multiplied or divided."""

from __future__ import annotations

from steplaw.flow import trips
from steplaw.flow.blocks import OUTSIDE
from steplaw.flow.dominators import dominates
from steplaw.flow.looping import Loop
from steplaw.flow.loops import CAUGHT
from steplaw.flow.names import Beyond
from steplaw.flow.pieces import NOTHING, ONCE, Pieces, restricted, sum_over, times
from steplaw.flow.poly import ZERO, Poly, var
from steplaw.flow.values import State, Ways
from steplaw.flow.walk import Flow, Weight


class WhileLoop(Loop):
    """Any other loop."""

    def run(self) -> list[Flow]:
        """Run it; give the ways out of it."""
        self.stays_at: dict[int, list[Poly]] = {}
        start = self.settle()
        back, leaving = self.trial(start)
        stays = self._stays(back, leaving) if back else [-self.place - 1]
        self.domain = (
            None if stays is None else [s.put({self.passes: self.place - 1}) for s in stays]
        )
        last = self._last(stays, leaving)
        if self.weight is None:
            return [(n, t, self.outside(s, last), w) for n, t, s, w in leaving]
        return self._counted(start, leaving, stays, last)

    domain: list[Poly] | None = None

    def trial(self, start: State) -> tuple[list[Flow], list[Flow]]:
        """Run the body without counting."""
        return self.body(start, None, False)

    def enter(self, state: State, weight: Weight | None) -> tuple[list[Flow], list[Flow]]:
        """Run the blocks of the body once."""
        inner = state.copy()
        inner.known |= {self.place}
        if self.domain is not None and all(self._from_the_first(d) for d in self.domain):
            inner.known |= {d for d in self.domain if d.constant is None}
        walk = self.walk
        outs = walk.block(self.head, inner, weight)
        back: list[Flow] = []
        leaving: list[Flow] = []
        pending: dict[int, list[Flow]] = {}
        nest = walk.frame.nest
        for flow in outs:
            if flow[1] == self.head:
                back.append(flow)
            elif flow[1] != OUTSIDE and nest.within(flow[1], self.head):
                pending.setdefault(flow[1], []).append(flow)
            else:
                leaving.append(flow)
        more_back, more = self._rest(pending)
        return back + more_back, leaving + more

    def _rest(self, pending: dict[int, list[Flow]]) -> tuple[list[Flow], list[Flow]]:
        walk, nest, head = self.walk, self.walk.frame.nest, self.head
        back: list[Flow] = []
        leaving: list[Flow] = []
        for b in nest.order:
            if b not in pending or b == head or nest.child(b, head) not in (-1, b):
                continue
            flows = pending.pop(b)
            state, weight = walk.merged(flows, nest.line(b)), walk.added(flows)
            is_loop = nest.child(b, head) == b
            outs = walk.loop(b, state, weight) if is_loop else walk.block(b, state, weight)
            for flow in outs:
                if flow[1] == head:
                    back.append(flow)
                elif flow[1] != OUTSIDE and nest.within(flow[1], head):
                    pending.setdefault(flow[1], []).append(flow)
                else:
                    leaving.append(flow)
        return back, leaving

    def _from_the_first(self, condition: Poly) -> bool:
        return self.names.implies(self.state.known, condition.put({self.passes: ZERO}))

    # -- when it ends ----------------------------------------------------------------------

    def _stays(self, back: list[Flow], leaving: list[Flow]) -> list[Poly] | None:
        """Give when another pass follows, None where the data decide."""
        walk, nest = self.walk, self.walk.frame.nest
        edges = walk.frame.graph.edges
        if not leaving or not back:
            return None
        out: list[Poly] = []
        for number, _, _, _ in leaving:
            if number == CAUGHT:
                return None
            b = edges[number].source
            if nest.inner[b] != self.head or not self._always_passed(b, back):
                return None
            ways = [w for n, w in walk.frame.stays.get(b, {}).items() if n != number]
            if len(ways) != 1 or ways[0] is None:
                return None
            stay = self._stay(ways[0], b)
            if stay is None:
                return None
            out += stay
            self.stays_at[number] = stay
        return out or None

    def _always_passed(self, b: int, back: list[Flow]) -> bool:
        edges, nest = self.walk.frame.graph.edges, self.walk.frame.nest
        return all(
            n != CAUGHT and dominates(nest.dominators, b, edges[n].source) for n, _, _, _ in back
        )

    def _stay(self, ways: Ways, b: int) -> list[Poly] | None:
        walk = self.walk
        walk.passes = (*self.outer, self.passes)
        try:
            for conditions in self._orders(ways):
                if not walk._settled(conditions):
                    continue
                if all(trips.is_falling(self.names, c, self.passes) for c in conditions):
                    return list(conditions)
        finally:
            walk.passes = self.outer
        return self._powers(ways)

    def _orders(self, ways: Ways) -> list[tuple[Poly, ...]]:
        """Give the ways that a loop can be known to stay in until one fails for good."""
        if len(ways) == 1:
            return [ways[0]]
        if len(ways) != 2 or any(len(w) != 1 for w in ways):
            return []
        # `!=` with a step of 1 from the right side is an inequality.
        out: list[tuple[Poly, ...]] = []
        for (c,) in ways:
            one = c.linear_in(self.passes) and c.coefficient(self.passes) == -1
            before = c.put({self.passes: ZERO}) + 1
            if one and self.names.implies(self.state.known, before):
                out.append((c,))
        return out

    def _powers(self, ways: Ways) -> list[Poly] | None:
        """Give when another pass follows where a number is multiplied or divided in each."""
        for symbol, (key, how, by) in self.scaled.items():
            first = self.initial(*key)
            if first is None or not self.walk._settled([first]):
                continue
            if how == "times":
                stay = self._grown_past(ways, symbol, by, first)
            else:
                stay = self._shrunk_below(ways, symbol, by, first)
            if stay is not None:
                return stay
        return None

    def _grown_past(self, ways: Ways, symbol: str, by: int, first: Poly) -> list[Poly] | None:
        """Give when another pass follows where ``x *= by`` is tested by ``x <= bound``."""
        start = first.constant
        if len(ways) != 1 or len(ways[0]) != 1 or start is None or start < 1:
            return None
        (condition,) = ways[0]
        ahead = {-1: 0, -by: 1}.get(int(condition.coefficient(symbol)))
        bound = condition.put({symbol: ZERO})
        if ahead is None or not condition.linear_in(symbol) or not self._fixed([bound]):
            return None
        log = self.names.logarithm(bound, int(start), by)
        return [log - ahead - self.place, bound - start]

    def _shrunk_below(self, ways: Ways, symbol: str, by: int, first: Poly) -> list[Poly] | None:
        """Give when another pass follows where ``x //= by`` is tested by ``x > bound``."""
        over = self.names.floor(var(symbol), by)
        for conditions in ways:
            if len(conditions) != 1:
                continue
            (condition,) = conditions
            for ahead, value in enumerate((var(symbol), over)):
                low = (value - condition).constant
                if low is None or low < 1 or low.denominator != 1:
                    continue
                if len(ways) > 1 and not self.names.implies(self.state.known, first):
                    continue
                log = self.names.logarithm(first, int(low), by)
                return [log - ahead - self.place, first - low]
        return None

    def _fixed(self, polys: list[Poly]) -> bool:
        return not self._inside(polys) and self.walk._settled(polys)

    def _last(self, stays: list[Poly] | None, leaving: list[Flow]) -> Poly | None:
        """Give the number of the pass that ends the loop."""
        if stays is None or len(leaving) != 1:
            return None
        try:
            extent = tuple(s.put({self.passes: trips.PLACE}) for s in stays)
            return trips.length(self.names, extent, self.state.known)
        except Beyond:
            return None

    # -- counting --------------------------------------------------------------------------

    def _counted(
        self, start: State, leaving: list[Flow], stays: list[Poly] | None, last: Poly | None
    ) -> list[Flow]:
        walk, frame = self.walk, self.walk.frame
        assert self.weight is not None
        inside = None if stays is None else self._exact(self.weight, leaving)
        entered = walk.sum(self.weight)
        if inside is None:
            inside = Weight(NOTHING, self._passes_unknown(start, leaving))
        exits = sorted({n for n, _, _, _ in leaving if n != CAUGHT})
        if any(n == CAUGHT for n, _, _, _ in leaving):
            exits = []
        if len(exits) == 1 and not inside.local:
            frame.forced[exits[0]] = exits
            frame.leaving[exits[0]] = entered
        elif len(exits) == 1 and inside.total:
            frame.forced[exits[0]] = exits
            frame.leaving[exits[0]] = self.weight.total
        if inside.local:
            frame.staying.update(self.stays_at)
        _, out = self.body(start, inside, frame.record)
        for n in exits:
            frame.forced.pop(n, None)
            frame.staying.pop(n, None)
        result: list[Flow] = []
        for n, t, s, w in out:
            after = self.outside(s, last)
            if len(exits) == 1:
                w = self.weight
            elif w is not None:
                w = self._summed(w)
            result.append((n, t, after, w))
        return result

    def _summed(self, weight: Weight) -> Weight:
        return Weight(sum_over(self.names, weight.local, self.passes), weight.total)

    def _exact(self, weight: Weight, leaving: list[Flow]) -> Weight | None:
        walk, names = self.walk, self.names
        assert self.domain is not None
        walk.passes = (*self.outer, self.passes)
        try:
            if all(self._from_the_first(d) for d in self.domain):
                local = restricted(names, weight.local, self.domain)
            else:
                local = restricted(names, weight.local, [-self.place]) + restricted(
                    names, weight.local, [self.place - 1, *self.domain]
                )
            total = NOTHING
            if weight.total:
                if names.scope(self.domain) & set(self.outer) or len(leaving) != 1:
                    return None
                more = restricted(names, ONCE, [self.place - 1, *self.domain])
                total = weight.total + times(weight.total, sum_over(names, more, self.passes))
            found = Weight(local, total)
            walk.sum(found)
        except Beyond:
            return None
        finally:
            walk.passes = self.outer
        return found

    def _passes_unknown(self, start: State, leaving: list[Flow]) -> Pieces:
        walk = self.walk
        most = None
        if self.domain is not None:
            walk.passes = (*self.outer, self.passes)
            state = start.copy()
            state.known |= {self.place, *self.domain}
            most = walk.cap(state)
            walk.passes = self.outer
        if most is None:
            walk.ledger.stop(self.line, "the data decide how long the loop goes on")
        return self.unknown("passes", most, block=self.head)
