"""`settlelab track`: one recording, no study needed."""

from __future__ import annotations

from collections import Counter
from pathlib import Path
from typing import TYPE_CHECKING, Literal

import click

from settlelab.cli import console

if TYPE_CHECKING:
    import pandas as pd

    from settlelab.video import TrackedRecording

ABOVE_ZERO = click.FloatRange(min=0, min_open=True)


@click.command("track")
@click.argument("video", type=click.Path(path_type=Path))
@click.option("--mm-per-px", type=ABOVE_ZERO, required=True, help="Scale in the plane of the fall.")
@click.option(
    "--frame-rate",
    type=ABOVE_ZERO,
    help="True capture rate, Hz; slow-motion files do not know it, folders of pictures have none.",
)
@click.option(
    "--gravity",
    type=click.Choice(["down", "up", "left", "right"]),
    default="down",
    show_default=True,
    help="Side of the picture towards which things fall.",
)
@click.option("--bore", type=ABOVE_ZERO, help="Inner diameter of the column, mm (optional): finds its walls.")
@click.option("--out", type=click.Path(path_type=Path, file_okay=False), required=True, help="Folder for the results.")
def command(
    video: Path,
    mm_per_px: float,
    frame_rate: float | None,
    gravity: Literal["down", "up", "left", "right"],
    bore: float | None,
    out: Path,
) -> None:
    """Follow the falls in one recording.

    Writes tracks, terminal velocities and an overlay picture. VIDEO is a video file or a folder of numbered PNG or TIFF
    pictures (which needs --frame-rate).
    """
    from settlelab.measure import measure_falls, track_table
    from settlelab.measure.model import Drop, TrackPoint
    from settlelab.report import overlay, save_overlay, write_csv
    from settlelab.study.model import Camera, Column
    from settlelab.units import Quantity
    from settlelab.video import follow_falls

    camera = Camera(
        frame_rate=None if frame_rate is None else Quantity(frame_rate),
        metre_per_px=Quantity(1e-3 * mm_per_px),
        gravity=gravity,
    )
    column = None if bore is None else Column(section="round", inner_diameter=Quantity(1e-3 * bore))
    tracked = follow_falls(video, camera=camera, column=column)
    drops = measure_falls(tracked)
    _tell(tracked, drops)
    out.mkdir(parents=True, exist_ok=True)
    console.written(
        [
            write_csv(track_table(tracked), TrackPoint, out / "tracks.csv", digits=9),
            write_csv(drops, Drop, out / "drops.csv"),
            save_overlay(overlay(tracked, drops), out / "overlay.png"),
        ]
    )
    console.doubts([*tracked.notes, "the scale is taken as exact: ± (k = 1) is that of track and clock alone"])


def _tell(tracked: TrackedRecording, drops: pd.DataFrame) -> None:
    """One line for each fall, one for each reason why something else is not counted."""
    from settlelab.report.numbers import with_uncertainty

    for row in drops.to_dict("records"):
        velocity = with_uncertainty(1e3 * row["velocity"], 1e3 * row["velocity_u"])
        flags = f", {row['flags'].replace(';', ', ')}" if row["flags"] else ""
        verdict = "" if row["accepted"] else f", not accepted: {row['reason']}"
        click.echo(
            f"fall {row['drop']}: {velocity} mm/s, {1e3 * row['projected_diameter']:.3g} mm wide,"
            f" {row['first_time']:.3g} to {row['last_time']:.3g} s{flags}{verdict}"
        )
    for reason, count in Counter(track.reason for track in tracked.refused).items():
        click.echo(f"not counted, {count} object{'s' if count > 1 else ''}: {reason}")
