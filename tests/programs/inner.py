"""Functions, classes, generators and coroutines made or used inside a generated function."""

from __future__ import annotations

from .choosing import one_of
from .expressions import CAUGHT, Expressions, Lines, Scope, indent


class Inner(Expressions):
    """Builds definitions inside functions, and the use of generators and coroutines."""

    # Definitions inside a function.

    def inner_function(self, scope: Scope) -> Lines:
        f = self.fresh("inner")
        inner = Scope(depth=scope.depth + 1, weight=scope.weight * 2, ints=("a", "p", "b"))
        body = self.block(inner, 2)
        change = one_of(self.chooser, ("b += p", "xs.append(p)", "pass"))
        lines = [f"def {f}(p, q=2, *, z=1):"]
        lines += ["    nonlocal a, b, c, xs, d, box"] if scope.outer != ("module",) else []
        lines += [f"    {change}", *indent(body), "    return p + q + z"]
        use = one_of(
            self.chooser,
            (
                f"c = {f}({self.number(scope, 0)})",
                f"c = {f}(1, z={self.number(scope, 0)})",
                f"c = sum(map({f}, (1, 2)))",
                f"c = max([{f}(p) for p in (1, 2)])",
                f"c = partial({f}, 1)(q=3)",
            ),
        )
        return [*lines, use]

    def inner_class(self, scope: Scope) -> Lines:
        name = self.fresh("Kind")
        base = one_of(self.chooser, ("Box", "Deck", "Plain"))
        return [
            f"class {name}({base}):",
            f"    level = {self.number(scope, 0)}",
            "    many = [p for p in range(3)]",
            "    if level > 2:",
            "        extra = lambda self: self.level",
            "    def worth(self, p):",
            "        return super().worth(p) + len(__class__.many)",
            f"c = {name}(a).worth(2)",
        ]

    def executed(self, scope: Scope) -> Lines:
        body = one_of(
            self.chooser,
            (
                "for p in range(3):\\n    out.append(p)",
                "def made(p):\\n    return p + 1\\nout.append(made(2))",
                "out += [p for p in range(4) if p % 2]",
                "try:\\n    1 // 0\\nexcept ZeroDivisionError:\\n    out.append(0)",
                "raise KeyError(out)",
            ),
        )
        return [f"exec('{body}', {{'out': log}})"]

    # Generators.

    def yielding(self, scope: Scope) -> Lines:
        value = self.number(scope, 1)
        options = [[f"yield {value}"], [f"a = yield {value}", "a = a or 1"], ["yield"]]
        if scope.kind == "generator":
            options += [
                [f"b = (yield from counted({self.below(4)})) or 0"],
                ["yield from (p + 1 for p in xs[:3])"],
                [f"yield from xs[:{self.below(3)}]"],
                [f"c = (yield from bouncing({self.below(3)})) or 0"],
            ]
        return one_of(self.chooser, options)

    def generator_use(self, scope: Scope) -> Lines:
        g, v = self.fresh("gen"), self.fresh("v")
        source = one_of(
            self.chooser,
            (f"counted({1 + self.below(4)})", f"bouncing({1 + self.below(4)})", "iter(Box(3))"),
        )
        fault = one_of(self.chooser, ("ValueError", "Lost", "KeyError", "GeneratorExit"))
        uses = (
            [f"for {v} in {g}:", f"    a += {v}", "    if a > 5: break"],
            [f"a = next({g})", f"b = next({g}, 3)", f"{g}.close()"],
            [f"a = next({g})", f"{g} = None"],
            [f"next({g})", f"b = {g}.send(4)"],
            [f"next({g})", f"b = {g}.throw({fault})"],
            [f"{g}.throw({fault})"],
            [f"{g}.close()"],
            [f"a = sum({g})"],
            [f"a, *rest = {g}"],
            [f"b = max({g}, default=0)", f"c = next({g}, 2)"],
            [f"for {v} in {g}:", f"    {g}.close()"],
            [f"d = dict(zip({g}, {g}))"],
            [
                f"a = next({g})",
                f"a = next({g})",
                f"a = next({g})",
                f"a = next({g})",
                f"a = next({g})",
            ],
        )
        lines = [f"{g} = {source}", *one_of(self.chooser, uses)]
        if not self.below(2):
            return lines
        kind = one_of(self.chooser, CAUGHT)
        return ["try:", *indent(lines), f"except {kind}:", "    log.append('gen')"]

    # Coroutines.

    def awaiting(self, scope: Scope) -> Lines:
        v = self.fresh("v")
        times = self.below(4)
        body = self.block(scope.inside(4, in_loop=True, ints=(v, *scope.ints)), 2)
        options = [
            [f"b = await Tick({times})"],
            ["c += await Tick(a % 3)"],
            [f"async for {v} in Stream({times}):", *indent(body)],
            [f"async for {v} in poured({times}):", *indent(body)],
            [f"xs = [{v} async for {v} in Stream({times}) if {v} != b]"],
            [f"xs = [await Tick({v} % 2) for {v} in range({times})]"],
            [f"d = {{{v}: await Tick(1) async for {v} in poured({times})}}"],
            ["b = await Lost.__new__(Lost)"],
        ]
        return one_of(self.chooser, options)
