"""The chart of a prediction: velocity over size with its intervals."""

from __future__ import annotations

import pandas as pd
from matplotlib.axes import Axes
from matplotlib.ticker import FuncFormatter

from settlelab.report import drawing

__all__ = ["predicted_velocities"]

COLOUR = drawing.SERIES[0][0]


def predicted_velocities(prediction: pd.DataFrame, *, title: str = "", ax: Axes | None = None) -> Axes:
    """Predicted velocity over diameter, the 95 % bands of the law and of a single particle behind it.

    `prediction` has the columns of `calibrate.Prediction` in SI; sizes outside the calibration are hollow.
    """
    ax = drawing.axes(ax, 6.4, 4.4)
    rows = prediction.sort_values("equivalent_diameter")
    size = 1e3 * rows["equivalent_diameter"]
    for kind, label, shade in (("prediction", "one particle", 0.15), ("confidence", "the law", 0.35)):
        low, high = 1e3 * rows[f"{kind}_low"], 1e3 * rows[f"{kind}_high"]
        ax.fill_between(size, low, high, color=COLOUR, alpha=shade, linewidth=0, label=f"95 %, {label}")
    ax.plot(size, 1e3 * rows["velocity"], color=COLOUR, linewidth=1.4)
    for inside, label in ((True, "velocity"), (False, "outside the calibration")):
        some = rows[rows["in_range"].astype(bool) == inside]
        if len(some):
            ax.plot(
                1e3 * some["equivalent_diameter"],
                1e3 * some["velocity"],
                "o",
                color=COLOUR,
                mfc=COLOUR if inside else "white",
                markersize=5,
                label=label,
            )
    ax.set(xscale="log", yscale="log", title=title)
    ax.set(xlabel="diameter of the sphere of equal volume, mm", ylabel="velocity in still, unbounded fluid, mm/s")
    ax.title.set(fontsize=10, color=drawing.INK)
    for axis in (ax.xaxis, ax.yaxis):
        axis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
        axis.set_minor_formatter(FuncFormatter(lambda value, _: f"{value:g}" if f"{value:.0e}"[0] in "25" else ""))
    ax.grid(which="major", color=drawing.FAINT, linewidth=0.6)
    ax.legend(fontsize=8, frameon=False, labelcolor=drawing.INK)
    return ax
