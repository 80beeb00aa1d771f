"""Audits for comparisons, made up from counts."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

from steplaw.record import AuditRecord

sys.path.insert(0, str(Path(__file__).parents[1] / "forecast"))


def drawn_audit(count: Callable[..., int], **given: Any) -> AuditRecord:
    """Give the record of an audit whose counts a function of the size and rng gives."""
    from stored_audits import stored

    return stored(count, **given)
