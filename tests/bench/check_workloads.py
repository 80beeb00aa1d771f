"""Compare the counts of every workload with the referee, at small scales.

Run as ``PYTHONPATH=tests:src python tests/bench/check_workloads.py [NAME...]``; the exit status is
1 where a figure differs.
"""

from __future__ import annotations

import sys
from pathlib import Path

sys.path[:0] = [str(Path(__file__).parents[1]), str(Path(__file__).parents[2] / "src")]

from bench.workloads import programs_folder, workloads  # noqa: E402
from programs.worker import Worker  # noqa: E402


def main() -> int:
    """Print a line for each workload."""
    if programs_folder() is None:
        print("pyperformance is not installed: only the loop nests are compared")
    wanted = sys.argv[1:]
    different = 0
    with Worker() as worker:
        for workload in workloads():
            if wanted and workload.name not in wanted:
                continue
            found = worker.differences(workload=workload.name)
            different += bool(found)
            print(f"{workload.name:24} {'equal' if not found else 'DIFFERENT'}", flush=True)
            for line in found[:6]:
                print("    " + line)
    print(f"{different} different, Python {sys.version.split()[0]}")
    return int(bool(different))


if __name__ == "__main__":
    sys.exit(main())
