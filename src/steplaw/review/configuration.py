"""Studies by name, read from the project's own configuration."""

from __future__ import annotations

import os
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from fractions import Fraction
from pathlib import Path
from typing import TYPE_CHECKING, Any

from steplaw.errors import CallError, SteplawError
from steplaw.review.settings import Fault, check, check_name, read_tolerance, sizes_of
from steplaw.review.tomllines import line_of, lines_of_keys
from steplaw.study import Study, make_study
from steplaw.wording import close_to, listing

if TYPE_CHECKING:
    from steplaw.job import Report
    from steplaw.record import AuditRecord

OWN_FILE, SHARED_FILE = "steplaw.toml", "pyproject.toml"
BUDGETS = "steplaw-budgets.toml"
EXAMPLE = '[tool.steplaw.studies.clashes] and under it subject = "ferry/timetable.py:clashes"'
_TOP = ("studies", "defaults", "budgets")


class NoConfiguration(CallError):
    """Neither the folder nor one above it has a configuration."""


@dataclass(frozen=True, slots=True)
class NamedStudy:
    """A study of the configuration.

    Parameters
    ----------
    name : str
        What the team calls it.
    settings : mapping
        What `steplaw.study.make_study` takes, paths as the configuration has them.
    tolerance : Fraction
        Share by which figures may rise without being worse.
    file : Path
        The configuration file.
    root : Path
        The folder that paths are taken from, and that the study is run in.
    where : mapping of str to int
        Line of each key in `file`; that of the study under the empty key.
    """

    name: str
    settings: Mapping[str, Any]
    tolerance: Fraction
    file: Path
    root: Path
    where: Mapping[str, int] = field(default_factory=dict)

    @property
    def line(self) -> int:
        """Line of the configuration file on which the study begins."""
        return self.where.get("", 1)

    def moved(self, root: Path) -> NamedStudy:
        """Give the same study of another copy of the project.

        Parameters
        ----------
        root : Path
            Folder of the copy.
        """
        return replace(self, root=root)

    def study(self, **more: Any) -> Study:
        """Give what `steplaw.job.run` takes, which must run in `root` (see `inside`).

        Parameters
        ----------
        **more
            Settings of `make_study` that go before those of the configuration.

        Raises
        ------
        CallError
            If subject or feed cannot be used.
        """
        with inside(self.root), self._placed():
            again = f"steplaw audit {self.name}"
            settings = {**_without_rivals(self.settings, more), **more}
            return make_study(**{"again": again, **settings})

    def audit(self, report: Report | None = None, **more: Any) -> AuditRecord:
        """Audit the study in its folder.

        Parameters
        ----------
        report : callable, optional
            As `steplaw.job.run` takes.
        **more
            Settings of `make_study` that go before those of the configuration.

        Raises
        ------
        CallError
            If subject or feed cannot be used.
        """
        from steplaw.job import run

        study = self.study(**more)
        with inside(self.root), self._placed():
            return run(study, report)

    @contextmanager
    def _placed(self) -> Iterator[None]:
        try:
            yield
        except SteplawError as fault:
            place = f"{_shown(self.file)}:{self.line}: study {self.name}"
            raise type(fault)(f"{place}: {fault.message}", fault.hint) from None


@dataclass(frozen=True, slots=True)
class Configuration:
    """What a project's configuration says.

    Parameters
    ----------
    file : Path
        Where it was read.
    root : Path
        The folder of the file.
    studies : tuple of NamedStudy
        In the order of the file.
    budgets : Path
        The file that agreed laws are kept in.
    """

    file: Path
    root: Path
    studies: tuple[NamedStudy, ...]
    budgets: Path

    def study(self, name: str) -> NamedStudy:
        """Give a study by name.

        Parameters
        ----------
        name : str
            As in the configuration.

        Raises
        ------
        CallError
            If there is none of that name.
        """
        for study in self.studies:
            if study.name == name:
                return study
        names = [study.name for study in self.studies]
        close = close_to(name, names)
        there = f"{_shown(self.file)} has {listing(names)}" if names else f"write {EXAMPLE}"
        hint = f"did you mean {' or '.join(close)}?" if close else there
        hint += "; a function is written path/to/file.py:name"
        raise CallError(f"{_shown(self.file)} has no study '{name}'", hint)


def read(place: str | Path = ".") -> Configuration:
    """Read a project's configuration.

    Parameters
    ----------
    place : str or Path
        A configuration file, or a folder: the nearest configuration in it or above it is taken.

    Returns
    -------
    Configuration
        Studies and budgets.

    Raises
    ------
    CallError
        If there is none, or one line that points at the file, the line and the key of a fault.
    """
    path = Path(place)
    if not path.exists():
        raise CallError(f"no such file or folder: {place}", f"give a {SHARED_FILE} or {OWN_FILE}")
    file = (find(path) if path.is_dir() else path).resolve()
    text = _text(file)
    prefix, data = _own_part(file, text)
    reader = _Reader(file, text, prefix)
    with reader.placed():
        return reader.configuration(data)


def find(folder: str | Path = ".") -> Path:
    """Give the nearest configuration file in a folder or above it.

    Parameters
    ----------
    folder : str or Path
        Where to begin.

    Raises
    ------
    CallError
        If there is none.
    """
    start = Path(folder).resolve()
    for here in (start, *start.parents):
        own, shared = here / OWN_FILE, here / SHARED_FILE
        has_own, has_shared = own.is_file(), shared.is_file() and _speaks_of_steplaw(shared)
        if has_own and has_shared:
            raise CallError(
                f"{here} has both {OWN_FILE} and [tool.steplaw] in {SHARED_FILE}",
                "keep one of them",
            )
        if has_own or has_shared:
            return own if has_own else shared
    raise NoConfiguration(
        f"neither {start} nor a folder above it has [tool.steplaw] in {SHARED_FILE} or {OWN_FILE}",
        f"write {EXAMPLE}",
    )


@contextmanager
def inside(folder: Path) -> Iterator[None]:
    """Work in a folder, as the processes do that are started meanwhile.

    Parameters
    ----------
    folder : Path
        The folder.
    """
    before = Path.cwd()
    os.chdir(folder)
    try:
        yield
    finally:
        os.chdir(before)


class _Reader:
    """Reads one file, and knows where in it the reading is."""

    def __init__(self, file: Path, text: str, prefix: tuple[str, ...]) -> None:
        self._file, self._text, self._prefix = file, text, prefix
        self._lines: dict[tuple[str, ...], int] | None = None
        self._at: tuple[str, ...] = ()

    @contextmanager
    def placed(self) -> Iterator[None]:
        """Say of a fault where in the file it is."""
        try:
            yield
        except Fault as fault:
            path = (*self._at, *fault.key)
            dotted = ".".join((*self._prefix, *path))
            place = f"{_shown(self._file)}:{self._line(path)}"
            told = f"{place}: {dotted}: {fault.message}" if dotted else f"{place}: {fault.message}"
            raise CallError(told, fault.hint) from None

    def configuration(self, data: Any) -> Configuration:
        root = self._file.parent
        _must_be_table(data)
        _must_be_known(data, _TOP)
        self._at = ("defaults",)
        defaults = data.get("defaults", {})
        _must_be_table(defaults)
        if "subject" in defaults:
            raise Fault("each study has a subject of its own", "leave it out here", ("subject",))
        check(defaults, root)
        self._at = ("studies",)
        tables = data.get("studies", {})
        if not isinstance(tables, dict):
            raise Fault(f"studies are tables, not {tables!r}"[:120], f"write {EXAMPLE}")
        studies = tuple(self._study(name, tables[name], defaults, root) for name in tables)
        self._at = ()
        return Configuration(self._file, root, studies, _budgets(data, root))

    def _study(self, name: str, table: Any, defaults: Mapping[str, Any], root: Path) -> NamedStudy:
        self._at = ("studies", name)
        check_name(name)
        if isinstance(table, str):
            table = {"subject": table}
        _must_be_table(table)
        if "subject" not in table:
            raise Fault("the study has no subject", 'add subject = "path/to/file.py:name"')
        check(table, root)
        settings = {**_without_rivals(defaults, table), **table}
        if settings.get("only_sizes") and "sizes" not in settings:
            raise Fault("only_sizes needs sizes", 'add sizes = "8..512"')
        tolerance = read_tolerance(settings.pop("tolerance", 0))
        if "sizes" in settings:
            settings["sizes"] = sizes_of(settings["sizes"])
        where = {key: self._line((*self._at, key)) for key in table}
        where[""] = self._line(self._at)
        return NamedStudy(name, settings, tolerance, self._file, root, where)

    def _line(self, path: tuple[str, ...]) -> int:
        if self._lines is None:
            self._lines = lines_of_keys(self._text)
        return line_of(self._lines, (*self._prefix, *path))


#: Settings of which a study has one: its own goes before the other of the defaults.
_RIVALS = (("feed", "every"), ("figure", "costs"))


def _without_rivals(defaults: Mapping[str, Any], table: Mapping[str, Any]) -> dict[str, Any]:
    kept = dict(defaults)
    for pair in _RIVALS:
        if any(key in table for key in pair):
            for key in pair:
                kept.pop(key, None)
    return kept


def _budgets(data: Mapping[str, Any], root: Path) -> Path:
    name = data.get("budgets", BUDGETS)
    if not isinstance(name, str) or not name.endswith(".toml"):
        raise Fault(
            f"{name!r} is not a file of budgets", f'write budgets = "{BUDGETS}"', ("budgets",)
        )
    return root / name


def _must_be_table(data: Any) -> None:
    if not isinstance(data, dict):
        raise Fault(f"a table is needed here, not {data!r}"[:120], f"write {EXAMPLE}")


def _must_be_known(data: Mapping[str, Any], known: tuple[str, ...]) -> None:
    for key, value in data.items():
        if key in known:
            continue
        hint = f"keys here are {', '.join(known)}"
        close = close_to(key, known)
        if close:
            hint = f"did you mean {' or '.join(close)}?"
        elif isinstance(value, dict):
            hint = f"did you mean studies.{key}?"
        raise Fault(f"there is no key '{key}' here", hint, (key,))


def _text(file: Path) -> str:
    try:
        return file.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError:
        raise CallError(f"{_shown(file)} is not UTF-8 text", "save it as UTF-8") from None
    except OSError as fault:
        raise CallError(
            f"cannot read {_shown(file)}: {fault.strerror or fault}",
            f"give a {SHARED_FILE} or {OWN_FILE}",
        ) from None


def _own_part(file: Path, text: str) -> tuple[tuple[str, ...], Any]:
    import re
    import tomllib

    try:
        data: Any = tomllib.loads(text)
    except tomllib.TOMLDecodeError as fault:
        told = re.fullmatch(
            r"(.*?) \(at (?:line (\d+), column (\d+)|end of document)\)", str(fault)
        )
        message, line = (told[1], told[2]) if told else (str(fault), None)
        number = line or str(max(1, len(text.splitlines())))
        raise CallError(
            f"{_shown(file)}:{number}: this is not TOML: {message[:1].lower()}{message[1:]}",
            f"write {EXAMPLE}" if "=" not in text else "texts stand in quotes, lists in brackets",
        ) from None
    if file.name != SHARED_FILE:
        return (), data
    tool = data.get("tool", {})
    if not isinstance(tool, dict) or "steplaw" not in tool:
        raise CallError(f"{_shown(file)} has no [tool.steplaw]", f"write {EXAMPLE}")
    return ("tool", "steplaw"), tool["steplaw"]


def _speaks_of_steplaw(file: Path) -> bool:
    """Whether the file has a [tool.steplaw], by its text where it cannot be read."""
    import tomllib

    try:
        text = file.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError):
        return False
    if "steplaw" not in text:
        return False
    try:
        tool = tomllib.loads(text).get("tool", {})
    except tomllib.TOMLDecodeError:
        return "tool.steplaw" in text
    return isinstance(tool, dict) and "steplaw" in tool


def _shown(file: Path) -> str:
    try:
        return str(file.relative_to(Path.cwd()))
    except ValueError:
        return str(file)
