"""Frequencies of blocks as exact formulas in sizes, worked out from the code without running it."""

from __future__ import annotations

import inspect
from collections.abc import Mapping
from dataclasses import dataclass
from types import CodeType

from steplaw.flow.ledger import Ledger
from steplaw.flow.module import Module, all_codes
from steplaw.flow.pieces import NOTHING, ONCE
from steplaw.flow.symbolic import Stop
from steplaw.flow.trips import make_names
from steplaw.flow.values import Function, Obj, State, Value
from steplaw.flow.walk import Walk, Weight

MOST_ROUNDS = 4


@dataclass(frozen=True, slots=True)
class Derived:
    """What a derivation found.

    Parameters
    ----------
    code : CodeType
        The subject.
    ledger : Ledger
        Frequencies, unknowns, and what stopped it.
    assumed : mapping of str to int
        What it takes for granted, with the first line that needs it.
    unseen : tuple of (int, str)
        Lines and names of calls whose steps are not in it.
    hints : mapping of str to str
        What each argument turned out to be used as.
    recursive : tuple of dict
        Calls of functions by themselves: ``function``, ``line`` and ``text``.
    sizes : frozenset of str
        The sizes that are sizes of arguments, as people write them.
    failed : Stop or None
        What kept the whole from being derived.
    """

    code: CodeType
    ledger: Ledger
    assumed: Mapping[str, int]
    unseen: tuple[tuple[int, str], ...]
    hints: Mapping[str, str]
    recursive: tuple[dict[str, object], ...] = ()
    sizes: frozenset[str] = frozenset()
    failed: Stop | None = None


def derive(
    code: CodeType, module: Module | None = None, hints: Mapping[str, str] | None = None
) -> Derived:
    """Derive the frequencies of a function's blocks from its code, without running it.

    Parameters
    ----------
    code : CodeType
        The function.
    module : Module, optional
        The module around it: its functions are followed where they are called.
    hints : mapping of str to str, optional
        What arguments are: ``int``, ``container`` or ``other``.

    Returns
    -------
    Derived
        Frequencies as exact formulas in the sizes of the arguments and in unknowns.

    Notes
    -----
    What an argument is, is read off its uses: so it is gone through again, with what the round
    before has found, until nothing new turns up.
    """
    known = dict(hints or {})
    for _ in range(MOST_ROUNDS):
        walk, failed = _round(code, module, known)
        found = {**_uses(walk), **(hints or {})}
        if found == known:
            break
        known = found
    _doubt_generators(walk.ledger, code)
    return Derived(
        code,
        walk.ledger,
        walk.assumed,
        tuple(walk.unseen),
        known,
        tuple(walk.recursive),
        frozenset(walk.argument_sizes),
        failed,
    )


def _round(
    code: CodeType, module: Module | None, hints: dict[str, str]
) -> tuple[Walk, Stop | None]:
    walk = Walk(make_names(), dict(hints), module)
    state = State()
    try:
        walk.run(Function(code), arguments(walk, state, code), state, Weight(ONCE, NOTHING), True)
    except Stop as stop:
        walk.ledger.stop(stop.line, stop.reason)
        return walk, stop
    return walk, None


def _doubt_generators(ledger: Ledger, subject: CodeType) -> None:
    """Claim nothing for a generator in which something stopped the derivation.

    What takes its items may then leave it at any of its yields.
    """
    for code in ledger.codes:
        if code is not subject and code.co_flags & inspect.CO_GENERATOR:
            lines = {line for _, _, line in code.co_lines()}
            if any(s.line in lines for s in ledger.stopped):
                ledger.unsure.update(all_codes(code))


def _uses(walk: Walk) -> dict[str, str]:
    return {
        name: next(iter(uses)) if len(uses) == 1 else "other"
        for name, uses in walk.evidence.items()
    }


def arguments(walk: Walk, state: State, code: CodeType) -> list[Value]:
    """Give the symbolic arguments of the subject."""
    count = code.co_argcount + code.co_kwonlyargcount
    extra = [inspect.CO_VARARGS, inspect.CO_VARKEYWORDS]
    count += sum(1 for flag in extra if code.co_flags & flag)
    return [Obj(f"p:{name}", name, "param") for name in code.co_varnames[:count]]
