"""Budgets: the agreed law of each study, in a TOML file that reads well in a diff."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from pathlib import Path
from typing import Any

from steplaw.errors import CallError
from steplaw.review.account import Account, Figure, Size, account_of, minor
from steplaw.review.configuration import Configuration, NamedStudy
from steplaw.review.tomltext import inline, key_text, value_text
from steplaw.tally.classes import CLASSES

#: Sizes whose counts are kept where no formula gives them, the largest ones.
COUNTS_KEPT = 8
HEADING = """\
# Laws that the team has agreed on, by study.
# `steplaw budget set` writes this file, `steplaw budget check` holds the code to it.
"""
Json = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Budgets:
    """The agreed laws of a project.

    Parameters
    ----------
    file : Path
        Where they are kept.
    entries : mapping of str to mapping
        A table for each study, as in the file.
    """

    file: Path
    entries: Mapping[str, Json] = field(default_factory=dict)

    def account(self, name: str) -> Account | None:
        """Give what was agreed on for a study, to be compared with an audit.

        Parameters
        ----------
        name : str
            The study.

        Raises
        ------
        CallError
            If the file does not hold it in the form that it is written in.
        """
        if name not in self.entries:
            return None
        try:
            return _account(self.entries[name])
        except (KeyError, TypeError, ValueError, AttributeError) as fault:
            raise CallError(
                f"{self.file}: the budget of {name} cannot be read ({type(fault).__name__}: "
                f"{fault})",
                f"write it anew: steplaw budget set {name}",
            ) from None


def read_budgets(configuration: Configuration) -> Budgets:
    """Read the agreed laws of a project.

    Parameters
    ----------
    configuration : Configuration
        Which says where they are.

    Returns
    -------
    Budgets
        Without entries where there is no file yet.

    Raises
    ------
    CallError
        If the file cannot be read.
    """
    import tomllib

    file = configuration.budgets
    try:
        data = tomllib.loads(file.read_text(encoding="utf-8"))
    except FileNotFoundError:
        return Budgets(file)
    except (OSError, UnicodeDecodeError) as fault:
        reason = getattr(fault, "strerror", None) or fault
        raise CallError(
            f"cannot read {file}: {reason}", "write it anew: steplaw budget set"
        ) from None
    except tomllib.TOMLDecodeError as fault:
        raise CallError(
            f"{file} is not TOML: {fault}", "mend it, or write it anew: steplaw budget set"
        ) from None
    for name, entry in data.items():
        if not isinstance(entry, dict):
            raise CallError(
                f"{file}: {name} is no budget of a study", "write it anew: steplaw budget set"
            )
    return Budgets(file, data)


def write_budgets(budgets: Budgets, order: Sequence[str]) -> None:
    """Write the agreed laws, each study in its own table.

    Parameters
    ----------
    budgets : Budgets
        All of them.
    order : sequence of str
        Names of studies in the order to write them; others follow.

    Raises
    ------
    CallError
        If the file cannot be written.
    """
    names = [n for n in order if n in budgets.entries]
    names += [n for n in budgets.entries if n not in names]
    text = HEADING + "".join(_table(name, budgets.entries[name]) for name in names)
    try:
        budgets.file.parent.mkdir(parents=True, exist_ok=True)
        budgets.file.write_text(text, encoding="utf-8")
    except OSError as fault:
        raise CallError(
            f"cannot write {budgets.file}: {fault.strerror or fault}",
            'name another place: budgets = "laws.toml" in the configuration',
        ) from None


def entry_of(study: NamedStudy, record: Json) -> dict[str, Any]:
    """Give the table of a study's agreed law.

    Parameters
    ----------
    study : NamedStudy
        The study.
    record : mapping
        Its finished `steplaw.audit/1` record.

    Returns
    -------
    dict
        Settings that the law was found with, a line for each figure, and counts at the largest
        sizes of those figures that no formula gives exactly.
    """
    account = account_of(record)
    kept = ("subject", "sizes", "every", "draws", "costs")
    entry: dict[str, Any] = {k: study.settings[k] for k in kept if k in study.settings}
    entry["feed"] = account.feed
    entry["figure"] = account.figure
    entry["python"] = ".".join(minor(account.python))
    entry["largest"] = _largest(record)
    names = dict.fromkeys((account.figure, "steps", "native", "work"))
    entry["laws"] = {n: _line(account.figures[n]) for n in names if n in account.figures}
    classes = [name for name in CLASSES if name in account.figures]
    entry["classes"] = {name: _line(account.figures[name]) for name in classes}
    inexact = [n for n in (*entry["laws"], *entry["classes"]) if not account.figures[n].is_counted]
    counts = {n: _kept_counts(account.figures[n]) for n in dict.fromkeys(inexact)}
    if counts:
        entry["counts"] = counts
    return entry


def _largest(record: Json) -> dict[str, int]:
    plan = record["sizes"]["plan"]
    return {name: max(at[name] for at in plan) for name in record["sizes"]["names"]}


def _line(figure: Figure) -> dict[str, Any]:
    """Give a law as one line of the file."""
    law, details = figure.law, figure.law.get("details") or {}
    line: dict[str, Any] = {}
    if figure.formula is not None:
        line["law"] = figure.formula
        line["leading"] = law.get("leading") or figure.formula
    line["grade"] = law["grade"]
    if law.get("holds_from"):
        line["holds_from"] = law["holds_from"]
    if law["grade"] == "fitted" and details.get("terms"):
        first = details["terms"][0]
        line["term"] = first["term"]
        line["between"] = [float(f"{first[end]:.6g}") for end in ("low", "high")]
    if law["grade"] == "open" and details.get("undecided"):
        line["undecided"] = list(details["undecided"])
    return line


def _kept_counts(figure: Figure) -> dict[str, str | int]:
    sizes = list(figure.counts)[-COUNTS_KEPT:]
    return {_size_text(size): _count(figure.counts[size]) for size in sizes}


def _size_text(size: Size) -> str:
    return " ".join(f"{name}={x}" for name, x in size)


def _read_size(text: str) -> Size:
    pairs = (part.split("=") for part in text.split())
    return tuple((name, int(x)) for name, x in pairs)


def _count(count: Fraction) -> str | int:
    return count.numerator if count.denominator == 1 else str(count)


def _account(entry: Json) -> Account:
    largest = entry["largest"]
    names = tuple(largest)
    counts = entry.get("counts", {})
    figures = {}
    for name, line in {**entry["laws"], **entry["classes"]}.items():
        seen = {_read_size(s): Fraction(x) for s, x in counts.get(name, {}).items()}
        figures[name] = Figure(_law(line, largest), seen, names)
    return Account(entry["figure"], figures, entry["python"], entry["feed"])


def _law(line: Json, largest: Mapping[str, int]) -> dict[str, Any]:
    details: dict[str, Any] = {}
    if "between" in line:
        low, high = line["between"]
        details["terms"] = [{"term": line["term"], "low": float(low), "high": float(high)}]
    if "undecided" in line:
        details["undecided"] = list(line["undecided"])
    held = line.get("holds_from", 0)
    return {
        "formula": line.get("law"),
        "leading": line.get("leading"),
        "grade": line["grade"],
        "holds_from": held,
        "settled_by": [],
        "checked_at": [dict(largest)],
        "error": None,
        "note": "as agreed on",
        "details": details,
    }


def _table(name: str, entry: Json) -> str:
    return "".join(f"{line}\n" for line in _table_lines(name, entry))


def _table_lines(name: str, entry: Json) -> Iterator[str]:
    own = key_text(name)
    yield from ("", f"[{own}]")
    for key, value in entry.items():
        if key not in ("laws", "classes", "counts"):
            yield f"{key_text(key)} = {value_text(value)}"
    for part in ("laws", "classes", "counts"):
        if entry.get(part):
            yield from ("", f"[{own}.{part}]")
            for key, value in entry[part].items():
                yield f"{key_text(key)} = {inline(value)}"
