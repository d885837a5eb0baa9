"""Draws the pictures of a study and keeps them as files: charts as SVG, overlays as PNG."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path, PurePath
from typing import TYPE_CHECKING

import pandas as pd

from settlelab.measure.model import Measured
from settlelab.report import drawing, figures
from settlelab.report.curves import drag_curves
from settlelab.report.overlay import overlay, save_overlay
from settlelab.report.sections import budget_shares
from settlelab.study.model import Study
from settlelab.video.model import TrackedRecording

if TYPE_CHECKING:
    from settlelab.calibrate import Calibration

__all__ = ["save_charts", "save_overlays"]

RANKED = 16  # rows of the ranking that its chart shows


def save_overlays(
    directory: Path, study: Study, drops: pd.DataFrame, tracked: Sequence[TrackedRecording]
) -> list[Path]:
    """One overlay picture per recording, in their order, named after the video."""
    names = _file_names([recording.name for recording in study.recordings])
    return [
        save_overlay(
            overlay(seen, drops[drops["recording"] == recording.name]),
            directory / f"{name}.png",
        )
        for name, recording, seen in zip(names, study.recordings, tracked, strict=True)
    ]


def _file_names(videos: Sequence[str]) -> list[str]:
    """A name for a file of each video, without folders and ending as long as they stay apart without."""
    for short in (lambda path: path.stem, lambda path: path.name, lambda path: "_".join(path.parts)):
        names = [short(PurePath(video.replace("\\", "/"))) for video in videos]
        if len(set(names)) == len(names):
            return names
    return [f"{number}_{name}" for number, name in enumerate(names, start=1)]


def save_charts(directory: Path, measured: Measured, calibration: Calibration | None) -> dict[str, Path]:
    """The charts that the results allow, by name: drag, published, calibrated, ranking, budget."""
    drops = measured.drops
    charts = {}
    if drops.loc[drops["accepted"].astype(bool), "reynolds"].notna().any():
        charts["drag"] = figures.drag_chart(drops, drag_curves(drops, calibration))
        shares = budget_shares(measured)
        if len(shares):
            charts["budget"] = figures.budget_bars(shares)
    if calibration is not None:
        charts["ranking"] = figures.ranking_bars(calibration.ranking.head(RANKED))
        chosen = [("calibrated", calibration.chosen.name)] if calibration.chosen else []
        for name, method in [("published", calibration.best_published), *chosen]:
            charts[name] = figures.measured_against_predicted(_pairs(drops, calibration, method), title=method)
    directory.mkdir(parents=True, exist_ok=True)
    paths = {}
    for name, ax in charts.items():
        paths[name] = directory / f"{name}.svg"
        paths[name].write_bytes(drawing.picture(ax, "svg"))
    return paths


def _pairs(drops: pd.DataFrame, calibration: Calibration, method: str) -> pd.DataFrame:
    """Measured beside predicted unbounded velocity of the drops that a method was compared on."""
    measured = drops[["drop", "lot", "unbounded_velocity", "unbounded_velocity_u"]]
    of_method = calibration.predictions[calibration.predictions["method"] == method]
    pairs = measured.merge(of_method[["drop", "predicted_velocity", "in_range"]], on="drop")
    names = {"unbounded_velocity": "measured", "unbounded_velocity_u": "measured_u", "predicted_velocity": "predicted"}
    return pairs.rename(columns=names)
