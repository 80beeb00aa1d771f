"""Expressions of generated programs: mostly whole numbers, some of them raising."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

from .choosing import Chooser, one_of, weighted

Lines = list[str]
CAUGHT = (
    "Exception",
    "ValueError",
    "(KeyError, IndexError)",
    "Lost",
    "Late",
    "ZeroDivisionError",
    "LookupError",
    "BaseException",
)
DIVISORS = ("3", "7", "(b - b or 2)")


def indent(lines: Lines) -> Lines:
    return [f"    {line}" for line in lines]


@dataclass(frozen=True)
class Scope:
    """What is at hand where a statement stands.

    Parameters
    ----------
    kind : str
        'plain', 'generator', 'async' or 'asyncgen': what `yield` and `await` may be used.
    ints : tuple of str
        Names bound to whole numbers.
    depth : int
        Nested statements so far.
    weight : int
        How often this place runs at most in one call of the function.
    in_loop : bool
        Whether `break` and `continue` are allowed.
    may_return : bool
        Whether `return` is allowed (not inside an except* handler, nor in an async generator).
    """

    kind: str = "plain"
    ints: tuple[str, ...] = ("a", "b", "c")
    depth: int = 0
    weight: int = 1
    in_loop: bool = False
    may_return: bool = True
    outer: tuple[str, ...] = field(default=())

    def inside(self, times: int = 1, **changes: object) -> Scope:
        return replace(
            self,
            depth=self.depth + 1,
            weight=self.weight * times,
            **changes,  # type: ignore[arg-type]
        )


class Expressions:
    """Builds expression source text.

    Parameters
    ----------
    chooser : Chooser
        Where choices come from.
    """

    def __init__(self, chooser: Chooser) -> None:
        self.chooser = chooser
        self.calls: list[tuple[str, int]] = []
        self.serial = 0

    def block(self, scope: Scope, most: int = 3) -> Lines:
        """Give one to `most` statements; see `Statements`."""
        raise NotImplementedError

    def below(self, limit: int) -> int:
        return self.chooser.below(limit)

    def fresh(self, stem: str) -> str:
        self.serial += 1
        return f"{stem}{self.serial}"

    def name(self, scope: Scope) -> str:
        return one_of(self.chooser, scope.ints)

    def number(self, scope: Scope, depth: int = 2) -> str:
        """Give an expression for a whole number."""
        make = weighted(
            self.chooser,
            [
                (6, self._plain),
                (5, self._constant),
                *(
                    [
                        (6, self._arithmetic),
                        (2, self._ternary),
                        (2, self._either),
                        (2, self._element),
                        (2, self._native),
                        (1, self._walrus),
                        (1, self._lambda),
                        (2, self._comprehension_sum),
                        (1, self._text_length),
                        (1, self._operators),
                        (1, self._comparison_as_number),
                        (1, self._star_call),
                    ]
                    if depth > 0
                    else []
                ),
            ],
        )
        return make(scope, depth)

    def _plain(self, scope: Scope, depth: int) -> str:
        return self.name(scope)

    def _constant(self, scope: Scope, depth: int) -> str:
        return one_of(self.chooser, ("0", "1", "2", "5", "-3", "300", "True"))

    def _arithmetic(self, scope: Scope, depth: int) -> str:
        operator = one_of(self.chooser, ("+", "-", "*", "//", "%", "&", "|", "^", ">>"))
        left = self.number(scope, depth - 1)
        if operator in ("//", "%"):
            right = one_of(self.chooser, (*DIVISORS, self.name(scope)))
        elif operator == ">>":
            right = "2"
        else:
            right = self.number(scope, depth - 1)
        if operator == "*":
            return f"({left} * {right} % 1009)"
        return f"({left} {operator} {right})"

    def _ternary(self, scope: Scope, depth: int) -> str:
        test = self.test(scope, depth - 1)
        yes, no = self.number(scope, depth - 1), self.number(scope, depth - 1)
        return f"({yes} if {test} else {no})"

    def _either(self, scope: Scope, depth: int) -> str:
        words = one_of(self.chooser, ("or", "and"))
        parts = [self.number(scope, depth - 1) for _ in range(2 + self.below(2))]
        return "(" + f" {words} ".join(parts) + ")"

    def _element(self, scope: Scope, depth: int) -> str:
        return one_of(
            self.chooser,
            (
                "xs[0]",
                f"xs[{self.number(scope, 0)} % 3]",
                f"xs[{self.number(scope, 0)}]",
                f"d.get({self.name(scope)}, 4)",
                f"d[{self.number(scope, 0)}]",
                "sum(xs[1:3])",
                "len(xs[::2])",
                "(xs[-1:] or [6])[0]",
                "box.part",
                "box.twice",
                "box.absent",
                "box[1]",
            ),
        )

    def _native(self, scope: Scope, depth: int) -> str:
        inner = self.number(scope, depth - 1)
        return one_of(
            self.chooser,
            (
                f"abs({inner})",
                f"max({inner}, {self.name(scope)})",
                f"int(str({inner}))",
                f"divmod({inner}, 3)[1]",
                f"sum(map(lambda p: p + 1, ({inner}, 2)))",
                f"max(xs, key=lambda q: (q - {self.name(scope)}) % 5)",
                f"reduce(lambda p, q: (p + q) % 97, xs, {inner})",
                f"partial(minus, {inner})(2)",
                f"eval('a + {self.below(3)}')",
                f"remembered({inner} % 4)",
                f"shared({inner})",
                f"int('x{self.below(2)}')",
                f"hop({self.below(4)})",
            ),
        )

    def _walrus(self, scope: Scope, depth: int) -> str:
        name = one_of(self.chooser, ("a", "b", "c"))
        return f"({name} := {self.number(scope, depth - 1)})"

    def _lambda(self, scope: Scope, depth: int) -> str:
        free = self.name(scope)
        inner = self.number(scope, 0)
        return one_of(
            self.chooser,
            (
                f"(lambda p: p + 1)({inner})",
                f"(lambda p, q=3: p - q + {free})({inner})",
                f"(lambda *p, **q: len(p) + len(q))({inner}, z={free})",
                f"(lambda: (lambda: {free})())()",
            ),
        )

    def _comprehension_sum(self, scope: Scope, depth: int) -> str:
        listing = self.listing(scope, depth - 1)
        return one_of(
            self.chooser, (f"sum({listing})", f"len({listing})", f"max({listing}, default=1)")
        )

    def listing(self, scope: Scope, depth: int) -> str:
        """Give an expression for a list of whole numbers."""
        v, w = self.fresh("v"), self.fresh("w")
        inner = self.inner_number(scope, v)
        test = one_of(
            self.chooser, (f"{v} % 2", f"{v} > 1 and {v} < 9", f"{v} != {self.name(scope)}", inner)
        )
        times = 1 + self.below(4)
        options = (
            "xs",
            f"[{inner} for {v} in range({times})]",
            f"[{inner} for {v} in xs if {test}]",
            f"list({inner} for {v} in range({times}) if {test})",
            f"[{inner} + {w} for {v} in range({times}) for {w} in range({v}) if {w} % 2 == 0]",
            f"[sum([{w} * {v} for {w} in range(2)]) for {v} in xs]",
            f"list({{{v} % 3: {inner} for {v} in xs}}.values())",
            f"sorted({{{inner} for {v} in range({times})}})",
            f"[*xs, *({w} for {w} in (1, 2))]",
            f"[(lambda: {v})() for {v} in range({times})]",
            f"[{v} for {v} in sorted(xs, key=lambda p: (-p, p))]",
            f"[{v} for {v} in map(minus, xs, xs[1:]) if {test}]",
            f"[{v} for {v}, {w} in zip(xs, range({times}))]",
            f"[{v} for {v} in counted({times})]",
            f"[10 // ({v} - 1) for {v} in range({times})]",
            f"[{w} for {v} in range({times}) if ({w} := {inner}) or {v}]",
        )
        return one_of(self.chooser, options)

    def inner_number(self, scope: Scope, variable: str) -> str:
        return one_of(
            self.chooser,
            (
                variable,
                f"{variable} + {self.name(scope)}",
                f"({variable} * 3) % 5",
                f"(1 if {variable} else {self.name(scope)})",
                f"minus({variable}, 1)",
                f"xs[{variable}]",
            ),
        )

    def _text_length(self, scope: Scope, depth: int) -> str:
        inner, free = self.number(scope, 0), self.name(scope)
        return "len(" + one_of(
            self.chooser,
            (
                f"f'{{{inner}}}')",
                f"f'{{{inner}!r:>6}}|{{{free}:{{b % 4 + 1}}d}}')",
                f"'-'.join(str(p) for p in ({inner}, {free})))",
                f"'%s' % ({inner},))",
                f"f'{{{free} = }}')",
            ),
        )

    def _operators(self, scope: Scope, depth: int) -> str:
        inner, free = self.number(scope, 0), self.name(scope)
        return one_of(
            self.chooser,
            (
                f"(Box({inner}) + Box({free})).part",
                f"(Box({inner}) < Box({free}))",
                f"max(Box({inner}), Box({free})).part",
                f"int(Box({inner}) == Box({free}))",
                f"len(Box({inner}))",
                f"Box({inner})(2)",
                f"(2 in Box({inner}))",
                f"[*Box({inner} % 3)][-1]",
                f"Deck({inner}).twice",
                f"Deck({inner}).worth({free})",
            ),
        )

    def _comparison_as_number(self, scope: Scope, depth: int) -> str:
        return f"({self.test(scope, depth - 1)})"

    def _star_call(self, scope: Scope, depth: int) -> str:
        inner, free = self.number(scope, 0), self.name(scope)
        return one_of(
            self.chooser,
            (
                f"gathered({inner}, *xs[:2])",
                f"gathered(*xs, z={inner}, **{{'y': {free}}})",
                f"gathered({inner}, *(), **{{}})",
                f"minus(*({inner}, {free}))",
                f"minus(**{{'p': {inner}, 'q': {free}}})",
                f"minus({inner})",
            ),
        )

    def test(self, scope: Scope, depth: int = 1) -> str:
        """Give an expression used as a condition."""
        left, right = self.number(scope, max(depth - 1, 0)), self.number(scope, 0)
        relation = one_of(self.chooser, ("<", ">", "==", "!=", "<=", ">="))
        options = [
            f"{left} {relation} {right}",
            f"{left} % 2",
            f"0 < {left} {relation} {right} < 90",
            f"not {left}",
            f"{left} in xs",
            f"{left} not in d",
            f"box is {one_of(self.chooser, ('None', 'not None'))}",
        ]
        if depth > 0:
            other = self.test(scope, depth - 1)
            options += [f"{left} and {other}", f"({left} or {other}) and {right}"]
        return one_of(self.chooser, options)
