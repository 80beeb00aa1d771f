"""Derivations: a subject's frequencies as formulas, worked out from its source alone."""

from __future__ import annotations

import platform
import sys
from collections.abc import Iterable
from dataclasses import dataclass
from importlib.machinery import PathFinder
from pathlib import Path
from typing import TYPE_CHECKING, Any

from steplaw.errors import CallError
from steplaw.loading import existing_file
from steplaw.record import DeriveRecord
from steplaw.reference import SubjectRef, parse
from steplaw.wording import close_to, listing

if TYPE_CHECKING:
    from steplaw.flow.derive import Derived
    from steplaw.flow.ledger import Frequencies
    from steplaw.flow.module import Module
    from steplaw.flow.pieces import Pieces

Json = dict[str, Any]
_UNSURE = "not all of its calls are followed"


@dataclass(frozen=True, slots=True)
class Source:
    """A subject's source, read and not run.

    Parameters
    ----------
    ref : SubjectRef
        How it was named.
    file : str
        Its file.
    text : str
        All of the file.
    """

    ref: SubjectRef
    file: str
    text: str


def derive(subject: str) -> DeriveRecord:
    """Derive the frequency of each line of a function from its source, without running it.

    Parameters
    ----------
    subject : str
        ``path/to/file.py:name``, ``package.module:name``, or either with ``Class.method``.

    Returns
    -------
    DeriveRecord
        A `steplaw.derive/1` record. Its formulas hold in the sizes of the arguments and in named
        unknowns, under the assumptions that it states.

    Raises
    ------
    CallError
        If there is no such file, module or function.

    Notes
    -----
    The source file is read and compiled; neither it nor any module is imported.
    """
    source = find(subject)
    module = compiled(source)
    name = source.ref.name
    code = module.find(name)
    if code is None or module.node(name) is None:
        raise _no_such_function(module, source)
    from steplaw.flow.derive import derive as derive_code

    derived = derive_code(code, module)
    return DeriveRecord(_Writer(source, derived).record())


def find(subject: str) -> Source:
    """Read the source of a subject.

    Parameters
    ----------
    subject : str
        As for `derive`.

    Raises
    ------
    CallError
        If there is no such file or module, or it has no Python source.
    """
    ref = parse(subject)
    file = existing_file(ref.place) if ref.is_file else _file_of_module(ref.place)
    try:
        text = file.read_bytes().decode("utf-8")
    except UnicodeDecodeError:
        import tokenize

        with tokenize.open(file) as stream:
            text = stream.read()
    except OSError as fault:
        raise CallError(f"cannot read {file}: {fault.strerror or fault}", None) from None
    return Source(ref, str(file), text)


def _file_of_module(name: str) -> Path:
    """Find a module's source file without importing it or the packages around it."""
    places: list[str] | None = ["", *sys.path]
    spec = None
    for part in name.split("."):
        spec = PathFinder.find_spec(part, places)
        if spec is None:
            known = part in sys.builtin_module_names
            what = "it is built into the interpreter" if known else "there is no such module here"
            raise CallError(f"no source of {name}: {what}", "name a .py file and its function")
        locations = spec.submodule_search_locations
        places = list(locations) if locations is not None else None
    if spec is None or spec.origin is None or not spec.origin.endswith(".py"):
        raise CallError(f"{name} has no Python source", "only Python code can be derived")
    return Path(spec.origin)


def compiled(source: Source) -> Module:
    """Compile a source file, running nothing of it.

    Raises
    ------
    CallError
        If it is no valid Python here.
    """
    from steplaw.flow.module import Module

    try:
        return Module(source.text, source.file)
    except (SyntaxError, ValueError) as fault:
        line = getattr(fault, "lineno", None)
        place = f"{source.file}:{line}" if line else source.file
        message = f"{place} is no valid Python here: {getattr(fault, 'msg', None) or fault}"
        raise CallError(message, f"it is read as Python {platform.python_version()}") from None


def _no_such_function(module: Module, source: Source) -> CallError:
    from steplaw.flow.module import all_codes

    name = source.ref.name
    names = [
        c.co_qualname for c in all_codes(module.code) if "<" not in c.co_qualname.split(".")[-1]
    ]
    known = [n for n in names if module.node(n) is not None]
    message = f"{source.ref.place} defines no function '{name}'"
    if name in module.bound:
        return CallError(f"{message}: it gets it from elsewhere", "name the file that defines it")
    close = close_to(name, known)
    if close:
        offers = " or ".join(f"{source.ref.place}:{c}" for c in close)
        return CallError(message, f"did you mean {offers}?")
    hint = f"its functions are {listing(known)}" if known else None
    return CallError(message, hint)


class _Writer:
    """Writes what a derivation found as a record.

    Parameters
    ----------
    source : Source
        The subject's source.
    derived : Derived
        What was found.
    """

    def __init__(self, source: Source, derived: Derived) -> None:
        self.source, self.derived = source, derived
        self.names = derived.ledger.names
        self.lines = source.text.splitlines()
        self.unsure = derived.ledger.unsure
        self.incomplete = derived.failed is not None or bool(derived.recursive or self.unsure)
        self._spell()

    def _spell(self) -> None:
        """Give another spelling to names that mean something else to sympy, such as N or beta."""
        import keyword

        import sympy

        taken = {n for n, known in self.names.known.items() if known.kind in ("size", "whole")}
        for place, u in enumerate(self.derived.ledger.unknowns, 1):
            spelt = f"u{place}"
            while spelt in taken:
                spelt += "_"
            self.names.spelt[u.name] = spelt
        for name, known in self.names.known.items():
            if (
                known.kind != "unknown"
                and not known.parts
                and (hasattr(sympy, name) or keyword.iskeyword(name))
            ):
                spelt = f"{name}_"
                while spelt in self.names.known:
                    spelt += "_"
                self.names.spelt[name] = spelt

    def record(self) -> Json:
        """Give the record."""
        from steplaw import __version__

        derived = self.derived
        code = derived.code
        lines = self._lines()
        functions = self._functions()
        total = self._total()
        unknowns = self._unknowns()
        return {
            "schema": "steplaw.derive/1",
            "steplaw": __version__,
            "python": platform.python_version(),
            "subject": {
                "name": self.source.ref.name,
                "file": self.source.file,
                "line": code.co_firstlineno,
            },
            "total": total,
            "sizes": self._sizes([total, *(x["frequency"] for x in lines)], unknowns),
            "lines": lines,
            "functions": functions,
            "unknowns": unknowns,
            "stopped_by": self._stopped(),
            "recurrences": list(derived.recursive),
            "not_included": [{"line": line, "name": name} for line, name in derived.unseen],
            "assumptions": self._assumptions(),
        }

    def law(self, pieces: Pieces | None, note: str = "") -> Json:
        """Write a count as a LAW."""
        if pieces is None:
            return _law(None, None, "open", note or "it could not be derived")
        from steplaw.flow.formula import written

        note = "" if note == _UNSURE else note
        formula = written(self.names, pieces)
        kinds = {self.names.known[n].kind for n in self.names.roots(pieces.polys())}
        results = {
            n
            for n in self.names.roots(pieces.polys())
            if self.names.known[n].kind in ("size", "whole") and not self._is_argument(n)
        }
        unknown = "unknown" in kinds
        grade = "exact" if unknown or results else "proved"
        notes = [note] if note else []
        if unknown:
            notes.append("exact in the unknowns that it names")
        if results:
            notes.append("in sizes of things that are no arguments")
        law = _law(
            formula.text, self._leading(formula.main), grade, "; ".join(notes), formula.holds_from
        )
        if formula.below:
            law["details"] = {"below": {str(n): v for n, v in formula.below.items()}}
        return law

    def _is_argument(self, name: str) -> bool:
        return self.names.known[name].text in self.derived.sizes

    def _leading(self, text: str) -> str:
        from steplaw.law.leading import leading_term

        try:
            return leading_term(text)
        except Exception:  # a formula beyond what leading terms are known for stands for itself
            return text

    def _lines(self) -> list[Json]:
        from steplaw.flow.lineflow import line_depths, line_frequencies
        from steplaw.flow.pieces import NOTHING
        from steplaw.flow.walk import nest_of

        frequency: dict[int, Pieces] = {}
        steps: dict[int, Pieces] = {}
        depth: dict[int, int] = {}
        doubtful: set[int] = set()
        for code, found in self.derived.ledger.codes.items():
            for line, (often, taken) in line_frequencies(found).items():
                if code in self.unsure:
                    doubtful.add(line)
                frequency[line] = frequency.get(line, NOTHING) + often
                steps[line] = steps.get(line, NOTHING) + taken
            for line, level in line_depths(nest_of(code)).items():
                depth[line] = max(depth.get(line, 0), level)
        return [
            {
                "file": self.source.file,
                "line": line,
                "source": self.lines[line - 1] if line <= len(self.lines) else "",
                "depth": depth.get(line, 0),
                "frequency": self.law(None if line in doubtful else frequency[line], _UNSURE),
                "steps": self.law(None if line in doubtful else steps[line], _UNSURE),
            }
            for line in sorted(steps)
        ]

    def _functions(self) -> list[Json]:
        from steplaw.flow.lineflow import steps_of

        return [
            {
                "file": self.source.file,
                "name": code.co_qualname,
                "line": code.co_firstlineno,
                "own": code is self.derived.code,
                "calls": self.law(None if code in self.unsure else found.calls, _UNSURE),
                "steps": self.law(None if code in self.unsure else steps_of(found), _UNSURE),
            }
            for code, found in self._codes()
        ]

    def _codes(self) -> Iterable[tuple[Any, Frequencies]]:
        return self.derived.ledger.codes.items()

    def _total(self) -> Json:
        from steplaw.flow.lineflow import steps_of
        from steplaw.flow.pieces import NOTHING

        if self.incomplete:
            return self.law(None, self._why())
        out = NOTHING
        for _, found in self._codes():
            out = out + steps_of(found)
        left_out = listing(dict.fromkeys(name for _, name in self.derived.unseen))
        note = f"without the steps of {left_out}, if these are Python code" if left_out else ""
        return self.law(out, note)

    def _why(self) -> str:
        if self.derived.failed is None and not self.derived.recursive:
            return _UNSURE
        if self.derived.failed is not None:
            return f"line {self.derived.failed.line}: {self.derived.failed.reason}"
        return "it calls itself: " + "; ".join(str(r["text"]) for r in self.derived.recursive)

    def _unknowns(self) -> list[Json]:
        from steplaw.flow.formula import written

        return [
            {
                "name": self.names.shown(u.name),
                "line": u.line,
                "what": u.what,
                "least": "0",
                "most": None if u.most is None else written(self.names, u.most).text,
            }
            for u in self.derived.ledger.unknowns
        ]

    def _sizes(self, laws: list[Json], unknowns: list[Json]) -> list[Json]:
        import re

        texts = [law["formula"] or "" for law in laws] + [u["most"] or "" for u in unknowns]
        used = {word for text in texts for word in re.findall(r"[^\W\d]\w*", text)}
        out = []
        for name, known in self.names.known.items():
            shown = self.names.shown(name)
            if known.kind in ("size", "whole") and shown in used:
                what = "argument" if self._is_argument(name) else "result"
                out.append({"name": shown, "text": known.text, "of": what})
        return out

    def _stopped(self) -> list[Json]:
        ledger = self.derived.ledger
        return [{"line": s.line, "reason": s.reason} for s in ledger.stopped]

    def _assumptions(self) -> list[Json]:
        fixed = [
            {"line": None, "text": "the call ends, and no exception leaves it or a loop in it"},
            {
                "line": None,
                "text": "no two arguments are one object, and code that is not seen changes no "
                "size of an argument that it is not given",
            },
        ]
        if self.derived.code.co_flags & 0x20:
            fixed.append({"line": None, "text": "the generator is run to its end"})
        return fixed + [{"line": n, "text": t} for t, n in self.derived.assumed.items()]


def _law(
    formula: str | None, leading: str | None, grade: str, note: str, holds_from: int | None = None
) -> Json:
    return {
        "formula": formula,
        "leading": leading,
        "grade": grade,
        "holds_from": holds_from if formula is not None else None,
        "settled_by": [],
        "checked_at": [],
        "error": 0.0 if formula is not None else None,
        "note": note,
    }
