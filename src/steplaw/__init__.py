"""Exact step counts of Python functions, size by size, and the law they follow."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from steplaw.expression import args
    from steplaw.job import audit
    from steplaw.record import AuditRecord
    from steplaw.tally.counting import count, counting

__version__ = "0.1.0"
__all__ = ["AuditRecord", "__version__", "args", "audit", "count", "counting"]

_HOMES = {
    "AuditRecord": "steplaw.record",
    "args": "steplaw.expression",
    "audit": "steplaw.job",
    "count": "steplaw.tally.counting",
    "counting": "steplaw.tally.counting",
}


def __getattr__(name: str) -> Any:
    """Import a public name where it is first used, so that `import steplaw` stays light."""
    home = _HOMES.get(name)
    if home is None:
        raise AttributeError(f"module 'steplaw' has no attribute {name!r}")
    import importlib

    return getattr(importlib.import_module(home), name)
