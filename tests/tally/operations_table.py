"""Operation classes of one set of sources, counted here or compared with the kept table.

``python tests/tally/operations_table.py`` compares this interpreter's counts with
`operations.json`, ``--write`` writes it; run with `PYTHONPATH=tests:src PYTHONHASHSEED=0`. The
table is written on one version, and the tests of every version compare with it.
"""

from __future__ import annotations

import gc
import hashlib
import json
import os
import re
import sys
import types
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from programs import constructs
from programs.generate import seeded_program
from programs.prelude import HELPERS
from referee import steady
from steplaw.feed import bind
from steplaw.subject import SubjectRef, locate
from steplaw.tally import counting
from steplaw.tally.classes import operations

TABLE = Path(__file__).with_name("operations.json")
SAMPLES = Path(__file__).parents[2] / "samples" / "ferry"
#: Programs made from these seeds.
SEEDS = range(int(os.environ.get("STEPLAW_PROGRAMS", "90")))
SIZES = (1, 2, 5, 9)
#: A comprehension's own function, which it has on some versions: part of what is around it.
_COMPREHENSION = re.compile(r"\.?<(list|set|dict)comp>")

Functions = dict[str, str]


@dataclass(frozen=True)
class Job:
    """One source to be counted.

    Parameters
    ----------
    name, file : str
        What it is called, and the file name of its code.
    run : callable
        Runs it and gives its result.
    source : str
        Its text, where it was made here.
    """

    name: str
    file: str
    run: Callable[[], Any]
    source: str = ""


def _generated(seed: int) -> Job:
    source, file = seeded_program(seed), f"<program {seed}>"

    def run() -> Any:
        module = types.ModuleType("program")
        sys.modules["program"] = module
        exec(compile(source, file, "exec"), module.__dict__)
        return module.main()

    return Job(str(seed), file, run, source)


def _sample(path: Path, name: str) -> Job:
    subject = locate(SubjectRef(str(path), name, True))
    feed = bind(None, subject)
    inputs = [feed.make({"n": n}, 0) for n in SIZES]
    return Job(
        f"{path.stem}.{name}",
        subject.function.__code__.co_filename,
        lambda: [subject.function(*made.args, **made.kwargs) for made in inputs],
    )


def jobs(kind: str) -> list[Job]:
    """Give the sources of a kind."""
    if kind == "generated":
        return [_generated(seed) for seed in SEEDS]
    if kind == "constructs":
        file = constructs.__file__
        return [Job(name, file, getattr(constructs, name)) for name in constructs.names()]
    return [
        _sample(path, name)
        for path in sorted(SAMPLES.glob("*.py"))
        for name in re.findall(r"^def (\w+)", path.read_text(encoding="utf-8"), re.M)
    ]


def counted(jobs: list[Job]) -> tuple[list[str], dict[str, dict[str, Functions]]]:
    """Give what each source returns or raises, and operations by file, function and class."""
    with steady(), counting() as counter:
        outcomes = [_outcome(job.run) for job in jobs]
    found: dict[str, dict[str, dict[str, int]]] = {job.file: {} for job in jobs}
    for item in counter.codes:
        code = item.probed.original
        if code.co_filename in found:
            name = _COMPREHENSION.sub("", code.co_qualname).removesuffix(".<locals>")
            row = found[code.co_filename].setdefault(name, {})
            for operation, n in operations(item):
                row[operation] = row.get(operation, 0) + n
    return outcomes, {
        file: {
            name: " ".join(f"{operation} {n}" for operation, n in sorted(row.items()))
            for name, row in sorted(functions.items())
        }
        for file, functions in found.items()
    }


def _outcome(call: Callable[[], Any]) -> str:
    try:
        return repr(call())
    except BaseException as fault:
        return repr(fault)
    finally:
        gc.collect(1)


def count(kind: str) -> dict[str, Any]:
    """Count all sources of a kind: what each came to, and the operations of its functions."""
    warnings.simplefilter("ignore")
    todo = jobs(kind)
    outcomes, functions = counted(todo)
    table: dict[str, Any] = {}
    for job, outcome in zip(todo, outcomes, strict=True):
        table[job.name] = {"outcome": outcome if len(outcome) < 40 else _digest(outcome)}
        if job.source:
            table[job.name] |= {"source": _digest(job.source), "functions": functions[job.file]}
    if kind != "generated":
        table["all"] = {"functions": {n: r for file in functions.values() for n, r in file.items()}}
    return table


KINDS = ("constructs", "samples", "generated")


def differences(expected: dict[str, Any], found: dict[str, Any]) -> list[str]:
    """Tell where the counts of two versions differ."""
    lines = []
    for name in sorted(expected.keys() | found.keys()):
        one, other = expected.get(name), found.get(name)
        if one is None or other is None:
            lines.append(f"{name}: {other}, not {one}")
            continue
        lines += [
            f"{name}: another {part}"
            for part in ("source", "outcome")
            if one.get(part) != other.get(part)
        ]
        lines += [
            f"{name} {function}: {ours.get(function)}, not {theirs.get(function)}"
            for ours, theirs in [(other.get("functions", {}), one.get("functions", {}))]
            for function in sorted(ours.keys() | theirs.keys())
            if ours.get(function) != theirs.get(function)
        ]
    return lines


def own_functions(table: dict[str, Any]) -> int:
    """Count the functions of generated programs, those of their fixed helpers left out."""
    helpers = {name.split(".")[0] for text in HELPERS.values() for name in _defined(text)}
    return sum(
        name.split(".")[0] not in helpers and name not in ("main", "<module>")
        for row in table["generated"].values()
        for name in row["functions"]
    )


def _defined(text: str) -> list[str]:
    return re.findall(r"^(?:async def|def|class) (\w+)", text, re.M)


def _digest(text: str) -> str:
    return hashlib.sha256(text.encode()).hexdigest()[:12]


def main(words: list[str]) -> int:
    """Write the table, print the counts of the kinds named, or compare with the table."""
    if words[:1] == ["--count"]:
        print(json.dumps({kind: count(kind) for kind in words[1:]}))
        return 0
    found = {kind: count(kind) for kind in KINDS}
    if words == ["--write"]:
        TABLE.write_text(json.dumps(found, indent=1) + "\n", encoding="utf-8")
        print(f"{own_functions(found)} generated functions")
        return 0
    table = json.loads(TABLE.read_text(encoding="utf-8"))
    lines = [f"{kind} {x}" for kind in KINDS for x in differences(table[kind], found[kind])]
    print("\n".join(lines))
    functions = sum(len(row.get("functions", ())) for kind in KINDS for row in found[kind].values())
    version = sys.version.split()[0]
    print(
        f"Python {version}: {functions} functions, {own_functions(found)} of them generated, "
        f"{len(lines)} differences"
    )
    return int(bool(lines))


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
