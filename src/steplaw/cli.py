"""The entry point: the help page at once, everything else through `steplaw.commands`."""

from __future__ import annotations

import sys


def main() -> None:
    """Run the command line and leave with its exit status."""
    words = sys.argv[1:]
    if words in ([], ["--help"], ["-h"]):
        sys.stdout.write(_help())
        raise SystemExit(0)
    from steplaw.commands import run

    raise SystemExit(run(words))


def _help() -> str:
    with open(f"{__file__.removesuffix('cli.py')}commands/help.txt") as file:  # noqa: PTH123
        return file.read()


if __name__ == "__main__":
    main()
