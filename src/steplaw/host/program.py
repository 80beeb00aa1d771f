"""Runs one program under probes, in this process, as the interpreter itself would run it."""

from __future__ import annotations

import atexit
import builtins
import importlib.machinery
import os
import sys
from types import CodeType, ModuleType
from typing import Any

from steplaw.tally.install import Installation
from steplaw.tally.registry import Registry
from steplaw.tally.snapshot import Snapshot
from steplaw.toll.hidden import hidden

Baseline = tuple[set[str], dict[str, Any]]
_run = builtins.exec


class _Watch:
    """Writes the tally when the process ends, after the program's own exit handlers."""

    def __init__(self, path: str) -> None:
        self.path = path
        self.pid = os.getpid()
        self.registry = Registry()
        self.installation = Installation(self.registry)
        self.interrupted = False
        atexit.register(self.finish)

    def enter(self) -> None:
        self.installation.enter()
        self.before = Snapshot(self.registry)

    def finish(self) -> None:
        if os.getpid() != self.pid:
            return
        after = Snapshot(self.registry)
        self.installation.leave()
        _write(self.path, self.before, after)
        if self.interrupted:
            _die_of_interrupt()


@hidden
def main(baseline: Baseline) -> None:
    """Run ``PATH (script|module) TARGET ARGS...`` and write the tally to PATH at the end.

    Frames of this function do not show, so that the program's tracebacks are its own.
    """
    path, kind, target, *arguments = sys.argv[1:]
    watch = _Watch(path)
    _forget_imports(baseline)
    code, module = _script(target) if kind == "script" else _module(target)
    sys.argv = [target if kind == "script" else module.__file__ or target, *arguments]
    sys.modules["__main__"] = module
    watch.enter()
    try:
        _run(watch.registry.rewrite(code), module.__dict__)
    except SystemExit:
        raise
    except BaseException as error:
        watch.interrupted = isinstance(error, KeyboardInterrupt)
        sys.last_type, sys.last_value = type(error), error
        sys.last_traceback = error.__traceback__
        sys.excepthook(type(error), error, error.__traceback__)
        raise SystemExit(1) from None


def _forget_imports(baseline: Baseline) -> None:
    """Let the program import anew what steplaw alone has imported so far."""
    modules, finders = baseline
    lines = sys.modules.get("linecache")
    if lines is not None:
        # 3.13 keeps the text of ``-c`` for tracebacks, under the name that eval'd code has too.
        lines.cache.pop("<string>", None)
        getattr(lines, "_interactive_cache", {}).clear()
    for name in [n for n in sys.modules if n not in modules]:
        if name != "steplaw" and not name.startswith("steplaw."):
            del sys.modules[name]
    for name, finder in list(sys.path_importer_cache.items()):
        if name not in finders:
            del sys.path_importer_cache[name]
        elif finders[name] is not None and finder is not None:
            finder._path_mtime = finders[name]  # type: ignore[attr-defined]


def _script(path: str) -> tuple[CodeType, ModuleType]:
    full = os.path.abspath(path)  # noqa: PTH100 - what the interpreter does
    sys.path[0] = os.path.dirname(os.path.realpath(path))  # noqa: PTH120
    module = ModuleType("__main__")
    module.__file__ = full
    module.__loader__ = importlib.machinery.SourceFileLoader("__main__", full)
    _dress(module, None)
    with open(full, "rb") as file:  # noqa: PTH123 - pathlib is not imported for the program
        source = file.read()
    return compile(source, full, "exec", dont_inherit=True), module


def _module(name: str) -> tuple[CodeType, ModuleType]:
    import runpy

    sys.path[0] = os.getcwd()  # noqa: PTH109
    try:
        _, spec, code = runpy._get_module_details(name)  # type: ignore[attr-defined]
    except runpy._Error as error:  # type: ignore[attr-defined]
        sys.exit(f"{sys.executable}: {error}")
    module = ModuleType("__main__")
    module.__file__ = spec.origin
    module.__spec__ = spec
    module.__loader__ = spec.loader
    module.__package__ = spec.parent
    _dress(module, spec.cached)
    return code, module


def _dress(module: ModuleType, cached: str | None) -> None:
    module.__dict__["__builtins__"] = builtins
    module.__dict__["__cached__"] = cached


def _write(path: str, before: Snapshot, after: Snapshot) -> None:
    import json

    from steplaw.tally.assembled import tally_of
    from steplaw.tally.snapshot import counts_between

    notes = [*before.unsettled, *after.unsettled]
    codes = list(counts_between(before, after, notes))
    tally = tally_of(codes, notes)
    with open(path, "w", encoding="utf-8") as file:  # noqa: PTH123
        json.dump(tally.as_json(), file)


def _die_of_interrupt() -> None:
    """End by the signal itself, as the interpreter does after an uncaught KeyboardInterrupt."""
    import signal

    for stream in (sys.stdout, sys.stderr):
        try:
            stream.flush()
        except (AttributeError, OSError, ValueError):
            continue
    signal.signal(signal.SIGINT, signal.SIG_DFL)
    os.kill(os.getpid(), signal.SIGINT)
