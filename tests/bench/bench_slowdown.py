"""How much slower programs run under probes, and under the interpreter's own opcode events.

Run as ``PYTHONPATH=tests:src python tests/bench/bench_slowdown.py [--rounds N] [--no-events]
[NAME...]``. Each program has a process of its own for each way of running, and the rounds of the
ways take turns, so that a slow spell of the machine falls on all of them. The figure is the ratio
of the least processor time of a round. Start-up and the rewriting of code come before the first
round and are not in it. The opcode events run at the small scale of the referee, as often as gives
a time to measure, against the plain program at that scale.
"""

from __future__ import annotations

import argparse
import gc
import itertools
import math
import platform
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

ROOT = Path(__file__).parents[2]
PATHS = [str(ROOT / "tests"), str(ROOT / "src")]
sys.path[:0] = PATHS

from bench.workloads import find, programs_folder, workloads  # noqa: E402

LEAST_SECONDS = 0.004
Row = dict[str, Any]


class Runner:
    """A process that runs one program one way, a round for each call."""

    def __init__(self, way: str, name: str, scale: str) -> None:
        self._process = subprocess.Popen(
            [sys.executable, __file__, "--child", way, name, scale],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            text=True,
        )
        self._answer()

    def _answer(self) -> list[str]:
        assert self._process.stdout
        words = self._process.stdout.readline().split()
        if not words:
            raise RuntimeError(f"a run ended with status {self._process.wait()}")
        return words

    def ask(self, word: str) -> list[str]:
        assert self._process.stdin
        self._process.stdin.write(word + "\n")
        self._process.stdin.flush()
        return self._answer()

    def round(self) -> float:
        return float(self.ask("round")[0])

    def end(self) -> list[str]:
        words = self.ask("end")
        self._process.wait(60)
        return words


def child(way: str, name: str, scale: str) -> None:
    """Answer rounds with their processor time."""
    workload = find(name)
    call = workload.make(workload.full if scale == "full" else workload.small)
    out = sys.stdout
    sys.stdout = sys.stderr
    call()
    times = _repetitions(call) if scale == "small" else 1

    def say(*words: object) -> None:
        print(*words, file=out, flush=True)

    if way in ("probes", "ledger"):
        from steplaw.tally import counting

        with counting(ledger=way == "ledger") as counter:
            call()
            rounds = _serve(call, times, say) + 1
        say(counter.probe_passes // rounds, counter.blocks_run // rounds, counter.tally.steps)
        return
    if way == "events":
        from referee import referee

        _serve(lambda: referee(call), times, say)
    else:
        _serve(call, times, say)
    say("ended")


def _repetitions(call: Callable[[], Any]) -> int:
    begun = time.process_time()
    call()
    return max(1, math.ceil(LEAST_SECONDS / max(time.process_time() - begun, 1e-6)))


def _serve(call: Callable[[], Any], times: int, say: Callable[..., None]) -> int:
    say("ready")
    for number in itertools.count():
        if sys.stdin.readline().strip() != "round":
            return number
        gc.collect()
        gc.disable()
        begun = time.process_time()
        for _ in range(times):
            call()
        spent = time.process_time() - begun
        gc.enable()
        say(spent / times)
    raise AssertionError("count has no end")


def measure(name: str, rounds: int, events: bool) -> Row:
    """Run one program all ways in turn."""
    runners = {way: Runner(way, name, "full") for way in ("plain", "probes", "ledger")}
    times: dict[str, list[float]] = {way: [] for way in runners}
    for turn in range(rounds):
        order = list(runners.items())
        for way, runner in order if turn % 2 == 0 else reversed(order):
            times[way].append(runner.round())
    runners["plain"].end()
    runners["ledger"].end()
    passes, blocks, _ = (int(word) for word in runners["probes"].end())
    row: Row = {
        "name": name,
        "seconds": min(times["plain"]),
        "probes": min(times["probes"]) / min(times["plain"]),
        "ledger": min(times["ledger"]) / min(times["plain"]),
        "passes": passes,
        "blocks": blocks,
        "events": None,
    }
    if events:
        row["events"] = _events(name)
    return row


def _events(name: str) -> float:
    plain, watched = Runner("plain", name, "small"), Runner("events", name, "small")
    pairs = [(plain.round(), watched.round()) for _ in range(3)]
    plain.end()
    watched.end()
    return min(w for _, w in pairs) / min(p for p, _ in pairs)


def mean(values: list[float]) -> float:
    """Geometric mean."""
    return math.exp(sum(map(math.log, values)) / len(values))


def _line(row: Row) -> str:
    events = "" if row["events"] is None else f"{row['events']:.1f}"
    share = row["passes"] / row["blocks"] if row["blocks"] else 0.0
    return (
        f"| {row['name']} | {row['seconds']:.3f} | {row['probes']:.3f} "
        f"| {row['ledger']:.3f} | {events} "
        f"| {row['passes']:,} | {row['blocks']:,} | {share:.3f} |"
    )


def _summary(title: str, rows: list[Row]) -> str:
    ratios = [row["probes"] for row in rows]
    events = [row["events"] for row in rows if row["events"]]
    ledger = [row["ledger"] for row in rows]
    said = f"{title}: geometric mean {mean(ratios):.3f}, worst {max(ratios):.3f}"
    said += f"; with the native ledger {mean(ledger):.3f}, worst {max(ledger):.3f}"
    if events:
        said += f"; opcode events {mean(events):.1f}"
    passes, blocks = sum(r["passes"] for r in rows), sum(r["blocks"] for r in rows)
    return said + f"; {passes:,} probe passes for {blocks:,} blocks run ({len(rows)} programs)"


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__.split("\n")[0] if __doc__ else None)
    parser.add_argument("--rounds", type=int, default=5)
    parser.add_argument("--no-events", action="store_true")
    parser.add_argument("names", nargs="*")
    given = parser.parse_args()
    chosen = [w for w in workloads() if not given.names or w.name in given.names]
    if programs_folder() is None:
        print("pyperformance is not installed: only the loop nests are run\n")
    print(f"CPython {platform.python_version()}, {platform.machine()}, {platform.system()}\n")
    heads = ("program", "plain s", "probes", "with ledger", "opcode events", "probe passes")
    print(f"| {' | '.join(heads)} | blocks run | share |")
    print("| --- | ---: | ---: | ---: | ---: | ---: | ---: | ---: |")
    groups: dict[str, list[Row]] = {}
    for workload in chosen:
        row = measure(workload.name, given.rounds, not given.no_events)
        groups.setdefault(workload.group, []).append(row)
        print(_line(row), flush=True)
    print()
    titles = {"open": "Open programs", "affine": "Affine loop nests"}
    for group, rows in groups.items():
        print(_summary(titles[group], rows) + "\n")


if __name__ == "__main__":
    if sys.argv[1:2] == ["--child"]:
        child(*sys.argv[2:5])
    else:
        main()
