"""Import a source file or module; each way it can fail is said in one line."""

from __future__ import annotations

import importlib
import importlib.util
import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from types import ModuleType, TracebackType

from steplaw.errors import CallError, SteplawError
from steplaw.wording import close_to, describe, listing, one_line

# Import names whose package goes by another name on PyPI (common practice).
PACKAGE_OF = {
    "PIL": "pillow",
    "bs4": "beautifulsoup4",
    "cv2": "opencv-python",
    "dateutil": "python-dateutil",
    "dotenv": "python-dotenv",
    "sklearn": "scikit-learn",
    "skimage": "scikit-image",
    "yaml": "PyYAML",
}

_under_way: list[str] = []


def under_way() -> str | None:
    """Give the place that is being imported at this moment, or None."""
    return _under_way[-1] if _under_way else None


def load_file(place: str) -> ModuleType:
    """Import a source file as running it from its folder would find it.

    A file in a package (folders with ``__init__.py``) is imported as that package's module, from
    the folder above the package; any other under its stem, so that pickling by name works.

    Parameters
    ----------
    place : str
        Path of a ``.py`` file.

    Returns
    -------
    module
        The imported module.

    Raises
    ------
    CallError
        If there is no such file or it cannot be imported.
    """
    path = existing_file(place)
    root, name = module_name_of(path)
    _put_first(str(root))
    found = sys.modules.get(name)
    if found is not None and _is_from(found, path):
        return found
    with _said_in_one_line(place, path):
        if "." in name or path.name == "__init__.py" or _leads_to(name, path):
            module = importlib.import_module(name)
        else:
            module = _load_beside(path, f"{name}__subject")
    if not _is_from(module, path):
        raise CallError(
            f"{place}: the module name '{name}' is taken by {_file_of(module) or 'a built-in'}",
            f"rename the folder, or run from an environment without that '{name.split('.')[0]}'",
        )
    return module


def load_module(name: str) -> ModuleType:
    """Import a module by its dotted name, the current folder searched first.

    Parameters
    ----------
    name : str
        Dotted name, as for ``python -m``.

    Returns
    -------
    module
        The imported module.

    Raises
    ------
    CallError
        If there is no such module or it cannot be imported.
    """
    if "" not in sys.path:
        _put_first(str(Path.cwd()))
    with _said_in_one_line(name, None):
        return importlib.import_module(name)


def existing_file(place: str) -> Path:
    """Give the full path of a Python source file that exists, or say what there is instead."""
    path = Path(place).expanduser()
    if path.is_dir():
        sources = sorted(p.name for p in path.glob("*.py"))
        what = f"name a file in it: {listing(sources)}" if sources else "name a .py file"
        raise CallError(f"{place} is a folder", what)
    if not path.exists():
        raise CallError(f"no such file: {place}", _file_hint(path))
    if path.suffix != ".py":
        raise CallError(f"{place} is not a Python source file", "name a .py file")
    return path.resolve()


def module_name_of(path: Path) -> tuple[Path, str]:
    """Give the folder to import from and the module's dotted name.

    Parameters
    ----------
    path : Path
        Full path of the source file.
    """
    parts = [] if path.name == "__init__.py" else [path.stem]
    folder = path.parent
    while (folder / "__init__.py").exists() and folder != folder.parent:
        parts.insert(0, folder.name)
        folder = folder.parent
    return folder, ".".join(parts) or path.stem


def _file_hint(path: Path) -> str:
    if path.with_name(path.name + ".py").is_file():
        return f"did you mean {path.with_name(path.name + '.py')}?"
    folder = path.parent
    wanted = path.name
    while not folder.is_dir() and folder != folder.parent:
        wanted, folder = folder.name, folder.parent
    names = [p.name for p in folder.iterdir() if p.is_dir() or p.suffix == ".py"]
    close = close_to(wanted, names)
    if close:
        return "did you mean " + " or ".join(str(folder / c) for c in close) + "?"
    sources = sorted(n for n in names if n.endswith(".py"))
    if folder == path.parent and sources:
        return f"in {folder} there is {listing(sources)}"
    return f"paths are taken from {Path.cwd()}"


def _put_first(folder: str) -> None:
    if not sys.path or sys.path[0] != folder:
        sys.path.insert(0, folder)
        importlib.invalidate_caches()


def _file_of(module: ModuleType) -> str | None:
    return getattr(module, "__file__", None)


def _is_from(module: ModuleType, path: Path) -> bool:
    file = _file_of(module)
    return file is not None and Path(file).exists() and Path(file).samefile(path)


def _leads_to(name: str, path: Path) -> bool:
    # Taking the name of a standard module would break everyone else's import of it.
    if name in sys.modules or name in sys.stdlib_module_names or not name.isidentifier():
        return False
    spec = importlib.util.find_spec(name)
    return spec is not None and spec.origin is not None and Path(spec.origin).samefile(path)


def _load_beside(path: Path, name: str) -> ModuleType:
    if name in sys.modules and _is_from(sys.modules[name], path):
        return sys.modules[name]
    spec = importlib.util.spec_from_file_location(name, path)
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[name] = module
    try:
        spec.loader.exec_module(module)
    except BaseException:
        sys.modules.pop(name, None)
        raise
    return module


@contextmanager
def _said_in_one_line(place: str, path: Path | None) -> Iterator[None]:
    _under_way.append(place)
    try:
        yield
    except (KeyboardInterrupt, SteplawError):
        raise
    except SystemExit as stop:
        code = "" if stop.code is None else repr(stop.code)
        raise CallError(
            f"{place} calls sys.exit({one_line(code)}) while it is imported{_where(stop, path)}",
            "put that part under: if __name__ == '__main__':",
        ) from None
    except ModuleNotFoundError as error:
        raise _missing(error, place, path) from None
    except BaseException as error:
        if isinstance(error, SyntaxError) and error.filename and Path(error.filename).is_file():
            raise _does_not_compile(error) from None
        hint = "load it by its module name from the folder above: package.module:name"
        raise CallError(
            f"{place} raises {describe(error)} while it is imported{_where(error, path)}",
            hint if "relative import" in one_line(error.args) else None,
        ) from None
    finally:
        _under_way.pop()


def _does_not_compile(error: SyntaxError) -> CallError:
    version = f"{sys.version_info.major}.{sys.version_info.minor}"
    at = f", line {error.lineno}" if error.lineno else ""
    text = f": {error.text.strip()}" if error.text else ""
    return CallError(
        f"{error.filename}{at} does not compile under Python {version}: "
        f"{one_line(error.msg)}{one_line(text)}"
    )


def _missing(error: ModuleNotFoundError, place: str, path: Path | None) -> CallError:
    name = error.name or one_line(error)
    top = name.partition(".")[0]
    if path is None and (place + ".").startswith(name + ".") and not _own_frames(error):
        return _no_such_module(place, name)
    if "." in name and top in sys.modules:
        return CallError(
            f"{place} needs the module '{name}', which the installed '{top}' does not have"
            f"{_where(error, path)}"
        )
    nearby = _folder_with(top, path)
    if nearby is not None:
        return CallError(
            f"{place} needs the module '{top}', which is not on Python's path{_where(error, path)}",
            f"it is in {nearby}: set PYTHONPATH={nearby}",
        )
    return CallError(
        f"{place} needs the package '{top}', which is not installed{_where(error, path)}",
        f"pip install {PACKAGE_OF.get(top, top)}",
    )


def _no_such_module(place: str, name: str) -> CallError:
    import pkgutil

    parent, _, leaf = name.rpartition(".")
    if parent:
        searched = getattr(sys.modules.get(parent), "__path__", None)
        if searched is None:
            return CallError(
                f"no such module: {place}; '{parent}' is a module, not a package",
                f"a function of it is written {parent}:{leaf}",
            )
        names = {m.name for m in pkgutil.iter_modules(searched)}
    else:
        names = {m.name for m in pkgutil.iter_modules()} | set(sys.stdlib_module_names)
    close = [f"{parent}.{c}" if parent else c for c in close_to(leaf, names)]
    if close:
        return CallError(f"no such module: {name}", f"did you mean {' or '.join(close)}?")
    return CallError(
        f"no such module: {name}",
        "a module must be importable from here; a file is written path/to/file.py:name",
    )


def _folder_with(top: str, path: Path | None) -> Path | None:
    folders = path.parents if path else [Path.cwd()]
    for folder in [f for p in folders for f in (p, p / "src")]:
        if (folder / f"{top}.py").is_file() or (folder / top / "__init__.py").is_file():
            return folder
    return None


def _own_frames(error: BaseException) -> list[tuple[str, int]]:
    frames = []
    trace: TracebackType | None = error.__traceback__
    while trace is not None:
        file = trace.tb_frame.f_code.co_filename
        if not file.startswith("<frozen importlib") and file not in (__file__, importlib.__file__):
            frames.append((file, trace.tb_lineno))
        trace = trace.tb_next
    return frames


def _where(error: BaseException, path: Path | None) -> str:
    frames = _own_frames(error)
    if not frames:
        return ""
    folder = f"{path.parent}{os.sep}" if path else ""
    near = [f for f in frames if folder and f[0].startswith(folder)]
    file, line = (near or frames)[-1]
    return f" ({file}, line {line})"
