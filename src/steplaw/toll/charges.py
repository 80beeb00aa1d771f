"""What rules are made from: the usual ways to charge a call."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.call import Call
from steplaw.toll.hidden import hidden

Charge = Callable[[Call], Any]


@hidden
def own_length(call: Call) -> Any:
    """Charge the length of the owner."""
    call.visits = kinds.length(call.owner) or 0
    return call.run()


@hidden
def own_length_at_most(call: Call) -> Any:
    """Charge at most the length of the owner."""
    call.at_most(kinds.length(call.owner) or 0)
    return call.run()


@hidden
def result_length(call: Call) -> Any:
    """Charge the length of the result."""
    result = call.run()
    call.visits = kinds.length(result) or 0
    return result


@hidden
def own_and_result(call: Call) -> Any:
    """Charge what is read and what is written."""
    result = call.run()
    call.visits = (kinds.length(call.owner) or 0) + (kinds.length(result) or 0)
    return result


@hidden
def items_of_first(call: Call) -> Any:
    """Charge each item that is read from the first argument."""
    read = call.items(0)
    try:
        return call.run()
    finally:
        call.visits = read()


@hidden
def items_until_settled(call: Call) -> Any:
    """Charge the items that are read from the first argument until the answer is settled."""
    read = call.items(0, early=True)
    try:
        return call.run()
    finally:
        call.visits = read()


@hidden
def items_and_own(call: Call) -> Any:
    """Charge a copy of the owner, and each item that is read from the arguments."""
    read = [call.items(number) for number in range(len(call.args))]
    try:
        return call.run()
    finally:
        call.visits = (kinds.length(call.owner) or 0) + sum(x() for x in read)


@hidden
def items_of_all(call: Call) -> Any:
    """Charge each item that is read from the arguments."""
    read = [call.items(number) for number in range(len(call.args))]
    try:
        return call.run()
    finally:
        call.visits = sum(x() for x in read)
