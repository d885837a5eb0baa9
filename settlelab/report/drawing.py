"""How our figures look: colours that stay apart in grey print and for colour-blind readers, axes, equal bytes."""

from __future__ import annotations

import io
from collections.abc import Iterable
from typing import Literal

import matplotlib as mpl
from matplotlib.axes import Axes
from matplotlib.figure import Figure

__all__ = ["FAINT", "INK", "MUTED", "SERIES", "axes", "framed", "picture", "series"]

INK = "#1d2733"
MUTED = "#7b8794"
FAINT = "#d5dae0"
# Colour and marker change together; lightness runs dark, middle, light, so that neighbours differ in grey too.
SERIES = (
    ("#17375e", "o"),
    ("#c8642b", "s"),
    ("#e3b23c", "^"),
    ("#4f8f8a", "D"),
    ("#6a3d6f", "v"),
    ("#9cc3e0", "P"),
    ("#8a3324", "X"),
    ("#a9b665", "p"),
)


def series(names: Iterable[str]) -> dict[str, tuple[str, str]]:
    """Colour and marker of each name; the same names always get the same ones."""
    return {name: SERIES[index % len(SERIES)] for index, name in enumerate(sorted(set(names)))}


def axes(ax: Axes | None, width: float, height: float) -> Axes:
    """The axes given, or those of a new figure of that size in inches, with our plain frame."""
    return framed(ax if ax is not None else Figure(figsize=(width, height), layout="constrained").subplots())


def framed(ax: Axes, labels: float = 9) -> Axes:
    """The axes with our plain frame and labels of that size."""
    ax.spines[["top", "right"]].set_visible(False)
    ax.spines[["left", "bottom"]].set_color(INK)
    ax.tick_params(which="both", colors=INK, labelsize=labels)
    for axis in (ax.xaxis, ax.yaxis):
        axis.label.set(color=INK, size=labels + 1)
    return ax


def picture(drawn: Axes | Figure, kind: Literal["svg", "png"], dpi: float = 150) -> bytes:
    """A figure, or that of the axes, as the bytes of a file; equal figures give equal bytes."""
    figure = drawn.get_figure() if isinstance(drawn, Axes) else drawn
    assert isinstance(figure, Figure)
    buffer = io.BytesIO()
    stamp = {"Date": None} if kind == "svg" else {"Software": None}
    with mpl.rc_context({"svg.hashsalt": "settlelab"}):
        figure.savefig(buffer, format=kind, dpi=dpi, metadata=stamp)
    return buffer.getvalue()
