"""Comparisons: two subjects on one feed, and the sizes where one overtakes the other."""

from __future__ import annotations

from steplaw.versus.job import versus

__all__ = ["versus"]
