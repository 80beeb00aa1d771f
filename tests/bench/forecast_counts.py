"""Counts many runs of one subject in a light process of its own, as lines on standard output.

Reads a line of JSON with ``subject`` and ``feed``, then lines ``[n, draw]``, and answers each of
those with the steps, or null where the run fails.
"""

from __future__ import annotations

import json
import sys
from collections.abc import Callable


def counter(subject_text: str, feed_text: str) -> Callable[[int, int], int | None]:
    """Give what counts one run of a size and a draw."""
    from steplaw import subject as subjects
    from steplaw.feed import bind, parse_feed
    from steplaw.tally.collector import YOUNG, Undisturbed
    from steplaw.tally.install import Installation
    from steplaw.tally.registry import Registry
    from steplaw.tally.snapshot import Snapshot, counts_between

    subject = subjects.locate(subjects.parse(subject_text))
    feed = bind(parse_feed(feed_text), subject, ("n",))
    registry = Registry()
    Installation(registry).enter()

    def steps(n: int, draw: int) -> int | None:
        try:
            made = feed.make({"n": n}, draw)
            with Undisturbed(YOUNG):
                before = Snapshot(registry)
                subjects.call(subject, made.args, made.kwargs)
                codes = list(counts_between(before, Snapshot(registry)))
        except Exception:
            return None
        return sum(sum(code.instructions) for code in codes)

    return steps


def main() -> None:
    """Answer until there is nothing more to read."""
    asked = json.loads(sys.stdin.readline())
    steps = counter(asked["subject"], asked["feed"])
    for line in sys.stdin:
        n, draw = json.loads(line)
        print(json.dumps(steps(n, draw)), flush=True)


if __name__ == "__main__":
    main()
