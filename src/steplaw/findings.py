"""The laws of a sweep, as the parts of the audit record."""

from __future__ import annotations

import linecache
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from fractions import Fraction
from typing import Any

from steplaw import costs, series
from steplaw.costs import Costs
from steplaw.dominance import dominance, share_limit
from steplaw.errors import CallError
from steplaw.host.asking import Run
from steplaw.law import find_law, leading_term, order
from steplaw.law.model import Law, Observation
from steplaw.native import NativeFindings
from steplaw.repeat import Repeat
from steplaw.structure import Forms
from steplaw.sweep import Sweep
from steplaw.tally.classes import CLASSES

#: Lines outside the subject's file are listed from this share of the steps on.
SHARE_LISTED = 0.01


class Findings:
    """The laws of a sweep.

    Parameters
    ----------
    sweep : Sweep
        The runs.
    figure : str
        The figure that the study is about.
    loaded : mapping
        The subject, as the host describes it.
    repeat : Repeat or None
        What differed between equal runs: no law is claimed for that.
    own : Costs, optional
        The team's own weights, which the figure `cost` is made from.
    forms : Forms, optional
        The forms that the structure of the code fixes; without, nothing is proved.
    """

    def __init__(
        self,
        sweep: Sweep,
        figure: str,
        loaded: Mapping[str, Any],
        repeat: Repeat | None,
        own: Costs | None = None,
        forms: Forms | None = None,
    ) -> None:
        self.costs = own if figure == "cost" else None
        self.sweep = sweep
        self.name = figure
        self.forms = forms
        self.loaded = loaded
        self.changed = repeat.changed if repeat is not None else set()
        self.unsteady = repeat is not None and not repeat.holds
        self._orders: tuple[Any, ...] | None = None
        self._limits: dict[tuple[str, int], Any] = {}
        self._known: dict[tuple[Any, ...], Law] = {}
        self._lines = series.of_many(sweep, _line_values)
        self._functions = series.of_many(sweep, _function_values)
        self._check_line()
        self._largest = max(sweep.runs, default=None)
        self._total = self._at_largest(series.of(sweep, _steps))
        self.native = NativeFindings(sweep, self._law, loaded["file"], self.unsteady)
        self.figure_law = self._figure_law()

    def _law(
        self,
        observations: Sequence[Observation],
        changed: bool = False,
        form: tuple[object, ...] = (),
    ) -> Law:
        """Find a law; `form` names the figure to `Forms`, if the structure may prove it."""
        if changed:
            return Law(None, None, "open", note="the count changes between equal runs")
        if not observations:
            return Law(None, None, "open", note="nothing was run to its end")
        shape, why_not = None, ""
        if form and self.forms is not None:
            shape, why_not = self.forms.shape(*form)
        key = (*observations, shape)
        law = self._known.get(key)
        if law is None:
            orders = self._exact_orders()
            law = find_law(observations, self.sweep.names, shape=shape, orders=orders)
            self._known[key] = law
        if why_not and law.grade == "exact":
            law = replace(law, note="; ".join(x for x in (law.note, f"not proved: {why_not}") if x))
        return law

    def _exact_orders(self) -> tuple[Any, ...]:
        """Give the orders of growth of the lines whose frequency has an exact law."""
        if self._orders is None:
            self._orders = ()
            laws = [
                self._law(values)
                for key, values in self._lines.items()
                if key[2] == "frequency" and all(o.variance == 0 for o in values)
            ]
            self._orders = tuple(
                dict.fromkeys(order(law) for law in laws if law.grade in ("exact", "proved"))
            )
        return self._orders

    def _check_line(self) -> None:
        if not self.name.startswith("line:") or not self.sweep.runs:
            return
        line, file = int(self.name[5:]), self.loaded["file"]
        if (file, line, "frequency") not in self._lines:
            ran = sorted({k[1] for k in self._lines if k[0] == file})
            raise CallError(
                f"line {line} of {file} never ran",
                "lines that did: " + ", ".join(map(str, ran)),
            )

    def _read(self) -> Callable[[Run], int | Fraction]:
        if self.name == "steps":
            return _steps
        if self.name.startswith("line:"):
            key = (self.loaded["file"], int(self.name[5:]))
            return lambda run: series.lines(run).get(key, (0, 0))[0]
        read = costs.reader(self.name) if self.costs is None else self.costs.of
        return lambda run: read(run.tally)

    def _figure_law(self) -> Law:
        changed = self.unsteady
        if self.name.startswith("line:"):
            changed = (self.loaded["file"], int(self.name[5:])) in self.changed
        law = self._law(series.of(self.sweep, self._read()), changed, self._form())
        whole = self.name in ("native", "work", "elements") or self.name == "cost"
        return self.native.bounded(law) if whole else law

    def _form(self) -> tuple[object, ...]:
        """Name the study's figure as `Forms` knows it."""
        if self.name == "steps":
            return ("steps",)
        if self.name.startswith("line:"):
            return self.loaded["file"], int(self.name[5:]), "frequency"
        return ("operation", self.name) if self.name in CLASSES else ()

    def figure(self) -> dict[str, Any]:
        """Give the record's ``figure``."""
        read = self._read()
        observations = series.of(self.sweep, read)
        fixed = all(o.variance == 0 for o in observations)
        by_law: dict[str, Any] = {"least": None, "most": None, "variance": None}
        if (self.sweep.whole or fixed) and observations and not self.unsteady:
            form = self._form() if fixed else ()
            least = _single(observations, lambda o: Fraction(o.least))
            most = _single(observations, lambda o: Fraction(o.most))
            by_law = {
                "least": self._law(least, form=form).as_json(),
                "most": self._law(most, form=form).as_json(),
                "variance": self._law(_single(observations, lambda o: o.variance)).as_json(),
            }
        return {
            "name": self.name,
            "law": self.figure_law.as_json(),
            **by_law,
            "values": [self._value(o, read) for o in observations],
        }

    def _value(self, o: Observation, read: Callable[[Run], int | Fraction]) -> dict[str, Any]:
        out = {
            "at": self.sweep.at(o.at),
            "draws": o.draws,
            "mean": number(o.value),
            "variance": number(o.variance),
            "least": number(o.least),
            "most": number(o.most),
        }
        if self.sweep.whole:
            runs = self.sweep.runs[o.at]
            out["witness_least"] = min(runs, key=lambda r: (read(r), r.draw)).input
            out["witness_most"] = max(runs, key=lambda r: (read(r), -r.draw)).input
        return out

    def tallies(self) -> list[dict[str, Any]]:
        """Give the record's ``tallies``."""
        out = []
        for runs in self.sweep.runs.values():
            for run in runs:
                entry = {
                    "at": dict(run.at),
                    "draw": run.draw,
                    "steps": run.tally.steps,
                    "own_steps": run.own_steps,
                    "operations": dict(run.tally.operations),
                    "native": run.tally.native,
                }
                if self.sweep.whole:
                    entry["inputs"] = run.times
                    entry["input"] = run.input
                out.append(entry)
        return out

    def laws(self) -> dict[str, Any]:
        """Give the record's ``laws``."""
        changed = self.unsteady
        operations = series.of_many(self.sweep, lambda r: r.tally.operations)
        exact, data = series.parts(self.sweep)
        split = any(o.value for o in data)
        return {
            "steps": self._law(series.of(self.sweep, _steps), changed, ("steps",)).as_json(),
            "native": self.native.law(lambda run: run.tally.native or 0),
            "work": self.native.law(lambda run: costs.work(run.tally)),
            "elements": self.native.law(lambda run: costs.elements(run.tally)),
            "operations": {
                name: self._law(operations[name], changed, ("operation", name)).as_json()
                for name in sorted(operations)
            },
            "bound": self._bound(changed),
            "parts": {
                "exact": self._law(exact, changed).as_json() if split else None,
                "data": self._law(data, changed).as_json() if split else None,
            },
        }

    def _bound(self, changed: bool) -> dict[str, Any] | None:
        """Give the proved upper bound of all steps, where the steps themselves are not proved."""
        observations = series.of(self.sweep, _steps)
        if self.forms is None or changed or not observations:
            return None
        if self.forms.shape("steps")[0] is not None:
            return None
        bound = self.forms.most(observations)
        if bound is None:
            return None
        names = self.sweep.names
        return Law(
            bound.formula,
            leading_term(bound.main, names),
            "proved",
            holds_from=bound.holds_from if len(names) == 1 else None,
            checked_at=tuple(o.at[0] if len(names) == 1 else list(o.at) for o in observations),
            note="an upper bound: the data may decide for less",
            names=names,
        ).as_json()

    def lines(self) -> list[dict[str, Any]]:
        """Give the record's ``lines``: those of the subject's file, and costly ones elsewhere."""
        out = []
        total = self._law(series.of(self.sweep, _steps), self.unsteady, ("steps",))
        for file, line in sorted({(k[0], k[1]) for k in self._lines}):
            steps = self._lines[file, line, "steps"]
            changed = (file, line) in self.changed
            law = self._law(steps, changed, (file, line, "steps"))
            limit = self._limits[file, line] = share_limit(law, total)
            share = self._share(steps)
            if file != self.loaded["file"] and share < SHARE_LISTED:
                continue
            out.append(
                {
                    "file": file,
                    "line": line,
                    "source": linecache.getline(file, line).strip("\n"),
                    "function": None,
                    "frequency": self._law(
                        self._lines[file, line, "frequency"], changed, (file, line, "frequency")
                    ).as_json(),
                    "steps": law.as_json(),
                    "share": share,
                    "share_limit": limit,
                    "dominant": False,
                }
            )
        if out and self._total:
            max(out, key=_share_of)["dominant"] = True
        return out

    def dominance(self) -> dict[str, Any] | None:
        """Give the record's ``dominance``, once `lines` was asked for."""
        steps = {(k[0], k[1]): values for k, values in self._lines.items() if k[2] == "steps"}
        return dominance(self._limits, steps)

    def functions(self) -> list[dict[str, Any]]:
        """Give the record's ``functions``, the costliest at the largest size first."""
        out = []
        loaded = self.loaded
        for file, name, line in {k[:3]: None for k in self._functions}:
            steps = self._functions[file, name, line, "steps"]
            changed = any(f == file for f, _ in self.changed)
            own = (file, line) == (loaded["file"], loaded["line"])
            out.append(
                {
                    "file": file,
                    "name": name,
                    "line": line,
                    "own": own,
                    "calls": self._law(
                        self._functions[file, name, line, "calls"],
                        changed,
                        ("calls", file, name, line),
                    ).as_json(),
                    "steps": self._law(steps, changed, ("steps", file, name, line)).as_json(),
                    "share": self._share(steps),
                }
            )
        return sorted(out, key=lambda e: (-float(e["share"]), str(e["file"]), int(e["line"])))

    def _at_largest(self, observations: Sequence[Observation]) -> Fraction:
        return next((o.value for o in observations if o.at == self._largest), Fraction(0))

    def _share(self, observations: Sequence[Observation]) -> float:
        if not self._total:
            return 0.0
        return round(float(self._at_largest(observations) / self._total), 4)


def is_undecided(swept: Sweep) -> bool:
    """Whether several orders of growth fit the steps equally well.

    Parameters
    ----------
    swept : Sweep
        The runs.
    """
    law = find_law(series.of(swept, _steps), swept.names)
    return "undecided" in (law.details or {})


def _share_of(entry: Mapping[str, Any]) -> float:
    return float(entry["share"])


def _steps(run: Run) -> int:
    return run.tally.steps


def _line_values(run: Run) -> dict[tuple[str, int, str], int]:
    out = {}
    for (file, line), (frequency, steps) in series.lines(run).items():
        out[file, line, "frequency"] = frequency
        out[file, line, "steps"] = steps
    return out


def _function_values(run: Run) -> dict[tuple[str, str, int, str], int]:
    out = {}
    for (file, name, line), (calls, steps) in series.functions(run).items():
        out[file, name, line, "calls"] = calls
        out[file, name, line, "steps"] = steps
    return out


def _single(
    observations: Sequence[Observation], read: Callable[[Observation], Fraction]
) -> list[Observation]:
    """Give observations of a companion figure, such as the variance, as exact values."""
    return [
        Observation(o.at, read(o), o.draws, Fraction(0), read(o), read(o), o.whole)
        for o in observations
    ]


def number(value: Fraction | int) -> int | str:
    """Give an exact number as the record holds it: an int, or a string of a fraction."""
    whole = Fraction(value)
    return whole.numerator if whole.denominator == 1 else str(whole)
