"""A light process that compares programs, each in a forked child.

It has little loaded, so that setting probes is quick, and each program begins in the same state.
A crash of the interpreter ends only the child. One job a line on standard input, as JSON: the
source of a program or the name of a picked call; one line back: the list of differences.
"""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import traceback
from collections.abc import Callable
from pathlib import Path
from types import TracebackType
from typing import Any

TESTS = Path(__file__).parents[1]
LONGEST_SECONDS = 60


class Worker:
    """The process, seen from the tests; a context manager.

    Parameters
    ----------
    *prepared : str
        Names of picked calls whose modules are loaded from the start.
    """

    def __init__(self, *prepared: str) -> None:
        self._command = [sys.executable, "-m", "programs.worker", *prepared]

    def __enter__(self) -> Worker:
        paths = [str(TESTS), str(TESTS.parent / "src")]
        environment = {
            **os.environ,
            "PYTHONHASHSEED": "0",
            "PYTHONPATH": os.pathsep.join(paths),
        }
        self._process = subprocess.Popen(
            self._command,
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            text=True,
            env=environment,
        )
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        value: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        assert self._process.stdin
        self._process.stdin.close()
        self._process.wait(30)

    def differences(self, **job: Any) -> list[str]:
        """Compare a program by source=..., or a picked call by picked=..., for all figures."""
        assert self._process.stdin and self._process.stdout
        self._process.stdin.write(json.dumps(job) + "\n")
        self._process.stdin.flush()
        answer = self._process.stdout.readline()
        if not answer:
            raise RuntimeError(f"the worker ended with status {self._process.wait()}")
        found: list[str] = json.loads(answer)
        return found


def _work(job: dict[str, Any]) -> list[str]:
    from programs.compare import differences, from_source

    if "source" in job:
        return differences(from_source(job["source"]))
    if "workload" in job:
        from bench.workloads import small_call

        return differences(lambda: small_call(job["workload"]))
    from programs.picked import picked_call

    call = picked_call(job["picked"])
    return differences(lambda: call)


def apart(work: Callable[[], list[str]]) -> list[str]:
    """Do work in a forked child, where a crash of the interpreter is only one more finding."""
    reading, writing = os.pipe()
    child = os.fork()
    if child == 0:
        os.close(reading)
        _child(work, writing)
    os.close(writing)
    with os.fdopen(reading, "rb") as pipe:
        data = pipe.read()
    _, status = os.waitpid(child, 0)
    if not data:
        return [f"the interpreter ended with status {status}"]
    found: list[str] = json.loads(data)
    return found


def _child(work: Callable[[], list[str]], writing: int) -> None:
    quiet = os.open(os.devnull, os.O_WRONLY)
    os.dup2(quiet, 1)
    os.dup2(quiet, 2)
    signal.alarm(LONGEST_SECONDS)
    try:
        found = work()
    except BaseException as fault:
        found = ["harness: " + "".join(traceback.format_exception(fault))]
    with os.fdopen(writing, "w") as pipe:
        json.dump(found, pipe)
    os._exit(0)


def main() -> None:
    # What generated programs import is rewritten once here, not in each child.
    import asyncio  # noqa: F401

    import programs.compare

    programs.compare.warm_up()
    answers = os.dup(1)
    with os.fdopen(answers, "w") as out:
        for line in sys.stdin:
            job = json.loads(line)
            out.write(json.dumps(apart(lambda job=job: _work(job))) + "\n")  # type: ignore[misc]
            out.flush()


if __name__ == "__main__":
    main()
