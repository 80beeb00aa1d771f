"""With the native ledger a program counts, returns, raises and shows the same as without.

The referee is the interpreter's own instruction events, as in tests/tally.
`STEPLAW_LEDGER=1 pytest tests/tally` holds all programs of that folder to it.
"""

from __future__ import annotations

import os
from collections.abc import Iterator

import pytest
from hypothesis import HealthCheck, Phase, given, settings

from programs.strategy import programs
from programs.worker import Worker

pytestmark = pytest.mark.skipif(not hasattr(os, "fork"), reason="each program runs in a fork")

SHARE = int(os.environ.get("STEPLAW_PROGRAMS", "15"))


@pytest.fixture(scope="module")
def watched() -> Iterator[Worker]:
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("STEPLAW_LEDGER", "1")
        with Worker() as worker:
            yield worker


@settings(
    max_examples=SHARE,
    derandomize=SHARE <= 100,
    database=None,
    deadline=None,
    suppress_health_check=list(HealthCheck),
    phases=(Phase.explicit, Phase.generate),
)
@given(source=programs())
def test_generated_program(watched: Worker, source: str) -> None:
    assert watched.differences(source=source) == []
