"""The clock check: the law held against the wall-clock time of the untouched function."""

from steplaw.clock.timing import Timing, measure
from steplaw.clock.verdict import check

__all__ = ["Timing", "check", "measure"]
