"""Real functions with hidden growth held against the clock, by steps alone and with visits in C.

Run it as ``PYTHONPATH=src:tests python tests/bench/clock_native.py [NAME...]``; it prints the
table of docs/measured.md. Each function takes some ten seconds.
"""

from __future__ import annotations

import sys
import time
from typing import Any

import steplaw
from programs.native_calls import CALLS, NativeCall
from steplaw.errors import SteplawError

_WORDS = {True: "agrees", False: "departs", None: "cannot tell"}


def row(call: NativeCall) -> tuple[str, str, str]:
    """Give one line of the table, the verdict on steps alone, and that on the whole."""
    record: Any = steplaw.audit(call.subject, feed=call.feed, sizes=call.sizes)
    laws, clock = record["laws"], record["clock"]
    # Where nothing is charged, the whole is the steps alone.
    alone, whole = _WORDS[(clock["steps_alone"] or clock)["agrees"]], _WORDS[clock["agrees"]]
    listed = ", ".join(x["operation"] for x in record["ledger"]["not_charged"] if x["grows"])
    cells = [
        f"`{call.subject}`",
        call.sizes,
        f"`{laws['steps']['leading']}`",
        f"`{laws['native']['leading']}`",
        alone,
        whole,
        listed or "nothing",
    ]
    return "| " + " | ".join(cells) + " |", alone, whole


def main(names: list[str]) -> None:
    """Print the table and the totals."""
    print(
        "| function | sizes | steps ~ | visits in C ~ | steps alone | with visits | not charged |"
    )
    print("| --- | --- | --- | --- | --- | --- | --- |")
    totals: dict[tuple[str, str], int] = {}
    began = time.perf_counter()
    for call in CALLS:
        if names and call.name not in names:
            continue
        try:
            line, alone, whole = row(call)
        except SteplawError as fault:
            line, alone, whole = f"{call.subject}: {fault}", "not run", "not run"
        totals[alone, whole] = totals.get((alone, whole), 0) + 1
        print(line, flush=True)
    for (alone, whole), number in sorted(totals.items()):
        print(f"{number}: steps alone: {alone}, with visits: {whole}")
    print(f"{sum(totals.values())} functions in {time.perf_counter() - began:.0f} s")


if __name__ == "__main__":
    main(sys.argv[1:])
