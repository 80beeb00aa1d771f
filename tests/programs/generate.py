"""Random Python programs that end, do the same on every run, and mix the whole language."""

from __future__ import annotations

from .choosing import Chooser, Seeded
from .definitions import Definitions
from .prelude import prelude_for


def program(chooser: Chooser) -> str:
    """Build one program: source text that defines `main`."""
    builder = Definitions(chooser)
    functions = [builder.function() for _ in range(1 + chooser.below(4))]
    body = "\n".join("\n".join(lines) for lines in [*functions, builder.main()]) + "\n"
    return prelude_for(body) + body


def seeded_program(seed: int) -> str:
    """Build the program of a seed."""
    return program(Seeded(seed))
