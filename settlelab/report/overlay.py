"""The overlay picture: what was followed, drawn on the still that it moved in front of.

Left the background with every fall as marks at equal steps of time, the column walls and a scale bar; right, on the
same vertical axis, depth over time: a straight line is a fall at terminal velocity, its slope the velocity.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import count, product
from pathlib import Path
from statistics import median
from string import ascii_lowercase
from typing import Any

import numpy as np
import pandas as pd
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke

from settlelab.report import drawing
from settlelab.report.numbers import significant, with_uncertainty
from settlelab.video.model import Track, TrackedRecording

__all__ = ["overlay", "save_overlay"]

LARGEST = (7.5, 9.0)  # inch, width and height that the still must fit into
CHART_WIDTH = 4.6  # inch
MARGINS = {"left": 0.75, "between": 0.75, "right": 0.25, "top": 0.75, "bottom": 0.55}  # inch
NOTE_LINE = 0.19  # inch, one line of text below
MARKS = 12  # at least, on the usual fall
HALO = (withStroke(linewidth=2.5, foreground="white"),)
Style = dict[str, Any]  # keywords of a matplotlib line
REFUSED = "#5b6570"
CROSS: Style = {"color": REFUSED, "marker": "x", "markersize": 4, "mew": 1.0, "linestyle": "none"}
SPECK: Style = {"color": REFUSED, "marker": ".", "markersize": 2.5, "linestyle": "none"}
CROWD = 6  # more objects than these, refused for one reason, get no letters
SPECKS = "·"


@dataclass(frozen=True, slots=True)
class Refused:
    """Objects refused for one reason, and the mark that stands for it in the picture."""

    mark: str
    reason: str
    tracks: tuple[Track, ...]

    def __str__(self) -> str:
        told = f"{self.mark}  not counted" if self.mark == SPECKS else f"×  {self.mark}  not counted"
        return f"{told}{f' ({len(self.tracks)} objects)' if len(self.tracks) > 1 else ''}: {self.reason}"


def overlay(tracked: TrackedRecording, drops: pd.DataFrame | None = None) -> Figure:
    """The still of a recording with everything that was followed in it.

    Parameters
    ----------
    tracked : TrackedRecording
        Falls and refused objects, px.
    drops : DataFrame or None
        Rows of the drop table that belong to this recording, one per fall and in their order (SI); they give the
        labels: drop, particle, velocity. None numbers the falls from 1.

    Returns
    -------
    Figure
        For `save_overlay`, or any other use.
    """
    refused = _groups(tracked.refused)
    figure, still, chart = _sheet(tracked, lines=len(refused))
    step = _time_step(tracked.falls)
    _background(still, tracked)
    chart.set_xlim(0, 1.04 * tracked.frame_count / tracked.clock.frame_rate)
    for index, fall in enumerate(tracked.falls):
        row = drops.iloc[index] if drops is not None and index < len(drops) else None
        accepted = row is None or bool(row["accepted"])
        colour, marker = drawing.SERIES[index % len(drawing.SERIES)]
        style = {"color": colour, "marker": marker, "mfc": colour if accepted else "white", "mec": colour}
        depth = (index % 6 + 1.0) / 7.0  # tags stand at different depths, for falls often share their path
        _draw_fall((still, chart), fall, tracked.scale.value, step, style)
        _tag(still, fall, tracked.scale.value, depth, _number(index, row))
        _label(chart, fall, tracked.scale.value, _description(index, row))
    for group in refused:
        _draw_refused((still, chart), group, tracked.scale.value)
    _words(figure, tracked, step, refused)
    return figure


def save_overlay(figure: Figure, path: Path) -> Path:
    """Write the picture as PNG; the same figure gives the same bytes."""
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(drawing.picture(figure, "png", dpi=130))
    return path


def _sheet(tracked: TrackedRecording, lines: int) -> tuple[Figure, Axes, Axes]:
    """Figure and its two axes, laid out in inches so that both have the height of the still."""
    width, height = tracked.size
    inch_per_px = min(LARGEST[0] / width, LARGEST[1] / height)
    still_width, still_height = width * inch_per_px, height * inch_per_px
    bottom = MARGINS["bottom"] + NOTE_LINE * (lines + 0.5 if lines else 0)
    total_width = MARGINS["left"] + still_width + MARGINS["between"] + CHART_WIDTH + MARGINS["right"]
    total_height = bottom + still_height + MARGINS["top"]
    figure = Figure(figsize=(total_width, total_height), facecolor="white")

    def place(left: float, width: float) -> tuple[float, float, float, float]:
        return left / total_width, bottom / total_height, width / total_width, still_height / total_height

    still = figure.add_axes(place(MARGINS["left"], still_width))
    chart = figure.add_axes(place(MARGINS["left"] + still_width + MARGINS["between"], CHART_WIDTH), sharey=still)
    for ax in (still, chart):
        drawing.framed(ax, labels=8)
    still.spines[["top", "right"]].set_visible(True)
    return figure, still, chart


def _background(still: Axes, tracked: TrackedRecording) -> None:
    millimetre_per_px = 1e3 * tracked.scale.value
    width, height = (side * millimetre_per_px for side in tracked.size)
    still.imshow(tracked.background, cmap="gray", vmin=0, vmax=255, extent=(0, width, height, 0), aspect="auto")
    still.set(xlim=(0, width), ylim=(height, 0), xlabel="across, mm", ylabel="along gravity, mm")
    for wall in tracked.walls or ():
        still.axvline(wall * millimetre_per_px, color="#c8642b", linestyle=(0, (5, 4)), linewidth=1.2)
    length = _round_number(width / 4)
    left, low = 0.06 * width, height - 0.03 * width
    still.plot(
        [left, left + length], [low, low], color=drawing.INK, linewidth=3, solid_capstyle="butt", path_effects=HALO
    )
    still.annotate(
        f"{length:g} mm",
        (left + length / 2, low),
        (0, 4),
        textcoords="offset points",
        ha="center",
        fontsize=8,
        color=drawing.INK,
        path_effects=HALO,
    )


def _draw_fall(sheet: tuple[Axes, Axes], fall: Track, scale: float, step: float, style: Style) -> None:
    still, chart = sheet
    x, y = 1e3 * scale * fall.x, 1e3 * scale * fall.y
    marked = _marked(fall.time, step)
    still.plot(x, y, color=style["color"], linewidth=0.8, alpha=0.8)
    still.plot(x[marked], y[marked], linestyle="none", markersize=5, mew=1.0, path_effects=HALO, **style)
    chart.plot(fall.time, y, color=style["color"], linewidth=1.0)
    chart.plot(fall.time[marked], y[marked], linestyle="none", markersize=5, mew=1.0, **style)


def _draw_refused(sheet: tuple[Axes, Axes], group: Refused, scale: float) -> None:
    style = SPECK if group.mark == SPECKS else CROSS
    for track in group.tracks:
        some = slice(None, None, max(1, len(track.x) // 12))
        for ax, across in zip(sheet, (1e3 * scale * track.x, track.time), strict=True):
            y = 1e3 * scale * track.y
            ax.plot(across[some], y[some], zorder=1.5, **style)
            if group.mark != SPECKS:
                ax.annotate(
                    group.mark,
                    (across[-1], y[-1]),
                    (5, 0),
                    textcoords="offset points",
                    va="center",
                    fontsize=8,
                    style="italic",
                    color=REFUSED,
                    path_effects=HALO,
                )


def _tag(still: Axes, fall: Track, scale: float, depth: float, text: str) -> None:
    index = int(depth * (len(fall.y) - 1))
    still.annotate(
        text,
        (1e3 * scale * fall.x[index], 1e3 * scale * fall.y[index]),
        (9, 0),
        textcoords="offset points",
        va="center",
        fontsize=9,
        weight="bold",
        color=drawing.INK,
        path_effects=HALO,
        annotation_clip=False,
    )


def _label(chart: Axes, fall: Track, scale: float, text: str) -> None:
    """The fall's description, written along its line on the later side."""
    y = 1e3 * scale * fall.y
    (left, top), (right, low) = chart.transData.transform([(fall.time[0], y[0]), (fall.time[-1], y[-1])])
    across, down = right - left, top - low
    length = math.hypot(across, down) or 1.0
    aside = 6.0  # points, from the line to the letters
    chart.annotate(
        text,
        (float(fall.time[0]), float(y[0])),
        (aside * down / length, aside * across / length),
        textcoords="offset points",
        rotation=-math.degrees(math.atan2(down, across)),
        rotation_mode="anchor",
        ha="left",
        va="bottom",
        fontsize=8,
        color=drawing.INK,
        path_effects=HALO,
        annotation_clip=False,
    )


def _words(figure: Figure, tracked: TrackedRecording, step: float, refused: Sequence[Refused]) -> None:
    still, chart = figure.axes
    clock = tracked.clock
    source = "as stated" if clock.source == "stated" else "from the container's clock"
    head = (
        f"{tracked.frame_count} frames, {significant(clock.frame_rate)} Hz {source}"
        f" · {significant(1e3 * tracked.scale.value)} mm/px · one mark every {step:g} s · ± standard uncertainty"
    )
    left = still.get_position().x0
    size = figure.get_size_inches()[1]
    figure.text(left, 1 - 0.26 / size, tracked.video.name, fontsize=11, weight="bold", color=drawing.INK)
    figure.text(left, 1 - 0.50 / size, head, fontsize=8.5, color=drawing.INK)
    chart.set_xlabel("time, s")
    chart.grid(color=drawing.FAINT, linewidth=0.6)
    for line, group in enumerate(refused):
        height = NOTE_LINE * (len(refused) - line) - 0.05
        figure.text(left, height / size, str(group), fontsize=8, color=drawing.INK)


def _number(index: int, row: pd.Series | None) -> str:
    return str(index + 1 if row is None else row["drop"])


def _description(index: int, row: pd.Series | None) -> str:
    if row is None:
        return f"fall {index + 1}"
    parts = [f"{row['drop']}  {row['particle']}".strip()]
    if math.isfinite(row["velocity"]):
        parts.append(f"{with_uncertainty(1e3 * row['velocity'], 1e3 * row['velocity_u'])} mm/s")
    if row["flags"]:
        parts.append(row["flags"].replace(";", ", "))
    if not row["accepted"]:
        parts.append("not accepted")
    return " · ".join(parts)


def _groups(refused: Sequence[Track]) -> list[Refused]:
    """The refused objects by reason, in order of appearance, each with its letter; a crowd is drawn as specks."""
    reasons: dict[str, list[Track]] = {}
    for track in refused:
        reasons.setdefault(track.reason, []).append(track)
    letters = ("".join(word) for length in count(1) for word in product(ascii_lowercase, repeat=length))
    return [
        Refused(SPECKS if len(tracks) > CROWD else next(letters), reason, tuple(tracks))
        for reason, tracks in reasons.items()
    ]


def _marked(time: np.ndarray, step: float) -> np.ndarray:
    """Indices of the points nearest to whole steps of time after the first."""
    wanted = np.arange(0.0, time[-1] - time[0] + 1e-9, step) + time[0]
    return np.unique(np.abs(time[:, None] - wanted[None, :]).argmin(axis=0))


def _time_step(falls: Sequence[Track]) -> float:
    """A round step that gives the usual fall about `MARKS` marks."""
    usual = median(float(fall.time[-1] - fall.time[0]) for fall in falls) if falls else 1.0
    return _round_number(usual / MARKS)


def _round_number(value: float) -> float:
    """The nearest of 1, 2, 5 times a power of ten that is not above the value."""
    power = 10.0 ** math.floor(math.log10(value)) if value > 0 else 1.0
    return max(step for step in (1.0, 2.0, 5.0) if step * power <= value * (1 + 1e-9)) * power if value > 0 else 1.0
