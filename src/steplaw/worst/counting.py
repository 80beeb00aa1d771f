"""Counts of many inputs, asked of a host: the same inputs give the same counts, so each is asked
once."""

from __future__ import annotations

import ast
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from steplaw.errors import CallError, SubjectError
from steplaw.host.asking import RunFailed
from steplaw.host.runner import Runner

Values = tuple[Any, ...]


@dataclass(frozen=True, slots=True)
class Given:
    """One input.

    Parameters
    ----------
    args : tuple of str
        The positional arguments, written out.
    kwargs : tuple of pair of str
        Keyword arguments by name, written out.
    """

    args: tuple[str, ...]
    kwargs: tuple[tuple[str, str], ...] = ()

    @property
    def text(self) -> str:
        """The input as a feed's value is written."""
        named = [f"{k}={v}" for k, v in self.kwargs]
        if len(self.args) == 1 and not named:
            return self.args[0]
        return f"args({', '.join([*self.args, *named])})"

    def must_be_plain(self) -> None:
        """Refuse what is not made of plain values."""
        for text in (*self.args, *(v for _, v in self.kwargs)):
            _plain(text)


class Strategies(Exception):
    """The feed gives strategies of hypothesis in place of values."""


class Counts:
    """Counts one figure of a subject on inputs that it is given.

    Parameters
    ----------
    runner : Runner
        Asks the host.
    figure : str
        The figure.
    name : str
        The size name.
    """

    #: Inputs counted in one fork.
    BATCH = 400

    def __init__(self, runner: Runner, figure: str, name: str) -> None:
        self.runner = runner
        self.figure = figure
        self.name = name
        self.runs = 0
        self._known: dict[Given, int | None] = {}
        self._drawn: dict[tuple[int, int], list[Given]] = {}

    def drawn(self, n: int, draws: int) -> list[Given]:
        """Give what the feed draws at a size.

        Raises
        ------
        CallError
            If it is not made of plain values, which a file can hold.
        Strategies
            If it is made of strategies of hypothesis.
        """
        if (n, draws) not in self._drawn:
            request = {"do": "written", "at": {self.name: n}, "draws": draws}
            try:
                replies = self._replies(request, n)
            except RunFailed as error:
                raise CallError(error.failure.message) from None
            if any("strategy" in r for r in replies):
                raise Strategies
            found = [Given(tuple(r["args"]), tuple(r["kwargs"].items())) for r in replies]
            for given in found:
                given.must_be_plain()
            self._drawn[n, draws] = found
        return self._drawn[n, draws]

    def of(self, inputs: Sequence[Given]) -> list[int | None]:
        """Count inputs; None for one on which the subject raised or ran past the limit."""
        new = [g for g in dict.fromkeys(inputs) if g not in self._known]
        for start in range(0, len(new), self.BATCH):
            self._count(new[start : start + self.BATCH])
        return [self._known[g] for g in inputs]

    def _count(self, inputs: Sequence[Given]) -> None:
        todo = list(inputs)
        while todo:
            request = {
                "do": "batch",
                "figure": self.figure,
                "inputs": [[list(g.args), dict(g.kwargs)] for g in todo],
            }
            replies: list[dict[str, Any]] = []
            ended = True
            try:
                for reply in self.runner.replies(request, {self.name: 0}, 0):
                    replies = [] if "again" in reply else [*replies, reply]
            except RunFailed as error:
                if error.failure.kind not in ("time", "memory", "crash", "exit"):
                    raise SubjectError(error.failure.message) from None
                ended = False
            for given, reply in zip(todo, replies, strict=False):
                self._known[given] = reply.get("value")
            self.runs += len(replies)
            todo = todo[len(replies) :]
            if not ended and todo:
                self._known[todo.pop(0)] = None
                self.runs += 1

    def decided(self, n: int, rest: Sequence[Any]) -> list[int] | None:
        """Give the order that the adversary finds, None where it fails."""
        try:
            replies = self._replies({"do": "adversary", "size": n, "rest": list(rest)}, n)
        except RunFailed:
            return None
        order: list[int] = replies[-1]["order"]
        return order

    def strategic(self, n: int, examples: int, seed: int) -> list[Given]:
        """Give the dearest inputs that hypothesis finds at a size, the dearest first."""
        request = {
            "do": "strategy",
            "at": {self.name: n},
            "examples": examples,
            "seed": seed,
            "figure": self.figure,
        }
        try:
            replies = self._replies(request, n)
        except RunFailed as error:
            raise CallError(error.failure.message) from None
        self.runs += examples
        found = [Given(tuple(r["args"]), tuple(r["kwargs"].items())) for r in replies]
        for given in found:
            given.must_be_plain()
        return found

    def life(self, n: int) -> list[int]:
        """Give the figure of each operation that the subject gives at a size."""
        request = {"do": "life", "at": {self.name: n}, "figure": self.figure}
        return [r["value"] for r in self._replies(request, n)]

    def held(self, n: int) -> Mapping[str, int]:
        """Give the peaks of memory and elements held at a size."""
        return self._replies({"do": "held", "at": {self.name: n}}, n)[-1]

    def _replies(self, request: Mapping[str, Any], n: int) -> list[Mapping[str, Any]]:
        found: list[Mapping[str, Any]] = []
        for reply in self.runner.replies(request, {self.name: n}, 0):
            if "again" in reply:
                found.clear()
            else:
                found.append(reply)
        return found


def _plain(text: str) -> Any:
    try:
        return ast.literal_eval(text)
    except (ValueError, SyntaxError, MemoryError, RecursionError):
        raise CallError(
            f"the search makes plain values alone (numbers, strings, lists, tuples, sets, "
            f"dictionaries), and the feed gives {text[:60]}",
            "let the subject be a function of plain values that builds what it needs",
        ) from None


def values_of(given: Given) -> Values:
    """Give the positional arguments themselves."""
    return tuple(ast.literal_eval(a) for a in given.args)
