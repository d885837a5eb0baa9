"""Following the falls of one recording: decode, find what changed, measure it, link it, tell falls from the rest."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from settlelab.errors import RecordingError
from settlelab.study.model import Camera, Column
from settlelab.video import flags
from settlelab.video.background import Background, background_of
from settlelab.video.clock import frame_times
from settlelab.video.falls import Points, counting_points, drifting, reflections, shorter_pieces, why_not_a_fall
from settlelab.video.linking import Linker, Sighting
from settlelab.video.model import Clock, FloatArray, Track, TrackedRecording
from settlelab.video.optics import scale_of
from settlelab.video.overlaps import alone, gaps_of, joint_views, unseen_ends
from settlelab.video.silhouettes import Silhouette
from settlelab.video.source import Source, open_recording, single_threaded
from settlelab.video.stitching import stitched
from settlelab.video.survey import MOST_OBJECTS, measured, survey
from settlelab.video.turning import Turn
from settlelab.video.walls import find_walls


@dataclass(frozen=True, slots=True, kw_only=True)
class _Seen:
    """Everything seen in a recording, frame by frame, before it is linked."""

    container_time: FloatArray  # (N,) s
    number: np.ndarray  # (N,)
    silhouettes: list[list[Silhouette]]
    passed_over: int  # frames with more objects than can be followed


def follow_falls(video: Path, *, camera: Camera, column: Column | None = None) -> TrackedRecording:
    """Follow everything that moves in a recording and tell the falls from the rest.

    Parameters
    ----------
    video : Path
        A video file, or a folder of numbered PNG or TIFF pictures.
    camera : Camera
        Scale, true frame rate and the direction of gravity in the picture.
    column : Column or None
        Its inner diameter or width lets the side walls be found.

    Returns
    -------
    TrackedRecording
        Without falls, and with a note, where nothing fell.

    Raises
    ------
    RecordingError
        The recording cannot be opened or decoded, has no clock, or its scale is not found.
    """
    source = open_recording(video)
    if not source.has_clock and camera.frame_rate is None:
        raise RecordingError(f"{video}: a folder of pictures has no clock; state the true capture rate (frame rate)")
    with single_threaded():
        seen, scene = _look(source)
    turn = Turn.to_gravity(camera.gravity, source.rotation, source.size)
    still = turn.picture(scene.level)
    scale, notes = scale_of(camera, still, video.name)
    times, clock = frame_times(seen.container_time, seen.number, camera.frame_rate)
    walls, wall_notes = _walls(still, scale.value, column, video.name)
    falls, refused = _judged(_paths(seen, turn, times * clock.frame_rate), seen, times, clock, walls)
    notes += [*source.notes, *_clock_notes(clock, video.name), *wall_notes]
    if seen.passed_over:
        notes.append(
            f"{video.name}: {seen.passed_over} of {len(times)} frames passed over, with more than {MOST_OBJECTS}"
            " objects each: damaged pictures, or the light changed"
        )
    if not falls:
        notes.append(f"{video.name}: nothing fell in this recording")
    return TrackedRecording(
        video=video,
        frame_count=len(times),
        size=turn.size,
        clock=clock,
        scale=scale,
        falls=tuple(falls),
        refused=tuple(refused),
        background=np.clip(np.rint(still), 0, 255).astype(np.uint8),
        walls=walls,
        notes=tuple(notes),
    )


def _look(source: Source) -> tuple[_Seen, Background]:
    """Measure every object of every frame."""
    first = survey(source)
    scene = background_of(first.samples, source.black)
    first.samples.clear()
    silhouettes = measured(first, source, scene)
    seen = _Seen(
        container_time=np.array(first.container_time),
        number=np.array(first.number),
        silhouettes=silhouettes,
        passed_over=first.passed_over,
    )
    return seen, scene


def _paths(seen: _Seen, turn: Turn, ticks: FloatArray) -> list[list[Sighting]]:
    linker = Linker(turn.size[1])
    for index, objects in enumerate(seen.silhouettes):
        linker.add(float(ticks[index]), [_turned(one, index, turn) for one in objects], ticks)
    return stitched(linker.paths(), ticks)


def _turned(one: Silhouette, index: int, turn: Turn) -> Sighting:
    x, y = turn.points(np.array(one.x), np.array(one.y))
    return Sighting(
        index=index,
        x=float(x),
        y=float(y),
        area=one.area,
        aspect_ratio=one.aspect_ratio,
        circularity=one.circularity,
        orientation=float(turn.orientation(np.array(one.orientation))),
        edge_width=one.edge_width,
        contrast=one.contrast,
        cut=one.cut,
    )


def _judged(
    paths: Sequence[Sequence[Sighting]],
    seen: _Seen,
    times: FloatArray,
    clock: Clock,
    walls: tuple[float, float] | None,
) -> tuple[list[Track], list[Track]]:
    """The falls and the refused objects, each in order of appearance."""
    ticks = times * clock.frame_rate
    gaps = gaps_of(paths)
    joint = joint_views(paths, gaps)
    unseen = gaps + unseen_ends(paths, joint)
    kept = [counting_points(alone(number, path, unseen), ticks) for number, path in enumerate(paths)]
    reasons = [why_not_a_fall(path, points, ticks) for path, points in zip(paths, kept, strict=True)]
    for index in joint:
        reasons[index] = "two objects seen as one" if reasons[index] is not None else None
    series = {index: Points(kept[index], ticks) for index, reason in enumerate(reasons) if reason == ""}
    for index in drifting(series):
        reasons[index] = "drifts with the fluid: far slower than its size explains"
        del series[index]
    for index in reflections(series):
        reasons[index] = "reflection of another object in the column wall"
        del series[index]
    for index in shorter_pieces(series):
        reasons[index] = "another piece of a fall that is counted"
        del series[index]
    falls, refused = [], []
    for index, reason in enumerate(reasons):
        if reason is None:
            continue
        if reason:
            named = ("rising",) if reason == "rises" else ()
            refused.append(_track(paths[index], seen, times, walls, named, reason))
            continue
        track = _track(kept[index], seen, times, walls)
        raised = _flags(paths[index], kept[index], series, index, track.wall_distance, clock)
        falls.append(_track(kept[index], seen, times, walls, raised))
    return falls, refused


def _flags(
    path: Sequence[Sighting],
    kept: Sequence[Sighting],
    series: dict[int, Points],
    index: int,
    wall_distance: FloatArray,
    clock: Clock,
) -> tuple[str, ...]:
    points = series[index]
    others = [other for number, other in series.items() if number != index]
    raised = {
        "near-wall": flags.near_wall(points, wall_distance),
        "neighbour": flags.neighbour(points, others),
        "short-track": flags.short_track(points),
        "blurred": flags.blurred(kept, points),
        "edge": flags.edge(path, points),
        "gap": flags.gap(path, points),
        "clock": clock.irregular,
    }
    return tuple(name for name, is_raised in raised.items() if is_raised)


def _track(
    points: Sequence[Sighting],
    seen: _Seen,
    times: FloatArray,
    walls: tuple[float, float] | None,
    flags: tuple[str, ...] = (),
    reason: str = "",
) -> Track:
    index = np.array([one.index for one in points], dtype=np.int64)
    x = np.array([one.x for one in points])
    distance = np.full(len(x), np.nan) if walls is None else np.minimum(x - walls[0], walls[1] - x)
    return Track(
        frame=seen.number[index].astype(np.int64),
        time=times[index],
        x=x,
        y=np.array([one.y for one in points]),
        area=np.array([one.area for one in points]),
        aspect_ratio=np.array([one.aspect_ratio for one in points]),
        circularity=np.array([one.circularity for one in points]),
        orientation=np.array([one.orientation for one in points]),
        wall_distance=distance,
        flags=flags,
        reason=reason,
    )


def _walls(
    still: np.ndarray, scale: float, column: Column | None, name: str
) -> tuple[tuple[float, float] | None, list[str]]:
    width = None if column is None else column.inner_diameter or column.width
    if width is None:
        return None, []
    walls = find_walls(still, width.value / scale)
    if walls is None:
        return None, [
            f"{name}: the side walls of the column are not found in the picture; distances to them are unknown"
        ]
    return walls, []


def _clock_notes(clock: Clock, name: str) -> list[str]:
    notes = []
    if clock.source == "container":
        notes.append(
            f"{name}: no frame rate is stated, the clock of the container is taken ({clock.frame_rate:.6g} Hz);"
            " a slow-motion recording would need the true one"
        )
    if clock.missing_frames:
        notes.append(f"{name}: {clock.missing_frames} frames are missing; times follow the clock of the recording")
    elif clock.irregular:
        notes.append(f"{name}: the intervals between frames are irregular; times follow the clock of the recording")
    return notes
