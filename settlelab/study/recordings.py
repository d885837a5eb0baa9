"""Recordings of a study: the video, the particles in order of release, the fluid, and the setup that applies."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from settlelab.errors import did_you_mean
from settlelab.study.keys import CameraKeys, ColumnKeys, RecordingKeys
from settlelab.study.model import Fluid, Particle, Recording
from settlelab.study.setup import camera_of, check_camera, check_column, column_of, overridden
from settlelab.study.source import Section, Source, several
from settlelab.units import wanted

__all__ = ["read_recordings"]

PICTURES = frozenset({".png", ".tif", ".tiff"})


def read_recordings(
    source: Source, raw: Mapping[str, Any], fluids: Mapping[str, Fluid], particles: tuple[Particle, ...] | None
) -> tuple[Recording, ...]:
    """Recordings in the order of study.toml, each with what applies to it; `particles` None: names are not checked."""
    camera = source.section(CameraKeys, raw.get("camera", {}), "camera")
    column = source.section(ColumnKeys, raw.get("column", {}), "column")
    typed = enumerate(several(raw, "recording"), start=1)
    sections = [source.section(RecordingKeys, each, f"recording {number}") for number, each in typed]
    if not sections:
        source.fault("[[recording]]", None, "at least one recording")
    if camera.lacks("gravity"):
        source.assumed.append(f'{source.file.name}, camera: gravity not given; taken as "down"')
    cameras = [overridden(camera, section.keys.camera, *_of(section, "camera")) for section in sections] or [camera]
    columns = [overridden(column, section.keys.column, *_of(section, "column")) for section in sections] or [column]
    for own_camera in {own.place: own for own in cameras}.values():
        check_camera(source, own_camera)
    for own_column in {own.place: own for own in columns}.values():
        check_column(source, own_column)
    recordings = tuple(
        Recording(
            name=section.keys.video or section.place,
            video=_video(source, section, own_camera),
            particles=_dropped(source, section, particles),
            fluid=_fluid(source, section, fluids),
            camera=camera_of(source, own_camera.keys),
            column=column_of(own_column.keys),
        )
        for section, own_camera, own_column in zip(sections, cameras, columns, strict=False)
    )
    _check_names(source, recordings)
    return recordings


def _of(section: Section[RecordingKeys], table: str) -> tuple[str, frozenset[str]]:
    """Where a recording's overrides of a table stand, and which of them were at fault."""
    inside = (key.partition(".") for key in section.at_fault)
    return f"{section.place}, {table}", frozenset(key for first, _, key in inside if first == table and key)


def _video(source: Source, section: Section[RecordingKeys], camera: Section[CameraKeys]) -> Path:
    """The resolved path: a file, or a folder of numbered pictures (then the frame rate must be stated)."""
    typed, place = section.keys.video, f"{section.place}, video"
    if not typed:
        if "video" not in section.at_fault:
            source.fault(place, None, 'a recording such as "a1.mp4"')
        return source.file.parent
    video = source.file.parent / typed
    if source.before_filming and not video.exists():
        return video
    if not video.is_dir():
        source.path(typed, place)
    elif not any(picture.suffix.lower() in PICTURES for picture in video.iterdir()):
        source.fault(place, typed, "a recording, or a folder of numbered pictures (this folder has none)")
    elif camera.lacks("frame_rate"):
        source.fault(f"{section.place}, camera.frame_rate", None, f"{wanted('Hz')}, as pictures have no clock")
    return video


def _dropped(
    source: Source, section: Section[RecordingKeys], particles: tuple[Particle, ...] | None
) -> tuple[str, ...]:
    """Names in order of release, each of them known."""
    names, place = section.keys.particles, f"{section.place}, particles"
    if not names:
        if "particles" not in section.at_fault:
            source.fault(place, None, 'the names of the particles in order of release, such as ["A-01", "A-02"]')
        return ()
    known = sorted({particle.name for particle in particles or ()})
    for name in dict.fromkeys(names):
        if particles is not None and name not in known:
            accepted = f"a particle of the particle table or a [[control]]{did_you_mean(name, known)}"
            source.fault(place, name, accepted)
    return tuple(names)


def _fluid(source: Source, section: Section[RecordingKeys], fluids: Mapping[str, Fluid]) -> Fluid:
    """The fluid that a recording names; the only one where it names none."""
    nothing = Fluid(name="", liquid="measured")
    named, place, known = section.keys.fluid, f"{section.place}, fluid", ", ".join(f'"{name}"' for name in fluids)
    if named is None:
        if len(fluids) > 1 and section.lacks("fluid"):
            source.fault(place, None, f"one of the fluids: {known}")
        return next(iter(fluids.values()), nothing)
    if named not in fluids:
        source.fault(place, named, f"a fluid of this study{did_you_mean(named, fluids) or f'; known: {known}'}")
    return fluids.get(named, nothing)


def _check_names(source: Source, recordings: tuple[Recording, ...]) -> None:
    """Each recording stands once; say for which ones the clock of the video file is taken."""
    for number, recording in enumerate(recordings, start=1):
        if recording.name in [earlier.name for earlier in recordings[: number - 1]]:
            source.fault(f"recording {number}, video", recording.name, "a recording that stands only once")
    without = [recording.name for recording in recordings if recording.camera.frame_rate is None]
    if without:
        names = "any recording" if len(without) == len(recordings) else ", ".join(without)
        source.assumed.append(f"{source.file.name}: no frame_rate for {names}; the clock of the video file is taken")
