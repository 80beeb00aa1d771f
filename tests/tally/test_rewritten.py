"""The standard library's own code, rewritten and read back (`python tests/tally/rewritten.py`).

The reference is the interpreter: `dis.stack_effect`, `code.co_positions` and the exception table
of the untouched code. One file of twenty is done here, all of them by the command.
"""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import pytest

from steplaw.tally.registry import Registry
from steplaw.tally.rewrite import Probed
from tally import rewritten


def test_every_twentieth_file_of_the_standard_library() -> None:
    found = rewritten.check(rewritten.library_files(20))
    assert found.codes > 3000
    assert found.with_handlers > 400
    assert found.refused == {}
    assert found.faulty == []


def _handling(seats: dict[str, int], vessel: str) -> int:
    try:
        with memoryview(b"deck"):
            return seats[vessel]
    except KeyError:
        return 0
    finally:
        seats.clear()


@pytest.fixture
def probed() -> Probed:
    registry = Registry()
    registry.rewrite(_handling.__code__)
    return registry.probed[0]


def _changed(probed: Probed, **parts: Any) -> Any:
    kept = {name: getattr(probed, name) for name in ("graph", "origins", "original", "code")}
    return SimpleNamespace(**{**kept, **parts})


def test_sound_code_has_no_faults(probed: Probed) -> None:
    assert list(rewritten.faults(probed)) == []


def test_a_lost_exception_table_is_noticed(probed: Probed) -> None:
    broken = _changed(probed, code=probed.code.replace(co_exceptiontable=b""))
    assert any("lost its handler" in fault for fault in rewritten.faults(broken))


def _only_raises() -> None:
    raise


def test_code_that_needs_no_stack_gets_room_for_the_recorder() -> None:
    registry = Registry()
    registry.rewrite(_only_raises.__code__)
    assert list(rewritten.faults(registry.probed[0])) == []


def test_moved_places_in_the_source_are_noticed(probed: Probed) -> None:
    moved = probed.code.co_firstlineno + 1
    broken = _changed(probed, code=probed.code.replace(co_firstlineno=moved))
    assert any("another place" in fault for fault in rewritten.faults(broken))


def test_too_small_a_stack_is_noticed(probed: Probed) -> None:
    broken = _changed(probed, code=probed.code.replace(co_stacksize=1))
    assert any("stack depth" in fault for fault in rewritten.faults(broken))
