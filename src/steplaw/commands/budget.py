"""``steplaw budget``."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

import click

from steplaw.commands.project import PROJECT
from steplaw.commands.studies import must_have_studies, summary, watching
from steplaw.review.budget import Budgets, entry_of, read_budgets, write_budgets
from steplaw.review.configuration import Configuration, NamedStudy, read
from steplaw.review.outcomes import Outcome, run_all
from steplaw.review.verdict import HOLDS, WORSE_COEFFICIENT, WORSE_ORDER, Verdict

NOT_HELD = 1


@click.group("budget")
def command() -> None:
    """Keep the laws that a team has agreed on, and hold the code to them."""


@command.command("set")
@click.argument("names", metavar="[STUDY]...", nargs=-1)
@PROJECT
def set_budgets(names: tuple[str, ...], project: str) -> int:
    """Write the laws of the studies as they are now; all studies where none is named."""
    configuration = read(project)
    studies = _chosen(configuration, names)
    before = read_budgets(configuration)
    shown = _begun(studies, "setting the budgets of", configuration)
    kept = {
        s.name: before.entries[s.name] for s in configuration.studies if s.name in before.entries
    }
    outcomes = []
    for outcome in run_all(studies, watching, {"clock": False}):
        outcomes.append(outcome)
        name = outcome.study.name
        if outcome.record is None or outcome.status:
            shown.row(name, _failed(outcome, "the budget stays as it was"))
            continue
        verdict = _verdict(before, outcome)
        kept[name] = entry_of(outcome.study, outcome.record)
        write_budgets(Budgets(before.file, kept), [s.name for s in configuration.studies])
        shown.row(name, [*_told(verdict, outcome, "new budget")])
    gone = [name for name in before.entries if name not in kept]
    if gone:
        write_budgets(Budgets(before.file, kept), [s.name for s in configuration.studies])
        shown.total(f"taken out, no longer studies: {', '.join(gone)}")
    shown.total(f"{summary(outcomes, studies)}; {before.file}")
    return max(outcome.status for outcome in outcomes)


@command.command("check")
@click.argument("names", metavar="[STUDY]...", nargs=-1)
@PROJECT
def check_budgets(names: tuple[str, ...], project: str) -> int:
    """Hold the studies to the laws agreed on; all studies where none is named."""
    configuration = read(project)
    studies = _chosen(configuration, names)
    budgets = read_budgets(configuration)
    for study in studies:
        budgets.account(study.name)  # says at once what cannot be read
    shown = _begun(studies, "held to the budgets of", configuration)
    ended: list[tuple[Outcome, Verdict | None]] = []
    for outcome in run_all(studies, watching, {"clock": False}):
        verdict = _verdict(budgets, outcome)
        ended.append((outcome, verdict))
        no_budget = f"no budget: steplaw budget set {outcome.study.name}"
        is_whole = outcome.record is not None and not outcome.status
        told = _told(verdict, outcome, no_budget) if is_whole else _failed(outcome, "not compared")
        shown.row(outcome.study.name, [*told])
    for text in _beside(budgets, configuration, ended):
        shown.total(text)
    held = sum(_status(*pair) == 0 for pair in ended)
    shown.total(f"{held} of {len(studies)} hold; {summary([o for o, _ in ended], studies)}")
    return max(_status(*pair) for pair in ended)


def _status(outcome: Outcome, verdict: Verdict | None) -> int:
    if outcome.status or outcome.record is None:
        return outcome.status
    return 0 if verdict is not None and verdict.holds else NOT_HELD


def _beside(
    budgets: Budgets,
    configuration: Configuration,
    ended: Sequence[tuple[Outcome, Verdict | None]],
) -> Iterator[str]:
    """Give what is to be said once, beside the studies."""
    gone = [n for n in budgets.entries if n not in {s.name for s in configuration.studies}]
    if gone:
        yield f"with a budget, but no studies: {', '.join(gone)}"
    about = (v.about_python for _, v in ended if v is not None)
    yield from dict.fromkeys(text for text in about if text is not None)


def _chosen(configuration: Configuration, names: Sequence[str]) -> Sequence[NamedStudy]:
    if not names:
        return must_have_studies(configuration)
    return [configuration.study(name) for name in dict.fromkeys(names)]


def _begun(studies: Sequence[NamedStudy], text: str, configuration: Configuration) -> Any:
    from steplaw.commands.output import screen
    from steplaw.faces.terminal_studies import Studies

    shown = Studies(screen(), [study.name for study in studies])
    shown.heading(text, str(configuration.file))
    return shown


def _verdict(budgets: Budgets, outcome: Outcome) -> Verdict | None:
    from steplaw.review.account import account_of
    from steplaw.review.verdict import compare_accounts

    agreed = budgets.account(outcome.study.name)
    if agreed is None or outcome.record is None:
        return None
    return compare_accounts(agreed, account_of(outcome.record), outcome.study.tolerance)


def _failed(outcome: Outcome, then: str) -> list[tuple[str, str]]:
    from steplaw.faces.sheet import BAD, QUIET

    faults = outcome.faults or ("interrupted",)
    return [*((fault, BAD) for fault in faults), (then, QUIET)]


def _told(verdict: Verdict | None, outcome: Outcome, new: str) -> Iterator[tuple[str, str]]:
    """Give the paragraphs on one study, each with its style."""
    from steplaw.faces.sheet import BAD, GOOD, HEAD, QUIET, UNSURE
    from steplaw.faces.verdicts import change_in_words, law_in_words
    from steplaw.review.cause import line_to_look_at

    record: Mapping[str, Any] = outcome.record or {}
    if verdict is None:
        figure = record["figure"]
        yield new, UNSURE
        yield f"{figure['name']} {law_in_words(figure['law'])}", HEAD
        return
    worse = verdict.kind in (WORSE_COEFFICIENT, WORSE_ORDER)
    style = BAD if worse else GOOD if verdict.kind in HOLDS else UNSURE
    yield verdict.kind.upper() if worse else verdict.kind, style
    if verdict.decided_by is not None:
        for place, text in enumerate(change_in_words(verdict.decided_by.as_json())):
            yield text, HEAD if place < 2 else QUIET
        look = line_to_look_at(record, verdict.decided_by.figure)
        if worse and look is not None:
            yield f"look at {look}", UNSURE
    for note in verdict.notes:
        yield note, QUIET
