"""The tests run everything anew: what an earlier test run has left in a store is not used."""

from __future__ import annotations

import os

os.environ["STEPLAW_STORE"] = "off"
