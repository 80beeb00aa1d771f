"""Several hosts of one subject at work at once, here or on other machines.

Runs do not depend on each other, so those that will be asked for soon are begun ahead of time.
Where they are made changes nothing in what they give.
"""

from __future__ import annotations

import json
import os
import threading
from collections.abc import Iterator, Mapping, Sequence
from concurrent.futures import Executor, Future, ThreadPoolExecutor
from contextlib import suppress
from typing import Any

from steplaw.errors import CallError, SteplawError
from steplaw.host.asking import Asker, Reply, Size
from steplaw.host.runner import HostProcess

INTRODUCE = {"do": "introduce"}
#: Hosts that a process keeps idle, over all subjects.
IDLE_MOST = 16
_CONNECT_SECONDS = 5


class _Hosts:
    """The hosts of this process, by job; an idle one is used again."""

    def __init__(self) -> None:
        self._lock = threading.Lock()
        self._idle: list[tuple[str, HostProcess, Reply]] = []
        self._busy: list[tuple[str, HostProcess]] = []

    def take(self, job: Mapping[str, Any]) -> tuple[HostProcess, Reply]:
        """Give a host that has loaded the subject, and how it introduced itself."""
        key = json.dumps(job, sort_keys=True)
        with self._lock:
            for place, (known, host, about) in enumerate(self._idle):
                if known == key:
                    del self._idle[place]
                    self._busy.append((key, host))
                    return host, about
            host = HostProcess(job)
            self._busy.append((key, host))
        return host, host.introduce()

    def give_back(self, job: Mapping[str, Any], host: HostProcess, about: Reply) -> None:
        """Keep a host for the next request; the one idle for longest goes where they are many."""
        key = json.dumps(job, sort_keys=True)
        with self._lock:
            if (key, host) not in self._busy:
                return
            self._busy.remove((key, host))
            self._idle.append((key, host, about))
            surplus = self._idle[:-IDLE_MOST]
            del self._idle[: len(surplus)]
        for _, old, _ in surplus:
            old.close()

    def end(self, job: Mapping[str, Any]) -> None:
        """End all hosts of a job, with whatever runs in them."""
        key = json.dumps(job, sort_keys=True)
        with self._lock:
            ending = [h for known, h, _ in self._idle if known == key]
            ending += [h for known, h in self._busy if known == key]
            self._idle = [x for x in self._idle if x[0] != key]
            self._busy = [x for x in self._busy if x[0] != key]
        for host in ending:
            host.close()


_hosts = _Hosts()


def answer(job: Mapping[str, Any], request: Mapping[str, Any]) -> list[Reply]:
    """Do one request in a host of this process.

    Parameters
    ----------
    job : mapping
        What the host is to load, as `Asker.job` gives.
    request : mapping
        What it is to do.

    Returns
    -------
    list of dict
        Its replies; an error among them as ``{"error": ...}``.
    """
    try:
        host, about = _hosts.take(job)
        if request == INTRODUCE or "error" in about:
            replies = [about]
        else:
            replies = [r for r in host.answers(request) if "progress" not in r]
    except SteplawError as error:
        kind = type(error).__name__
        return [{"error": {"message": error.message, "hint": error.hint, "kind": kind}}]
    _hosts.give_back(job, host, about)
    return replies


class Crew:
    """What runs are handed to.

    Parameters
    ----------
    processes : int, optional
        Hosts at work at once on this machine; all processors by default.
    cluster : str, optional
        Address of a Dask scheduler, whose workers make the runs instead.

    Raises
    ------
    CallError
        If there is no such cluster, or the package for it is not installed.
    """

    def __init__(self, processes: int | None = None, cluster: str | None = None) -> None:
        self._client: Any = None
        self._executor: Executor
        if cluster is None:
            self.size = processes or os.cpu_count() or 1
            self._executor = ThreadPoolExecutor(self.size, thread_name_prefix="steplaw")
        else:
            self._client = _client(cluster)
            self.size = max(1, len(self._client.scheduler_info(n_workers=-1)["workers"]))
            # A worker that is lost costs its runs alone: they are made again by another.
            self._executor = self._client.get_executor(pure=False, retries=10)

    def submit(self, job: Mapping[str, Any], request: Mapping[str, Any]) -> Future[list[Reply]]:
        """Hand over a request."""
        return self._executor.submit(answer, job, request)

    def end(self, job: Mapping[str, Any]) -> None:
        """End the hosts of a job, wherever they are."""
        if self._client is None:
            _hosts.end(job)
        else:
            with suppress(Exception):
                self._client.run(_hosts_end, dict(job))

    def close(self) -> None:
        """Hand over no more."""
        if self._client is None:
            self._executor.shutdown(wait=False, cancel_futures=True)
        else:
            self._executor.shutdown(wait=False)
            self._client.close()

    def __enter__(self) -> Crew:
        return self

    def __exit__(self, *what: object) -> None:
        self.close()


def _hosts_end(job: Mapping[str, Any]) -> None:
    _hosts.end(job)


def _client(address: str) -> Any:
    try:
        import distributed
    except ImportError:
        raise CallError(
            "--cluster needs the package distributed, which is not installed",
            "pip install 'steplaw[cluster]'",
        ) from None
    try:
        connect: Any = distributed.Client
        return connect(address, timeout=_CONNECT_SECONDS, set_as_default=False)
    except (OSError, ValueError, TypeError) as error:
        raise CallError(
            f"there is no Dask scheduler at {address}: {error}",
            "give its address, as in --cluster tcp://127.0.0.1:8786",
        ) from None


class Crewed(Asker):
    """Asks a crew.

    Parameters
    ----------
    crew : Crew
        Who makes the runs.
    *job, **settings
        As for `Asker`.
    """

    def __init__(self, crew: Crew, *job: Any, **settings: Any) -> None:
        super().__init__(*job, **settings)
        self.ahead = 2 * crew.size if crew.size > 1 else 0
        self._crew = crew
        self._begun: dict[str, Future[list[Reply]]] = {}

    def introduce(self) -> Reply:
        """Have the subject loaded."""
        return self._crew.submit(self.job, INTRODUCE).result()[0]

    def answers(self, request: Mapping[str, Any]) -> Iterator[Reply]:
        """Wait for what was begun ahead of time, or have it done now."""
        future = self._begun.pop(_key(request), None)
        yield from (future or self._crew.submit(self.job, request)).result()

    def expect(self, wanted: Sequence[tuple[Size, int | None]]) -> None:
        """Begin runs that may be asked for soon."""
        for at, draw in wanted:
            with suppress(SteplawError):  # a feed that fails is told when it is asked for
                request = self.request(at, draw)
                if _key(request) not in self._begun:
                    self._begun[_key(request)] = self._crew.submit(self.job, request)

    def close(self) -> None:
        """Give up what was begun and not asked for."""
        for future in self._begun.values():
            future.cancel()
        self._crew.end(self.job)


def _key(request: Mapping[str, Any]) -> str:
    return json.dumps(request, sort_keys=True)
