"""The page's plots: SVG drawn by hand, so that style sheets and the slider reach into it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from steplaw.faces.dominance import Shares
from steplaw.faces.growth import Growth, Points
from steplaw.faces.text import clean, grouped, percent

WIDTH, HEIGHT = 420, 300
LEFT, RIGHT, TOP, BOTTOM = 46, 12, 12, 40
#: Parts with a band of their own; the rest share one.
BANDS = 6


@dataclass(frozen=True, slots=True)
class Axes:
    """A drawing surface with a logarithmic axis across, and one up that may be.

    Parameters
    ----------
    low, high : float
        Ends of the axis across.
    bottom, top : float
        Ends of the axis up.
    log : bool
        Whether the axis up is logarithmic.
    right : int
        Margin kept at the right.
    """

    low: float
    high: float
    bottom: float
    top: float
    log: bool = True
    right: int = RIGHT

    @property
    def width(self) -> float:
        """Give the width of the field."""
        return WIDTH - LEFT - self.right

    def x(self, size: float) -> float:
        """Give where a size is, from the left."""
        part = math.log(size / self.low) / math.log(self.high / self.low)
        return LEFT + part * self.width

    def y(self, height: float) -> float:
        """Give where a height is, from the top."""
        if self.log:
            part = math.log(height / self.bottom) / math.log(self.top / self.bottom)
        else:
            part = (height - self.bottom) / (self.top - self.bottom)
        return HEIGHT - BOTTOM - part * (HEIGHT - TOP - BOTTOM)

    def path(self, points: Sequence[tuple[float, float]]) -> str:
        """Give a path through points."""
        return "M" + "L".join(f"{self.x(x):.1f} {self.y(y):.1f}" for x, y in points)


def growth_chart(growth: Growth, place: int) -> str:
    """Draw counts, law and time against size, both axes logarithmic.

    Parameters
    ----------
    growth : Growth
        The points.
    place : int
        Number of the size name, which the slider's mark goes by.

    Returns
    -------
    str
        An ``svg`` element; what it holds of the record is escaped.
    """
    every = [*growth.counts, *growth.law, *growth.beyond, *growth.work, *growth.time]
    low, high = min(x for x, _ in every), max(x for x, _ in every)
    bottom = 10 ** math.floor(math.log10(min(y for _, y in every)) + 1e-9)
    top = 10 ** math.ceil(math.log10(max(y for _, y in every)) - 1e-9)
    axes = Axes(low, max(high, 2 * low), bottom, max(top, 10 * bottom))
    name = clean(growth.along.name)
    parts = [_frame(axes), _across(axes, name), _up(axes)]
    if growth.law:
        parts.append(f'<path class="law" d="{axes.path(growth.law)}"/>')
    if growth.work:
        parts.append(f'<path class="work-law" d="{axes.path(growth.work)}"/>')
    if len(growth.beyond) > 1:
        parts.append(f'<path class="law beyond" d="{axes.path(growth.beyond)}"/>')
    parts += [
        f'<circle class="count" cx="{axes.x(x):.1f}" cy="{axes.y(y):.1f}" r="3.4"/>'
        for x, y in growth.counts
    ]
    parts += [_cross(axes.x(x), axes.y(y)) for x, y in growth.time]
    parts += [_mark(axes, place), _key(growth)]
    what = "Counts, law and time against size" if growth.time else "Counts and law against size"
    return _svg("growth", f"{what}, both axes logarithmic: {_slope(growth)}", parts)


def shares_chart(shares: Shares, place: int, what: str) -> str:
    """Draw the shares of parts as bands, one upon the other.

    Parameters
    ----------
    shares : Shares
        The shares.
    place : int
        Number of the size name.
    what : str
        What the parts are: terms or lines.

    Returns
    -------
    str
        An ``svg`` element; what it holds of the record is escaped.
    """
    axes = Axes(shares.sizes[0], shares.sizes[-1], 0, 1, log=False, right=118)
    rows = layers(shares)
    under = [0.0] * len(shares.sizes)
    parts, marks = [_frame(axes), _across(axes, clean(shares.along.name))], []
    for label, row, colour in rows:
        over = [a + b for a, b in zip(under, row, strict=True)]
        edge = list(zip(shares.sizes, over, strict=True))
        floor = list(zip(shares.sizes, under, strict=True))[::-1]
        title = f"<title>{_text(label)}</title>"
        parts.append(f'<path class="band {colour}" d="{axes.path(edge + floor)}Z">{title}</path>')
        if row[-1] >= 0.045:
            marks.append((axes.y(under[-1] + row[-1] / 2), label, row[-1]))
        under = over
    for up, label, share in marks:
        short = label if len(label) < 16 else f"{label[:14]}…"
        parts.append(
            f'<text class="at" x="{WIDTH - 118 + 6}" y="{up + 4:.1f}">{_text(short)} '
            f"{percent(share)}</text>"
        )
    for share in (0, 0.5, 1):
        parts.append(_left(axes.y(share), f"{100 * share:.0f} %"))
    parts.append(_mark(axes, place))
    says = f"Shares of the {what} against size; the table beside it says which is greatest where"
    return _svg("shares", says, parts)


def layers(shares: Shares) -> list[tuple[str, tuple[float, ...], str]]:
    """Give the bands of a plot of shares, lowest first.

    Parameters
    ----------
    shares : Shares
        The shares.

    Returns
    -------
    list of (str, tuple of float, str)
        Label, share at each size, and the name of its colour. Colours go by rank at the largest
        size, so that what dominates is the same in every plot; small parts share one band.
    """

    def rank(part: int) -> tuple[float, float]:
        return -shares.rows[part][-1], -max(shares.rows[part])

    ranked = sorted(range(len(shares.labels)), key=rank)
    kept = sorted(ranked[:BANDS])
    rows = [(shares.labels[p], shares.rows[p], f"b{ranked.index(p)}") for p in kept]
    rest = [shares.rows[part] for part in ranked[BANDS:]]
    if rest:
        rows.append(("the rest", tuple(map(sum, zip(*rest, strict=True))), f"b{BANDS}"))
    return rows


def _svg(kind: str, says: str, parts: Sequence[str]) -> str:
    return (
        f'<svg class="plot {kind}" viewBox="0 0 {WIDTH} {HEIGHT}" role="img" '
        f'aria-label="{_text(says)}">{"".join(parts)}</svg>'
    )


def _text(text: str) -> str:
    from markupsafe import escape

    return str(escape(clean(text)))


def _frame(axes: Axes) -> str:
    return (
        f'<rect class="frame" x="{LEFT}" y="{TOP}" width="{axes.width}" '
        f'height="{HEIGHT - TOP - BOTTOM}"/>'
    )


def _across(axes: Axes, name: str) -> str:
    out = ""
    decades = math.log10(axes.high / axes.low)
    for size in _ticks(axes.low, axes.high, (1, 2, 5) if decades < 2.2 else (1,)):
        x = axes.x(size)
        out += f'<path class="grid" d="M{x:.1f} {TOP}V{HEIGHT - BOTTOM}"/>'
        out += f'<text class="mid" x="{x:.1f}" y="{HEIGHT - BOTTOM + 15}">{_power(size)}</text>'
    middle = LEFT + axes.width / 2
    return out + f'<text class="mid name" x="{middle:.1f}" y="{HEIGHT - 6}">{_text(name)}</text>'


def _up(axes: Axes) -> str:
    low, high = round(math.log10(axes.bottom)), round(math.log10(axes.top))
    step = max(1, math.ceil((high - low) / 7))
    out = ""
    for power in range(low, high + 1, step):
        y = axes.y(10.0**power)
        out += f'<path class="grid" d="M{LEFT} {y:.1f}H{WIDTH - axes.right}"/>'
        out += _left(y, "1" if power == 0 else f"10{raised(power)}")
    return out


def _left(y: float, label: str) -> str:
    return f'<text class="end" x="{LEFT - 5}" y="{y + 4:.1f}">{label}</text>'


def _ticks(low: float, high: float, steps: Sequence[int]) -> list[int]:
    out = []
    for power in range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1):
        out += [step * 10**power for step in steps if low <= step * 10**power <= high]
    return [int(size) for size in out]


def _power(size: int) -> str:
    power = round(math.log10(size))
    return f"10{raised(power)}" if size >= 10_000 and size == 10**power else grouped(size)


def raised(power: int) -> str:
    """Write an exponent."""
    return str(power).translate(str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻"))


def _cross(x: float, y: float) -> str:
    return f'<path class="time" d="M{x - 4:.1f} {y - 4:.1f}l8 8m0 -8l-8 8"/>'


def _mark(axes: Axes, place: int) -> str:
    """Draw the line that the slider moves; its data say how sizes map to the axis."""
    return (
        f'<path class="mark" d="M0 {TOP}V{HEIGHT - BOTTOM}" visibility="hidden" '
        f'data-way="{place}" data-low="{axes.low}" data-high="{axes.high}" '
        f'data-left="{LEFT}" data-width="{axes.width}"/>'
    )


def _key(growth: Growth) -> str:
    rows = ['<circle class="count" cx="8" cy="0" r="3.4"/><text x="20" y="4">counted</text>']
    if growth.law:
        line = '<path class="law" d="M0 0H16"/>'
        rows.append(f'{line}<text x="20" y="4">law</text>')
    if growth.work:
        line = '<path class="work-law" d="M0 0H16"/>'
        rows.append(f'{line}<text x="20" y="4">law with native visits</text>')
    if growth.time:
        rows.append(f'{_cross(8, 0)}<text x="20" y="4">time</text>')
    made = "".join(
        f'<g transform="translate({LEFT + 10} {TOP + 14 + 17 * place})">{row}</g>'
        for place, row in enumerate(rows)
    )
    return f'<g class="key">{made}</g>'


def _slope(growth: Growth) -> str:
    def steepness(points: Points) -> str:
        (x0, y0), (x1, y1) = points[-2], points[-1]
        return f"{math.log(y1 / y0) / math.log(x1 / x0):.2f}"

    said = f"between the last two sizes counts grow as size to the power {steepness(growth.counts)}"
    if len(growth.time) > 1:
        said += f", time to the power {steepness(growth.time)}"
    return said
