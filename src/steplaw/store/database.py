"""The store: one SQLite file, safe for several processes at once.

Each finished run is a transaction of its own. A process that is killed loses the run in progress;
what was finished is there, and whole.
"""

from __future__ import annotations

import hashlib
import json
import os
import platform
import sqlite3
import time
import zlib
from collections.abc import Iterator, Mapping, Sequence
from contextlib import closing, contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from steplaw.errors import CallError
from steplaw.store.fingerprint import Files

#: Where the store is: a path, or ``off``.
VARIABLE = "STEPLAW_STORE"
FORMAT = 1
#: Times that an answer may stand beside others to the same question, for code that changes back.
VARIANTS = 8
DAY = 86_400.0

_TABLES = """
CREATE TABLE IF NOT EXISTS depends (digest TEXT PRIMARY KEY, body BLOB NOT NULL);
CREATE TABLE IF NOT EXISTS answers (
    number INTEGER PRIMARY KEY,
    question TEXT NOT NULL,
    depends TEXT NOT NULL,
    subject TEXT NOT NULL,
    request TEXT NOT NULL,
    python TEXT NOT NULL,
    made REAL NOT NULL,
    used REAL NOT NULL,
    replies BLOB NOT NULL,
    UNIQUE (question, depends)
);
CREATE INDEX IF NOT EXISTS by_subject ON answers (subject);
"""


@dataclass(frozen=True, slots=True)
class Entry:
    """What the store has of one subject.

    Parameters
    ----------
    subject : str
        As it was named.
    python : str
        Version of the interpreter.
    answers : int
        Finished runs and the like.
    bytes : int
        Their size.
    used : float
        When the last of them was used, in seconds since the epoch.
    """

    subject: str
    python: str
    answers: int
    bytes: int
    used: float


class Store:
    """Kept answers.

    Parameters
    ----------
    path : Path
        The file; it is made where there is none.

    Raises
    ------
    CallError
        If the file cannot be made or is not a store.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        self.files = Files()
        try:
            path.parent.mkdir(parents=True, exist_ok=True)
            with self._open() as database:
                (found,) = database.execute("PRAGMA user_version").fetchone()
                if found not in (0, FORMAT):
                    raise CallError(
                        f"the store {path} is of another version of steplaw",
                        f"remove it, or name another in {VARIABLE}",
                    )
                database.execute("PRAGMA journal_mode = WAL")
                database.executescript(_TABLES)
                database.execute(f"PRAGMA user_version = {FORMAT}")
        except (OSError, sqlite3.Error) as error:
            raise CallError(
                f"the store {path} cannot be used: {error}",
                f"remove that file, name another in {VARIABLE}, or set {VARIABLE}=off",
            ) from None

    @contextmanager
    def _open(self) -> Iterator[sqlite3.Connection]:
        """Open the file for one transaction: a connection does not outlive a fork or a thread."""
        with closing(sqlite3.connect(self.path, timeout=60.0)) as database:
            database.execute("PRAGMA synchronous = NORMAL")
            with database:
                yield database

    def find(self, question: str) -> list[dict[str, Any]] | None:
        """Give the answer to a question, if what it depends on is unchanged.

        Parameters
        ----------
        question : str
            Digest of all that was asked.

        Returns
        -------
        list of dict or None
            The host's replies; None where there is no answer that holds.
        """
        with suppress(sqlite3.Error, zlib.error, ValueError), self._open() as database:
            rows = database.execute(
                "SELECT number, depends, replies, used FROM answers WHERE question = ? "
                "ORDER BY number DESC",
                (question,),
            ).fetchall()
            for number, digest, replies, used in rows:
                if self._holds(database, digest):
                    self._use(database, number, used)
                    found: list[dict[str, Any]] = json.loads(zlib.decompress(replies))
                    return found
        return None

    def _holds(self, database: sqlite3.Connection, digest: str) -> bool:
        row = database.execute("SELECT body FROM depends WHERE digest = ?", (digest,)).fetchone()
        return row is not None and self.files.holds(digest, json.loads(zlib.decompress(row[0])))

    @staticmethod
    def _use(database: sqlite3.Connection, number: int, used: float) -> None:
        """Note the use, once a day at most, so that reading seldom writes."""
        now = time.time()
        if now - used > DAY:
            database.execute("UPDATE answers SET used = ? WHERE number = ?", (now, number))

    def keep(
        self,
        question: str,
        told: Mapping[str, Any],
        replies: Sequence[Mapping[str, Any]],
        *,
        subject: str,
        request: str,
    ) -> bool:
        """Keep an answer.

        Parameters
        ----------
        question : str
            Digest of all that was asked.
        told : mapping
            What it depends on, as the host tells it.
        replies : sequence of mapping
            The host's replies.
        subject, request : str
            For people who list the store.

        Returns
        -------
        bool
            Whether it was kept: not where it depends on more than the store can watch.
        """
        depends = self.files.describe(told)
        if depends is None:
            return False
        text = json.dumps(depends, sort_keys=True).encode()
        digest = hashlib.sha256(text).hexdigest()
        now = time.time()
        body = zlib.compress(json.dumps(list(replies)).encode())
        python = platform.python_version()
        with suppress(sqlite3.Error), self._open() as database:
            database.execute(
                "INSERT OR IGNORE INTO depends VALUES (?, ?)", (digest, zlib.compress(text))
            )
            database.execute(
                "INSERT OR REPLACE INTO answers (question, depends, subject, request, python, "
                "made, used, replies) VALUES (?, ?, ?, ?, ?, ?, ?, ?)",
                (question, digest, subject, request, python, now, now, body),
            )
            database.execute(
                "DELETE FROM answers WHERE question = ? AND number NOT IN (SELECT number FROM "
                "answers WHERE question = ? ORDER BY number DESC LIMIT ?)",
                (question, question, VARIANTS),
            )
            return True
        return False

    def forget(self, questions: Sequence[str]) -> None:
        """Take answers out."""
        with suppress(sqlite3.Error), self._open() as database:
            database.executemany(
                "DELETE FROM answers WHERE question = ?", [(q,) for q in questions]
            )

    def entries(self) -> list[Entry]:
        """Give what there is, by subject, the last used first."""
        with self._open() as database:
            rows = database.execute(
                "SELECT subject, python, COUNT(*), SUM(LENGTH(replies)), MAX(used) FROM answers "
                "GROUP BY subject, python ORDER BY MAX(used) DESC, subject, python"
            ).fetchall()
        return [Entry(*row) for row in rows]

    def prune(self, days: float) -> int:
        """Take out what was not used for some days.

        Parameters
        ----------
        days : float
            0 takes out everything.

        Returns
        -------
        int
            How many answers went.
        """
        with self._open() as database:
            gone = database.execute(
                "DELETE FROM answers WHERE used <= ?", (time.time() - days * DAY,)
            ).rowcount
            database.execute(
                "DELETE FROM depends WHERE digest NOT IN (SELECT depends FROM answers)"
            )
        with closing(sqlite3.connect(self.path, timeout=60.0)) as database:
            database.execute("VACUUM")
        return int(gone)

    def export(self, subject: str | None = None) -> Iterator[dict[str, Any]]:
        """Give the kept answers as plain JSON values.

        Parameters
        ----------
        subject : str, optional
            Those of one subject alone.
        """
        with self._open() as database:
            rows = database.execute(
                "SELECT subject, python, request, made, replies FROM answers "
                "WHERE ? IS NULL OR subject = ? ORDER BY number",
                (subject, subject),
            )
            for name, python, request, made, replies in rows:
                yield {
                    "subject": name,
                    "python": python,
                    "request": json.loads(request),
                    "made": made,
                    "replies": json.loads(zlib.decompress(replies)),
                }


def default_path() -> Path | None:
    """Give where the store is, None where it is turned off."""
    named = os.environ.get(VARIABLE, "")
    if named.lower() in ("off", "no", "0"):
        return None
    if named:
        return Path(named)
    cache = os.environ.get("XDG_CACHE_HOME", "")
    return (Path(cache) if cache else Path.home() / ".cache") / "steplaw" / "store.sqlite3"


def open_store() -> Store | None:
    """Open the person's store; None where it is turned off, or has no place to be."""
    path = default_path()
    if path is None:
        return None
    try:
        return Store(path)
    except CallError:
        if os.environ.get(VARIABLE):
            raise
        return None
