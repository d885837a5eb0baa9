"""What the tracks of one recording tell without knowing particle and fluid: velocity, silhouette, place, flags."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from typing import get_type_hints

import numpy as np
import pandas as pd

from settlelab.measure.acceptance import Finding, finding, near_wall, verdict
from settlelab.measure.model import Drop, TrackPoint, Velocity
from settlelab.measure.velocity import terminal_velocity
from settlelab.physics.constants import STANDARD_GRAVITY, FloatArray
from settlelab.video.model import Track, TrackedRecording

__all__ = ["View", "drop_table", "measure_falls", "row_of", "silhouette_wander", "track_table", "view_of"]

# The centre of an angular grain's silhouette moves against its centre of mass by so much of its diameter while it turns
# (k = 1; simulated grains), in full where the circularity is below 1 by so much.
WANDER, ANGULAR = 0.03, 0.02
# Time constants beyond so many times that of Stokes' drag are taken for something else than an approach; the history
# force draws its end out by about this much.
SLOWEST = 3.0


@dataclass(frozen=True, slots=True, kw_only=True)
class View:
    """A fall as the camera shows it, in SI; medians over the window of its velocity."""

    velocity: Velocity
    projected_diameter: float
    circularity: float
    aspect_ratio: float
    off_axis: float  # distance from the axis over the radius; nan where no wall is known
    wall_distance: float  # nan where no wall is known

    def findings(self, track: Track, diameter: float) -> list[Finding]:
        """Every flag on the fall; `diameter` [m] is that of the particle.

        Where the walls are known, how near they are is judged here and not taken from the tracker.
        """
        found = [finding(flag) for flag in track.flags if flag != "near-wall" or math.isnan(self.off_axis)]
        reached = f"{100 * self.velocity.fraction_of_terminal:.1f} % of terminal velocity reached in view"
        found += [finding(flag, reached if flag == "accelerating" else "") for flag in self.velocity.flags]
        wall = near_wall(self.off_axis, self.wall_distance / diameter)
        return [*found, wall] if wall is not None else found


def view_of(track: Track, tracked: TrackedRecording, *, density_ratio: float = math.nan, sphere: bool = False) -> View:
    """Velocity and silhouette of one fall.

    Parameters
    ----------
    track : Track
        The fall.
    tracked : TrackedRecording
        The recording that it belongs to.
    density_ratio : float
        Particle over fluid density, where known: limits how slowly the particle can approach its terminal velocity.
    sphere : bool
        Whether the particle is known to be a sphere, whose silhouette keeps its centre however it turns.
    """
    scale = tracked.scale.value
    velocity = terminal_velocity(
        track.time,
        track.y * scale,
        wander=0.0
        if sphere
        else silhouette_wander(_projected_diameter(track.area) * scale, _median(track.circularity)),
        slowest=_slowest_approach(track, scale, density_ratio),
    )
    window = slice(velocity.first, velocity.last + 1)
    wall_distance = _median(track.wall_distance[window])
    off_axis = math.nan
    if tracked.walls is not None:
        off_axis = 1 - 2 * wall_distance / (tracked.walls[1] - tracked.walls[0])
    return View(
        velocity=velocity,
        projected_diameter=_projected_diameter(track.area[window]) * scale,
        circularity=_median(track.circularity[window]),
        aspect_ratio=_median(track.aspect_ratio[window]),
        off_axis=off_axis,
        wall_distance=wall_distance * scale,
    )


def silhouette_wander(diameter: float, circularity: float) -> float:
    """How far a silhouette's centre may move against the centre of mass, k = 1; none for a round silhouette.

    Parameters
    ----------
    diameter : float
        Of the silhouette, in any unit of length; the result is in the same.
    circularity : float
        Of the silhouette [-].
    """
    return WANDER * diameter * max(min((1 - circularity) / ANGULAR, 1.0), 0.0)


def _projected_diameter(area: FloatArray) -> float:
    return math.sqrt(4 * _median(area) / math.pi)


def _slowest_approach(track: Track, scale: float, density_ratio: float) -> float:
    """Longest time constant of an approach [s]: that of Stokes' drag at the mean velocity, with room for history."""
    lighter = abs(density_ratio - 1)
    span = float(track.time[-1] - track.time[0]) if len(track.time) > 1 else 0.0
    if not lighter > 0 or span == 0:
        return math.inf
    mean = abs(float(track.y[-1] - track.y[0])) * scale / span
    return SLOWEST * mean * (density_ratio + 0.5) / (STANDARD_GRAVITY * lighter)


def _median(values: FloatArray) -> float:
    known = values[np.isfinite(values)]
    return float(np.median(known)) if known.size else math.nan


def row_of(track: Track, tracked: TrackedRecording, view: View) -> dict[str, object]:
    """A row of the drop table with what needs no study; the rest nan or empty."""
    empty: Mapping[type, object] = {float: math.nan, str: "", bool: False, int: 0}
    velocity = view.velocity
    shared = math.hypot(tracked.scale.u / tracked.scale.value, tracked.clock.u_relative)
    return {name: empty[kind] for name, kind in get_type_hints(Drop).items()} | {
        "recording": tracked.video.name,
        "first_time": float(track.time[velocity.first]),
        "last_time": float(track.time[velocity.last]),
        "frames": velocity.last - velocity.first + 1,
        "velocity": velocity.value,
        "velocity_u": math.hypot(velocity.u, shared * velocity.value),
        "fraction_of_terminal": velocity.fraction_of_terminal,
        "projected_diameter": view.projected_diameter,
        "circularity": view.circularity,
        "aspect_ratio": view.aspect_ratio,
    }


def judged(findings: Sequence[Finding]) -> dict[str, object]:
    """The columns of the drop table that say whether a drop counts."""
    accepted, flags, reason = verdict(findings)
    return {"accepted": accepted, "flags": flags, "reason": reason}


def drop_table(rows: Sequence[Mapping[str, object]]) -> pd.DataFrame:
    """Rows as a table: the columns of `Drop` in SI, then those of further descriptors."""
    columns = [field.name for field in fields(Drop)]
    further = list(dict.fromkeys(name for row in rows for name in row if name not in columns))
    table = pd.DataFrame([dict(row) for row in rows], columns=[*columns, *further])
    return table.astype({name: kind for name, kind in get_type_hints(Drop).items() if kind is not str})


def measure_falls(tracked: TrackedRecording) -> pd.DataFrame:
    """The drop table of one recording without a study: velocities and silhouettes.

    Parameters
    ----------
    tracked : TrackedRecording
        Its falls are numbered from 1 in order of appearance.

    Returns
    -------
    DataFrame
        Columns of `Drop`, SI; nan or empty where particle and fluid would be needed.
    """
    rows = []
    for number, track in enumerate(tracked.falls, start=1):
        view = view_of(track, tracked)
        found = view.findings(track, view.projected_diameter)
        rows.append(row_of(track, tracked, view) | {"drop": number} | judged(found))
    return drop_table(rows)


def track_table(tracked: TrackedRecording, *, first_drop: int = 1) -> pd.DataFrame:
    """Every point of every fall, as in tracks.csv; other objects that the tracker refused are not in it.

    Parameters
    ----------
    tracked : TrackedRecording
        Falls in order of appearance.
    first_drop : int
        Number of its first fall in the study.

    Returns
    -------
    DataFrame
        Columns of `TrackPoint`, SI.
    """
    scale = tracked.scale.value
    parts = [
        pd.DataFrame(
            {
                "drop": first_drop + index,
                "frame": track.frame,
                "time": track.time,
                "x": track.x * scale,
                "y": track.y * scale,
                "area": track.area * scale**2,
                "aspect_ratio": track.aspect_ratio,
                "circularity": track.circularity,
                "orientation_deg": np.degrees(track.orientation),
                "wall_distance": track.wall_distance * scale,
            }
        )
        for index, track in enumerate(tracked.falls)
    ]
    kinds = get_type_hints(TrackPoint)
    empty = pd.DataFrame(columns=[field.name for field in fields(TrackPoint)])
    table = pd.concat(parts, ignore_index=True) if parts else empty
    return table.astype(kinds)
