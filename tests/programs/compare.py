"""One program, three ways: as it is, under the referee, and under probes; every figure compared."""

from __future__ import annotations

import gc
import os
import sys
import traceback
import types
import warnings
from collections.abc import Callable
from pathlib import Path
from typing import Any

from referee import Counts, referee, steady
from steplaw.tally import Counter, Tally, counting

Make = Callable[[], Callable[[], Any]]
HARNESS = {str(Path(__file__)), str(Path(__file__).parents[1] / "referee.py")}
MODULE = "program"

#: Count with the native ledger as well: no count, result or traceback may differ for it.
WITH_LEDGER = bool(os.environ.get("STEPLAW_LEDGER"))


def from_source(source: str) -> Make:
    """Give what makes the program afresh: its code run in a new module, its `main`."""
    code = compile(source, f"<{MODULE}>", "exec")

    def make() -> Callable[[], Any]:
        module = types.ModuleType(MODULE)
        sys.modules[MODULE] = module
        exec(code, module.__dict__)
        main: Callable[[], Any] = module.__dict__["main"]
        return main

    return make


def differences(make: Make) -> list[str]:
    """Compare tally and referee for a program; no line means that all figures are equal."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        hook, sys.unraisablehook = sys.unraisablehook, sys.__unraisablehook__
        try:
            _outcome(make())
            plain = _outcome(make())
            before = referee(make())
            watched = _describe(before.result, before.error)
            counter, outcome = _probed(make())
            after = referee(make())
        finally:
            sys.unraisablehook = hook
    if before.instructions != after.instructions:
        return _unsteady(before, after)
    found = _by_instruction(before, counter.instructions())
    found += _by_tally(before, counter.tally)
    for name, other in (("probes", outcome), ("referee", watched)):
        if other != plain:
            found.append(f"outcome: {plain} as it is, {other} under {name}")
    return found


def _probed(call: Callable[[], Any]) -> tuple[Counter, Any]:
    result: Any = None
    error: BaseException | None = None
    with steady(), counting(ledger=WITH_LEDGER) as counter:
        try:
            result = call()
        except BaseException as fault:
            error = fault
    return counter, _describe(result, error)


def _outcome(call: Callable[[], Any]) -> Any:
    result: Any = None
    error: BaseException | None = None
    with steady():
        try:
            result = call()
        except BaseException as fault:
            error = fault
    return _describe(result, error)


def _describe(result: Any, error: BaseException | None) -> Any:
    """Give what a person would see: the value, or the exception and where it went through."""
    # Generators dropped in a cycle may still write to what the program returned.
    gc.collect(1)
    if error is None:
        return repr(result)
    trail = [
        (frame.name, frame.lineno, frame.end_lineno, frame.colno, frame.end_colno)
        for frame in traceback.TracebackException.from_exception(error).stack
        if frame.filename not in HARNESS
    ]
    return repr(error), trail


def _unsteady(before: Counts, after: Counts) -> list[str]:
    keys = before.instructions.keys() | after.instructions.keys()
    changed = [k for k in keys if before.instructions.get(k) != after.instructions.get(k)]
    return [f"unsteady: the referee itself differs from run to run at {sorted(changed)[:4]}"]


def _by_instruction(expected: Counts, found: dict[Any, dict[int, int]]) -> list[str]:
    lines = []
    for key in sorted(expected.instructions.keys() | found.keys()):
        ours, theirs = found.get(key, {}), expected.instructions.get(key, {})
        if ours == theirs:
            continue
        places = [
            f"@{offset}: {theirs.get(offset, 0)} reported, {ours.get(offset, 0)} counted"
            for offset in sorted(ours.keys() | theirs.keys())
            if ours.get(offset, 0) != theirs.get(offset, 0)
        ]
        lines.append(f"{key}: " + "; ".join(places[:6]) + (" ..." if len(places) > 6 else ""))
    return lines


def _by_tally(expected: Counts, tally: Tally) -> list[str]:
    lines = []
    if tally.steps != expected.total:
        lines.append(f"steps: {expected.total} reported, {tally.steps} counted")
    names = expected.opcodes.keys() | tally.opcodes.keys()
    lines += [
        f"opcode {name}: {expected.opcodes[name]} reported, {tally.opcodes.get(name, 0)} counted"
        for name in sorted(names)
        if expected.opcodes[name] != tally.opcodes.get(name, 0)
    ]
    own = {(f.file, f.name, f.line): f for f in tally.functions}
    for key, offsets in expected.instructions.items():
        steps = own[key].steps if key in own else 0
        if steps != sum(offsets.values()):
            lines.append(f"{key}: {sum(offsets.values())} steps reported, {steps} counted")
        calls = own[key].calls if key in own else 0
        if calls != expected.calls[key]:
            lines.append(f"{key}: {expected.calls[key]} calls reported, {calls} counted")
    return lines + _by_line(expected, tally)


def _by_line(expected: Counts, tally: Tally) -> list[str]:
    """Compare lines; an instruction without a line may be put on the line it continues."""
    counted = {(x.file, x.line): x.steps for x in tally.lines}
    spare = expected.total - sum(expected.lines.values())
    lines = []
    for place in sorted(expected.lines.keys() | counted.keys()):
        extra = counted.get(place, 0) - expected.lines[place]
        spare -= max(extra, 0)
        if extra < 0 or spare < 0:
            lines.append(
                f"line {place}: {expected.lines[place]} reported, {counted.get(place, 0)} counted"
            )
    return lines


def warm_up() -> None:
    """Run one small program all three ways, so that what they load is loaded."""
    differences(from_source("def main():\n    return 1\n"))
