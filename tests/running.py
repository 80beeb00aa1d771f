"""Runs the real command in a process of its own."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import Any

TESTS = Path(__file__).parent
ROOT = TESTS.parent
SOURCE = str(ROOT / "src")


@dataclass(frozen=True)
class Ended:
    """How a process ended, and what it said."""

    status: int
    out: str
    err: str

    @property
    def record(self) -> dict[str, Any]:
        """The record alone on standard output."""
        loaded: dict[str, Any] = json.loads(self.out)
        return loaded

    @property
    def message(self) -> str:
        """The one line on standard error that is steplaw's own message."""
        lines = [line for line in self.err.splitlines() if line.startswith("steplaw: ")]
        assert len(lines) == 1, self.err
        assert "Traceback" not in self.err
        return lines[0].removeprefix("steplaw: ")


def environment(**more: str) -> dict[str, str]:
    return {**os.environ, "PYTHONPATH": SOURCE, "COLUMNS": "100", **more}


def python(*words: str, folder: Path = ROOT, stdin: str | None = None, **env: str) -> Ended:
    """Run the interpreter that runs the tests."""
    done = subprocess.run(
        [sys.executable, *words],
        cwd=folder,
        env=environment(**env),
        input=stdin,
        stdin=subprocess.DEVNULL if stdin is None else None,
        capture_output=True,
        encoding="utf-8",
        timeout=120,
    )
    return Ended(done.returncode, done.stdout, done.stderr)


def steplaw(*words: str, folder: Path = ROOT, stdin: str | None = None, **env: str) -> Ended:
    """Run ``steplaw`` with these words."""
    return python("-m", "steplaw", *words, folder=folder, stdin=stdin, **env)
