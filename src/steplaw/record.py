"""The finished records: plain JSON values with a schema, readable in a session."""

from __future__ import annotations

import json
from collections.abc import Mapping
from importlib.resources import files
from pathlib import Path
from typing import Any, NoReturn, Self

from steplaw.errors import CallError


class Part(dict[str, Any]):
    """A JSON object whose keys are attributes too.

    A key that is also a method of a dict (`values`, `items`, `keys`) is read in brackets alone:
    ``record.figure["values"]``.

    Parameters
    ----------
    data : mapping
        Plain JSON values; objects inside become parts as well.
    """

    def __init__(self, data: Mapping[str, Any]) -> None:
        super().__init__((key, _wrap(value)) for key, value in data.items())

    def __getattr__(self, name: str) -> Any:
        try:
            return self[name]
        except KeyError:
            raise AttributeError(f"the record has no {name!r} here") from None

    def __dir__(self) -> list[str]:
        return sorted({*super().__dir__(), *(key for key in self if key.isidentifier())})

    def __reduce__(self) -> tuple[type[Part], tuple[dict[str, Any]]]:
        return type(self), (dict(self),)

    def __deepcopy__(self, memo: dict[int, Any]) -> Part:
        return type(self)(self)


def _wrap(value: Any) -> Any:
    if isinstance(value, Mapping):
        return Part(value)
    if isinstance(value, list | tuple):
        return [_wrap(item) for item in value]
    return value


class Record(Part):
    """What the records have in common: JSON out and in, and a schema to hold them to."""

    schema_name = ""
    schema_file = ""

    def to_json(self, indent: int | None = 2) -> str:
        """Give the record as JSON text, with the keys in the order they were built.

        Parameters
        ----------
        indent : int, optional
            Spaces a level; None for one line.

        Returns
        -------
        str
            JSON text that ends in a line feed.
        """
        return json.dumps(self, indent=indent, ensure_ascii=True, allow_nan=False) + "\n"

    def write(self, path: str | Path) -> Path:
        """Write the record as JSON.

        Parameters
        ----------
        path : str or Path
            Where to.

        Returns
        -------
        Path
            The file written.

        Raises
        ------
        CallError
            If the file cannot be written.
        """
        target = Path(path)
        try:
            target.write_text(self.to_json(), encoding="utf-8")
        except OSError as fault:
            hint = "give a path in a folder that can be written"
            raise CallError(f"cannot write {target}: {fault.strerror or fault}", hint) from None
        return target

    @classmethod
    def from_json(cls, text: str | bytes, where: str = "the record") -> Self:
        """Read a record from JSON text and hold it to its schema.

        Parameters
        ----------
        text : str or bytes
            JSON text.
        where : str
            What a message calls the text.

        Returns
        -------
        Record
            The record.

        Raises
        ------
        CallError
            If the text is no JSON or does not follow the schema.
        """
        record = cls(_parse(text, where))
        record.validate(where)
        return record

    def validate(self, where: str = "the record") -> None:
        """Hold the record to the schema that ships with the package.

        Parameters
        ----------
        where : str
            What a message calls the record.

        Raises
        ------
        CallError
            At the place that tells most of what does not follow the schema.
        """
        from jsonschema import Draft202012Validator
        from jsonschema.exceptions import best_match

        fault = best_match(Draft202012Validator(schema(self.schema_file)).iter_errors(self))
        if fault is not None:
            place = "/".join(str(part) for part in fault.absolute_path) or "the top"
            what = " ".join(_shortened(fault.message).split())
            message = f"{where} does not follow {self.schema_name}: at {place}: {what}"
            raise CallError(_printable(message), "write the record anew with --json")


class AuditRecord(Record):
    """The finished audit, a `steplaw.audit/1` record.

    Examples
    --------
    >>> record = AuditRecord({"figure": {"law": {"formula": "n**2"}}})
    >>> record.figure.law.formula == record["figure"]["law"]["formula"]
    True
    """

    schema_name = "steplaw.audit/1"
    schema_file = "audit-1.schema.json"

    def __repr__(self) -> str:
        rows = [f"audit of {self._subject_line()}"]
        figure = self.get("figure") or {}
        law = figure.get("law") or {}
        formula = law.get("formula") or "no formula"
        rows.append(f"  {figure.get('name', 'steps')} = {formula} ({law.get('grade', 'open')})")
        if law.get("leading"):
            rows.append(f"  leading term {law['leading']}")
        for line in self.get("lines") or []:
            if line.get("dominant"):
                share = round(100 * line.get("share", 0))
                source = str(line.get("source", "")).strip()
                rows.append(f"  line {line['line']} has {share} % of the steps: {source}")
        clock = self.get("clock")
        rows.append(f"  clock: {clock.get('reason') if clock else 'not held against the clock'}")
        stopped = self.get("stopped")
        if stopped:
            rows.append(f"  stopped at {stopped.get('at')}: {stopped.get('message')}")
        return "\n".join(_printable(row) for row in rows)

    def _subject_line(self) -> str:
        subject = self.get("subject") or {}
        return (
            f"{subject.get('name', '?')} at {subject.get('file', '?')}:{subject.get('line', '?')}"
        )

    def _repr_html_(self) -> str:
        # A notebook asks the record for its page: the one place that looks up at a face.
        from steplaw.faces.page import frame

        return frame(self)


class TallyRecord(Record):
    """The tally of a whole program or of one call, a `steplaw.tally/1` record."""

    schema_name = "steplaw.tally/1"
    schema_file = "tally-1.schema.json"

    def __repr__(self) -> str:
        rows = [f"tally of {self.get('program', '?')}: {self.get('steps', 0)} steps"]
        for part in (self.get("functions") or [])[:5]:
            rows.append(f"  {part['steps']} in {part['name']} ({part['calls']} calls)")
        return "\n".join(_printable(row) for row in rows)


class DeriveRecord(Record):
    """The finished derivation, a `steplaw.derive/1` record."""

    schema_name = "steplaw.derive/1"
    schema_file = "derive-1.schema.json"

    def __repr__(self) -> str:
        subject, law = self["subject"], self["total"]
        rows = [f"derivation of {subject['name']} at {subject['file']}:{subject['line']}"]
        rows.append(f"  steps = {law['formula'] or 'no formula'} ({law['grade']})")
        rows += [f"  {u['name']}: line {u['line']}, {u['what']}" for u in self["unknowns"]]
        rows += [f"  stopped at line {s['line']}: {s['reason']}" for s in self["stopped_by"]]
        return "\n".join(_printable(row) for row in rows)


class WorstRecord(Record):
    """The worst case of a subject, a `steplaw.worst/1` record."""

    schema_name = "steplaw.worst/1"
    schema_file = "worst-1.schema.json"

    def __repr__(self) -> str:
        best = self["best"]
        rows = [f"worst case of {self['subject']['name']}: {best['value']} at n={best['at']}"]
        if self["family"] is not None:
            law = self["family"]["law"]
            rows.append(f"  at least {law['formula']} ({law['grade']}): {self['family']['text']}")
        return "\n".join(_printable(row) for row in rows)


class LifeRecord(Record):
    """The cost of operations over a life, a `steplaw.life/1` record."""

    schema_name = "steplaw.life/1"
    schema_file = "life-1.schema.json"


class TypicalRecord(Record):
    """The distribution of a figure by size, a `steplaw.typical/1` record."""

    schema_name = "steplaw.typical/1"
    schema_file = "typical-1.schema.json"


class SpaceRecord(Record):
    """What a subject holds at its peak, a `steplaw.space/1` record."""

    schema_name = "steplaw.space/1"
    schema_file = "space-1.schema.json"


class ForecastRecord(Record):
    """Steps and time foretold from an audit, a `steplaw.forecast/1` record."""

    schema_name = "steplaw.forecast/1"
    schema_file = "forecast-1.schema.json"

    def __repr__(self) -> str:
        rows = [f"forecast of {self['subject']['name']}, laws of {self['python']}"]
        for entry in self["at"]:
            told = entry["figures"]["steps"]
            steps = told["interval"] or told["value"]
            rows.append(f"  at {entry['at']}: steps {steps}, seconds {entry['seconds']}")
        for entry in self["within"]:
            sure = entry["sure"] and entry["sure"]["at"]
            rows.append(f"  within {entry['limit']}: {sure or entry['why'] or 'not for sure'}")
        return "\n".join(_printable(row) for row in rows)


class VersusRecord(Record):
    """Two subjects on one feed, a `steplaw.versus/1` record."""

    schema_name = "steplaw.versus/1"
    schema_file = "versus-1.schema.json"

    def __repr__(self) -> str:
        a, b = (self["subjects"][k]["name"] for k in "ab")
        rows = [f"{a} versus {b}, laws of {self['python']}"]
        for figure, told in self["figures"].items():
            for c in told["crossings"]:
                who = {"a": a, "b": b}[c["less"]]
                rows.append(f"  fewer {figure} from {c['at']} on: {who} ({told['grade']})")
        return "\n".join(_printable(row) for row in rows)


RECORDS: dict[str, type[Record]] = {
    kind.schema_name: kind
    for kind in (
        AuditRecord,
        TallyRecord,
        DeriveRecord,
        WorstRecord,
        LifeRecord,
        TypicalRecord,
        SpaceRecord,
        ForecastRecord,
        VersusRecord,
    )
}


def read(path: str | Path) -> Record:
    """Read a stored record of any kind.

    Parameters
    ----------
    path : str or Path
        A file that `Record.write` wrote.

    Returns
    -------
    Record
        The record, of the class that its schema names.

    Raises
    ------
    CallError
        If there is no such file, or it holds no record.
    """
    try:
        text = Path(path).read_bytes()
    except OSError as fault:
        hint = "give the file that --json wrote"
        raise CallError(f"cannot read {path}: {fault.strerror or fault}", hint) from None
    data = _parse(text, str(path))
    kind = RECORDS.get(str(data.get("schema")))
    if kind is None:
        known = " or ".join(RECORDS)
        raise CallError(f"{path} is no record of steplaw", f"give a file whose schema is {known}")
    record = kind(data)
    record.validate(str(path))
    return record


def schema(name: str) -> dict[str, Any]:
    """Give a JSON Schema that ships with the package.

    Parameters
    ----------
    name : str
        File name, such as ``audit-1.schema.json``.

    Returns
    -------
    dict
        The schema, JSON Schema draft 2020-12.
    """
    text = files("steplaw").joinpath("schemas", name).read_text(encoding="utf-8")
    loaded: dict[str, Any] = json.loads(text)
    return loaded


def _parse(text: str | bytes, where: str) -> dict[str, Any]:
    try:
        data = json.loads(text, parse_constant=_refuse)
    except (ValueError, RecursionError) as fault:
        what = "nested too deeply" if isinstance(fault, RecursionError) else str(fault)
        raise CallError(f"{where} is not JSON: {what}", "give the file that --json wrote") from None
    if not isinstance(data, dict):
        raise CallError(f"{where} holds no JSON object", "give the file that --json wrote")
    return data


def _refuse(name: str) -> NoReturn:
    raise ValueError(f"{name} is not a JSON number")


def _shortened(text: str, most: int = 160) -> str:
    return text if len(text) <= most else f"{text[: most // 2]} … {text[-most // 2 :]}"


def _printable(text: str) -> str:
    """Leave out what could move a terminal's cursor or turn the reading direction."""
    return "".join(c if c.isprintable() else " " for c in text)
