"""Statements of generated programs: every kind, nested, leaving early in every way."""

from __future__ import annotations

from .choosing import one_of, weighted
from .expressions import CAUGHT, Lines, Scope, indent
from .inner import Inner
from .loops import Loops

DEEPEST = 3
HEAVIEST = 250
FAULTS = (
    "ValueError",
    "KeyError(3)",
    "Lost('way')",
    "Late(2)",
    "ZeroDivisionError",
    "IndexError",
    "StopIteration(4)",
)


class Statements(Loops, Inner):
    """Builds statements as lists of source lines."""

    def block(self, scope: Scope, most: int = 3) -> Lines:
        """Give one to `most` statements."""
        lines: Lines = []
        for _ in range(1 + self.below(most)):
            lines += self.statement(scope)
        return lines

    def statement(self, scope: Scope) -> Lines:
        options = [
            (10, self.assignment),
            (3, self.other_assignment),
            (2, self.list_change),
            (2, self.leaving),
            (2, self.call),
            (1, self.checking),
        ]
        if scope.kind in ("generator", "asyncgen"):
            options.append((6, self.yielding))
        if scope.kind in ("async", "asyncgen"):
            options.append((6, self.awaiting))
        if scope.depth < DEEPEST and scope.weight < HEAVIEST:
            options += [
                (5, self.branching),
                (5, self.for_loop),
                (4, self.range_nest),
                (3, self.while_loop),
                (6, self.trying),
                (4, self.with_block),
                (3, self.matching),
                (2, self.grouping),
                (2, self.inner_function),
                (1, self.inner_class),
                (2, self.generator_use),
                (1, self.executed),
                (1, self.awkward_finally),
            ]
        return weighted(self.chooser, options)(scope)

    # Straight ones.

    def assignment(self, scope: Scope) -> Lines:
        name = one_of(self.chooser, ("a", "b", "c"))
        sign = one_of(self.chooser, ("=", "+=", "-=", "^=", "|=", "//=", "%="))
        return [f"{name} {sign} {self.number(scope)}"]

    def other_assignment(self, scope: Scope) -> Lines:
        value, other = self.number(scope), self.number(scope, 0)
        return one_of(
            self.chooser,
            (
                [f"a, b = b, {value}"],
                [f"a = c = {value}"],
                [f"(a, (b, c)) = {value}, ({other}, 1)"],
                [f"a, *rest = {value}, *xs", "b += len(rest)"],
                [f"*rest, c = range({self.below(4)})"],
                ["a, b, c = c, a, b"],
                ["a, b = xs"],
                [f"box.part = {value}"],
                [f"box.half += {value}"],
                [f"box.twice = {value}"],
                [f"box[{other}] += {value}"],
                [f"xs[0] -= {value}"],
                [f"d[{other}] = {value}"],
                [f"d[{other}] += {value}"],
                [f"kept: int = {value}", "c -= kept"],
                ["del a", f"a = {value}"],
                ["del d[3]"],
                [f"a = {value}; b = a + {other}; c -= b"],
                [f"if (b := {value}) > 2: c += b"],
                ["text = f'{a}-{b:>4}'.split('-')", "c += len(text)"],
                [f"seat = Seat({value})", "a += seat.row + (seat < Seat(3))"],
                [f"a = Frozen({value}).row"],
                [f"pair = Pair({value}, b)", "a, b = pair._replace(left=2)"],
                [f"a = kindly({value}) + kindly('xyz')"],
            ),
        )

    def list_change(self, scope: Scope) -> Lines:
        value, listing = self.number(scope, 1), self.listing(scope, 1)
        return one_of(
            self.chooser,
            (
                [f"xs.append({value})"],
                [f"xs = {listing}"],
                [f"xs[1:2] = {listing}"],
                ["xs[:] = sorted(xs, key=lambda p: (p % 3, p))[:6]"],
                ["del xs[::2]"],
                ["xs.sort(key=lambda p: -p)"],
                [f"d |= dict.fromkeys({listing}, 2)"],
                [f"d = {{**d, 1: {value}}}"],
                ["c = xs.pop()"],
                [f"c = d.pop({value}, 1)"],
                [f"a, b = {listing}[:2]"],
            ),
        )

    def call(self, scope: Scope) -> Lines:
        """Call an earlier function of the program, when the work stays small."""
        fitting = [text for text, cost in self.calls if cost * scope.weight <= 600]
        if not fitting:
            return ["pass"]
        text = one_of(self.chooser, fitting)
        call = text.format(self.number(scope, 1), self.number(scope, 0))
        return [f"a = {call}"] if self.below(4) else [call]

    def checking(self, scope: Scope) -> Lines:
        test = self.test(scope)
        return one_of(
            self.chooser,
            (
                [f"assert {test}"],
                [f"assert {test}, {self.number(scope)}"],
                ["import math", "c += math.floor(1.5)"],
                ["from collections import OrderedDict, deque", "c += len(deque(xs, 2))"],
                ["import collections.abc as kinds", "c += isinstance(xs, kinds.Sequence)"],
                ["from os import path as place", "c += place.sep == '/'"],
                ["global total", f"total = {self.number(scope)}"]
                if scope.kind == "never"
                else ["log.append(c)"],
                ["pass"],
                [f"{test}"],
            ),
        )

    def leaving(self, scope: Scope) -> Lines:
        """Give something that leaves the block, mostly under a condition."""
        ways = [(4, self.raising(scope))]
        if scope.in_loop:
            ways += [(4, ["break"]), (4, ["continue"])]
        if scope.may_return:
            value = "" if scope.kind == "asyncgen" else f" {self.number(scope)}"
            ways.append((2, [f"return{value}"]))
        way = weighted(self.chooser, ways)
        if self.below(8) == 7:
            return way
        return [f"if {self.test(scope)}:", *indent(way)]

    def raising(self, scope: Scope) -> Lines:
        fault = one_of(self.chooser, FAULTS)
        return [f"raise {fault}{one_of(self.chooser, ('', '', ' from None', ' from Lost()'))}"]

    # Blocks.

    def branching(self, scope: Scope) -> Lines:
        lines = [f"if {self.test(scope)}:", *indent(self.block(scope.inside()))]
        for _ in range(self.below(3)):
            lines += [f"elif {self.test(scope)}:", *indent(self.block(scope.inside(), 2))]
        if self.below(2):
            lines += ["else:", *indent(self.block(scope.inside(), 2))]
        return lines

    def trying(self, scope: Scope) -> Lines:
        lines = ["try:", *indent(self.block(scope.inside()))]
        catchers = self.below(3)
        for _ in range(catchers):
            kind = one_of(self.chooser, CAUGHT)
            named = self.below(3)
            fault = self.fresh("fault")
            lines.append(f"except {kind} as {fault}:" if named else f"except {kind}:")
            body = self.block(scope.inside(), 2)
            ending = self.below(7)
            if ending == 6:
                body.append("raise")
            elif ending == 5 and named:
                body.append(f"raise Late(4) from {fault}")
            elif named:
                body.insert(0, f"log.append(type({fault}).__name__)")
            lines += indent(body)
        if catchers and self.below(5) == 4:
            lines += ["except:", "    log.append('any')"]
        if catchers and self.below(3) == 2:
            lines += ["else:", *indent(self.block(scope.inside(), 2))]
        if not catchers or self.below(2):
            lines += ["finally:", *indent(self.block(scope.inside(), 2))]
        return lines

    def awkward_finally(self, scope: Scope) -> Lines:
        """Leave from inside a finally, which drops what was on its way."""
        body = self.block(scope.inside(), 2)
        last = self.leaving(scope)
        way = one_of(self.chooser, ("break", "continue", "return 3"))
        if (way.startswith("return") and (not scope.may_return or scope.kind == "asyncgen")) or (
            not way.startswith("return") and not scope.in_loop
        ):
            way = "pass"
        return [
            "try:",
            *indent(body + last),
            "finally:",
            f"    if {self.test(scope)}:",
            f"        {way}",
        ]

    def with_block(self, scope: Scope) -> Lines:
        mode = self.below(5)
        name = self.fresh("g")
        inside = scope.inside(ints=(name, *scope.ints))
        heads = [
            f"with Gate({mode}) as {name}:",
            f"with gate({mode}) as {name}:",
            f"with Gate({mode}) as {name}, gate({self.below(3)}):",
            f"with (Gate({self.below(4)}), Gate({mode}) as {name}):",
            f"{name} = 2\nwith suppress(ValueError, Lost):",
            f"{name} = 1\nwith closing(counted(3)):",
        ]
        if scope.kind in ("async", "asyncgen"):
            heads += [f"async with Lock({mode}) as {name}:"] * 4
        head = one_of(self.chooser, heads).split("\n")
        if self.below(6) == 5:
            body = [f"{name} = many.enter_context(Gate({mode}))", "many.callback(log.append, 5)"]
            return ["with ExitStack() as many:", *indent(body + self.block(inside, 2))]
        return [*head, *indent(self.block(inside))]

    def matching(self, scope: Scope) -> Lines:
        subject = one_of(
            self.chooser,
            (
                "a",
                "(a, b)",
                "xs",
                "d",
                "box",
                "[a, *xs]",
                "{'n': a, 'm': (b, c)}",
                "str(a)",
                "Seat(a)",
            ),
        )
        patterns = [
            "0 | 1 | 2",
            "(p, 2)",
            "[p, q]",
            "[p, *others] if p > 1",
            "[_, _, *_]",
            "{1: p, **others}",
            "{'n': int(p), 'm': (_, q)}",
            "Box(p)",
            "Box(part=3 as p)",
            "Box(part=p) if p > 2",
            "Seat(row=1) | Seat(place=3)",
            "int() | bool()",
            "str(p) if len(p) > 1",
            "None",
            "-1",
        ]
        lines = [f"match {subject}:"]
        for _ in range(1 + self.below(3)):
            pattern = one_of(self.chooser, patterns)
            lines += [f"    case {pattern}:", *indent(indent(self.block(scope.inside(), 2)))]
        if self.below(2):
            lines += ["    case _:", *indent(indent(self.block(scope.inside(), 2)))]
        return lines

    def grouping(self, scope: Scope) -> Lines:
        """Exception groups and except*."""
        raised = one_of(
            self.chooser,
            (
                "ExceptionGroup('g', [ValueError(a), KeyError(1)])",
                "ExceptionGroup('g', [ExceptionGroup('h', [Lost(1), ValueError(2)]), Late(3)])",
                "ValueError(b)",
                "ExceptionGroup('g', [ZeroDivisionError()])",
            ),
        )
        inside = scope.inside(in_loop=False, may_return=False)
        lines = ["try:", *indent(self.block(inside, 2))]
        lines += [f"    if {self.test(scope)}:", f"        raise {raised}"]
        for kind in ("ValueError", "(Lost, KeyError)", "Late")[: 1 + self.below(3)]:
            fault = self.fresh("fault")
            lines += [f"except* {kind} as {fault}:", *indent(self.block(inside, 2))]
            lines.append(f"    log.append(len({fault}.exceptions))")
            if self.below(6) == 5:
                lines.append("    raise")
        if self.below(3) == 2:
            lines += ["else:", *indent(self.block(inside, 1))]
        if self.below(3) == 2:
            lines += ["finally:", *indent(self.block(inside, 1))]
        return lines
