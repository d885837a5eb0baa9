"""The charts of the report: data in, axes out. Nothing is computed from physics or saved here.

Colours and markers change together (see `drawing`), so every chart can be read in grey print. Lengths, velocities
and uncertainties arrive in SI; bars are expanded uncertainties (k = 2).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
import pandas as pd
from matplotlib.axes import Axes
from matplotlib.axis import Axis
from matplotlib.ticker import FuncFormatter
from numpy.typing import NDArray

from settlelab.report import drawing

__all__ = ["DragCurve", "budget_bars", "drag_chart", "measured_against_predicted", "ranking_bars"]

LEFT_OUT = "on particles left out of the fit"
CURVE_STYLE: dict[str, dict[str, Any]] = {
    "sphere": {"linestyle": "-", "linewidth": 1.2},
    "published": {"linestyle": (0, (5, 3)), "linewidth": 1.3},
    "calibrated": {"linestyle": "-", "linewidth": 1.8},
}


@dataclass(frozen=True, slots=True, kw_only=True)
class DragCurve:
    """A drag law drawn with the drops of a lot, or with all; reynolds and drag_coefficient are (N,)."""

    label: str
    kind: Literal["sphere", "published", "calibrated"]
    lot: str | None  # whose colour it takes
    reynolds: NDArray[np.float64]
    drag_coefficient: NDArray[np.float64]


def drag_chart(drops: pd.DataFrame, curves: Sequence[DragCurve], *, ax: Axes | None = None) -> Axes:
    """Drag coefficient over Reynolds number of each accepted drop, control spheres hollow, with drag laws.

    Drops in a fluid that is not Newtonian are filled by half: there a law holds at Re/X, left of the drop.
    """
    ax = drawing.axes(ax, 7.0, 4.8)
    used = drops[drops["accepted"].astype(bool)]
    cuttings, controls = used[~used["control"].astype(bool)], used[used["control"].astype(bool)]
    styles = drawing.series(cuttings["lot"])
    for lot, (colour, marker) in styles.items():
        _drops(ax, cuttings[cuttings["lot"] == lot], lot or "no lot", marker, {"color": colour, "mec": drawing.INK})
    if len(controls):
        _drops(ax, controls, "control spheres", "o", {"color": drawing.INK, "mfc": "white", "mec": drawing.INK})
    for curve in curves:
        colour = drawing.MUTED if curve.lot is None else styles[curve.lot][0]
        ax.plot(curve.reynolds, curve.drag_coefficient, color=colour, zorder=1, **CURVE_STYLE[curve.kind])
    for kind, label in {curve.kind: curve.label for curve in curves}.items():
        whose = "" if kind == "sphere" else ", at each lot's median shape"
        colour = drawing.MUTED if kind == "sphere" else drawing.INK
        ax.plot([], [], color=colour, label=f"{label}{whose}", **CURVE_STYLE[kind])
    ax.set(xscale="log", yscale="log", xlabel="Reynolds number", ylabel="drag coefficient (bars: k = 2)")
    for axis in (ax.xaxis, ax.yaxis):
        _plain_decades(axis)
    ax.grid(which="major", color=drawing.FAINT, linewidth=0.6)
    _legend(ax)
    return ax


def _plain_decades(axis: Axis) -> None:
    """Ticks of a logarithmic axis as plain numbers, those between the decades where there is room for them."""
    low, high = axis.get_view_interval()
    between = "25" if high < 1000 * low else ""
    axis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
    axis.set_minor_formatter(FuncFormatter(lambda value, _: f"{value:g}" if f"{value:.0e}"[0] in between else ""))
    axis.set_tick_params(which="minor", labelsize=8)


def _drops(ax: Axes, drops: pd.DataFrame, label: str, marker: str, colours: dict[str, Any]) -> None:
    """Drops with their bars; those in a fluid that is not Newtonian are filled by half."""
    newtonian = (drops["flow_index"] == 1.0) & (drops["yield_stress"] == 0.0)
    for some, filling in ((drops[newtonian], "full"), (drops[~newtonian], "left")):
        ax.errorbar(
            some["reynolds"],
            some["drag_coefficient"],
            xerr=2 * some["reynolds_u"],
            yerr=2 * some["drag_coefficient_u"],
            fmt=marker,
            fillstyle=filling,
            markerfacecoloralt="white",
            markersize=6,
            mew=0.7,
            elinewidth=0.9,
            zorder=3,
            **colours,
        )
    ax.plot([], [], marker, label=label, markersize=6, mew=0.7, **colours)


def measured_against_predicted(pairs: pd.DataFrame, *, title: str = "", ax: Axes | None = None) -> Axes:
    """Predicted over measured unbounded velocity of each drop, with the 1:1 and ±20 % lines.

    `pairs` holds lot, measured, measured_u, predicted [m/s] and in_range; drops outside the method's range are hollow.
    """
    ax = drawing.axes(ax, 4.6, 4.6)
    for ratio, style in ((1.0, "-"), (0.8, (0, (4, 3))), (1.2, (0, (4, 3)))):
        ax.axline((0, 0), slope=ratio, color=drawing.MUTED, linestyle=style, linewidth=0.9, zorder=0)
    for lot, (colour, marker) in drawing.series(pairs["lot"]).items():
        for inside in (True, False):
            some = pairs[(pairs["lot"] == lot) & (pairs["in_range"].astype(bool) == inside)]
            if len(some) == 0:
                continue
            ax.errorbar(
                1e3 * some["measured"],
                1e3 * some["predicted"],
                xerr=2e3 * some["measured_u"],
                fmt=marker,
                color=colour,
                mfc=colour if inside else "white",
                mec=drawing.INK if inside else colour,
                mew=0.7 if inside else 1.3,
                markersize=6,
                elinewidth=0.9,
                label=(lot or "no lot") if inside else None,
            )
    if not pairs["in_range"].astype(bool).all():
        ax.plot([], [], "o", mfc="white", mec=drawing.INK, label="hollow: outside the method's range")
    top = 1.12e3 * np.nanmax([pairs["measured"].max(), pairs["predicted"].max()]) if len(pairs) else 1.0
    ax.set(xlim=(0, top), ylim=(0, top), aspect="equal", title=title)
    ax.set(xlabel="measured velocity, mm/s (bars: k = 2)", ylabel="predicted velocity, mm/s")
    ax.title.set(fontsize=10, color=drawing.INK)
    ax.annotate("+20 %", (top / 1.2, top), ha="right", va="top", fontsize=8, color=drawing.MUTED)
    ax.annotate("−20 %", (top, top * 0.8), ha="right", va="top", fontsize=8, color=drawing.MUTED)
    _legend(ax)
    return ax


def ranking_bars(ranking: pd.DataFrame, *, ax: Axes | None = None) -> Axes:
    """Root mean square deviation in velocity of each method, in the order given from the top, with its bias as a mark.

    `ranking` has the columns of ranking.csv; calibrated forms are dark and show their cross-validated figure as well.
    Bars far beyond the useful methods end in an arrow; the figure stands beside the name.
    """
    rows = ranking.iloc[::-1].reset_index(drop=True)
    ax = drawing.axes(ax, 7.0, 0.9 + 0.3 * max(len(rows), 1))
    end = 1.08 * min(rows["rms_percent"].max(), max(60.0, 2 * rows["rms_percent"].min()))
    for kind, colour in (("published", "#c9d3de"), ("calibrated", "#17375e")):
        some = rows[rows["kind"] == kind]
        ax.barh(some.index, some["rms_percent"].clip(upper=end), color=colour, edgecolor=drawing.INK, linewidth=0.6)
    beyond = rows.index[rows["rms_percent"] > end]
    ax.plot(np.full(len(beyond), 0.99 * end), beyond, ">", color=drawing.INK, ms=5)
    near = rows[rows["bias_percent"].abs() < end]
    ax.plot(
        near["bias_percent"].abs(), near.index, "|", color="#c8642b", ms=10, mew=2.2, label="bias, without its sign"
    )
    if (rows["kind"] == "calibrated").any():
        ax.plot(rows["cv_rms_percent"], rows.index, "D", color=drawing.INK, mfc="white", ms=5, label=LEFT_OUT)
    labels = [f"{name}   {rms:.1f} %" for name, rms in zip(rows["method"], rows["rms_percent"], strict=True)]
    ax.set_yticks(rows.index, labels)
    ax.set(xlabel="deviation in velocity, % (bars: root mean square)", xlim=(0, end), ylim=(-0.6, len(rows) - 0.4))
    ax.spines["left"].set_visible(False)
    ax.tick_params(axis="y", length=0)
    _legend(ax)
    return ax


def budget_bars(shares: pd.DataFrame, *, ax: Axes | None = None) -> Axes:
    """Where the variance of each output comes from: one stacked bar per row, its columns the inputs, shares 0 to 1."""
    ax = drawing.axes(ax, 7.0, 1.2 + 0.55 * max(len(shares), 1))
    left = np.zeros(len(shares))
    place = np.arange(len(shares))[::-1]
    for index, name in enumerate(shares.columns):
        colour, hatch = _stack_style(index)
        share = 100 * shares[name].to_numpy(dtype=np.float64)
        ax.barh(place, share, left=left, color=colour, hatch=hatch, edgecolor="white", linewidth=0.8, label=name)
        for bar, value, start in zip(place, share, left, strict=True):
            if value >= 6:
                ax.text(
                    start + value / 2,
                    bar,
                    f"{name} {value:.0f}" if value >= 15 else f"{value:.0f}",
                    ha="center",
                    va="center",
                    fontsize=8,
                    color=drawing.INK,
                    bbox={"facecolor": "white", "edgecolor": "none", "pad": 1.2},
                )
        left += share
    ax.set_yticks(place, shares.index)
    ax.set(xlabel="share of the variance, % (mean over accepted drops)", xlim=(0, 100))
    ax.spines["left"].set_visible(False)
    ax.tick_params(axis="y", length=0)
    ax.legend(
        fontsize=8,
        frameon=False,
        ncols=4,
        loc="lower center",
        bbox_to_anchor=(0.5, 1.0),
        labelcolor=drawing.INK,
    )
    return ax


def _stack_style(index: int) -> tuple[str, str]:
    colour = drawing.SERIES[index % len(drawing.SERIES)][0]
    return colour, ("", "////", "....")[index // len(drawing.SERIES) % 3]


def _legend(ax: Axes) -> None:
    if ax.get_legend_handles_labels()[0]:
        ax.legend(fontsize=8, frameon=True, framealpha=0.9, edgecolor="none", labelcolor=drawing.INK)
