"""Tolls of numpy arrays, by elements; numpy itself is never imported here."""

from __future__ import annotations

from typing import Any

from steplaw.toll.call import Call, Rule
from steplaw.toll.hidden import hidden


def elements(value: Any) -> int:
    """Give the elements of an array, 0 for anything else."""
    kind = type(value)
    if kind.__name__ == "ndarray" and kind.__module__ == "numpy":
        return int(value.size)
    return 0


@hidden
def _method(call: Call) -> Any:
    """Charge the elements of the operands, or of the result where that has more."""
    read = elements(call.owner) + sum(elements(x) for x in call.args)
    call.at_most(read)
    result = call.run()
    call.at_most(max(read, elements(result)))
    return result


METHOD = Rule("array method", _method)
FUNCTION = Rule("array function", _method)
