"""Faces: they read a finished record, show it, and compute nothing that is not in it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.errors import CallError

_NAMED = {
    "steplaw.tally/1": "a tally",
    "steplaw.derive/1": "a derivation",
    "steplaw.forecast/1": "a forecast",
    "steplaw.versus/1": "a comparison",
}
KINDS = ("terminal", "page", "markdown", "svg", "json")


def render(record: Mapping[str, Any], as_: str, width: int = 80) -> str:
    """Show a record as text.

    Parameters
    ----------
    record : mapping
        A record of any schema of steplaw.
    as_ : {"terminal", "page", "markdown", "svg", "json"}
        The face.
    width : int
        Columns, for the terminal.

    Returns
    -------
    str
        The text of the face, without terminal codes.

    Raises
    ------
    CallError
        If there is no such face, or it cannot show this kind of record.
    """
    kind = str(record.get("schema"))
    if as_ == "terminal":
        from steplaw.faces.terminal import text

        return text(record, width)
    if as_ == "json":
        import json

        return json.dumps(record, indent=2) + "\n"
    if as_ not in KINDS:
        raise CallError(f"there is no face {as_!r}", f"give one of {', '.join(KINDS)}")
    if kind == "steplaw.forecast/1" and as_ == "markdown":
        from steplaw.faces.markdown_forecast import comment as forecast_comment

        return forecast_comment(record)
    if kind == "steplaw.versus/1" and as_ == "markdown":
        from steplaw.faces.markdown_versus import comment as versus_comment

        return versus_comment(record)
    if kind != "steplaw.audit/1":
        raise CallError(f"{_NAMED.get(kind, 'this')} has no {as_} face", "give --as terminal")
    if as_ == "page":
        from steplaw.faces.page import page

        return page(record)
    if as_ == "svg":
        from steplaw.faces.plot import picture

        return picture(record, "svg").decode("utf-8")
    from steplaw.faces.markdown import comment

    return comment(record)
