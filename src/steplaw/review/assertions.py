"""Assertions on a law that was found: each failure shows both laws and the line to look at."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from pathlib import Path
from typing import Any

from steplaw.errors import CallError
from steplaw.review.account import Figure, account_of
from steplaw.review.cause import line_to_look_at
from steplaw.review.change import compare_growth
from steplaw.wording import close_to, listing

Json = Mapping[str, Any]


class FoundLaw:
    """The law of one figure of an audit, to assert on.

    Parameters
    ----------
    record : mapping
        A finished `steplaw.audit/1` record.
    figure : str, optional
        The figure; by default that of the audit.
    study : str, optional
        The study's name, where the audit had one.
    project : Path
        Folder of the configuration, or below it.
    """

    def __init__(
        self,
        record: Json,
        figure: str | None = None,
        study: str | None = None,
        project: Path | None = None,
    ) -> None:
        self.record = record
        self.figure = figure or str(record["figure"]["name"])
        self._study = study
        self._project = project or Path()

    def __getitem__(self, figure: str) -> FoundLaw:
        """Give the law of another figure of the same audit.

        Parameters
        ----------
        figure : str
            ``steps``, ``native``, ``work``, an operation class, or ``line:N``.
        """
        found = FoundLaw(self.record, figure, self._study, self._project)
        _ = found.law
        return found

    @property
    def law(self) -> Json:
        """The LAW of the figure, as the record has it.

        Raises
        ------
        CallError
            If the audit has no such figure.
        """
        return self._counted.law

    @property
    def formula(self) -> str | None:
        """The formula, None where no law is claimed."""
        return self._counted.formula

    def grows_at_most(self, bound: str) -> FoundLaw:
        """Assert that the figure grows no faster than a formula, whatever the factor.

        Parameters
        ----------
        bound : str
            A formula in the size names, such as ``n*log(n)``.

        Returns
        -------
        FoundLaw
            The same, for a further assertion.

        Raises
        ------
        AssertionError
            If it grows faster, or no law is claimed that would tell.
        """
        __tracebackhide__ = True
        limit = self._bound(bound)
        told = self._orders()
        if not told:
            self._fail("no law is claimed that tells the growth of", f"grow at most like {bound}")
        if any(compare_growth(limit, growth) > 0 for growth in told):
            self._fail("faster growth of", f"grow at most like {bound}")
        return self

    def stays_within(self, bound: str) -> FoundLaw:
        """Assert that no count exceeds a formula, and that the law stays within it for good.

        Parameters
        ----------
        bound : str
            A formula in the size names, such as ``15*n**2 + 20*n``.

        Returns
        -------
        FoundLaw
            The same, for a further assertion.

        Raises
        ------
        AssertionError
            At the first size where it does, or where the law outgrows the formula.
        """
        __tracebackhide__ = True
        from steplaw.law.evaluate import value

        self.grows_at_most(bound)
        for size, count in self._counted.counts.items():
            allowed = value(bound, dict(size))
            if count > allowed:
                at = ", ".join(f"{name} = {x}" for name, x in size)
                more = f"{_number(count)} counted at {at}, where {_number(allowed)} is allowed, of"
                self._fail(more, f"stay within {bound}")
        if self._exceeds_in_the_limit(bound):
            self._fail("a larger coefficient of", f"stay within {bound}")
        return self

    def is_exactly(self, formula: str) -> FoundLaw:
        """Assert that a formula gives every count.

        Parameters
        ----------
        formula : str
            A formula in the size names, such as ``n*(n - 1)/2``.

        Returns
        -------
        FoundLaw
            The same, for a further assertion.

        Raises
        ------
        AssertionError
            At the first size where it does not.
        """
        __tracebackhide__ = True
        from steplaw.law.evaluate import value

        self._bound(formula)
        for size, count in self._counted.counts.items():
            expected = value(formula, dict(size))
            if count != expected:
                at = ", ".join(f"{name} = {x}" for name, x in size)
                self._fail(
                    f"{_number(count)} counted at {at} instead of {_number(expected)}, of",
                    f"be exactly {formula}",
                )
        return self

    def is_as_agreed(self, study: str | None = None) -> FoundLaw:
        """Assert that no law became worse than in the budget of a study, all figures together.

        Parameters
        ----------
        study : str, optional
            The study; by default the one that was audited.

        Returns
        -------
        FoundLaw
            The same, for a further assertion.

        Raises
        ------
        AssertionError
            If one became worse, or none was agreed on.
        CallError
            If there is no such study.
        """
        __tracebackhide__ = True
        from steplaw.faces.verdicts import change_in_words
        from steplaw.review.budget import read_budgets
        from steplaw.review.configuration import read
        from steplaw.review.verdict import compare_accounts

        name = study or self._study
        if name is None:
            raise CallError("the audited function is no study", "name one: is_as_agreed('clashes')")
        configuration = read(self._project)
        tolerance = configuration.study(name).tolerance
        agreed = read_budgets(configuration).account(name)
        if agreed is None:
            raise AssertionError(f"no law is agreed on for {name}: run steplaw budget set {name}")
        verdict = compare_accounts(agreed, account_of(self.record), tolerance)
        if verdict.holds:
            return self
        lines = [f"{self._name()}: {verdict.kind}"]
        if verdict.decided_by is not None:
            lines += change_in_words(verdict.decided_by.as_json())
            lines += _look(self.record, verdict.decided_by.figure)
        lines += [note for note in (verdict.about_python, *verdict.notes) if note]
        raise AssertionError("\n  ".join(lines))

    @property
    def _counted(self) -> Figure:
        account = account_of(self.record)
        if self.figure in account.figures:
            return account.figures[self.figure]
        line = self._line()
        if line is not None:
            return Figure(line, {}, tuple(self.record["sizes"]["names"]))
        known = [*account.figures, "line:N"]
        close = close_to(self.figure, known)
        hint = f"did you mean {' or '.join(close)}?" if close else f"it has {listing(known, 20)}"
        raise CallError(f"the audit has no figure '{self.figure}'", hint)

    def _line(self) -> Json | None:
        kind, _, number = self.figure.partition(":")
        if kind != "line":
            return None
        file = self.record["subject"]["file"]
        of_line = (
            line["frequency"]
            for line in self.record["lines"]
            if line["file"] == file and str(line["line"]) == number
        )
        return next(of_line, None)

    def _orders(self) -> list[Figure]:
        """Give the law, or each law that it may be where several fit alike."""
        counted = self._counted
        if counted.formula is not None:
            return [counted]
        undecided = (counted.law.get("details") or {}).get("undecided", ())
        return [
            Figure({**counted.law, "formula": formula}, {}, counted.names) for formula in undecided
        ]

    def _bound(self, formula: str) -> Figure:
        from steplaw.law.evaluate import parse
        from steplaw.law.expand import free_names

        names = tuple(self.record["sizes"]["names"])
        try:
            used = set(free_names(parse(formula)))
        except SyntaxError as fault:
            raise CallError(
                f"'{formula}' is no formula: {fault.msg}", "write one such as n*log(n)"
            ) from None
        if not used <= set(names):
            unknown = ", ".join(sorted(used - set(names)))
            raise CallError(
                f"'{formula}' speaks of {unknown}",
                f"the sizes of this audit are {', '.join(names)}",
            )
        law = {"formula": formula, "leading": None, "grade": "exact", "holds_from": 0}
        return Figure({**law, "settled_by": [], "checked_at": []}, {}, names)

    def _exceeds_in_the_limit(self, bound: str) -> bool:
        from steplaw.law.growth import TooHard
        from steplaw.law.leading import ratio_limit

        counted = self._counted
        if not counted.is_counted:
            return False
        try:
            ratio = ratio_limit(counted.as_law(), self._bound(bound).as_law())
        except TooHard:
            return False
        return ratio is not None and ratio > 1

    def _name(self) -> str:
        return self._study or str(self.record["subject"]["name"])

    def _fail(self, what: str, asked: str) -> None:
        __tracebackhide__ = True
        from steplaw.faces.verdicts import law_in_words

        law = self.law
        lines = [
            f"{self._name()}: {what} {self.figure}",
            f"found: {self.figure} = {law_in_words(law)}".replace("= ~", "~"),
            f"asked: to {asked}",
            *([str(law["note"])] if law.get("formula") is None and law.get("note") else []),
            *_look(self.record, self.figure),
        ]
        raise AssertionError("\n  ".join(lines))


def _look(record: Json, figure: str) -> list[str]:
    place = line_to_look_at(record, figure)
    return [] if place is None else [f"look at {place}"]


def _number(x: Fraction | float) -> str:
    whole = isinstance(x, Fraction) and x.denominator == 1
    return str(int(x)) if whole else f"{float(x):.6g}"
