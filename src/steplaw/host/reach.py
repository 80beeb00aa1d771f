"""What a run depends on: the code that it reached, files that it read, and what cannot be kept.

The host tells this along with its answers, so that a finished run can be kept and known again.
"""

from __future__ import annotations

import hashlib
import os
import sys
import sysconfig
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from types import CodeType, FrameType
from typing import Any

#: File, qualified name and first line.
Place = tuple[str, str, int]

#: What a run may do that the same code and input need not do again.
_OUTSIDE = {
    "socket.connect": "connects to another machine",
    "subprocess.Popen": "starts another program",
    "os.system": "starts another program",
    "os.posix_spawn": "starts another program",
    "os.exec": "starts another program",
    "os.listdir": "lists a folder",
    "os.scandir": "lists a folder",
    "sqlite3.connect": "opens a database",
    "os.remove": "removes a file",
    "os.rename": "renames a file",
}
_COMPILED = (".pyc", ".so", ".pyd")


class Reach:
    """Notes what a subject reaches, from its import on.

    Attributes
    ----------
    imported : set of code
        Code that ran while modules were imported.
    read : set of str
        Files opened for reading, source and compiled code left out.
    outside : str or None
        What keeps its runs from being kept: an effect on, or of, the world outside.
    """

    def __init__(self) -> None:
        self.imported: set[CodeType] = set()
        self.read: set[str] = set()
        self.outside: str | None = None
        self._listening = False
        self._digests: dict[str, str] = {}

    @contextmanager
    def importing(self) -> Iterator[None]:
        """Note the code that runs while the subject is imported."""
        sys.addaudithook(self._hear)
        before = sys.getprofile()
        self._listening = True
        sys.setprofile(self._note_call)
        try:
            yield
        finally:
            sys.setprofile(before)
            self._listening = False

    @contextmanager
    def running(self) -> Iterator[None]:
        """Note what a run does to files and the like."""
        self._listening = True
        try:
            yield
        finally:
            self._listening = False

    def _note_call(self, frame: FrameType, event: str, arg: object) -> None:
        if event == "call":
            self.imported.add(frame.f_code)

    def _hear(self, event: str, details: tuple[Any, ...]) -> None:
        if not self._listening or (event != "open" and event not in _OUTSIDE):
            return
        if sys._getframe(1).f_code.co_filename.startswith("<frozen importlib"):
            return  # looking for modules, and keeping their compiled code
        if event == "open":
            self._opened(*details)
        else:
            self.outside = self.outside or _OUTSIDE[event]

    def _opened(self, path: object, mode: object, flags: object) -> None:
        if not isinstance(path, str | bytes):
            return
        name = os.path.abspath(os.fsdecode(path))  # noqa: PTH100 - no pathlib in the host
        writes = isinstance(flags, int) and flags & (os.O_WRONLY | os.O_RDWR | os.O_CREAT)
        if writes or name.startswith(("/dev/", "/proc/", "/sys/")):
            if name not in ("/dev/null", "/dev/urandom") and not name.endswith(_COMPILED):
                self.outside = self.outside or ("writes a file" if writes else "reads the system")
        elif not name.endswith((".py", *_COMPILED)):
            self.read.add(name)

    def tell(self, reached: Iterable[CodeType] | None) -> dict[str, Any]:
        """Describe what a run depends on.

        Parameters
        ----------
        reached : iterable of code
            Code that ran in it; None where that is not known, and any of it may have.

        Returns
        -------
        dict
            ``files``, the content digest of each source and extension module by path; ``imported``
            and ``reached``, places of code; ``read``, the content digest of data files;
            ``outside``.
        """
        return {
            "files": {path: self._digest(path) for path in module_files()},
            "imported": sorted({_place(c) for c in self.imported if is_project(c.co_filename)}),
            "reached": None
            if reached is None
            else sorted({_place(c) for c in reached if is_project(c.co_filename)}),
            "read": {path: self._digest(path) for path in sorted(self.read)},
            "outside": self.outside,
        }

    def _digest(self, path: str) -> str:
        """Give the digest of a file as it was when it was first asked for."""
        if path not in self._digests:
            self._digests[path] = file_digest(path)
        return self._digests[path]


def _place(code: CodeType) -> Place:
    return code.co_filename, code.co_qualname, code.co_firstlineno


def file_digest(path: str) -> str:
    """Give the digest of a file's content, empty where it cannot be read."""
    try:
        with open(path, "rb") as file:  # noqa: PTH123 - no pathlib in the host
            return hashlib.sha256(file.read()).hexdigest()
    except OSError:
        return ""


def module_files() -> list[str]:
    """Give the files of the loaded modules that are not the standard library's or steplaw's."""
    files = set()
    for module in list(sys.modules.values()):
        path = getattr(module, "__file__", None)
        if isinstance(path, str) and is_outside_library(path):
            files.add(path)
    return sorted(files)


_LIBRARY = tuple(
    {os.path.join(sysconfig.get_path(name), "") for name in ("stdlib", "platstdlib")}  # noqa: PTH118
)
_SITE = ("site-packages", "dist-packages")
_OWN = os.path.join(os.path.dirname(os.path.dirname(__file__)), "")  # noqa: PTH118, PTH120


def is_outside_library(path: str) -> bool:
    """Whether a file is neither of the standard library nor of steplaw."""
    if path.startswith(_OWN) or not path or path.startswith("<"):
        return False
    return not path.startswith(_LIBRARY) or is_installed(path)


def is_installed(path: str) -> bool:
    """Whether a file is of an installed package."""
    return any(f"{os.sep}{site}{os.sep}" in path for site in _SITE)


def is_project(path: str) -> bool:
    """Whether a file holds source that people work on."""
    return is_outside_library(path) and not is_installed(path)
