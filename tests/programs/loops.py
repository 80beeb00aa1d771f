"""Loops of generated programs."""

from __future__ import annotations

from .choosing import one_of, weighted
from .expressions import Expressions, Lines, Scope, indent


class Loops(Expressions):
    """Builds `for` and `while` loops."""

    def for_loop(self, scope: Scope) -> Lines:
        i, j = self.fresh("i"), self.fresh("j")
        times = 1 + self.below(5)
        names, heads = weighted(
            self.chooser,
            [
                (6, ((i,), (f"{i} in range({times})",))),
                (1, ((i,), (f"{i} in range({times}, 0, -1)", f"{i} in range(0, {times}, 2)"))),
                (1, ((i,), (f"{i} in range(b % 4)", f"{i} in steady_range(a % 3, c % 5)"))),
                (2, ((i,), (f"{i} in xs[:5]", f"{i} in list(d)[:3]", f"{i} in (a, b, 2)"))),
                (
                    1,
                    (
                        (i, j),
                        (
                            f"{i}, {j} in enumerate(xs[:4])",
                            f"{i}, {j} in zip(xs, range({times}))",
                            f"{i}, {j} in list(d.items())[:3]",
                            f"{i}, *{j} in [(a, 1), (b,)]",
                        ),
                    ),
                ),
                (
                    2,
                    (
                        (i,),
                        (
                            f"{i} in counted({times})",
                            f"{i} in (p * 2 for p in range({times}))",
                            f"{i} in map(minus, xs[:3])",
                            f"{i} in reversed(range({times}))",
                            f"{i} in Box({times})",
                            f"{i} in iter(lambda: shared(1) % 5, 3)",
                            f"{i} in [p for p in range({times}) if p != b]",
                            f"{i} in {{1, 2, 5}}",
                        ),
                    ),
                ),
                (1, ((), (f"_ in 'x' * {times}", f"xs[0] in range({times})"))),
            ],
        )
        head = one_of(self.chooser, heads)
        known = tuple(name for name in names if "*" + name not in head)
        inside = scope.inside(max(times, 5), in_loop=True, ints=(*known, *scope.ints))
        lines = [f"for {head}:", *indent(self.block(inside))]
        if self.below(3) == 2:
            lines += ["else:", *indent(self.block(scope.inside(), 2))]
        return lines

    def while_loop(self, scope: Scope) -> Lines:
        k = self.fresh("k")
        times = 1 + self.below(5)
        inside = scope.inside(times, in_loop=True, ints=(k, *scope.ints))
        body = self.block(inside)
        shape = self.below(4)
        if shape == 0:
            lines = [f"{k} = {times}", f"while {k} > 0:", f"    {k} -= 1", *indent(body)]
        elif shape == 1:
            lines = [f"{k} = 0", "while True:", f"    {k} += 1"]
            lines += [f"    if {k} > {times}: break", *indent(body)]
        elif shape == 2:
            lines = [f"{k} = {times}", f"while {k} > 0 and ({self.test(scope)} or {k} > 1):"]
            lines += [f"    {k} -= 1", *indent(body)]
        else:
            lines = [f"{k} = {times}", f"while ({k} := {k} - 1) >= 0:", *indent(body)]
        if shape != 1 and self.below(3) == 2:
            lines += ["else:", *indent(self.block(scope.inside(), 2))]
        return lines

    def range_nest(self, scope: Scope) -> Lines:
        """Nested loops over ranges, mostly affine and mostly run to their end."""
        i, j, k = self.fresh("i"), self.fresh("j"), self.fresh("k")
        n = 1 + self.below(5)
        outer = one_of(
            self.chooser,
            (
                f"range({n})",
                f"range(1, {n})",
                f"range({n}, -1, -1)",
                f"range(0, {n}, 2)",
                f"range({n} - 3)",
                "range(len(xs))",
                "range(a % 4, c % 6)",
                "range(b % 5)",
                f"range(True, {n})",
                f"range(*(1, {n}))",
                "range(box.part)",
                "range('x')",
                f"range(0, {n}, b % 3)",
                f"range(10 ** 30, 10 ** 30 + {n})",
            ),
        )
        middle = one_of(
            self.chooser,
            (f"range({i})", f"range({i} + 1, {n})", f"range({i}, {n}, 2)", "range(2)", "range(0)"),
        )
        third = one_of(self.chooser, (f"range({j}, {i} + 2)", f"range({j})", f"range({i} - {j})"))
        deepest = self._nest_body(scope, k)
        lines = [f"for {i} in {outer}:"]
        depth = 1 + self.below(3)
        if outer.startswith(("range(10", "range('x")):
            depth = 1
        if outer.startswith("range(box"):
            lines.insert(0, "box.part = b % 4")
        if depth == 1:
            lines += indent(self._nest_body(scope, i))
        elif depth == 2:
            lines += [f"    for {j} in {middle}:", *indent(indent(self._nest_body(scope, j)))]
            lines += self._after(2)
        else:
            lines += [f"    for {j} in {middle}:", f"        for {k} in {third}:"]
            lines += [*indent(indent(indent(deepest))), *self._after(3), *self._after(2)]
        lines += self._after(1)
        if self.below(5) == 4:
            lines += ["else:", "    c += 1"]
        return lines

    def _after(self, depth: int) -> Lines:
        """Give a line behind an inner loop, or none."""
        line = one_of(self.chooser, ("", "", "b += 1", "a = b", "if a > 3: b += 1"))
        return ["    " * (depth - 1) + line] if line and depth > 1 else []

    def _nest_body(self, scope: Scope, variable: str) -> Lines:
        number = one_of(self.chooser, (variable, f"{variable} * 3 % 7", "b"))
        return weighted(
            self.chooser,
            [
                (6, [f"a = (a + {number}) % 1009"]),
                (2, [f"if {number} > 1:", f"    b += {number} % 5"]),
                (2, [f"if {number} % 2:", "    a += 1", "else:", "    c -= 1"]),
                (1, ["a += 1", f"if {number} > 3: continue", "b += 1"]),
                (1, ["c += 1" if not scope.may_return else f"if {number} > 4: break"]),
                (1, [f"{variable} = 0", "a += 1"]),
                (1, [f"a += 10 // ({number} - 2)"]),
                (1, [f"a = minus({number}, a % 5)"]),
                (1, [f"a = sum([{variable} for _ in range(2)])"]),
                (
                    1,
                    [
                        "try:",
                        f"    a = 6 // ({number} - 1)",
                        "except ArithmeticError:",
                        "    b += 1",
                    ],
                ),
                (1, ["while b % 3: b += 1"]),
                (1, [f"a = {variable} and b or c"]),
                (1, [f"yield {variable}"] if scope.kind in ("generator", "asyncgen") else ["pass"]),
                (1, [f"xs.append({number})", "del xs[3:]"]),
            ],
        )
