"""The plots of a record as a picture, SVG or PNG."""

from __future__ import annotations

import io
import math
from collections.abc import Mapping
from pathlib import PurePath
from typing import TYPE_CHECKING, Any

from steplaw.errors import CallError
from steplaw.faces import along as ways
from steplaw.faces.along import Along
from steplaw.faces.chart import layers, raised
from steplaw.faces.dominance import Shares, line_shares, term_shares
from steplaw.faces.growth import Growth, growth
from steplaw.faces.reading import verdict
from steplaw.faces.text import clean

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Json = Mapping[str, Any]
KINDS = ("svg", "png")
INK, MARK, TIME, QUIET = "#1c2b2a", "#0b6155", "#8a4b08", "#55645f"
BANDS = {"b0": "#2f7f73", "b1": "#b9c98f", "b2": "#5b7fa6", "b3": "#d9b36c"}
BANDS |= {"b4": "#8f6f9e", "b5": "#9fc1bd", "b6": "#c3c9c4"}
SETTINGS: dict[Any, Any] = {
    # What a record says is text, never a formula for the plotting library to parse.
    "text.parse_math": False,
    "svg.hashsalt": "steplaw",
    "svg.fonttype": "path",
    "font.size": 9,
    "axes.edgecolor": QUIET,
    "axes.labelcolor": INK,
    "xtick.color": INK,
    "ytick.color": INK,
}


def kind_of(path: str) -> str:
    """Give the kind of picture that a path's ending asks for.

    Parameters
    ----------
    path : str
        Where the picture is to go.

    Returns
    -------
    str
        ``svg`` or ``png``.

    Raises
    ------
    CallError
        If it ends otherwise.
    """
    kind = PurePath(path).suffix.lower().removeprefix(".")
    if kind not in KINDS:
        raise CallError(f"{path} is no name for a picture", "give a path that ends in .svg or .png")
    return kind


def picture(record: Json, kind: str) -> bytes:
    """Draw a record: growth of counts, law and time, and what dominates at which size.

    Parameters
    ----------
    record : mapping
        A `steplaw.audit/1` record.
    kind : {"svg", "png"}
        The format.

    Returns
    -------
    bytes
        The picture's file, the same for the same record and the same libraries.

    Raises
    ------
    CallError
        If fewer than two sizes have a count to draw.
    """
    from matplotlib import rc_context
    from matplotlib.figure import Figure

    found = [(along, points) for along in ways.ways(record) if (points := growth(record, along))]
    if not found:
        raise CallError(
            "there is nothing to draw: fewer than two sizes have a count above 0",
            "audit more sizes, with --sizes",
        )
    with rc_context(SETTINGS):
        sheet = Figure(figsize=(10, 4.4 * len(found)), layout="constrained")
        grid = sheet.subplots(len(found), 2, squeeze=False, width_ratios=(1.15, 1))
        name, said = clean(record["subject"]["name"]), " · ".join(verdict(record))
        sheet.suptitle(f"{_fit(name, 90)}\n{_fit(said, 130)}", color=INK, fontsize=11)
        for (along, points), (left, right) in zip(found, grid, strict=True):
            _growth(left, points)
            _shares(right, record, along)
        out = io.BytesIO()
        extra = {"Date": None} if kind == "svg" else {"Software": None}
        sheet.savefig(out, format=kind, dpi=144, metadata=extra)
    return out.getvalue()


def _growth(axes: Axes, points: Growth) -> None:
    axes.set_xscale("log")
    axes.set_yscale("log")
    axes.xaxis.set_major_formatter(_power)
    axes.yaxis.set_major_formatter(_power)
    axes.grid(True, color="#dfe8e1")
    if points.law:
        axes.plot(*zip(*points.law, strict=True), color=MARK, label="law")
    if len(points.beyond) > 1:
        label = "law beyond the sizes run"
        axes.plot(*zip(*points.beyond, strict=True), color=MARK, ls="--", label=label)
    if points.work:
        label = "law with native visits"
        axes.plot(*zip(*points.work, strict=True), color=QUIET, ls=":", label=label)
    sizes, counts = zip(*points.counts, strict=True)
    axes.plot(sizes, counts, "o", mec=INK, mfc="white", ms=5, label="counted")
    if points.time:
        axes.plot(*zip(*points.time, strict=True), "x", color=TIME, label="time")
    axes.set_xlabel(_named(points.along))
    axes.set_ylabel(points.says)
    axes.legend(frameon=False, loc="upper left")


def _shares(axes: Axes, record: Json, along: Along) -> None:
    shares, what = line_shares(record, along)[0], "steps"
    if shares is None:
        shares, what = term_shares(record, along), "law, by term"
    if shares is None:
        axes.set_axis_off()
        return
    _bands(axes, shares)
    axes.set_xlabel(_named(along))
    axes.set_ylabel(f"share of the {what}")


def _bands(axes: Axes, shares: Shares) -> None:
    rows = layers(shares)
    axes.stackplot(
        shares.sizes,
        [row for _, row, _ in rows],
        labels=[_fit(label, 24) for label, _, _ in rows],
        colors=[BANDS[colour] for _, _, colour in rows],
    )
    axes.set_xscale("log")
    axes.xaxis.set_major_formatter(_power)
    axes.set_xlim(shares.sizes[0], shares.sizes[-1])
    axes.set_ylim(0, 1)
    axes.yaxis.set_major_formatter(lambda share, _: f"{100 * share:.0f} %")
    handles, labels = axes.get_legend_handles_labels()
    axes.legend(
        handles[::-1], labels[::-1], frameon=False, loc="center left", bbox_to_anchor=(1, 0.5)
    )


def _power(value: float, _: object) -> str:
    power = round(math.log10(value))
    return f"{value:g}" if 0 <= power < 4 else f"10{raised(power)}"


def _named(along: Along) -> str:
    return clean(along.name) + (f", with {clean(along.where)}" if along.held else "")


def _fit(text: str, most: int) -> str:
    return text if len(text) <= most else f"{text[: most - 1]}…"
