"""One figure before and after: judged by laws where they settle it, by equal inputs elsewhere."""

from __future__ import annotations

import math
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

from steplaw.review.account import Figure, Size

SAME, BETTER, UNDECIDED = "same law", "better", "undecided"
WORSE_COEFFICIENT, WORSE_ORDER = "worse coefficient", "worse order"

#: Growth of the ratio of counts, as an exponent of the size, from which on a fitted order of
#: growth is taken for another one; n*log(n) beside n has over 0.1 at any size below 20000.
DRIFT = 0.1

Pair = tuple[Size, Fraction, Fraction]


@dataclass(frozen=True, slots=True)
class Change:
    """What became of one figure.

    Parameters
    ----------
    figure : str
        Its name.
    kind : {"same law", "better", "undecided", "worse coefficient", "worse order"}
        What became of it.
    before, after : mapping
        The two LAWs.
    ratio : Fraction, float or None
        What the figure is multiplied by as the sizes grow without bound; None where laws do not
        tell.
    counted : tuple or None
        The largest size that both were counted at, and the two counts there.
    why : str
        What the kind rests on, in a few words.
    """

    figure: str
    kind: str
    before: Mapping[str, Any]
    after: Mapping[str, Any]
    ratio: Fraction | float | None
    counted: Pair | None
    why: str

    def as_json(self) -> dict[str, Any]:
        """Give the change as plain JSON values."""
        from steplaw.findings import number

        ratio: int | str | float | None = None
        if isinstance(self.ratio, Fraction):
            ratio = number(self.ratio)
        elif self.ratio is not None and math.isfinite(self.ratio):
            ratio = self.ratio
        counted = None
        if self.counted is not None:
            at, before, after = self.counted
            counted = {"at": dict(at), "before": number(before), "after": number(after)}
        return {
            "figure": self.figure,
            "kind": self.kind,
            "before": dict(self.before),
            "after": dict(self.after),
            "ratio": ratio,
            "counted": counted,
            "why": self.why,
        }


def compare_figure(
    name: str, before: Figure, after: Figure, tolerance: Fraction, same_inputs: bool = True
) -> Change:
    """Compare one figure of two audits.

    Parameters
    ----------
    name : str
        The figure.
    before, after : Figure
        Laws and counts.
    tolerance : Fraction
        Share by which it may rise.
    same_inputs : bool
        Whether both were run on inputs made in the same way, so that counts can be compared one
        by one.

    Returns
    -------
    Change
        Laws that give every count are compared as formulas. A fitted order of growth counts as
        another one only where the counts of equal inputs drift apart as well.
    """
    pairs = _pairs(before, after) if same_inputs else []
    counted = pairs[-1] if pairs else None
    change = Change(name, UNDECIDED, before.law, after.law, None, counted, "")
    if before.names != after.names:
        return replace(change, why=f"sizes were {_and(before.names)}, now {_and(after.names)}")
    if pairs and all(a == b for _, a, b in pairs) and not _both_counted(before, after):
        return replace(change, kind=SAME, ratio=Fraction(1), why="every count is the same")
    if _both_counted(before, after):
        return _by_formulas(change, before, after, pairs, tolerance)
    order = _order_told(before, after, pairs)
    if order:
        return order_change(change, order, "laws and counts", pairs)
    if not pairs:
        return _by_intervals(change, before, after, tolerance)
    return _by_counts(change, before, after, pairs, tolerance)


def order_change(change: Change, order: int, why: str, pairs: list[Pair]) -> Change:
    """Give a change of the order of growth.

    Parameters
    ----------
    change : Change
        What is known of it.
    order : int
        1 where it grows faster than before, -1 where slower.
    why : str
        What that rests on.
    pairs : list
        Sizes with both counts.
    """
    worse = order > 0
    kind = WORSE_ORDER if worse else BETTER
    against = [p for p in pairs if (p[2] < p[1] if worse else p[2] > p[1])]
    if against and len(against) == len(pairs):
        why += f", though {'less' if worse else 'more'} at every size run"
    return replace(change, kind=kind, ratio=math.inf if worse else Fraction(0), why=why)


def _by_formulas(
    change: Change, before: Figure, after: Figure, pairs: list[Pair], tolerance: Fraction
) -> Change:
    order = compare_growth(before, after)
    if order:
        return order_change(change, order, "another order of growth", pairs)
    from steplaw.law.growth import TooHard
    from steplaw.law.leading import ratio_limit

    if before.formula == after.formula:
        return replace(change, kind=SAME, ratio=Fraction(1), why="the same formula")
    with suppress(TooHard):
        change = replace(change, ratio=ratio_limit(after.as_law(), before.as_law()))
    ratio = change.ratio
    if ratio is None or math.isinf(ratio):
        change = replace(change, ratio=None)
        return _by_counts(change, before, after, pairs, tolerance)
    if ratio != 1:
        return _by_ratio(change, ratio, tolerance, "leading coefficient")
    if not pairs:
        return replace(change, why="the leading terms are the same; no size is in both")
    if all(a == b for _, a, b in pairs):
        return replace(change, kind=SAME, why="every count is the same")
    return _by_largest(change, pairs, tolerance, "lower terms")


def _by_ratio(change: Change, ratio: Fraction | float, tolerance: Fraction, what: str) -> Change:
    text = _times(ratio)
    if ratio < 1:
        return replace(change, kind=BETTER, why=f"{what} {text}")
    if ratio <= 1 + tolerance:
        return replace(change, kind=SAME, why=f"{what} {text}, within the tolerance")
    return replace(change, kind=WORSE_COEFFICIENT, why=f"{what} {text}")


def _by_largest(change: Change, pairs: list[Pair], tolerance: Fraction, what: str) -> Change:
    """Judge by the largest size at which the counts differ."""
    at, a, b = next(p for p in reversed(pairs) if p[1] != p[2])
    place = f"{what}, {_number(a)} before and {_number(b)} now at {_size(at)}"
    if b < a:
        return replace(change, kind=BETTER, why=place)
    if b <= a * (1 + tolerance):
        return replace(change, kind=SAME, why=f"{place}, within the tolerance")
    return replace(change, kind=WORSE_COEFFICIENT, why=place)


def _by_counts(
    change: Change, before: Figure, after: Figure, pairs: list[Pair], tolerance: Fraction
) -> Change:
    """Judge by counts of equal inputs; by intervals where these went both ways."""
    if not pairs:
        return replace(change, why="neither laws nor sizes in both tell")
    rose = any(b > a for _, a, b in pairs)
    fell = any(b < a for _, a, b in pairs)
    if rose and fell and before.formula and after.formula:
        by_intervals = _by_intervals(change, before, after, tolerance)
        if by_intervals.kind != UNDECIDED:
            return by_intervals
    if not rose and not fell:
        return replace(change, kind=SAME, ratio=Fraction(1), why="every count is the same")
    return _by_largest(change, pairs, tolerance, "counts of equal inputs")


def _by_intervals(change: Change, before: Figure, after: Figure, tolerance: Fraction) -> Change:
    """Judge by the leading coefficients, each with its interval."""
    was, now = _leading_interval(before), _leading_interval(after)
    if was is None or now is None or compare_growth(before, after):
        return replace(change, why="laws of this grade do not tell")
    why = f"leading term {now[0] / was[1]:.4g} to {now[1] / was[0]:.4g} times what it was"
    if now[0] > was[1] * (1 + float(tolerance)):
        return replace(change, kind=WORSE_COEFFICIENT, why=why)
    if now[1] < was[0]:
        return replace(change, kind=BETTER, why=why)
    return replace(change, kind=SAME, why=f"{why}: the intervals overlap")


#: A size at which leading terms are compared that are equal but for their coefficient.
_FAR = 10**6


def _leading_interval(figure: Figure) -> tuple[float, float] | None:
    """Give the leading term far out, at the ends of its coefficient's interval."""
    from steplaw.law.evaluate import value

    (name,) = figure.names if len(figure.names) == 1 else (None,)
    leading, terms = figure.law.get("leading"), (figure.law.get("details") or {}).get("terms")
    if name is None or leading is None:
        return None
    if figure.is_counted:
        low = high = float(value(leading, {name: _FAR}))
    elif terms and terms[0].get("low") is not None:
        unit = float(value(terms[0]["term"], {name: _FAR}))
        low, high = unit * terms[0]["low"], unit * terms[0]["high"]
    else:
        return None
    return (low, high) if 0 < low <= high < math.inf else None


def _order_told(before: Figure, after: Figure, pairs: list[Pair]) -> int:
    """Give 1 or -1 where laws and counts both say that the order of growth is another one."""
    drift = _drift(pairs)
    told = {_sign_of(a, b, before, after) for a in _orders(before) for b in _orders(after)}
    if told == {1}:
        return 1 if drift is None or drift > DRIFT else 0
    if told == {-1}:
        return -1 if drift is None or drift < -DRIFT else 0
    # No formula on one side: counts alone must say it, and by much.
    if not told and drift is not None and abs(drift) > 3 * DRIFT:
        return 1 if drift > 0 else -1
    return 0


def _orders(figure: Figure) -> list[str]:
    """Give the formulas whose order the figure may have: several where it is undecided."""
    if figure.formula is not None:
        return [figure.formula]
    return list((figure.law.get("details") or {}).get("undecided", ()))


def _sign_of(a: str, b: str, before: Figure, after: Figure) -> int:
    return compare_growth(
        replace(before, law={**before.law, "formula": a}),
        replace(after, law={**after.law, "formula": b}),
    )


def compare_growth(before: Figure, after: Figure) -> int:
    """Compare orders of growth: as all sizes grow alike, then as each of them grows alone.

    Parameters
    ----------
    before, after : Figure
        Both with a formula.

    Returns
    -------
    int
        1 where the second grows faster, -1 where it grows slower, 0 where neither does.
    """
    together = _order_along(before, after)
    if together or len(before.names) == 1:
        return together
    alone = {_order_along(before, after, name) for name in before.names}
    return 1 if 1 in alone else -1 if -1 in alone else 0


def _order_along(before: Figure, after: Figure, *names: str) -> int:
    from steplaw.law.growth import TooHard, compare
    from steplaw.law.leading import order

    try:
        ours, theirs = order(before.as_law(*names)), order(after.as_law(*names))
    except TooHard:
        return 0
    # Nothing at all grows no slower than a constant does.
    flat = (0.0,) * 5
    a, b = (flat if o[0] == -math.inf else o for o in (ours, theirs))
    return compare((b[0], b[1], b[2], b[3], b[4]), (a[0], a[1], a[2], a[3], a[4]))


def _drift(pairs: list[Pair]) -> float | None:
    """Give the growth of the ratio of counts over the upper half of sizes, as an exponent."""
    usable = [(_extent(at), a, b) for at, a, b in pairs if a > 0 and b > 0 and _extent(at) > 1]
    if len(usable) < 4:
        return None
    middle, last = usable[len(usable) // 2], usable[-1]
    if last[0] <= middle[0]:
        return None
    growth = math.log(last[2] / last[1]) - math.log(middle[2] / middle[1])
    return growth / math.log(last[0] / middle[0])


def _pairs(before: Figure, after: Figure) -> list[Pair]:
    """Give the sizes at which both are known exactly, the smallest first."""
    found = []
    for at in sorted({*before.counts, *after.counts}, key=lambda s: (_extent(s), s)):
        a, b = before.at(at), after.at(at)
        if a is not None and b is not None:
            found.append((at, a, b))
    return found


def _extent(size: Size) -> int:
    return math.prod(max(1, x) for _, x in size)


def _both_counted(before: Figure, after: Figure) -> bool:
    return before.is_counted and after.is_counted


def _times(ratio: Fraction | float) -> str:
    if isinstance(ratio, Fraction) and ratio.denominator < 1000:
        return f"{ratio} times what it was"
    return f"{float(ratio):.4g} times what it was"


def _number(x: Fraction) -> str:
    return str(x.numerator) if x.denominator == 1 else f"{float(x):.6g}"


def _size(at: Size) -> str:
    return ", ".join(f"{name} = {x}" for name, x in at)


def _and(names: tuple[str, ...]) -> str:
    return " and ".join(names)
