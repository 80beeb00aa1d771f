"""Whole functions of generated programs, and how the main function uses each kind."""

from __future__ import annotations

from .choosing import one_of, weighted
from .expressions import Lines, Scope, indent
from .statements import Statements

START = ["xs = [b, 3, a % 7]", "d = {1: a, 3: 5}", "box = Box(c)"]
KINDS = ((6, "plain"), (4, "generator"), (3, "async"), (2, "asyncgen"))


class Definitions(Statements):
    """Builds functions; remembers how to call each and what it costs."""

    def function(self) -> Lines:
        shape = weighted(
            self.chooser,
            [(16, self.grown), (1, self.recursive), (1, self.wide), (1, self.long_jump)],
        )
        return shape()

    def grown(self) -> Lines:
        """A function of a random kind with a random body."""
        kind = weighted(self.chooser, list(KINDS))
        name = self.fresh({"plain": "f", "generator": "g", "async": "co", "asyncgen": "ag"}[kind])
        known = list(self.calls)
        body = self.block(Scope(kind=kind), 4)
        if kind in ("generator", "asyncgen"):
            body.insert(0, "yield a")
        lines = [f"{'async ' if 'async' in kind else ''}def {name}(a, b=2, c=3):"]
        lines += indent([*START, *body])
        if kind != "asyncgen":
            lines += [f"    return {self.number(Scope(kind=kind), 1)}"]
        if kind == "plain" and self.below(4) == 3:
            lines.insert(0, one_of(self.chooser, ("@noted", "@doubled(2)", "@lru_cache")))
        cost = self._cost(body, known)
        for use in self._uses(kind, name):
            self.calls.append((use, cost))
        return lines

    def _cost(self, body: Lines, known: list[tuple[str, int]]) -> int:
        """Estimate the heaviest course: lines times the loops around them, callees included."""
        total = 0
        loops: list[int] = []
        for line in body:
            depth = len(line) - len(line.lstrip())
            while loops and depth <= loops[-1]:
                loops.pop()
            times = 4 ** len(loops)
            total += times
            total += sum(cost * times for use, cost in known if use.split("(")[0] in line)
            if line.lstrip().startswith(("for ", "while ", "async for ")):
                loops.append(depth)
        return total

    def _uses(self, kind: str, name: str) -> list[str]:
        if kind == "plain":
            return [
                f"{name}({{0}}, {{1}})",
                f"{name}(c={{0}}, a={{1}})",
                f"{name}(*({{0}}, {{1}}))",
            ]
        if kind == "generator":
            return [
                f"summed({name}({{0}}, {{1}}))",
                f"next({name}({{0}}))",
                f"len(list({name}({{0}}, {{1}})))",
                f"used({name}({{0}}), {self.below(9)})",
                f"(lambda p: (next(p), p.close()))({name}({{0}}))[0]",
            ]
        if kind == "async":
            return [
                f"drive({name}({{0}}, {{1}}))",
                f"drive({name}({{0}}), 2)",
                f"drive({name}({{0}}), 0)",
                f"spoilt({name}({{0}}), {self.below(3)})",
            ]
        return [
            f"drive(collected({name}({{0}}), {{1}} % 5))",
            f"drive(meddled({name}({{0}}), {self.below(4)}))",
        ]

    def recursive(self) -> Lines:
        name = self.fresh("r")
        shape = self.below(3)
        self.calls.append((f"{name}({{0}} % 6)", 60))
        if shape == 0:
            test = self.test(Scope(ints=("n", "k")))
            return [
                f"def {name}(n, k=0, box=Box(2), xs=(4, 5, 6), d={{}}, a=1, b=2, c=0):",
                "    if n <= 0:",
                "        return k",
                f"    if {test}:",
                f"        return {name}(n - 1, k + 1)",
                f"    return {name}(n - 2) + 1",
            ]
        if shape == 1:
            return [
                f"def {name}(n):",
                "    try:",
                "        if n < 1:",
                "            raise Late(n)",
                f"        return {name}(n - 1) + 1",
                "    except Late as fault:",
                "        if n < 3:",
                "            raise",
                "        return fault.hours",
                "    finally:",
                "        log.append(n)",
            ]
        return [
            f"def {name}(n):",
            f"    return sum({name}_walk(n))",
            f"def {name}_walk(n):",
            "    if n > 0:",
            f"        yield from {name}_walk(n - 1)",
            "        yield n",
            f"        yield from {name}_walk(n - 3)",
        ]

    def wide(self) -> Lines:
        """More than 256 constants, names and locals, so that EXTENDED_ARG occurs."""
        name = self.fresh("wide")
        number = 258 + self.below(3) * 10
        raising = self.below(3)
        self.calls.append((f"{name}({{0}})", 700))
        lines = [f"def {name}(n):", "    kept = 0", "    try:"]
        for at in range(number):
            lines.append(f"        v{at} = n + {1000 + at}")
        lines += [
            "        for i in range(3):",
            f"            v{number - 1} += v{number - 2} + i",
            f"            kept += v{number - 1} if i else shared(i)",
            f"        10 // ({raising} - 1)",
            "    except ZeroDivisionError:",
            f"        kept += {5000 + number}",
            "    finally:",
            f"        kept += n and {6000 + number}",
            f"    return kept, [kept + q for q in range(3) if q != {7000 + number}]",
        ]
        return lines

    def long_jump(self) -> Lines:
        """Bodies longer than 256 code units: jumps, loops and handlers far away."""
        name = self.fresh("far")
        number = 40 + 30 * self.below(3)
        kind = self.below(3)
        self.calls.append((f"{name}({{0}})", 700))
        filler = [f"b = (b * 3 + {at}) % 1009" for at in range(number)]
        loop = ("for i in range(n % 3 + 1):", "while i < 3:", "for i in counted(3):")[kind]
        return [
            f"def {name}(n):",
            "    i = 0; b = n",
            f"    {loop}",
            "        i += 1",
            "        if b % 5 == 4:",
            "            continue",
            "        try:",
            "            if b % 3:",
            *indent(indent(indent(indent(filler)))),
            "            elif b % 7 == 1:",
            "                break",
            "            b = 10 // (b % 4)",
            "        except ZeroDivisionError:",
            *indent(indent(indent(filler[:30]))),
            "    else:",
            "        b += 1",
            "    return b",
        ]

    def main(self) -> Lines:
        lines = ["def main():", "    a = b = c = 1", *indent(START)]
        rounds = 1 + self.below(5)
        for _ in range(rounds):
            lines += indent(self._step())
        return [*lines, "    return log, a, b, c, xs, d, box.part"]

    def _step(self) -> Lines:
        body = self.call(Scope()) if self.below(3) else self.block(Scope(), 2)
        shape = weighted(
            self.chooser, [(2, "bare"), (8, "kept"), (1, "thread"), (1, "asyncio"), (1, "group")]
        )
        if shape == "bare":
            return body
        if shape == "kept":
            return [
                "try:",
                *indent(body),
                "except Exception as fault:",
                "    log.append((type(fault).__name__, fault.__traceback__.tb_lineno))",
            ]
        if shape == "thread":
            number = 1 + self.below(3)
            return [
                "def work(p):",
                "    for q in range(p + 2):",
                "        log.append(minus(q, p))",
                f"crew = [threading.Thread(target=work, args=(p,)) for p in range({number})]",
                "for one in crew: one.start(); one.join()",
            ]
        if shape == "asyncio":
            return [
                "async def job(p):",
                "    await asyncio.sleep(0)",
                "    return p + 1",
                "async def jobs():",
                f"    return sum(await asyncio.gather(*(job(p) for p in range({self.below(3)}))))",
                "b = asyncio.run(jobs())",
            ]
        return [
            "try:",
            *indent(self.grouping(Scope())),
            "except Exception as fault:",
            "    log.append(repr(fault))",
        ]
