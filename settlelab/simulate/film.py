"""Draws a scene as a video and tells the truth about it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from settlelab.simulate.backdrop import Backdrop, backdrop, to_pixels
from settlelab.simulate.falls import Trajectory, trajectories
from settlelab.simulate.scene import Camera, Scene
from settlelab.simulate.silhouettes import Pose, silhouette, subexposures
from settlelab.simulate.write import turned, write_video
from settlelab.units import Unit

FloatArray = NDArray[np.float64]
Second = Annotated[float, Unit("s")]
Millimetre = Annotated[float, Unit("mm")]
MillimetrePerSecond = Annotated[float, Unit("mm/s")]
KilogramPerCubicMetre = Annotated[float, Unit("kg/m3")]
Number = Annotated[float, Unit("1")]


@dataclass(frozen=True, slots=True, kw_only=True)
class DropTruth:
    """One row of the truth table: what a perfect measurement of this drop would find. SI inside."""

    drop: int  # in the order of release, from 1
    particle: str
    lot: str
    released_at: Second
    first_frame: int  # first and last frame that show the whole particle falling; -1 where none does
    last_frame: int
    velocity: MillimetrePerSecond  # terminal, in the column
    fraction_of_terminal: Number  # reached at first_frame
    wall_factor: Number
    unbounded_velocity: MillimetrePerSecond
    equivalent_diameter: Millimetre
    particle_density: KilogramPerCubicMetre
    fluid_density: KilogramPerCubicMetre
    viscosity: Annotated[float, Unit("mPa s")]  # apparent, at unbounded velocity / equivalent diameter
    reynolds: Number
    drag_coefficient: Number
    long_axis: Millimetre
    intermediate_axis: Millimetre
    short_axis: Millimetre
    corey_shape_factor: Number
    sphericity: Number
    stokes_drag_ratio: Number  # k_S of the shape law
    newton_drag_ratio: Number  # k_N
    scatter: Number  # factor of this particle in this drop on the drag law


@dataclass(frozen=True, slots=True, kw_only=True)
class PositionTruth:
    """Where a mass centre is in one frame, in the picture with gravity down."""

    drop: int
    frame: int
    time: Second
    x_px: float
    y_px: float


def recording(scene: Scene, path: Path, seed: int) -> pd.DataFrame:
    """Draw a scene as a video and return its truth table.

    Parameters
    ----------
    scene : Scene
        What is filmed.
    path : Path
        The video to write: .mp4, .avi (better kept) or .mkv (lossless).
    seed : int
        Seed of the noise and the dust; the same scene and seed give the same bytes with the same OpenCV.

    Returns
    -------
    pandas.DataFrame
        One row per drop, the columns of `DropTruth` in SI.

    Raises
    ------
    RecordingError
        The video cannot be written.
    """
    camera = scene.camera
    across, along = camera.width, camera.height
    size = (across, along) if camera.gravity in ("down", "up") else (along, across)
    falls = trajectories(scene)
    rate = camera.container_rate or camera.frame_rate
    write_video(path, _frames(scene, falls, seed), size=size, rate=rate)
    return _truth(scene, falls)


def pictures(scene: Scene, seed: int) -> Iterator[NDArray[np.uint8]]:
    """The frames of a scene as recorded, grey, turned as the camera was."""
    return _frames(scene, trajectories(scene), seed)


def _frames(scene: Scene, falls: list[Trajectory], seed: int) -> Iterator[NDArray[np.uint8]]:
    rng = np.random.default_rng(seed)
    behind = backdrop(scene, rng)
    for time in scene.times:
        light = clean_picture(behind, falls, float(time))
        yield turned(_grey(light, scene.camera, rng), scene.camera.gravity)


def clean_picture(behind: Backdrop, falls: list[Trajectory], time: float) -> FloatArray:
    """Grey levels (height, width) at a time [s], free of noise, gravity down."""
    scene = behind.scene
    camera = scene.camera
    picture = behind.at(time)
    for fall in falls:
        if time < fall.drop.time:
            continue
        count = subexposures(fall.terminal * camera.exposure / camera.metre_per_px)
        moments = time + ((np.arange(count) + 0.5) / count - 0.5) * camera.exposure
        poses = [_pose(scene, fall, float(moment)) for moment in moments]
        if poses[0].y - fall.reach / camera.metre_per_px > camera.height:
            continue
        patch = silhouette(fall.drop.particle.body, poses, camera.metre_per_px, camera.softness)
        patch.darken(picture, fall.drop.particle.transmission)
    return picture


def _pose(scene: Scene, fall: Trajectory, time: float) -> Pose:
    x, y, rotation = fall.at(time)
    return Pose(*to_pixels(scene, x, y), rotation)


def _grey(light: FloatArray, camera: Camera, rng: np.random.Generator) -> NDArray[np.uint8]:
    """Digital grey levels: shot noise of the light, read noise of the sensor, rounding."""
    level = light.astype(np.float32)
    spread = np.sqrt(level / np.float32(camera.electrons_per_grey) + np.float32(camera.read_noise**2))
    noisy = level + spread * rng.standard_normal(level.shape, dtype=np.float32)
    grey: NDArray[np.uint8] = np.clip(np.rint(noisy), 0, 255).astype(np.uint8)
    return grey


def truth(scene: Scene) -> pd.DataFrame:
    """The truth table of a scene: one row per drop, the columns of `DropTruth` in SI."""
    return _truth(scene, trajectories(scene))


def _truth(scene: Scene, falls: list[Trajectory]) -> pd.DataFrame:
    rows = [_row(scene, number, fall) for number, fall in enumerate(falls, start=1)]
    return pd.DataFrame(rows, columns=list(DropTruth.__annotations__))


def _row(scene: Scene, number: int, fall: Trajectory) -> dict[str, object]:
    particle, settled = fall.drop.particle, fall.settled
    long, intermediate, short = particle.body.axes
    stokes, newton = scene.law.drag_ratios(particle.body)
    frames = fall.whole_frames(scene)
    first, last = (int(frames[0]), int(frames[-1])) if len(frames) else (-1, -1)
    return {
        "drop": number,
        "particle": particle.name,
        "lot": particle.lot,
        "released_at": fall.drop.time,
        "first_frame": first,
        "last_frame": last,
        "velocity": fall.terminal,
        "fraction_of_terminal": fall.speed(scene.times[first]) / fall.terminal if first >= 0 else np.nan,
        "wall_factor": settled.wall_factor,
        "unbounded_velocity": settled.unbounded_velocity,
        "equivalent_diameter": particle.body.equivalent_diameter,
        "particle_density": particle.density,
        "fluid_density": scene.liquid.density,
        "viscosity": settled.viscosity,
        "reynolds": settled.reynolds,
        "drag_coefficient": settled.drag_coefficient,
        "long_axis": long,
        "intermediate_axis": intermediate,
        "short_axis": short,
        "corey_shape_factor": short / np.sqrt(long * intermediate),
        "sphericity": particle.body.sphericity,
        "stokes_drag_ratio": stokes,
        "newton_drag_ratio": newton,
        "scatter": particle.scatter * fall.drop.scatter,
    }


def positions(scene: Scene) -> pd.DataFrame:
    """Where every mass centre is in every frame that shows it whole: the columns of `PositionTruth` in SI."""
    rows = []
    for number, fall in enumerate(trajectories(scene), start=1):
        for frame in fall.whole_frames(scene):
            time = float(scene.times[frame])
            x, y, _ = fall.at(time)
            rows.append((number, int(frame), time, *to_pixels(scene, x, y)))
    return pd.DataFrame(rows, columns=list(PositionTruth.__annotations__))
