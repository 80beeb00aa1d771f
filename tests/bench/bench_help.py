"""How long ``steplaw --help`` takes beside ``python -c pass``, side by side in one run."""

from __future__ import annotations

import subprocess
import sys
import time
from pathlib import Path

ROUNDS = 30


def _seconds(command: list[str]) -> float:
    start = time.perf_counter()
    subprocess.run(command, stdout=subprocess.DEVNULL, check=True)
    return time.perf_counter() - start


def main() -> None:
    """Print the best of each and their ratio."""
    plain = [sys.executable, "-c", "pass"]
    help_page = [str(Path(sys.executable).with_name("steplaw")), "--help"]
    pairs = [(_seconds(plain), _seconds(help_page)) for _ in range(ROUNDS)]
    best = [min(column) for column in zip(*pairs, strict=True)]
    print(f"python -c pass {best[0] * 1e3:.1f} ms, steplaw --help {best[1] * 1e3:.1f} ms")
    print(f"ratio {best[1] / best[0]:.2f}")


if __name__ == "__main__":
    main()
