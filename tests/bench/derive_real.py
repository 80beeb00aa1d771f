"""How many of a hundred picked functions are derived, and confirmed by counts.

Run it as ``PYTHONPATH=src:tests/flow python tests/bench/derive_real.py``.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1] / "flow"))

from confirm import confirm, derived, module_of
from picks import PICKS, arguments_of, function_of


def judge(place: str, text: str) -> tuple[str, str]:
    """Give a verdict on one pick and what to say beside it."""
    function = function_of(place)
    if function is None:
        return "absent", "no Python function of that name here"
    module = module_of(function)
    found = derived(function, module)
    stopped = "; ".join(f"line {s.line}: {s.reason}" for s in found.ledger.stopped)
    args, kwargs = arguments_of(place, text)
    result = confirm(found, function, args, kwargs)
    if result.faults:
        return "WRONG", result.faults[0] + (f" ({stopped})" if stopped else "")
    if stopped:
        return "stopped", stopped
    if result.unsettled:
        return "open", f"{result.unsettled} of {result.equations} frequencies stay unsettled"
    return "derived", f"{result.equations} counts agree, {result.solved} of them to settle unknowns"


def main() -> None:
    """Print a line for each pick and the totals."""
    totals: dict[str, int] = {}
    began = time.perf_counter()
    for place, text in PICKS:
        verdict, why = judge(place, text)
        totals[verdict] = totals.get(verdict, 0) + 1
        print(f"{verdict:8} {place}: {why[:150]}", flush=True)
    print(totals, f"of {len(PICKS)} in {time.perf_counter() - began:.1f} s")


if __name__ == "__main__":
    main()
