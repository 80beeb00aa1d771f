"""What the search for worst cases finds, how dear it is against a mean draw, and how long it took.

    PYTHONPATH=tests:src python tests/bench/bench_worst.py

Each row is a search that is told no more than the input's type or a feed of random orders. Where
the law of a family is known from the literature, tests/worst holds it against that.
"""

from __future__ import annotations

import time
from pathlib import Path
from typing import Any

from steplaw.study import make_study
from steplaw.worst.job import worst

SUBJECTS = Path(__file__).parent.parent / "worst" / "subjects.py"
ORDERS = "rng.sample(range(n), n)"
GRAPH = "[(rng.randrange(n), rng.randrange(n)) for _ in range(n)]"

#: Name, subject, size, feed (None: type hints alone).
SEARCHES: tuple[tuple[str, str, int, str | None], ...] = (
    ("quicksort, first pivot", f"{SUBJECTS}:first_pivot", 200, ORDERS),
    ("quicksort, middle pivot", f"{SUBJECTS}:middle_pivot", 200, ORDERS),
    ("quicksort, median of three", f"{SUBJECTS}:median_of_three", 200, ORDERS),
    ("(a or aa)*b by backtracking", f"{SUBJECTS}:matches", 20, None),
    ("hash table, bad hash", f"{SUBJECTS}:store_bookings", 200, None),
    ("string matcher", f"{SUBJECTS}:find_text", 200, None),
    ("difflib.SequenceMatcher", f"{SUBJECTS}:similarity", 64, None),
    ("os.path.commonprefix", f"{SUBJECTS}:shared_start", 200, None),
    ("groups joined edge by edge", f"{SUBJECTS}:joined_groups", 100, GRAPH),
)


def row(name: str, subject: str, n: int, feed: str | None) -> str:
    """Search once, and give a row of a Markdown table."""
    began = time.monotonic()
    record: Any = worst(make_study(subject, feed=feed), n)
    seconds = time.monotonic() - began
    best, family = record["best"], record["family"]
    law = family["law"]["leading"] or "open"
    cells = (
        name,
        best["at"],
        f"{best['value']:,}",
        f"{best['times_mean']:.1f}",
        family["text"].replace("|", "/")[:60],
        f"{law} ({family['law']['grade']})",
        f"{record['search']['runs']:,}",
        f"{seconds:.0f}",
    )
    return f"| {' | '.join(map(str, cells))} |"


def main() -> None:
    """Print the table."""
    print("| search | n | steps | times the mean draw | family | at least ~ | runs | s |")
    print("| --- | ---: | ---: | ---: | --- | --- | ---: | ---: |")
    for search in SEARCHES:
        print(row(*search), flush=True)


if __name__ == "__main__":
    main()
