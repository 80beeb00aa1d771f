"""Lets the tests here import the referee and the programs."""

from __future__ import annotations

import sys
from pathlib import Path

TESTS = str(Path(__file__).parents[1])
if TESTS not in sys.path:
    sys.path.insert(0, TESTS)
