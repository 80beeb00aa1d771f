"""All code of the standard library, rewritten, and what was written read back.

Run as ``PYTHONPATH=tests:src python tests/tally/rewritten.py`` for all of it; the exit status is 1
where a code object comes out wrong. What it is read back with: the interpreter's own
`code.co_positions` and `dis.stack_effect`, and a flow of stack depths over both forms.
"""

from __future__ import annotations

import dis
import sys
import sysconfig
import time
import warnings
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from types import CodeType

sys.path[:0] = [str(Path(__file__).parents[2] / "src")]

from steplaw.flow import isa  # noqa: E402
from steplaw.flow.decode import Decoded, Handler  # noqa: E402
from steplaw.tally.registry import Registry  # noqa: E402
from steplaw.tally.rewrite import Probed  # noqa: E402

_RETURN_GENERATOR = isa.OPMAP["RETURN_GENERATOR"]
_RETURNS_CONSTANT = isa.RETURN | {isa.OPMAP["LOAD_CONST"]}
_ENDS = isa.GOTO | isa.RETURN | isa.ALWAYS_RAISE


def library_files(every: int = 1) -> list[Path]:
    """Give every so manieth source file of the standard library, its tests included."""
    root = Path(sysconfig.get_path("stdlib"))
    files = [f for f in root.rglob("*.py") if "site-packages" not in f.parts]
    return sorted(files)[::every]


def module_code(path: Path) -> CodeType | None:
    """Compile a file; None for the files that are meant not to compile."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return compile(path.read_bytes(), str(path), "exec", dont_inherit=True)
    except (SyntaxError, ValueError):
        return None


def depths(decoded: Decoded) -> list[int | None]:
    """Give the stack depth before each instruction that can be reached, by `dis.stack_effect`."""
    known: list[int | None] = [None] * len(decoded)
    todo = [(0, 0)]
    while todo:
        k, depth = todo.pop()
        while known[k] is None:
            known[k] = depth
            op, arg = decoded.ops[k], decoded.args[k]
            given = arg if op >= dis.HAVE_ARGUMENT else None
            handler = decoded.handlers[k]
            if handler is not None:
                todo.append((handler.target, handler.depth + handler.lasti + 1))
            if decoded.targets[k] >= 0:
                effect = dis.stack_effect(op, given, jump=True)
                todo.append((decoded.targets[k], depth + effect))
            if op in _ENDS or k + 1 == len(decoded):
                break
            # 3.11's figure leaves out the value that a generator is sent when it begins.
            sent = op == _RETURN_GENERATOR
            depth += 1 if sent else dis.stack_effect(op, given, jump=False)
            k += 1
    return known


def faults(probed: Probed) -> Iterator[str]:
    """Tell what is wrong with a code object under probes."""
    old, new = probed.graph.decoded, Decoded(probed.code)
    origins = [probed.origins[unit] for unit in new.starts]
    # A jump back out of line stands for the original one a second time: the first is that one.
    copies = {origin: k for k, origin in reversed(list(enumerate(origins))) if origin >= 0}
    missing = set(range(len(old))) - set(copies)
    if missing:
        yield f"instructions {sorted(missing)} are not there"
        return
    before, after = depths(old), depths(new)
    for k, depth in enumerate(after):
        if depth is not None and not 0 <= depth <= probed.code.co_stacksize:
            yield f"stack depth {depth} at {k}, of {probed.code.co_stacksize}"
    added = set()
    for k, depth in enumerate(before):
        now = after[copies[k]]
        if (depth is None) != (now is None) and not _ends_for(old, k):
            yield f"instruction {k} is reached in one form alone"
        elif depth is not None and now is not None and old.ops[k] not in _RETURNS_CONSTANT:
            added.add(now - depth)
    if len(added - {0}) > 1:
        yield f"instructions have {sorted(added)} more below them"
    for k in range(len(old)):
        yield from _handler_faults(k, old, new, copies[k], origins)
    positions = list(probed.original.co_positions())
    written = list(probed.code.co_positions())
    for k, origin in enumerate(origins):
        if origin >= 0 and written[new.starts[k]] != positions[old.starts[origin]]:
            yield f"instruction {origin} has another place in the source"


def _ends_for(decoded: Decoded, k: int) -> bool:
    """Whether an instruction clears up behind FOR_ITER: a probe out of line has its own."""
    return any(
        op == isa.FOR_ITER and target <= k < target + isa.FOR_ITER_SKIPS
        for op, target in zip(decoded.ops, decoded.targets, strict=True)
    )


def _handler_faults(
    k: int, old: Decoded, new: Decoded, copy: int, origins: list[int]
) -> Iterator[str]:
    """Follow what is written at the new handler to the old one."""
    handler, written = old.handlers[k], new.handlers[copy]
    if handler is None:
        return
    if written is None:
        yield f"instruction {k} has lost its handler"
        return
    at, unwound = _first_original(new, written, origins)
    if at != handler.target:
        yield f"instruction {k} is handled at {at} and not at {handler.target}"
    elif min(unwound) < unwound[-1]:
        yield f"instruction {k} unwinds to {unwound} items, the last of which are gone"


def _first_original(
    new: Decoded, handler: Handler, origins: list[int]
) -> tuple[int | None, list[int]]:
    """Go through inserted instructions, jumps and re-raises to the first original one.

    The second part is the depths that the stack is unwound to on the way.
    """
    k, unwound = handler.target, [handler.depth]
    for _ in range(10_000):
        if origins[k] >= 0:
            return origins[k], unwound
        op = new.ops[k]
        if op in isa.ALWAYS_RAISE:
            entry = new.handlers[k]
            if entry is None:
                return None, unwound
            k = entry.target
            unwound.append(entry.depth)
        elif op in isa.GOTO:
            k = new.targets[k]
        else:
            k += 1
    return None, unwound


@dataclass(slots=True)
class Findings:
    """What came of it: counts, seconds of rewriting alone, and faults by code object."""

    files: int = 0
    not_compiled: list[Path] = field(default_factory=list)
    codes: int = 0
    refused: dict[str, list[str]] = field(default_factory=dict)
    with_handlers: int = 0
    compiling: float = 0.0
    rewriting: float = 0.0
    faulty: list[str] = field(default_factory=list)


def check(files: list[Path]) -> Findings:
    """Rewrite the code of these files and read it back."""
    found = Findings()
    for path in files:
        begun = time.process_time()
        code = module_code(path)
        found.compiling += time.process_time() - begun
        if code is None:
            found.not_compiled.append(path)
            continue
        found.files += 1
        _check_module(code, found)
    return found


def _check_module(code: CodeType, found: Findings) -> None:
    registry = Registry()
    begun = time.process_time()
    registry.rewrite(code)
    found.rewriting += time.process_time() - begun
    found.codes += len(registry.probed) + len(registry.refused)
    for original, reason in registry.refused.items():
        name = f"{original.co_filename}:{original.co_firstlineno} {original.co_qualname}"
        found.refused.setdefault(reason, []).append(name)
    for probed in registry.probed:
        found.with_handlers += bool(probed.original.co_exceptiontable)
        for fault in faults(probed):
            original = probed.original
            found.faulty.append(
                f"{original.co_filename}:{original.co_firstlineno} {original.co_qualname}: {fault}"
            )


def main() -> int:
    """Do all of the standard library and print what came of it."""
    found = check(library_files())
    rate = found.codes / found.rewriting
    whole = found.codes / (found.rewriting + found.compiling)
    print(f"Python {sys.version.split()[0]}: {found.files} files of the standard library")
    print(f"left out, not to be compiled: {len(found.not_compiled)}")
    print(f"{found.codes} code objects, {found.with_handlers} with an exception table")
    print(f"{rate:.0f} a second rewritten; {whole:.0f} a second with compiling")
    print(f"refused: {sum(map(len, found.refused.values()))}")
    for reason, names in found.refused.items():
        print(f"    {reason}: {len(names)}, as {names[0]}")
    print(f"wrong: {len(found.faulty)}")
    for line in found.faulty[:50]:
        print("    " + line)
    return int(bool(found.faulty))


if __name__ == "__main__":
    sys.exit(main())
