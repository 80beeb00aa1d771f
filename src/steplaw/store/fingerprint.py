"""Fingerprints of code: what of a source file a run depends on, and whether it is still the same.

A run depends on the code objects that it reached and on those that ran while its modules were
imported. What was only imported counts without its places in the source, so that a change further
up in the file does not touch it.
"""

from __future__ import annotations

import hashlib
import warnings
from collections.abc import Iterable, Iterator, Mapping
from pathlib import Path
from types import CodeType
from typing import Any

from steplaw.host.reach import file_digest, is_installed

#: Qualified name and first line.
Key = tuple[str, int]


class Files:
    """The source files as they are now, each read and compiled once."""

    def __init__(self) -> None:
        self._digests: dict[str, str] = {}
        self._codes: dict[str, list[CodeType] | None] = {}
        self._known: dict[str, bool] = {}

    def digest(self, path: str) -> str:
        """Give the digest of a file's content, empty where there is none."""
        if path not in self._digests:
            self._digests[path] = file_digest(path)
        return self._digests[path]

    def fingerprint(self, path: str, imported: Iterable[str], reached: Iterable[Key]) -> str:
        """Give the digest of some of a file's code.

        Parameters
        ----------
        path : str
            A source file.
        imported : iterable of str
            Qualified names of code that ran at the import.
        reached : iterable of (str, int)
            Qualified names and first lines of code that ran in the run.

        Returns
        -------
        str
            Empty where the file cannot be compiled.
        """
        codes = self._all(path)
        if codes is None:
            return ""
        names, keys = set(imported), set(reached)
        told = hashlib.sha256()
        for code in codes:
            if (code.co_qualname, code.co_firstlineno) in keys:
                told.update(repr(_content(code, places=True)).encode())
            elif code.co_qualname in names:
                told.update(repr(_content(code, places=False)).encode())
        return told.hexdigest()

    def _all(self, path: str) -> list[CodeType] | None:
        if path not in self._codes:
            self._codes[path] = _compiled(path)
        return self._codes[path]

    def describe(self, told: Mapping[str, Any]) -> dict[str, Any] | None:
        """Turn what the host told of a run into what it depends on.

        Parameters
        ----------
        told : mapping
            As `steplaw.host.reach.Reach.tell` gives.

        Returns
        -------
        dict or None
            None where the run is not to be kept: it depends on more than files, or a file has
            changed since it was made.
        """
        if told["outside"] is not None:
            return None
        contents = {**told["files"], **told["read"]}
        if any(not digest or self.digest(path) != digest for path, digest in contents.items()):
            return None
        source: dict[str, Any] = {}
        for path in told["files"] if told["reached"] is not None else ():
            if path.endswith(".py") and not is_installed(path):
                imported = sorted({n for f, n, _ in told["imported"] if f == path})
                reached = sorted({(n, line) for f, n, line in told["reached"] if f == path})
                source[path] = {
                    "imported": imported,
                    "reached": [list(key) for key in reached],
                    "code": self.fingerprint(path, imported, reached),
                }
        return {"contents": contents, "source": source}

    def holds(self, digest: str, depends: Mapping[str, Any]) -> bool:
        """Whether everything that a run depends on is as it was.

        Parameters
        ----------
        digest : str
            What the answer is remembered by.
        depends : mapping
            As `describe` gives.
        """
        if digest not in self._known:
            self._known[digest] = all(
                self._is_same(path, content, depends["source"].get(path))
                for path, content in depends["contents"].items()
            )
        return self._known[digest]

    def _is_same(self, path: str, content: str, source: Mapping[str, Any] | None) -> bool:
        if self.digest(path) == content:
            return True
        if source is None:
            return False
        reached = [(name, line) for name, line in source["reached"]]
        return self.fingerprint(path, source["imported"], reached) == str(source["code"])


def _compiled(path: str) -> list[CodeType] | None:
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            code = compile(Path(path).read_bytes(), path, "exec", dont_inherit=True)
    except (OSError, SyntaxError, ValueError):
        return None
    return list(_nested(code))


def _nested(code: CodeType) -> Iterator[CodeType]:
    yield code
    for const in code.co_consts:
        if isinstance(const, CodeType):
            yield from _nested(const)


def _content(code: CodeType, *, places: bool) -> tuple[Any, ...]:
    """Give what a code object does, nested ones by their names alone."""
    consts = tuple(
        ("code", c.co_qualname) if isinstance(c, CodeType) else (type(c).__name__, _shown(c))
        for c in code.co_consts
    )
    where: tuple[Any, ...] = ()
    if places:
        where = (code.co_firstlineno, code.co_linetable)
    return (
        code.co_qualname,
        code.co_code,
        consts,
        code.co_names,
        code.co_varnames,
        code.co_freevars,
        code.co_cellvars,
        code.co_flags,
        code.co_argcount,
        code.co_posonlyargcount,
        code.co_kwonlyargcount,
        code.co_exceptiontable,
        where,
    )


def _shown(const: object) -> str:
    if isinstance(const, frozenset):
        return repr(sorted(map(repr, const)))
    return repr(const)
