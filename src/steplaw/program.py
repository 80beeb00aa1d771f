"""The tally of a whole program: run as it is, with probes in all its Python code.

The program runs in a process of its own with the caller's standard streams, working folder and
signals; the tally is written when that process ends.
"""

from __future__ import annotations

import json
import os
import platform
import shlex
import signal
import subprocess
import sys
import tempfile
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from steplaw.errors import CallError
from steplaw.host.program_start import START
from steplaw.record import TallyRecord


def run_program(target: str, arguments: Sequence[str], *, module: bool) -> tuple[TallyRecord, int]:
    """Run a program under probes.

    Parameters
    ----------
    target : str
        Path of a script, or name of a module.
    arguments : sequence of str
        The program's arguments.
    module : bool
        Whether `target` is a module, as in ``python -m``.

    Returns
    -------
    record : TallyRecord
        The tally (``steplaw.tally/1``).
    status : int
        The program's exit status; negative for a signal that ended it.

    Raises
    ------
    CallError
        If there is no such script.
    """
    if not module and not Path(target).is_file():
        raise CallError(f"there is no script {target}", "give the path of a Python file")
    handle, path = tempfile.mkstemp(prefix="steplaw-", suffix=".json")
    os.close(handle)
    try:
        command = [
            sys.executable,
            "-c",
            START,
            path,
            "module" if module else "script",
            target,
            *arguments,
        ]
        status = _wait(subprocess.Popen(command))
        text = Path(path).read_text(encoding="utf-8")
    finally:
        Path(path).unlink(missing_ok=True)
    if not text:
        raise CallError(
            f"{target} left no tally: its process ended without running its exit handlers "
            f"(status {status})",
            "os._exit, a signal or a crash ends a program so",
        )
    return TallyRecord(_record(json.loads(text), [target, *arguments], status)), status


def _wait(process: subprocess.Popen[bytes]) -> int:
    """Wait for the program; an interrupt is the program's own affair."""
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        return process.wait()
    finally:
        signal.signal(signal.SIGINT, before)


def _record(tally: dict[str, Any], program: list[str], status: int) -> dict[str, Any]:
    from steplaw import __version__

    return {
        "schema": "steplaw.tally/1",
        "steplaw": __version__,
        "python": platform.python_version(),
        "program": shlex.join(program),
        "exit_status": status,
        **tally,
    }
