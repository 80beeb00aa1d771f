"""The standard library's own tests, run plainly and with all code under probes.

Run as ``PYTHONPATH=tests:src python tests/tally/own_tests.py [MODULE...]``; the exit status is 1
where a test ends otherwise under probes. The tests are those that the interpreter ships in the
package `test`; where it ships none, that is said.
"""

from __future__ import annotations

import importlib.util
import json
import os
import subprocess
import sys
import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

RUNNER = Path(__file__).with_name("outcomes.py")
SOURCE = Path(__file__).parents[2] / "src"

#: Tests of modules written in Python, and of parts of the language that probes could disturb.
MODULES = [
    "difflib",
    "heapq",
    "bisect",
    "statistics",
    "textwrap",
    "fractions",
    "json",
    "decimal",
    "dataclasses",
    "contextlib",
    "contextlib_async",
    "functools",
    "collections",
    "enum",
    "argparse",
    "string",
    "copy",
    "graphlib",
    "ordered_dict",
    "shlex",
    "configparser",
    "csv",
    "queue",
    "calendar",
    "pprint",
    "reprlib",
    "html",
    "random",
    "ipaddress",
    "optparse",
    "getopt",
    "types",
    "abc",
    "fnmatch",
    "glob",
    "posixpath",
    "urlparse",
    "cmd",
    "colorsys",
    "base64",
    "quopri",
    "generators",
    "coroutines",
    "asyncgen",
    "exceptions",
    "except_star",
    "with",
    "yield_from",
    "unpack_ex",
    "iter",
    "raise",
    "baseexception",
]


@dataclass(slots=True)
class Compared:
    """What the tests of one module came to.

    Parameters
    ----------
    module : str
        Name of the module under `test`.
    missing : bool
        Whether this interpreter lacks it.
    tests : int
        Tests that ended plainly.
    plain, probed : float
        Processor time of the tests, in seconds.
    differences : list of str
        Tests that ended otherwise.
    """

    module: str
    missing: bool = False
    tests: int = 0
    plain: float = 0.0
    probed: float = 0.0
    steps: int = 0
    differences: list[str] = field(default_factory=list)


def compare(module: str) -> Compared:
    """Run the tests of a module both ways."""
    name = f"test.test_{module}"
    if importlib.util.find_spec("test") is None or importlib.util.find_spec(name) is None:
        return Compared(module, missing=True)
    with tempfile.TemporaryDirectory() as folder:
        tally = Path(folder, "tally.json")
        plain = _run([str(RUNNER)], name, folder)
        probed = _run(["-m", "steplaw", "tally", "--json", str(tally), str(RUNNER)], name, folder)
        steps = json.loads(tally.read_text())["steps"] if tally.is_file() else 0
    found = Compared(module, steps=steps)
    if isinstance(plain, str) or isinstance(probed, str):
        found.differences = [f"{name}: plainly {_ended(plain)}, under probes {_ended(probed)}"]
        return found
    found.tests = len(plain["outcomes"])
    found.plain, found.probed = plain["seconds"], probed["seconds"]
    found.differences = list(_differences(plain["outcomes"], probed["outcomes"]))
    return found


def _run(words: Sequence[str], name: str, folder: str) -> dict[str, Any] | str:
    """Give the outcomes, or the last line of what was printed instead."""
    path = Path(folder, "outcomes.json")
    path.unlink(missing_ok=True)
    done = subprocess.run(
        [sys.executable, *words, str(path), name],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(SOURCE)},
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        errors="replace",
        timeout=900,
    )
    if not path.is_file():
        return (done.stderr.strip().splitlines() or [f"status {done.returncode}"])[-1]
    outcomes: dict[str, Any] = json.loads(path.read_text(encoding="utf-8"))
    return outcomes


def _ended(found: dict[str, Any] | str) -> str:
    return found if isinstance(found, str) else f"{len(found['outcomes'])} tests"


def _differences(
    plain: Mapping[str, list[list[str]]], probed: Mapping[str, list[list[str]]]
) -> list[str]:
    different = []
    for test in sorted(plain.keys() | probed.keys()):
        before, after = plain.get(test, []), probed.get(test, [])
        if [o for o, _ in before] != [o for o, _ in after]:
            why = (after[0][1].strip().splitlines() if after else []) or [""]
            different.append(
                f"{test}: {' '.join(o for o, _ in before) or 'not run'}, "
                f"under probes {' '.join(o for o, _ in after) or 'not run'} {why[-1]}"
            )
    return different


def main() -> int:
    """Print a line for each module."""
    different = missing = tests = modules = 0
    for module in sys.argv[1:] or MODULES:
        found = compare(module)
        if found.missing:
            missing += 1
            print(f"{module:18} this interpreter ships no such tests", flush=True)
            continue
        modules += 1
        tests += found.tests
        different += len(found.differences)
        print(
            f"{module:18} {found.tests:5} tests, {len(found.differences)} end otherwise, "
            f"{found.steps:>12,} steps, {found.plain:.2f} s and {found.probed:.2f} s",
            flush=True,
        )
        for line in found.differences:
            print("    " + line)
    print(
        f"Python {sys.version.split()[0]}: {modules} modules, {tests} tests, "
        f"{different} end otherwise under probes; {missing} modules without tests"
    )
    return int(bool(different))


if __name__ == "__main__":
    sys.exit(main())
