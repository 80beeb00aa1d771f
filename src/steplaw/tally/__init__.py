"""Exact counts of executed instructions: where probes go, how they are set, what they say."""

from __future__ import annotations

from steplaw.tally.counting import Counter, count, counting
from steplaw.tally.model import FunctionCount, LineCount, Tally

__all__ = ["Counter", "FunctionCount", "LineCount", "Tally", "count", "counting"]
