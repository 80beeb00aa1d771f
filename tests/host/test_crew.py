"""Runs made at once, here and on a Dask cluster, give the same record as one after the other.

The reference library is `distributed`, Dask's own scheduler and workers, in processes of this
machine.
"""

from __future__ import annotations

import os
import signal
import threading
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

import steplaw
from steplaw.errors import CallError
from steplaw.host import crew
from steplaw.host.asking import RunFailed
from steplaw.host.limits import Limits
from steplaw.reference import SubjectRef

ROOT = Path(__file__).parents[2]
SIZES = [1, 2, 3, 5, 8, 40, 80, 120, 130, 140, 150, 160]


def audit(**settings: Any) -> Any:
    return steplaw.audit(
        f"{ROOT / 'samples/ferry/timetable.py'}:trios",
        feed=f"{ROOT / 'samples/feeds.py'}:sailings",
        sizes=SIZES,
        only_sizes=True,
        draws=3,
        clock=False,
        **settings,
    )


@pytest.fixture(scope="module")
def plain() -> Any:
    return audit(processes=1)


@pytest.fixture
def begun(monkeypatch: pytest.MonkeyPatch) -> list[Any]:
    """The runs that were begun ahead of time."""
    seen: list[Any] = []
    expect = crew.Crewed.expect

    def note(self: crew.Crewed, wanted: Any) -> None:
        seen.extend(wanted)
        expect(self, wanted)

    monkeypatch.setattr(crew.Crewed, "expect", note)
    return seen


def test_two_at_once_give_the_same_record(plain: Any, begun: list[Any]) -> None:
    record = audit(processes=2)
    assert begun
    assert record.to_json() == plain.to_json()


def test_every_input_of_several_sizes_at_once() -> None:
    def every(processes: int) -> Any:
        return steplaw.audit(
            f"{ROOT / 'samples/ferry/timetable.py'}:clashes",
            every="([(p, p + 9) for p in order] for order in permutations(range(n)))",
            sizes=[1, 2, 3, 4, 5, 6],
            only_sizes=True,
            clock=False,
            processes=processes,
        )

    assert every(2).to_json() == every(1).to_json()


@pytest.fixture(scope="module")
def cluster() -> Iterator[Any]:
    distributed = pytest.importorskip("distributed")
    with distributed.LocalCluster(
        n_workers=2, threads_per_worker=1, processes=True, dashboard_address=None
    ) as local:
        yield local


def test_a_cluster_gives_the_same_record(plain: Any, cluster: Any) -> None:
    assert audit(cluster=cluster.scheduler_address).to_json() == plain.to_json()


def test_a_worker_that_is_killed_loses_nothing(
    plain: Any, cluster: Any, begun: list[Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    killed: list[int] = []

    def kill() -> None:
        while not begun:
            time.sleep(0.01)
        worker = next(iter(cluster.workers.values()))
        killed.append(worker.pid)
        os.kill(worker.pid, signal.SIGKILL)

    killer = threading.Thread(target=kill, daemon=True)
    killer.start()
    record = audit(cluster=cluster.scheduler_address)
    killer.join(timeout=10)
    assert killed
    assert record.to_json() == plain.to_json()


def test_a_cluster_that_is_not_there_is_named() -> None:
    pytest.importorskip("distributed")
    with pytest.raises(CallError, match="no Dask scheduler at"):
        crew.Crew(cluster="tcp://127.0.0.1:9")


def test_a_subject_that_cannot_be_loaded_is_told_by_the_crew() -> None:
    with crew.Crew(2) as hands:
        asker = crew.Crewed(hands, SubjectRef("no_such_module", "f", False), None)
        with pytest.raises(CallError, match="no_such_module"):
            asker.load()
        asker.close()


def test_what_was_begun_is_given_up_at_the_end(tmp_path: Path) -> None:
    (tmp_path / "slow.py").write_text("def wait(n: int):\n    while True:\n        n += 1\n")
    with crew.Crew(2) as hands:
        ref = SubjectRef(str(tmp_path / "slow.py"), "wait", True)
        asker = crew.Crewed(hands, ref, None, ("n",), Limits(30.0))
        asker.load()
        asker.expect([({"n": 1}, 0), ({"n": 2}, 0)])
        begun = time.monotonic()
        asker.close()
    assert time.monotonic() - begun < 20


def test_a_limit_is_kept(tmp_path: Path) -> None:
    (tmp_path / "slow.py").write_text("def wait(n: int):\n    while True:\n        n += 1\n")
    with crew.Crew(2) as hands:
        ref = SubjectRef(str(tmp_path / "slow.py"), "wait", True)
        asker = crew.Crewed(hands, ref, None, ("n",), Limits(0.3))
        with pytest.raises(RunFailed) as failed:
            asker.count({"n": 1})
        assert failed.value.failure.kind == "time"
        asker.close()
