"""The sheet as a page: one self-contained HTML file, and the same in a notebook's frame."""

from __future__ import annotations

import base64
import hashlib
from collections.abc import Mapping
from functools import lru_cache
from importlib.resources import files
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from jinja2 import Environment

Json = Mapping[str, Any]


def page(record: Json) -> str:
    """Give an audit as a page.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    str
        A whole HTML document that asks for nothing from anywhere. Untrusted text is escaped, and
        the document's own policy (Content Security Policy, level 3) lets nothing else run than
        the script that it was made with.
    """
    from steplaw.faces.view import view

    style, script = _part("page.css"), _part("law.js") + _part("sheet.js")
    template = _environment().get_template("page.html.j2")
    return template.render(
        view(record),
        style=style,
        style_hash=_hash(style),
        script=script,
        script_hash=_hash(script),
    )


def frame(record: Json) -> str:
    """Give an audit as a notebook shows it: the page in a frame of its own.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.

    Returns
    -------
    str
        An ``iframe`` whose styles do not leak into the notebook, nor the notebook's into it.
    """
    from markupsafe import Markup

    made = Markup(
        '<iframe title="Step law sheet" sandbox="allow-scripts" srcdoc="{}" '
        'style="width:100%;height:44rem;border:0"></iframe>'
    )
    return str(made.format(page(record)))


@lru_cache(maxsize=1)
def _environment() -> Environment:
    from jinja2 import Environment, PackageLoader, StrictUndefined

    return Environment(
        loader=PackageLoader("steplaw.faces", ""),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


@lru_cache(maxsize=8)
def _part(name: str) -> str:
    return files("steplaw.faces").joinpath(name).read_text(encoding="utf-8")


def _hash(text: str) -> str:
    """Give the source expression that allows one inline part (CSP level 3, 6.7.3)."""
    digest = base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()
    return f"sha256-{digest}"
