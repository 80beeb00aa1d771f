"""The picture of a distribution by size."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from io import BytesIO
from typing import Any


def picture(record: Mapping[str, Any], kind: str) -> bytes:
    """Draw mean, median and quantiles of a figure by size.

    Parameters
    ----------
    record : mapping
        A `steplaw.typical/1` record.
    kind : {"svg", "png"}
        The format.

    Returns
    -------
    bytes
        The file's content.
    """
    from matplotlib import rc_context
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    rows = [r for r in record["sizes"] if r["n"] > 0 and r["most"] > 0]
    sizes = [r["n"] for r in rows]

    def column(name: str) -> list[float]:
        return [float(Fraction(r[name])) for r in rows]

    with rc_context({"svg.hashsalt": "steplaw", "font.size": 9}):
        figure = Figure(figsize=(6.4, 4.0), layout="constrained")
        FigureCanvasAgg(figure)
        axes = figure.add_subplot()
        axes.fill_between(sizes, column("least"), column("most"), color="#d9e2e7", label="all")
        axes.fill_between(
            sizes, column("lower"), column("upper"), color="#93b1bf", label="middle half"
        )
        axes.plot(sizes, column("median"), color="#17495c", lw=1.4, label="median")
        axes.plot(sizes, column("mean"), color="#b3541e", lw=1.2, ls="--", label="mean")
        if len(sizes) > 1 and sizes[-1] > 20 * sizes[0]:
            axes.set_xscale("log", base=2)
            axes.set_yscale("log")
        axes.set_xlabel("n")
        axes.set_ylabel(record["figure"])
        axes.set_title(f"{record['subject']['name']}: {record['figure']} by size", loc="left")
        axes.legend(frameon=False)
        axes.spines[["top", "right"]].set_visible(False)
        out = BytesIO()
        metadata = {"Date": None} if kind == "svg" else None
        figure.savefig(out, format=kind, dpi=150, metadata=metadata)
    return out.getvalue()
