"""The hypothesis strategy of generated programs."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies

from .choosing import Drawn
from .generate import program


@strategies.composite
def programs(draw: Any) -> str:
    """Give programs that hypothesis can make smaller."""
    return program(Drawn(draw))
