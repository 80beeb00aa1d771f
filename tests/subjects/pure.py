"""The standard library's own Python versions of what it otherwise takes from C."""

from __future__ import annotations

import importlib
import sys
from types import ModuleType


def _without(compiled: str, name: str) -> ModuleType:
    kept = {key: sys.modules.pop(key) for key in (compiled, name) if key in sys.modules}
    sys.modules[compiled] = None  # type: ignore[assignment]
    try:
        return importlib.import_module(name)
    finally:
        del sys.modules[compiled], sys.modules[name]
        sys.modules.update(kept)


bisect_right = _without("_bisect", "bisect").bisect_right
heapify = _without("_heapq", "heapq").heapify
