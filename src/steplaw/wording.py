"""Short texts for messages of one line."""

from __future__ import annotations

from collections.abc import Iterable


def one_line(text: object, most: int = 200) -> str:
    """Bring a text of any length and shape into one line.

    Parameters
    ----------
    text : object
        What to show, by its ``str``.
    most : int
        Characters at most.
    """
    words = " ".join(str(text).split())
    # A terminal cannot show lone surrogates, and must not obey what a message holds.
    line = "".join(c if c.isprintable() else ascii(c)[1:-1] for c in words)
    return line if len(line) <= most else line[: most - 1] + "…"


def describe(error: BaseException) -> str:
    """Give an exception as its type and its text, in one line.

    Parameters
    ----------
    error : BaseException
        The exception.
    """
    try:
        text = one_line(error)
    except Exception:
        text = ""
    return f"{type(error).__name__}: {text}" if text else type(error).__name__


def listing(names: Iterable[str], most: int = 8) -> str:
    """Join names by commas, the first few of many.

    Parameters
    ----------
    names : iterable of str
        All of them.
    most : int
        How many are shown.
    """
    all_names = list(names)
    shown = ", ".join(all_names[:most])
    return f"{shown}, … ({len(all_names)} in all)" if len(all_names) > most else shown


def close_to(name: str, names: Iterable[str], most: int = 3) -> list[str]:
    """Give the names that a mistyped name may have meant, best first.

    Parameters
    ----------
    name : str
        What was typed.
    names : iterable of str
        What there is.
    most : int
        How many at most.
    """
    import difflib

    spelt = {n.lower(): n for n in names}
    found = difflib.get_close_matches(name.lower(), spelt, n=most, cutoff=0.6)
    return [spelt[f] for f in found]


def with_article(noun: str) -> str:
    """Put an article before a noun.

    Parameters
    ----------
    noun : str
        In English.
    """
    return f"an {noun}" if noun[:1].lower() in "aeiou" else f"a {noun}"
