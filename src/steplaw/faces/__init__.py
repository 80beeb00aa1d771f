"""Faces: they read a finished record, show it, and compute nothing that is not in it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from steplaw.errors import CallError

KINDS = ("terminal", "page", "markdown", "json")


def render(record: Mapping[str, Any], as_: str, width: int = 80) -> str:
    """Show a record as text.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` or `steplaw.tally/1` record.
    as_ : {"terminal", "page", "markdown", "json"}
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
    tally = record.get("schema") == "steplaw.tally/1"
    if as_ == "terminal":
        from steplaw.faces.terminal import text

        return text(record, width)
    if as_ == "json":
        import json

        return json.dumps(record, indent=2) + "\n"
    if as_ not in KINDS:
        raise CallError(f"there is no face {as_!r}", f"give one of {', '.join(KINDS)}")
    if tally:
        raise CallError(f"a tally has no {as_} face", "give --as terminal or --as json")
    if as_ == "page":
        from steplaw.faces.page import page

        return page(record)
    from steplaw.faces.markdown import comment

    return comment(record)
